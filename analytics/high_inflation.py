"""Stretches of high inflation and of falling prices: runs, the three-year mark, Cagan's rule."""

from dataclasses import dataclass, replace

import numpy as np
import pandas as pd

from analytics.rates import growth_rate
from analytics.readable import Readable
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, Series, period_code

CAGAN_PERCENT = 50.0  # a month: Cagan (1956)
HYPERINFLATION_MARK = 100.0  # percent over three years: IAS 29, paragraph 3(e)


@dataclass(frozen=True)
class Run(Readable):
    """A contiguous run of periods.

    Attributes
    ----------
    first, last : pandas.Period
        Its ends, both included.
    length : int
        Periods from first to last, bridged gaps included.
    peak : float
        Highest reading (lowest for runs below a level), percent.
    peak_period : pandas.Period
        The first period that has it.
    mean : float
        Mean reading, percent, periods without a reading left out.
    open : bool
        Whether the run reaches the newest reading.
    """

    first: pd.Period
    last: pd.Period
    length: int
    peak: float
    peak_period: pd.Period
    mean: float
    open: bool


def runs_beyond(
    rate: Series, level: float, *, below: bool = False, shortest: int = 1, gap: int = 0
) -> tuple[Run, ...]:
    """Find runs of readings above (or below) a level.

    Parameters
    ----------
    rate : Series
        Readings, percent; a missing one interrupts a run as one at the level does.
    level : float
        Percent; the level itself is not beyond it.
    below : bool, default False
        Look for readings below the level.
    shortest : int, default 1
        Runs of fewer periods are dropped, after bridging.
    gap : int, default 0
        Two runs with at most this many periods between them count as one.

    Returns
    -------
    tuple of Run
        In the order of time.

    Raises
    ------
    ValueError
        `shortest` is below 1 or `gap` below 0.

    Examples
    --------
    >>> rate = Series("Prices", pd.Period("2024-01", "M"), [1.0, 6.0, 7.0, 4.0, 6.0], kind="rate")
    >>> [(str(run.first), run.length) for run in runs_beyond(rate, 5.0)]
    [('2024-02', 2), ('2024-05', 1)]
    >>> [(str(run.first), run.length) for run in runs_beyond(rate, 5.0, gap=1)]
    [('2024-02', 4)]
    """
    if shortest < 1:
        raise ValueError(f"shortest must be 1 or more, but got {shortest}")
    if gap < 0:
        raise ValueError(f"gap must be 0 or more, but got {gap}")
    beyond = rate.values < level if below else rate.values > level  # nan is never beyond
    places = np.flatnonzero(beyond)
    if places.size == 0:
        return ()
    breaks = np.flatnonzero(np.diff(places) > gap + 1)
    starts = places[np.concatenate([[0], breaks + 1])]
    stops = places[np.concatenate([breaks, [places.size - 1]])]
    runs = [
        _run(rate, int(start), int(stop), below)
        for start, stop in zip(starts, stops, strict=True)
        if stop - start + 1 >= shortest
    ]
    return tuple(runs)


def three_year_change(series: Series) -> Series:
    """Cumulative change over 36 months (12 quarters, 3 years), percent.

    Raises
    ------
    ValueError
        Fewer periods than that and one, or a value zero or below.

    Notes
    -----
    IAS 29, paragraph 3(e), names a cumulative rate over three years that approaches or exceeds
    100 % as one sign of a hyperinflationary economy.
    """
    span = 3 * PERIODS_PER_YEAR[series.frequency]
    if series.kind != "rate" and series.values.size <= span:
        raise ValueError(
            f"{series.name!r} must have {span + 1} {PERIOD_NOUN[series.frequency]}s for a"
            f" three-year change, but has {series.values.size}"
        )
    return growth_rate(series, span=span, formula="percent")


def cagan_episodes(
    rate: Series, *, level: float = CAGAN_PERCENT, quiet: int = 12
) -> tuple[Run, ...]:
    """Hyperinflations by the rule of Cagan (1956).

    Parameters
    ----------
    rate : Series
        One-month rates, percent.
    level : float, default 50
        Percent a month.
    quiet : int, default 12
        Months below the level that end an episode.

    Returns
    -------
    tuple of Run
        An episode begins in the month in which the rise exceeds 50 % and ends in the month before
        the rise drops below it and stays below for at least a year. An episode that has not been
        quiet for that long at the newest reading is `open`.

    Raises
    ------
    ValueError
        The rates are not monthly, or `quiet` is below 1.

    Examples
    --------
    >>> rise = [60.0, 10.0, 10.0, 55.0] + [5.0] * 12
    >>> rate = Series("Prices", pd.Period("1923-01", "M"), rise, kind="rate")
    >>> [(str(run.first), str(run.last)) for run in cagan_episodes(rate)]
    [('1923-01', '1923-04')]
    """
    if rate.frequency != "monthly":
        raise ValueError(
            f"Cagan's rule must be given monthly rates, but {rate.name!r} is {rate.frequency}"
        )
    if quiet < 1:
        raise ValueError(f"quiet must be 1 or more, but got {quiet}")
    runs = runs_beyond(rate, level, gap=quiet - 1)
    return tuple(replace(run, open=rate.last.ordinal - run.last.ordinal < quiet) for run in runs)


def run_code(run: Run) -> str:
    """Name a run by its ends, for example ``1979-03:1981-04``."""
    return f"{period_code(run.first)}:{period_code(run.last)}"


def _run(rate: Series, start: int, stop: int, below: bool) -> Run:
    readings = rate.values[start : stop + 1]
    peak = int(np.nanargmin(readings) if below else np.nanargmax(readings))
    return Run(
        rate.first + start,
        rate.first + stop,
        stop - start + 1,
        float(readings[peak]),
        rate.first + start + peak,
        float(np.nanmean(readings)),
        stop == rate.values.size - 1,
    )
