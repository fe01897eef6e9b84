"""The numbers of each view of the Breadth page as CSV, every digit kept, over the whole sample."""

from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import Any

import numpy as np

from analytics.breadth import own_history_rank
from analytics.series import period_code
from app.breadth.bridge import Breadth, breadth
from app.breadth.table import Row, rows
from app.breadth.words import sentence
from app.compute import Bridge
from app.exports import csv_text
from app.places import software_version
from app.state import StateError, ViewState
from app.words import slug

Rows = Iterable[Sequence[Any]]


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Breadth page.

    Raises
    ------
    ValueError
        No such view, a refused value, or nothing to show; one sentence.
    """
    shown = breadth(ViewState.from_query(query), bridge)
    return f"{name}-{stem(shown)}.csv", view_text(name, shown)


def stem(shown: Breadth) -> str:
    """Return the words of a file name that follow the name of the view."""
    total = slug(shown.total.name) if shown.total else "chained"
    return f"breadth-{total or 'total'}-{period_code(shown.periods[-1]).lower()}"


def view_text(name: str, shown: Breadth) -> str:
    """Return one view as CSV text under a header that names what it holds.

    Raises
    ------
    ValueError
        There is no such view, or the weights it needs are refused.
    """
    if name not in VIEWS:
        raise ValueError(f"view must be one of {', '.join(VIEWS)}, but got {name!r}")
    if name in WEIGHTED and shown.weighted is None:
        raise StateError(shown.refusal)
    return csv_text(header(shown), VIEWS[name](shown))


def header(shown: Breadth) -> list[tuple[str, str]]:
    """Name what a file holds: sentence, total, components, weights, state, version, notes."""
    total = "none published; chained from the components"
    if shown.total is not None:
        series = shown.total
        total = (
            f"{series.name}; {series.unit or 'unit not named'}; source"
            f" {series.source or 'not named'}; fingerprint {series.fingerprint}"
        )
    marks = " ".join(shown.prices[name].fingerprint for name in shown.names[:20])
    return [
        ("Pricewake", software_version()),
        ("view", sentence(shown)),
        ("all items", total),
        ("components", f"{len(shown.names)}; fingerprints of the first 20 {marks}"),
        ("weights", f"{shown.weights_source}; fingerprint {shown.weights_fingerprint}"),
        ("rates", f"percent over {shown.span} {shown.noun}s; contributions in percentage points"),
        ("state", f"/breadth?{shown.state.to_query()}"),
        *[("note", note) for note in shown.notes],
        ("note", "contributions are arithmetic; they name no cause and are no advice"),
    ]


def _contributions(shown: Breadth) -> Rows:
    assert shown.weighted is not None
    yield ("component", "points", "points_over_one_period")
    points, points_1 = shown.weighted.points[-1], shown.weighted.points_1[-1]
    order = np.argsort(-np.nan_to_num(points), kind="stable").tolist()
    for i in order:
        yield (shown.names[i], float(points[i]), float(points_1[i]))
    yield ("sum", float(points.sum()), float(points_1.sum()))
    yield ("rate of all items", float(shown.rate[-1]), float(shown.rate_1[-1]))
    yield (
        "residual",
        float(shown.residual[-1]),
        float(shown.rate_1[-1] - points_1.sum()),
    )


def _history(shown: Breadth) -> Rows:
    assert shown.weighted is not None
    yield ("period", "rate_of_all_items", "residual", *shown.names)
    residual = shown.residual
    for t in _sample(shown):
        parts = shown.weighted.points[t].tolist()
        yield (period_code(shown.periods[t]), float(shown.rate[t]), float(residual[t]), *parts)


def _strip(shown: Breadth) -> Rows:
    yield ("period", "component", "rate", "rank")
    ranks = own_history_rank(shown.rates[shown.start :])
    for t in _sample(shown):
        code = period_code(shown.periods[t])
        for i, name in enumerate(shown.names):
            yield (code, name, float(shown.rates[t, i]), float(ranks[t - shown.start, i]))


def _core(shown: Breadth) -> Rows:
    assert shown.weighted is not None
    measures, trend = shown.weighted.measures, shown.weighted.tracking.trend
    yield ("period", *measures, "centred_trend_a_year")
    for t in _sample(shown):
        values = (float(column[t]) for column in measures.values())
        yield (period_code(shown.periods[t]), *values, float(trend[t - shown.start]))


def _diffusion(shown: Breadth) -> Rows:
    found = shown.weighted
    yield ("period", "diffusion", "share_above_pace", "diffusion_by_weight", "weight_above_pace")
    for t in _sample(shown):
        yield (
            period_code(shown.periods[t]),
            float(shown.diffusion[t]),
            float(shown.above[t]),
            float(found.diffusion[t]) if found else None,
            float(found.above[t]) if found else None,
        )


def _weights(shown: Breadth) -> Rows:
    assert shown.weighted is not None
    yield ("period", *shown.names)
    for t in _sample(shown):
        yield (period_code(shown.periods[t]), *(100.0 * shown.weighted.effective[t]).tolist())


def _table(shown: Breadth) -> Rows:
    yield tuple(Row.__dataclass_fields__)
    for row in rows(shown):
        yield (
            row.name,
            row.weight,
            row.rate,
            row.rate_1m,
            row.rank,
            row.points,
            row.points_1m,
            "yes" if row.left_out else "no",
        )


def _tracking(shown: Breadth) -> Rows:
    assert shown.weighted is not None
    found = shown.weighted.tracking
    yield ("measure", "trend_rmse", "trend_bias", "trend_n", "next_rmse", "next_bias", "next_n")
    for place, name in enumerate(found.names):
        yield (
            name,
            float(found.trend_rmse[place]),
            float(found.trend_bias[place]),
            found.trend_n,
            float(found.next_rmse[place]),
            float(found.next_bias[place]),
            found.next_n,
        )


def _sample(shown: Breadth) -> Iterator[int]:
    yield from range(shown.start, len(shown.periods))


VIEWS: dict[str, Callable[[Breadth], Rows]] = {
    "contributions": _contributions,
    "history": _history,
    "strip": _strip,
    "core": _core,
    "diffusion": _diffusion,
    "weights": _weights,
    "table": _table,
    "tracking": _tracking,
}
WEIGHTED = ("contributions", "history", "core", "weights", "tracking")
