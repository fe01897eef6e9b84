"""The numbers that the tools of the Lag page show, row by row, every digit kept."""

from collections.abc import Iterable, Sequence
from typing import Any

from analytics.series import period_code
from app.compute import Bridge
from app.lag.evidence import completed
from app.lag.tools import (
    counts_of,
    density_of,
    peaks_of,
    responses_work,
    slice_of,
    two_cells,
)
from app.pages.lag import LagView
from app.state import ViewState

Rows = Iterable[Sequence[Any]]


def slice_rows(state: ViewState, bridge: Bridge) -> Rows:
    """Rows for the file of the scatter: the path that the mean of the slice draws."""
    path = slice_of(state, bridge)
    if path is None:
        return
    across = state.band == "driver"
    for k in range(path.centre.size):
        centre, mean = float(path.centre[k]), float(path.mean[k])
        yield (
            "chosen slice" if k == state.band_place else "slice path",
            None,
            None,
            centre if across else mean,
            mean if across else centre,
            None,
            None,
            float(path.low[k]),
            float(path.high[k]),
            int(path.count[k]),
        )


def count_rows(state: ViewState, bridge: Bridge) -> Rows:
    """Rows for the file of the scatter: pairs in each bin of a side and in each square."""
    counts = counts_of(state, bridge)
    if counts is None:
        return
    x, y = (edges.tolist() for edges in (counts.driver_edges, counts.response_edges))
    for part, edges, numbers in (
        ("driver count", x, counts.driver),
        ("response count", y, counts.response),
    ):
        for k, number in enumerate(numbers.tolist()):
            middle = (edges[k] + edges[k + 1]) / 2
            at = (middle, None) if part == "driver count" else (None, middle)
            yield part, None, None, *at, None, None, edges[k], edges[k + 1], number
    for row, line in enumerate(counts.both.tolist()):
        for column, number in enumerate(line):
            if number:
                at = (x[column] + x[column + 1]) / 2, (y[row] + y[row + 1]) / 2
                yield "square count", None, None, *at, None, None, None, None, number


def density_rows(state: ViewState, bridge: Bridge) -> Rows:
    """Rows for the file of the parameter plane: the density of the error on its grid."""
    density = density_of(state, bridge)
    if density is None:
        return
    for row, slope in enumerate(density.slope.tolist()):
        for column, intercept in enumerate(density.intercept.tolist()):
            yield "density", intercept, slope, float(density.density[row, column])


def peak_rows(shown: LagView, bridge: Bridge) -> Rows:
    """Give the matched peaks with their distance, then those that no other one meets."""
    yield "part", "driver_peak", "response_peak", "distance", "driver", "response"
    peaks = peaks_of(shown.state, bridge)
    if peaks is None:
        return
    found, periods = peaks.found, shown.pair.periods[peaks.first :]
    for k, (one, other) in enumerate(found.pairs.tolist()):
        yield (
            "matched",
            period_code(periods[one]),
            period_code(periods[other]),
            int(found.distance[k]),
            float(found.height[k, 0]),
            float(found.height[k, 1]),
        )
    for part, column, places in (
        ("driver only", 0, found.driver),
        ("response only", 1, found.response),
    ):
        for place in sorted(set(places.tolist()) - set(found.pairs[:, column].tolist())):
            month = period_code(periods[place])
            yield part, *((None, month) if column else (month, None)), None, None, None


def compare_rows(shown: LagView, bridge: Bridge) -> Rows:
    """Give the numbers of the pinned and of the chosen cell, then the pairs of both."""
    yield "part", "pinned", "chosen"
    both = two_cells(shown.state, bridge)
    if both is None:
        return
    known = completed(shown.state, bridge)
    for name in ("window", "shift"):
        yield name, *(getattr(one.state, name) for one in both)
    for name in ("n", "slope", "intercept", "correlation", "p_naive"):
        yield name, *(getattr(one.cell, name) for one in both)
    for name in ("effective_months", "p", "se_robust"):
        yield f"per cell {name}", *(getattr(one.inference, name) for one in both)
    for name in ("slope_interval", "correlation_interval"):
        for place, end in enumerate(("low", "high")):
            yield f"{name} {end}", *(getattr(one.inference, name)[place] for one in both)
    found = [known.p_searched(one.state.window, one.state.shift) for one in both]
    yield "search_adjusted_p", *found
    for label, side in (("driver", "driver"), ("response", "response")):
        columns = [getattr(one.cell, side) for one in both]
        for i in range(max(column.size for column in columns)):
            yield (
                f"{label} of pair {i + 1}",
                *(float(column[i]) if i < column.size else None for column in columns),
            )


def response_rows(shown: LagView, bridge: Bridge) -> Rows:
    """Give best cell and p of each listed response, then the correlations drawn."""
    yield "part", "response", "window", "shift", "correlation", "search_adjusted_p", "holm_p"
    if not shown.state.other_responses:
        return
    found = bridge.jobs.complete(responses_work(shown.state, bridge))
    for one in found:
        if one.best is not None:
            yield "best", one.name, *one.best, one.p, one.p_all
        else:
            yield f"none: {one.refusal}", one.name, None, None, None, None, None
    for one in found:
        if one.surface is None:
            continue
        row = one.surface.windows.tolist().index(one.window)
        for shift, value in zip(
            one.surface.shifts.tolist(), one.surface.correlation[row].tolist(), strict=True
        ):
            yield "profile", one.name, one.window, shift, value, None, None
