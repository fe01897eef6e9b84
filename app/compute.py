"""The one bridge from a state to analytics; each result is computed once and kept by its key."""

import hashlib
from collections.abc import Collection
from dataclasses import dataclass, replace
from typing import Any

import pandas as pd
from flask_caching import Cache

from analytics.cell import LagCell, lag_cell
from analytics.rates import growth_rate, trailing_mean
from analytics.series import (
    PERIOD_NOUN,
    PERIODS_PER_YEAR,
    FloatArray,
    Frequency,
    Pair,
    Series,
    align,
    period_label,
)
from analytics.surface import LagSurface, lag_surface
from app.desk.pending import Pending
from app.jobs import Jobs
from app.lag.left_out import kept_months
from app.memory import Memory
from app.preparing import Prepared, prepared
from app.scan.held import HeldResults
from app.state import StateError, ViewState, field_kind
from app.workspace import Workspace, WorkspaceView

MIN_PAIRS = 24


@dataclass(frozen=True, eq=False)
class Overlay:
    """Smoothed driver and smoothed response moved back by the shift, on the driver's months.

    Attributes
    ----------
    periods : PeriodIndex, shape (m,)
        Months on which at least one of the two exists.
    driver, response : ndarray of float, shape (m,)
        Percent a month; nan where the series does not reach.
    """

    periods: pd.PeriodIndex
    driver: FloatArray
    response: FloatArray


class Bridge:
    """Answers for a workspace: from a `ViewState` to results of analytics."""

    def __init__(self, workspace: Workspace, cache: Cache | None = None) -> None:
        self.workspace = workspace
        self.memory = Memory(cache)
        self.jobs = Jobs(self.memory)
        self.pending = Pending()
        self.results = HeldResults()

    def in_view(self, state: ViewState) -> WorkspaceView:
        """Return the loaded series, as they stood on the date of the state where it names one."""
        return self.workspace.as_of(state.as_of)

    def key(self, state: ViewState) -> str:
        """Return the key of everything numeric in a state: data, then state, never by hand."""
        parts = [state.numbers().to_query()]
        in_view = self.in_view(state)
        for name in (state.driver, state.response):
            series = in_view.named(name)
            parts += [series.fingerprint, series.name, series.adjustment]
        return hashlib.sha256("\n".join(parts).encode()).hexdigest()[:32]

    def pair(self, state: ViewState) -> Pair:
        """Growth rates of driver and response over the common months of the sample.

        Raises
        ------
        ValueError
            As in `rates`, or the two do not overlap.
        """
        sides = self.rates(state)
        return self.memory.once("pair:" + self.key(state.question()), lambda: align(*sides))

    def rates(self, state: ViewState) -> tuple[Series, Series]:
        """Growth rates of driver and response, each over its own part of the sample.

        Raises
        ------
        ValueError
            One sentence: unknown name, no growth rate, no season to take out.
        """
        in_view = self.in_view(state)
        loaded = list(in_view.series)
        if len(loaded) == 1:
            raise StateError(
                f"two series must be loaded to be paired, but there is only {loaded[0]!r}"
            )
        if state.driver == state.response:
            raise StateError(
                f"driver and response must be two series, but both are {state.driver!r}; a series"
                " leads itself by 0 with correlation 1"
            )

        def make() -> tuple[Series, Series]:
            formula: Any = state.growth
            used = self.prepared(state)
            return (
                _sample(growth_rate(used.driver, formula=formula), state),
                _sample(growth_rate(used.response, formula=formula), state),
            )

        return self.memory.once("rates:" + self.key(state.question()), make)

    def prepared(self, state: ViewState) -> Prepared:
        """Return driver and response as they are paired: breaks, season and frequency seen to."""
        in_view = self.in_view(state)
        sides = in_view.named(state.driver), in_view.named(state.response)
        return prepared(*sides, state, self.memory)

    def fitted(self, state: ViewState, asked: Collection[str] = ()) -> ViewState:
        """Return the state with window and shift inside the map of this pair's calendar.

        The usual 12 and 24 months stand for one and two years: for quarters they become 4 and 8.
        Fields named in `asked` are kept as they are.
        """
        pair = self.pair(state)
        windows, shifts = grid(pair, state)
        year = PERIODS_PER_YEAR[pair.driver.frequency]
        window, shift = state.window, state.shift
        if window not in windows and "window" not in asked:
            window = max(min(year, windows[-1]), windows[0])
        if shift not in shifts and "shift" not in asked:
            shift = max(min(2 * year, shifts[-1]), shifts[0])
        return replace(state, window=window, shift=shift)

    def surface(self, state: ViewState) -> LagSurface:
        """Every cell of the map, for the pair and sample of the state."""
        question = state.question()

        def make() -> LagSurface:
            pair = self.pair(question)
            windows, shifts = grid(pair, question)
            return lag_surface(
                pair.driver.values,
                pair.response.values,
                windows=windows,
                shifts=shifts,
                same_months=question.months == "same",
                min_pairs=MIN_PAIRS,
                kept=kept_months(pair, question),
            )

        return self.memory.once("surface:" + self.key(question), make)

    def cell(self, state: ViewState) -> LagCell:
        """Return the chosen cell in full."""

        def make() -> LagCell:
            pair = self.pair(state)
            first, last = cell_span(pair, state)
            kept = kept_months(pair, state)
            return lag_cell(
                pair.driver.values[first:last],
                pair.response.values[first:last],
                window=state.window,
                shift=state.shift,
                min_pairs=MIN_PAIRS,
                kept=None if kept is None else kept[first:last],
            )

        return self.memory.once("cell:" + self.key(state), make)

    def overlay(self, state: ViewState) -> Overlay:
        """Both smoothed series on the driver's calendar, the response moved back by the shift."""
        pair = self.pair(state)
        smooth = [trailing_mean(s.values, state.window) for s in (pair.driver, pair.response)]
        periods = pair.periods[state.window - 1 :]
        driver = pd.Series(smooth[0], index=periods)
        response = pd.Series(smooth[1], index=periods.shift(-state.shift))
        both = pd.concat([driver, response], axis=1, sort=True)
        return Overlay(both.index, both[0].to_numpy(), both[1].to_numpy())


def noun(pair: Pair) -> str:
    """Return month, quarter or year, whichever the pair counts in."""
    return PERIOD_NOUN[pair.driver.frequency]


def span_words(pair: Pair) -> str:
    """Return the sample in words, for example ``Mar 1965 to Oct 2026``."""
    return f"{period_label(pair.periods[0])} to {period_label(pair.periods[-1])}"


def usual_grid(frequency: Frequency) -> tuple[tuple[int, int], tuple[int, int]]:
    """Return lowest and highest window and shift of the usual map: five years, and -3 to 5 years.

    Annual series get windows of up to five years as well.
    """
    year = PERIODS_PER_YEAR[frequency]
    return (1, 5 * year), (-3 * year, 5 * year)


def grid(pair: Pair, state: ViewState) -> tuple[range, range]:
    """Windows and shifts of the map: those asked for, else the usual ones that the sample allows.

    The usual windows stop at a quarter of the sample, and the usual shifts where the longest
    window would be left with fewer than 24 pairs, so that every usual cell is defined.

    Raises
    ------
    StateError
        A range asked for is empty or goes beyond the sample.
    """
    usual = usual_grid(pair.driver.frequency)
    room = pair.n - MIN_PAIRS
    if room < 0:
        raise StateError(
            f"the sample must have at least {MIN_PAIRS} {noun(pair)}s, but {span_words(pair)}"
            f" has {pair.n}"
        )
    longest = min(usual[0][1], max(1, pair.n // 4), room + 1)
    farthest = room - longest + 1
    found = []
    for name, (low, high), most in (
        ("windows", (1, longest), room + 1),
        ("shifts", (max(usual[1][0], -farthest), min(usual[1][1], farthest)), room),
    ):
        asked = getattr(state, name)
        if asked:
            low, high = (int(part) for part in asked.split(":"))
            bounds = field_kind(name.removesuffix("s"))
            most = min(most, getattr(bounds, "high", most))
            least = max(-most, getattr(bounds, "low", -most))
            if low > high or low < least or high > most:
                raise StateError(
                    f"{field_kind(name).label} must be a range within {least}:{most} for"
                    f" {pair.n} {noun(pair)}s, but got {asked}"
                )
        found.append(range(low, high + 1))
    return found[0], found[1]


def cell_span(pair: Pair, state: ViewState) -> tuple[int, int]:
    """Part of the sample that the chosen cell uses: all of it, or the months every cell has."""
    if state.months == "own":
        return 0, pair.n
    windows, shifts = grid(pair, state)
    first = windows[-1] - 1 + max(0, -shifts[0])
    last = pair.n - 1 - max(0, shifts[-1])
    return (
        max(0, first - state.window + 1 + min(0, state.shift)),
        min(pair.n, last + 1 + max(0, state.shift)),
    )


def _sample(rate: Series, state: ViewState) -> Series:
    """Cut a series to the sample of the state."""
    calendar = rate.first.freqstr
    first = pd.Period(state.first).asfreq(calendar, how="start") if state.first else None
    last = pd.Period(state.last).asfreq(calendar, how="end") if state.last else None
    return rate.between(first, last)
