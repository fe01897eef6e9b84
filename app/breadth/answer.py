"""How broad a print was, unrounded, as ``pricewake breadth --json`` writes it."""

from typing import Any

import numpy as np

from analytics.series import period_code
from app.breadth.bridge import Breadth
from app.breadth.core import MEDIAN, TOTAL, TRIMMED
from app.breadth.words import sentence, verdict


def breadth_answer(shown: Breadth) -> dict[str, Any]:
    """Return the answer; what needs weights that are refused is null.

    `rate_12m`, `contributions`, `trimmed_mean` and `weighted_median` are of a year (a month where
    the state or the record asks for it: `span` says how many periods).
    """
    found = shown.weighted
    answer: dict[str, Any] = {
        "period": period_code(shown.periods[-1]),
        "frequency": {"month": "monthly", "quarter": "quarterly", "year": "annual"}[shown.noun],
        "span": shown.span,
        "all_items": shown.total.name if shown.total else None,
        "rate_12m": float(shown.rate[-1]),
        "rate_1m": float(shown.rate_1[-1]),
        "contributions": None,
        "contributions_1m": None,
        "residual": None,
        "weights": None,
        "rates": _named(shown, shown.rates[-1]),
        "ranks": _named(shown, shown.ranks[-1]),
        "diffusion": float(shown.diffusion[-1]),
        "above_pace": float(shown.above[-1]),
        "diffusion_weighted": None,
        "above_pace_weighted": None,
        "trimmed_mean": None,
        "weighted_median": None,
        "without": None,
        "tracking": None,
        "notes": list(shown.notes),
        "refused": shown.refusal or None,
        "sentence": sentence(shown),
        "verdict": verdict(shown),
    }
    if found is None:
        return answer
    left_out = [name for name, out in zip(shown.names, shown.left_out, strict=True) if out]
    extra = [name for name in found.measures if name not in (TOTAL, MEDIAN, TRIMMED)]
    track = found.tracking
    return answer | {
        "contributions": _named(shown, found.points[-1]),
        "contributions_1m": _named(shown, found.points_1[-1]),
        "residual": float(shown.residual[-1]),
        "weights": _named(shown, 100.0 * found.effective[-1]),
        "diffusion_weighted": float(found.diffusion[-1]),
        "above_pace_weighted": float(found.above[-1]),
        "trimmed_mean": float(found.measures[TRIMMED][-1]),
        "weighted_median": float(found.measures[MEDIAN][-1]),
        "without": {"components": left_out, "rate": float(found.measures[extra[0]][-1])}
        if extra
        else None,
        "tracking": [
            {
                "measure": name,
                "trend_rmse": float(track.trend_rmse[place]),
                "trend_bias": float(track.trend_bias[place]),
                "next_rmse": float(track.next_rmse[place]),
                "next_bias": float(track.next_bias[place]),
                "trend_n": track.trend_n,
                "next_n": track.next_n,
            }
            for place, name in enumerate(track.names)
        ],
    }


def _named(shown: Breadth, values: np.ndarray) -> dict[str, float]:
    return {name: float(value) for name, value in zip(shown.names, values, strict=True)}
