"""What the Data page shows, computed: new files against what is kept, and revisions."""

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from analytics.rates import growth_rate
from analytics.revisions import BiasTest, Revisions, bias_test, revisions
from analytics.series import PERIOD_NOUN, Series, period_label
from app.compute import Bridge
from app.intake.reading import Release
from app.state import ViewState
from app.words import counted
from app.workspace import Vintage, Workspace, WorkspaceView

SAME = 1e-9  # of the largest value: differences below are rounding
BEFORE = 12  # periods of history shown before the first print of the oldest vintage


@dataclass(frozen=True, eq=False)
class Revised:
    """Revisions of one series, or the sentence that says why there are none to show.

    Attributes
    ----------
    name : str
        The series.
    vintages : tuple of Vintage
        Oldest first.
    unit : str
        Of first prints, latest values and revisions.
    result : Revisions or None
        None where `refusal` says why.
    bias : BiasTest or None
        None where `bias_refusal` says why.
    loaded : tuple of str
        For each period, the day of the vintage that its first value stands in; empty for none.
    moved : tuple of int
        Places of first prints and of values that were revised.
    start : int
        Place of the first period worth showing in a chart.
    """

    name: str
    vintages: tuple[Vintage, ...]
    unit: str = ""
    result: Revisions | None = None
    refusal: str = ""
    bias: BiasTest | None = None
    bias_refusal: str = ""
    loaded: tuple[str, ...] = ()
    moved: tuple[int, ...] = ()
    start: int = 0

    @property
    def noun(self) -> str:
        """Month, quarter or year."""
        return PERIOD_NOUN[self.vintages[-1].series.frequency]


def revised_names(in_view: WorkspaceView) -> list[str]:
    """Return the series in view that have had more than one content, in their order."""
    return [name for name in all_series(in_view) if in_view.vintages.get(name, 0) > 1]


def all_series(in_view: WorkspaceView) -> dict[str, tuple[Series, str]]:
    """Return every series in view, weights included, with its file; the newest file wins."""
    return {one.name: (one, file.name) for file in in_view.releases for one in file.series}


def revised(state: ViewState, bridge: Bridge) -> Revised | None:
    """Return the revisions of the chosen series, else of the first that has any; None for none."""
    names = revised_names(bridge.in_view(state))
    if not names:
        return None
    name = state.series if state.series in names else names[0]
    vintages = bridge.workspace.vintages(name, state.as_of)
    contents = [one.series for one in vintages]
    try:
        if state.revised == "growth":
            formula: Any = state.formula
            contents = [growth_rate(one, formula=formula) for one in contents]
        found = revisions(contents)
    except ValueError as error:
        return Revised(name, vintages, refusal=str(error))
    table = np.full((len(contents), found.periods.size), np.nan)
    for row, one in zip(table, contents, strict=True):
        place = one.first.ordinal - found.periods[0].ordinal
        row[place : place + one.values.size] = one.values
    there = ~np.isnan(table)
    days = tuple(vintages[int(column.argmax())].day if column.any() else "" for column in there.T)
    dust = SAME * np.nanmax(np.abs(found.latest))
    moved = np.flatnonzero(found.first_print | (np.abs(found.revision) > dust))
    bias, refusal = None, ""
    try:
        bias = bias_test(found.first[found.counted], found.revision[found.counted])
    except ValueError as error:
        refusal = str(error)
    return Revised(
        name,
        vintages,
        unit=contents[-1].unit or "unit not named",
        result=found,
        bias=bias,
        bias_refusal=refusal,
        loaded=days,
        moved=tuple(int(place) for place in moved),
        start=max(0, int(moved[0]) - BEFORE) if moved.size else 0,
    )


def corrected(release: Release, workspace: Workspace) -> Release:
    """Return a release with the corrections that are remembered for its series."""
    said = workspace.corrections()
    series = tuple(
        replace(one, **said[one.name]) if one.name in said else one  # type: ignore[arg-type]
        for one in release.series
    )
    return replace(release, series=series)


def against_kept(new: Series, kept: Series | None) -> str:
    """Say what a new vintage changes: new, the same, periods added, values revised.

    Examples
    --------
    >>> import pandas as pd
    >>> kept = Series("Prices", pd.Period("2024-01", "M"), [100.0, 101.0])
    >>> against_kept(Series("Prices", pd.Period("2024-01", "M"), [100.0, 101.2, 102.0]), kept)
    'adds 1 month (Mar 2024); revises 1 value, Feb 2024'
    """
    if kept is None:
        return "new"
    if new.frequency != kept.frequency:
        return f"was {kept.frequency} before"
    parts = []
    noun = PERIOD_NOUN[new.frequency]
    start = min(new.first, kept.first)
    size = max(new.last, kept.last).ordinal - start.ordinal + 1
    sides = np.full((2, size), np.nan)
    for side, one in zip(sides, (kept, new), strict=True):
        place = one.first.ordinal - start.ordinal
        side[place : place + one.values.size] = one.values
    before, after = sides
    known, given = ~np.isnan(before), ~np.isnan(after)
    for words, places in (
        ("adds", np.flatnonzero(given & ~known)),
        ("no longer has", np.flatnonzero(known & ~given)),
    ):
        if places.size:
            parts.append(f"{words} {counted(places.size, noun)}{_span(start, places)}")
    changed = np.flatnonzero(known & given & (before != after))
    if changed.size:
        span = _span(start, changed).strip(" ()")
        parts.append(f"revises {counted(changed.size, 'value')}, {span}")
    if new.kind != kept.kind:
        parts.append(f"was read as {kept.kind} before")
    return "; ".join(parts) or "the same as kept"


def _span(start: Any, places: Any) -> str:
    first, last = start + int(places[0]), start + int(places[-1])
    if first == last:
        return f" ({period_label(first)})"
    return f" ({period_label(first)} to {period_label(last)})"
