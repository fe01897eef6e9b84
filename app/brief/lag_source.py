"""The Lag page for a brief: it is drawn by the browser, so its parts are put together here."""

import json
from typing import Any

from dash import html

from app.compute import Bridge
from app.figures.theme import colour
from app.pages import lag, lag_evidence
from app.state import ViewState
from app.words import plain, signed

HEADINGS = {
    "surface": "Every window and shift",
    "scatter": "The chosen cell",
    "overlay": "Through time",
}
_FOLDS = {name: words for name, words in lag_evidence.FOLDS.items() if name != "method"}
VIEWS = {**HEADINGS, **_FOLDS}


def shown(state: ViewState, bridge: Bridge, wanted: tuple[str, ...]) -> dict[str, Any]:
    """Return the fields of `app.brief.sources.Shown`; only the folds wanted are worked out.

    Raises
    ------
    ValueError
        One sentence that says why there is nothing to show.
    """
    seen = lag.view(state, bridge)
    page = lag.payload(state, bridge)
    opened = tuple(name for name in _FOLDS if name in wanted)
    answer = lag_evidence.answer(seen.state, bridge, opened)
    strip, verdict, folds, data = answer[0], answer[1], answer[2:-1], answer[-1]
    words = dict(zip(lag_evidence.FOLDS, folds, strict=True))
    drawn = {name: json.loads(chart.to_json()) for name, chart in lag.charts(seen, bridge).items()}
    charts = {**drawn, **data["figures"]}
    charts["surface"] = _searched(charts["surface"], data, seen.state)
    for name in ("scatter", "overlay"):
        charts[name]["layout"]["showlegend"] = True
    cell, noun = seen.cell, page["noun"]
    words["scatter"] = (
        f"n {cell.n}, correlation {signed(cell.correlation)}, slope {plain(cell.slope, 3)},"
        f" intercept {plain(cell.intercept, 3)}."
    )
    words["overlay"] = (
        f"Both averaged over {seen.state.window} {noun}s; the response is drawn"
        f" {abs(seen.state.shift)} {noun}s {'earlier' if seen.state.shift >= 0 else 'later'}."
    )
    words["surface"] = (
        "Outside the black line the search-adjusted p is above 5 % (paler)."
        " Lines cross at the chosen cell."
        if data["support"]
        else "Lines cross at the chosen cell."
    )
    return {
        "state": seen.state,
        "sentence": f"{seen.sentence}.",
        "verdict": verdict,
        "source": page["source"],
        "charts": charts,
        "subtitles": {
            **VIEWS,
            "surface": f"{seen.state.quantity} in every cell. {words['surface']}",
        },
        "words": words,
        "notes": (html.Dl(strip, className="strip"), *map(html.P, page["notes"])),
        "jobs": tuple(data["jobs"]),
    }


def _searched(chart: dict[str, Any], data: dict[str, Any], state: ViewState) -> dict[str, Any]:
    """Lay over the map what the search supports, the shift set, and a cross at the chosen cell."""
    layout, ink = chart["layout"], colour("ink")
    line = {"color": ink, "width": 1}
    members = {
        "type": "scatter",
        "mode": "markers",
        "x": data["set"],
        "y": [state.window] * len(data["set"]),
        "marker": {"symbol": "square", "size": 5, "color": ink},
        "name": "shift set",
    }
    crossing = [
        {
            "type": "line",
            "xref": "x",
            "yref": "paper",
            "x0": state.shift,
            "x1": state.shift,
            "y0": 0,
            "y1": 1,
            "line": line,
        },
        {
            "type": "line",
            "xref": "paper",
            "yref": "y",
            "x0": 0,
            "x1": 1,
            "y0": state.window,
            "y1": state.window,
            "line": line,
        },
    ]
    return {
        **chart,
        "data": [*chart["data"], *data["support"], *([members] if data["set"] else [])],
        "layout": {**layout, "shapes": [*layout.get("shapes", []), *crossing]},
    }
