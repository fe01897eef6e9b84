"""Base effects: what the new month and the month that drops out do to the yearly rate."""

from dataclasses import dataclass

import numpy as np
import pandas as pd

from analytics.print_rates import growing
from analytics.rates import Formula, growth_rate
from analytics.readable import Readable
from analytics.series import (
    PERIOD_NOUN,
    PERIODS_PER_YEAR,
    FloatArray,
    Series,
    read_only,
)


@dataclass(frozen=True, eq=False)
class BaseEffects(Readable):
    """Result of `base_effects`; all in percentage points or percent, oldest period first.

    Attributes
    ----------
    periods : PeriodIndex, shape (m,)
        Periods whose yearly rate changed.
    yearly : ndarray of float, shape (m,), read-only
        The yearly rate, percent.
    change : ndarray of float, shape (m,), read-only
        Its change on the period before, percentage points.
    new, base : ndarray of float, shape (m,), read-only
        Parts of the change that the new period and the one that dropped out brought; they add up
        to `change`.
    rate_new, rate_dropped : ndarray of float, shape (m,), read-only
        One-period rate of the new period, and of the one a year before it.
    """

    periods: pd.PeriodIndex
    yearly: FloatArray
    change: FloatArray
    new: FloatArray
    base: FloatArray
    rate_new: FloatArray
    rate_dropped: FloatArray


@dataclass(frozen=True, eq=False)
class DropOuts(Readable):
    """Result of `drop_outs`: the year of rates that is still to leave the yearly rate.

    Attributes
    ----------
    periods : PeriodIndex, shape (m,)
        The coming periods.
    rate : ndarray of float, shape (m,), read-only
        One-period rate that drops out then, percent. The yearly rate rises where the new period's
        rate is above it.
    usual : ndarray of float, shape (m,), read-only
        Median one-period rate of that month of the year over the years before; nan where there are
        none.
    pull : ndarray of float, shape (m,), read-only
        What its leaving does to the yearly rate if the new period brings the usual rate, percentage
        points: the base effect in the sense of a departure from the usual season.
    """

    periods: pd.PeriodIndex
    rate: FloatArray
    usual: FloatArray
    pull: FloatArray


def base_effects(series: Series, *, periods: int = 24, formula: Formula = "percent") -> BaseEffects:
    """Exact split of each change in the yearly rate.

    Parameters
    ----------
    series : Series
        An index or a level, positive.
    periods : int, default 24
        Newest periods wanted; fewer come back where the series is short.
    formula : {"log", "percent"}
        Of all the rates.

    Returns
    -------
    BaseEffects
        nan where a gap leaves a rate undefined.

    Raises
    ------
    ValueError
        The series is a rate, a value is zero or below, or there are fewer periods than a year and
        two.

    Notes
    -----
    With m the new one-period rate, b that of a year before and k = p_(t-1) / p_(t-Y), growth over
    the Y - 1 periods that both yearly rates share, the percent rates obey ``Y_t - Y_(t-1) = k m -
    k b`` without remainder: the usual difference m - b (for example the Economic Survey of India
    2020-21, vol. 2, par. 5.6) with the compounding put back. Log rates have k = 1.

    Examples
    --------
    >>> prices = Series("Prices", pd.Period("2024-01", "M"), [100.0] * 13 + [101.0] * 13)
    >>> effect = base_effects(prices)
    >>> effect.new[[0, -1]].round(9) + 0.0, effect.base[[0, -1]].round(9) + 0.0
    (array([1., 0.]), array([ 0., -1.]))
    """
    growing(series, "a base effect")
    year = PERIODS_PER_YEAR[series.frequency]
    if series.values.size < year + 2:
        raise ValueError(
            f"{series.name!r} must have {year + 2} {PERIOD_NOUN[series.frequency]}s for a base"
            f" effect, but has {series.values.size}"
        )
    one = _on_calendar(growth_rate(series, formula=formula), series)
    yearly = _on_calendar(growth_rate(series, span=year, formula=formula), series)
    level = series.values
    new, dropped = one[year + 1 :], one[1:-year]
    shared = level[year:-1] / level[1:-year] if formula == "percent" else np.ones(new.size)
    parts = (yearly[year + 1 :], np.diff(yearly[year:]), shared * new, -shared * dropped)
    newest = slice(max(0, new.size - periods), None)
    return BaseEffects(
        series.periods[year + 1 :][newest],
        *(read_only(part[newest]) for part in (*parts, new, dropped)),
    )


def drop_outs(series: Series, *, formula: Formula = "percent") -> DropOuts:
    """Rates that will drop out of the yearly rate over the coming year, and what is usual then.

    Parameters
    ----------
    series : Series
        An index or a level, positive.
    formula : {"log", "percent"}
        Of all the rates.

    Returns
    -------
    DropOuts
        One entry a period of the coming year.

    Raises
    ------
    ValueError
        The series is a rate, a value is zero or below, or there are fewer periods than a year and
        one.

    Notes
    -----
    The h-th coming period pushes out the rate of a year before it, which is known today. `pull` is
    the growth factor of the last year times the usual rate less the one that drops out: exact for
    the next period, and for later ones as if the yearly rate stayed where it is.
    """
    growing(series, "drop-outs")
    year = PERIODS_PER_YEAR[series.frequency]
    if series.values.size < year + 1:
        raise ValueError(
            f"{series.name!r} must have {year + 1} {PERIOD_NOUN[series.frequency]}s for a calendar"
            f" of drop-outs, but has {series.values.size}"
        )
    one = _on_calendar(growth_rate(series, formula=formula), series)
    leaving, earlier = one[-year:], one[1:-year]
    usual = np.full(year, np.nan)
    for place in range(year):
        same = earlier[::-1][year - 1 - place :: year]  # the same month, years before
        same = same[~np.isnan(same)]
        if same.size:
            usual[place] = np.median(same)
    shared = np.ones(year)
    if formula == "percent":
        shared = (series.values[-1] / series.values[-1 - year]) / (1.0 + leaving / 100.0)
    return DropOuts(
        pd.period_range(series.last + 1, periods=year),
        read_only(leaving),
        read_only(usual),
        read_only(shared * (usual - leaving)),
    )


def _on_calendar(rate: Series, series: Series) -> FloatArray:
    """Rates at the places of the series that they were made from; nan where there is none."""
    whole = np.full(series.values.size, np.nan)
    start = rate.first.ordinal - series.first.ordinal
    whole[start : start + rate.values.size] = rate.values
    return whole
