"""The answer of `pricewake lag` as JSON, unrounded: cell, best, search, shift set, episodes."""

from typing import Any

from analytics.series import period_code
from app.lag.cells import episode_code
from app.lag.evidence import Evidence
from app.lag.verdict import verdict
from app.pages.lag import LagView


def answer(shown: LagView, known: Evidence) -> dict[str, Any]:
    """Return the chosen cell, the best one and the evidence, unrounded, as the JSON output."""
    found = known.search
    window, shift = (
        (found.best_window, found.best_shift) if found is not None else shown.surface.peak()
    )
    place = shown.surface.cell(window, shift)
    cell, inference = shown.cell, known.inference
    return {
        "driver": shown.pair.driver.name,
        "response": shown.pair.response.name,
        "frequency": shown.pair.driver.frequency,
        "first": period_code(shown.pair.periods[0]),
        "last": period_code(shown.pair.periods[-1]),
        "cell": {
            "window": shown.state.window,
            "shift": shown.state.shift,
            "n": cell.n,
            "slope": cell.slope,
            "intercept": cell.intercept,
            "correlation": cell.correlation,
            "se_naive": cell.se_naive,
            "p_naive": cell.p_naive,
            "se_robust": inference.se_robust,
            "p_robust": inference.p,
            "effective_months": inference.effective_months,
        },
        "best": {
            "window": window,
            "shift": shift,
            "correlation": float(shown.surface.correlation[place]),
            "slope": float(shown.surface.slope[place]),
        },
        "search": _search_answer(known),
        "shift_set": _shift_set_answer(known),
        "episodes": [
            {
                "first": code.split(":")[0],
                "last": code.split(":")[1],
                "share": episode.share,
                "slope_without": episode.slope_without,
                "p_without": episode.p_without,
            }
            for episode in known.influence.episodes
            for code in [episode_code(episode, shown.pair, shown.state)]
        ],
        "fragility": known.influence.fragility,
        "left_out": _left_out_answer(shown, known),
        "breaks": list(shown.breaks),
        "made": list(shown.made),
        "verdict": verdict(known, shown.pair, shown.state),
    }


def _left_out_answer(shown: LagView, known: Evidence) -> dict[str, Any] | None:
    """Return what the cell is without the months left out; the rest of the answer reads them."""
    if known.rest is None:
        return None
    return {
        "months": shown.state.left_out,
        "slope": known.rest.slope,
        "intercept": known.rest.intercept,
        "correlation": known.rest.correlation,
        "p_robust": known.rest.p,
        "effective_months": known.rest.effective_months,
    }


def _search_answer(known: Evidence) -> dict[str, Any]:
    found = known.search
    if found is None:
        return {"p": None, "refused": known.refusal}
    return {
        "p": float(found.p),
        "p_one_sided": float(found.p_one_sided),
        "p_error": found.p_error,
        "p_with_level_shifts": found.p_with_level_shifts,
        "level_shifts_removed": found.level_shifts_removed,
        "surrogates": found.surrogates,
        "seed": found.seed,
        "method": found.method,
        "best": {
            "window": found.best_window,
            "shift": found.best_shift,
            "correlation": found.best_correlation,
        },
        "windows": [int(found.windows[0]), int(found.windows[-1])],
        "shifts": [int(found.shifts[0]), int(found.shifts[-1])],
    }


def _shift_set_answer(known: Evidence) -> dict[str, Any]:
    """Return the set only where the search is significant, as on the page."""
    chosen = known.shift_set if known.found else None
    if chosen is None:
        none = {"level": 0.95, "identified": False, "shifts": []}
        return none | ({"refused": known.set_refusal} if known.set_refusal else {})
    return {
        "level": chosen.level,
        "identified": chosen.identified,
        "shifts": [int(s) for s in chosen.shifts],
    }
