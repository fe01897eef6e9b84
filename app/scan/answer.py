"""The answer of `pricewake scan` as JSON, unrounded: pairs, what was found, long averages."""

import math
from typing import Any

from analytics.panel import PairScan, PanelScan
from app.scan.bridge import Scan
from app.scan.words import near_pairs, notes, sentence, verdict


def scan_answer(known: Scan) -> dict[str, Any]:
    """Return a finished scan; where a pair was refused its numbers are None."""
    asked, panel = known.question, known.panel
    assert panel is not None
    return {
        "pairs": [
            _pair(scan, p_scan, p_holm)
            for scan, p_scan, p_holm in zip(
                panel.pairs, panel.p_scan.tolist(), panel.p_holm.tolist(), strict=True
            )
        ],
        "found": {
            "level": 0.05,
            "benjamini_hochberg": _found(panel, panel.p_scan.tolist()),
            "holm": _found(panel, panel.p_holm.tolist()),
        },
        "settings": asked.settings,
        "surrogates": asked.state.surrogates,
        "seed": asked.state.seed,
        "sign": asked.state.sign,
        "lacking": list(asked.roles.lacking),
        "opened": _opened(known),
        "near": [
            {"names": list(scan.names), "p": p, "error": error}
            for scan, p, error in near_pairs(panel, asked.state.correction)
        ],
        "averages": _averages(known),
        "sentence": sentence(asked),
        "verdict": [verdict(known), *notes(known)],
    }


def _opened(known: Scan) -> dict[str, Any] | None:
    opened = known.question.opened
    if opened is None:
        return None
    return {
        "file": opened.name,
        "content": opened.mark,
        "pricewake": opened.version,
        "finished": opened.finished,
        "drawn": len(known.question.pairs),
    }


def _pair(scan: PairScan, p_scan: float, p_holm: float) -> dict[str, Any]:
    found = vars(scan) | {
        "shift_set": list(scan.shift_set),
        "p_scan": p_scan,
        "p_holm": p_holm,
    }
    if scan.refused:
        found |= {"window": None, "shift": None, "level_shifts_removed": None, "identified": None}
    return {
        name: None if isinstance(value, float) and math.isnan(value) else value
        for name, value in found.items()
    }


def _found(panel: PanelScan, p: list[float]) -> list[dict[str, str]]:
    return [
        {"economy": scan.economy, "driver": scan.driver, "response": scan.response}
        for scan, each in zip(panel.pairs, p, strict=True)
        if each <= 0.05
    ]


def _averages(known: Scan) -> dict[str, Any]:
    found = known.averages
    points = [vars(one) for one in known.question.averages]
    if found is None:
        return {"points": points, "refused": known.no_averages}
    return {
        "points": points,
        "log": found.log,
        "slope": found.slope,
        "intercept": found.intercept,
        "slope_interval": list(found.slope_interval),
        "correlation": found.correlation,
        "slope_without": dict(zip(found.names, found.slope_without.tolist(), strict=True)),
        "most_telling": found.most_telling,
        "left_out": list(found.left_out),
    }
