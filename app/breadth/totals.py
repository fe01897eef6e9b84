"""The published total that components are held against, on the calendar of the components."""

import numpy as np

from analytics.breadth import change
from analytics.series import FloatArray, Series, period_label
from analytics.weights import ChainedBasket
from app.breadth.panel import ALL_ITEMS, Panel, chained
from app.intake.problems import quoted
from app.state import StateError, ViewState
from app.workspace import WorkspaceView

NEAR = 0.25  # percentage points by which a published total may differ from the chained one


def chosen_total(
    state: ViewState, in_view: WorkspaceView, shown: Panel, basket: ChainedBasket | None
) -> Series | None:
    """Return the published total: the one named, else the one nearest to the chained index."""
    if state.aggregate:
        series = in_view.named(state.aggregate)
        if series.frequency != shown.frequency or series.kind == "rate":
            raise StateError(
                f"all items must be a {shown.frequency} index, but {quoted(series.name)} is not"
            )
        if np.any(series.values <= 0):
            raise StateError(f"all items must be positive, but {quoted(series.name)} is not always")
        return series
    nearest, best = None, NEAR
    for series in totals(in_view, shown.names):
        if series.frequency != shown.frequency:
            continue
        if basket is None:
            return series
        gap = np.abs(change(aligned(series, shown), 1) - change(basket.total, 1))
        recent = gap[~np.isnan(gap)][-60:]
        if recent.size and np.median(recent) < best:
            nearest, best = series, float(np.median(recent))
    return nearest


def totals(in_view: WorkspaceView, names: tuple[str, ...]) -> list[Series]:
    """Return the loaded series that may be a published total of components."""
    taken = {name.strip().casefold() for name in names}
    return [
        series
        for name, series in in_view.series.items()
        if name.strip().casefold() not in taken
        and series.kind == "index"
        and ALL_ITEMS.search(name)
        and not np.any(series.values <= 0)
    ]


def ended_with_total(
    shown: Panel,
    basket: ChainedBasket | None,
    total: Series | None,
    state: ViewState,
    notes: list[str],
) -> tuple[Panel, ChainedBasket | None]:
    """End the panel where the published total ends, with a note."""
    if total is None or total.last >= shown.periods[-1]:
        return shown, basket
    if total.last <= shown.periods[0]:
        raise StateError(
            f"all items must overlap with the components, but {quoted(total.name)} ends in"
            f" {period_label(total.last)}"
        )
    notes.append(
        f"{quoted(total.name)} ends in {period_label(total.last)}, before the components; that"
        " is taken as the print."
    )
    cut = shown.until(total.last)
    return cut, None if basket is None else chained(cut, state)[0]


def aligned(series: Series, shown: Panel) -> FloatArray:
    """Lay a series on the calendar of the panel, nan where it has no value."""
    values = np.full(len(shown.periods), np.nan)
    offset = series.first.ordinal - shown.periods[0].ordinal
    low, high = max(0, offset), min(values.size, offset + series.values.size)
    if high > low:
        values[low:high] = series.values[low - offset : high - offset]
    return values
