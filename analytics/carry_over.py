"""Carry-over: what a flat rest of the year would leave of annual growth; and paths "if .. then"."""

from dataclasses import dataclass

import numpy as np
import pandas as pd

from analytics.print_rates import growing
from analytics.rates import Formula
from analytics.readable import Readable
from analytics.series import (
    PERIODS_PER_YEAR,
    FloatArray,
    Series,
    read_only,
)


@dataclass(frozen=True)
class CarryOver(Readable):
    """Result of `carry_over`.

    Attributes
    ----------
    year : int
        Calendar year of the newest value.
    this_year : float
        Growth of that year's average on the average of the year before, if the level stays where
        it is to the end of the year, percent; nan where the year before is not complete.
    next_year : float
        Growth of the next year's average on this one's, if the level stays where it is to the end
        of the next year, percent; nan where this year has periods without a value.
    """

    year: int
    this_year: float
    next_year: float


@dataclass(frozen=True, eq=False)
class Path(Readable):
    """Result of `path_if`: the coming periods if each brings the same rate.

    Attributes
    ----------
    periods : PeriodIndex, shape (m,)
        The coming periods.
    rate : float
        One-period rate assumed, percent.
    level : ndarray of float, shape (m,), read-only
        Values, in the unit of the series.
    yearly : ndarray of float, shape (m,), read-only
        The yearly rate that follows, percent; nan where the value of a year before is missing.
    """

    periods: pd.PeriodIndex
    rate: float
    level: FloatArray
    yearly: FloatArray


def carry_over(series: Series) -> CarryOver:
    """Annual growth that is there already, were the level to stay where it is.

    Parameters
    ----------
    series : Series
        An index or a level, positive.

    Returns
    -------
    CarryOver
        In the last period of a year, `this_year` is the annual growth itself and `next_year` the
        overhang of the Austrian central bank's glossary (OeNB): last value over year average, less
        one.

    Raises
    ------
    ValueError
        The series is a rate, or a value is zero or below.

    Examples
    --------
    >>> prices = Series("Prices", pd.Period("2023-01", "M"), [100.0] * 23 + [112.0])
    >>> carried = carry_over(prices)
    >>> carried.year, round(carried.this_year, 4), round(carried.next_year, 4)
    (2024, 1.0, 10.8911)
    """
    growing(series, "carry-over")
    per_year = PERIODS_PER_YEAR[series.frequency]
    newest = series.last
    this = _flat_year(series, newest.year, per_year)
    before = _flat_year(series, newest.year - 1, per_year)
    level = series.values[-1]
    return CarryOver(
        newest.year,
        float(100.0 * (this.mean() / before.mean() - 1.0)),
        float(100.0 * (level / this.mean() - 1.0)),
    )


def annual_growth_weights(periods_per_year: int) -> FloatArray:
    """Weights with which one-period rates make up the growth of annual averages.

    Parameters
    ----------
    periods_per_year : int
        12 for months, 4 for quarters.

    Returns
    -------
    ndarray of float, shape (2 periods_per_year - 1,)
        Oldest first: 1, 2, .., Y, .., 2, 1 over Y. The first Y - 1 belong to the year before. To
        first order the growth of the annual average is the weighted sum of the one-period rates
        (Cross and Wyman 2011, Canadian Economic Observer, June).

    Raises
    ------
    ValueError
        `periods_per_year` is below 1.

    Examples
    --------
    >>> annual_growth_weights(4) * 4
    array([1., 2., 3., 4., 3., 2., 1.])
    """
    if periods_per_year < 1:
        raise ValueError(f"periods_per_year must be 1 or more, but got {periods_per_year}")
    rising = np.arange(1.0, periods_per_year + 1)
    weights: FloatArray = np.concatenate([rising, rising[-2::-1]]) / periods_per_year
    return weights


def path_if(
    series: Series, rate: float, *, periods: int = 24, formula: Formula = "percent"
) -> Path:
    """Yearly rate of the coming periods if every one of them brings the same rate.

    Parameters
    ----------
    series : Series
        An index or a level, positive.
    rate : float
        One-period rate, percent, in the formula given.
    periods : int, default 24
        How many coming periods.
    formula : {"log", "percent"}
        Of `rate` and of the yearly rate.

    Returns
    -------
    Path
        Arithmetic on the published values: not a forecast.

    Raises
    ------
    ValueError
        The series is a rate, a value is zero or below, the rate is -100 percent or below, or
        `periods` is below 1.

    Examples
    --------
    >>> prices = Series("Prices", pd.Period("2024-01", "M"), [100.0] * 13)
    >>> path_if(prices, 1.0).yearly[[0, 11, 23]].round(4)
    array([ 1.    , 12.6825, 12.6825])
    """
    growing(series, "a path")
    if periods < 1:
        raise ValueError(f"periods must be 1 or more, but got {periods}")
    if formula == "percent" and rate <= -100.0:
        raise ValueError(f"rate must be above -100 percent, but got {rate:g}")
    step = np.log1p(rate / 100.0) if formula == "percent" else rate / 100.0
    year = PERIODS_PER_YEAR[series.frequency]
    coming = series.values[-1] * np.exp(step * np.arange(1, periods + 1))
    joined = np.concatenate([np.full(year, np.nan), series.values, coming])
    ratio = joined[-periods:] / joined[-periods - year : -year]
    yearly = 100.0 * (ratio - 1.0) if formula == "percent" else 100.0 * np.log(ratio)
    return Path(
        pd.period_range(series.last + 1, periods=periods),
        float(rate),
        read_only(coming),
        read_only(yearly),
    )


def _flat_year(series: Series, year: int, per_year: int) -> FloatArray:
    """Values of a calendar year, those still to come as the newest one; nan where one is missing.

    Raises nothing: a year that the series does not reach is nan.
    """
    values = np.full(per_year, np.nan)
    start = pd.Period(year=year, month=1, freq="M").asfreq(series.first.freqstr).ordinal
    for place in range(per_year):
        at = start + place - series.first.ordinal
        if at >= series.values.size:
            values[place] = series.values[-1]
        elif at >= 0:
            values[place] = series.values[at]
    return values
