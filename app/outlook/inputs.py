"""From a state to what an outlook stands on: both series to their own ends, and past vintages."""

import hashlib
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from analytics.outlook_pair import OutlookPair, break_in_path, outlook_pair
from analytics.outlook_target import Target, TargetKind, outlook_target
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, FloatArray, Series, period_label
from app.compute import Bridge
from app.outlook.fields import AHEAD_YEARS
from app.state import ViewState
from app.workspace_rows import period_of

MADE_FROM = ("driver", "response", "window", "shift", "growth", "first", "last", "season", "meet")
HORIZON_YEARS = 3


@dataclass(frozen=True, eq=False)
class Inputs:
    """Driver and response of a state, ready for an outlook.

    Attributes
    ----------
    state : ViewState
        With window and shift as they are used.
    pair : OutlookPair
        Growth rates from one first period on, each to its own end.
    loaded : tuple of Series
        Driver and response as read.
    compounding : str
        How one-period rates make a yearly one.
    notes : tuple of str
        What was done to the series or is to be known of them.
    """

    state: ViewState
    pair: OutlookPair
    loaded: tuple[Series, Series]
    compounding: str
    notes: tuple[str, ...] = ()

    @property
    def driver(self) -> FloatArray:
        """Percent a period."""
        return self.pair.driver.values

    @property
    def response(self) -> FloatArray:
        """Percent a period."""
        return self.pair.response.values

    @property
    def year(self) -> int:
        """Periods in a year."""
        return PERIODS_PER_YEAR[self.pair.response.frequency]

    @property
    def noun(self) -> str:
        """Month, quarter or year."""
        return PERIOD_NOUN[self.pair.response.frequency]

    @property
    def horizon(self) -> int:
        """Longest horizon of direct regressions and backtest: three years."""
        return HORIZON_YEARS * self.year

    @property
    def ahead(self) -> int:
        """Periods ahead that the state looks."""
        return max(1, round(AHEAD_YEARS[self.state.ahead] * self.year))

    def target(self, kind: str) -> Target:
        """Return the target of a kind for this pair."""
        named: TargetKind = kind  # type: ignore[assignment]
        how: Any = self.compounding
        return outlook_target(
            named, window=self.state.window, compounding=how, periods_per_year=self.year
        )


def inputs(state: ViewState, bridge: Bridge) -> Inputs:
    """Gather the series of a state.

    Raises
    ------
    ValueError
        An unknown name, a gap, no overlap, no growth rate; one sentence.
    """
    in_view = bridge.in_view(state)
    used = bridge.prepared(state)
    pair = outlook_pair(*bridge.rates(state))
    notes = [f"{pair.note}."] if pair.note else []
    notes += [f"{said}." for said in used.said]
    for name in (state.driver, state.response):
        notes += [f"{name}: {said}." for said in in_view.breaks(name)]
    breaks = []
    for mark in in_view.marks:
        if mark.series == state.driver:
            try:
                breaks.append(period_of(pair.driver.frequency, mark.period))
            except ValueError:
                continue  # marked in another frequency
    if state.shift > 0:
        inside = break_in_path(pair, window=state.window, shift=state.shift, breaks=breaks)
        if inside is not None:
            notes.append(
                f"The path rests on {state.driver} across the break marked at"
                f" {period_label(inside)}: a part of it is what the treatment assumes."
            )
    return Inputs(
        state=state,
        pair=pair,
        loaded=(in_view.as_read[state.driver], in_view.as_read[state.response]),
        compounding="mean" if used.response.kind == "rate" else state.growth,
        notes=tuple(notes),
    )


def outlook_key(part: str, state: ViewState, bridge: Bridge, names: tuple[str, ...] = ()) -> str:
    """Return the key of a part: the data, then those fields of the state that it depends on."""
    kept = ViewState(**{name: getattr(state, name) for name in (*MADE_FROM, "as_of", *names)})
    in_view = bridge.in_view(state)
    lines = [part, kept.to_query()]
    for name in (state.driver, state.response):
        series = in_view.named(name)
        lines += [series.fingerprint, series.name, series.adjustment, series.source]
    return f"{part}:{hashlib.sha256(chr(10).join(lines).encode()).hexdigest()[:32]}"


@dataclass(frozen=True, eq=False)
class PastViews:
    """The days on which past periods of the response first stood in the workspace.

    Attributes
    ----------
    days : mapping of int to str
        From the place of a period in the response to the first day on which it was known; periods
        that were history already when the first file came are left out.
    key : str
        Changes when a vintage does.
    """

    days: dict[int, str]
    key: str


def past_views(found: Inputs, bridge: Bridge) -> PastViews:
    """Find which past dates the workspace has the vintages of."""
    state, first = found.state, found.pair.response.first
    desk = bridge.workspace
    responses = desk.vintages(state.response, state.as_of)
    drivers = desk.vintages(state.driver, state.as_of)
    lines = [f"{v.day}:{v.series.fingerprint}" for v in (*responses, *drivers)]
    key = hashlib.sha256("\n".join(lines).encode()).hexdigest()[:16]
    days: dict[int, str] = {}
    if len(responses) > 1 and responses[0].series.frequency == found.pair.response.frequency:
        known = responses[0].series.last.ordinal
        days[known - first.ordinal] = responses[0].day
        for vintage in responses[1:]:
            for ordinal in range(known + 1, vintage.series.last.ordinal + 1):
                days[ordinal - first.ordinal] = vintage.day
            known = max(known, vintage.series.last.ordinal)
    return PastViews(days, key)


def vintages_of(
    found: Inputs, views: PastViews, bridge: Bridge
) -> Callable[[int], tuple[FloatArray, FloatArray]] | None:
    """Return driver and response as they stood at a past date, or None where nothing was kept.

    A date that the workspace has no vintage of, or whose vintage begins later than the series do
    now, is answered from the newest one, cut at the date.
    """
    if not views.days:
        return None
    state, pair = found.state, found.pair
    now = found.driver, found.response
    lead = max(0, pair.lead)

    def then(origin: int) -> tuple[FloatArray, FloatArray]:
        newest = now[0][: origin + 1 + pair.lead], now[1][: origin + 1]
        if origin not in views.days:
            return newest
        try:
            sides = bridge.rates(replace(state, as_of=views.days[origin]))
        except ValueError:
            return newest
        cut = []
        for side, stop in zip(sides, (origin + 1 + lead, origin + 1), strict=True):
            start = pair.response.first.ordinal - side.first.ordinal
            if start < 0 or side.first.freqstr != pair.response.first.freqstr:
                return newest
            cut.append(side.values[start : start + stop])
        driver, response = cut
        if response.size != origin + 1 or driver.size == 0 or np.isnan(response).any():
            return newest
        return (driver, response) if not np.isnan(driver).any() else newest

    return then
