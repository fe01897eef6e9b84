"""The rates of a print: over one period, annualised, over a year, of annual averages; doubling."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from analytics.rates import Formula, growth_rate, trailing_mean
from analytics.readable import Readable
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, FloatArray, Series, period_label


@dataclass(frozen=True)
class PrintRates(Readable):
    """Result of `print_rates`; nan where the series is too short or has a gap there.

    Attributes
    ----------
    one : float
        Over one period, percent.
    quarter_annualised, half_annualised : float
        Over three and six months, at an annual rate, percent; for quarters over one and two. nan
        for annual series.
    year : float
        Over twelve months or four quarters, percent.
    annual_average : float
        Mean of the last year's values over the mean of the year before, percent. In the last
        period of a calendar year this is the change of the annual average.
    """

    one: float
    quarter_annualised: float
    half_annualised: float
    year: float
    annual_average: float


def print_rates(series: Series, *, formula: Formula = "percent") -> PrintRates:
    """Rates at the newest value of an index or a level.

    Raises
    ------
    ValueError
        The series is a rate already, a value is zero or below, or the formula is unknown.

    Examples
    --------
    >>> import pandas as pd
    >>> steady = Series("Prices", pd.Period("2023-01", "M"), 100 * 1.01 ** np.arange(30))
    >>> rates = print_rates(steady)
    >>> round(rates.one, 9), round(rates.half_annualised, 6), round(rates.annual_average, 6)
    (1.0, 12.682503, 12.682503)
    """
    growing(series, "rates")
    year = PERIODS_PER_YEAR[series.frequency]

    def newest(span: int, annualised: bool = False) -> float:
        if span < 1 or span >= series.values.size or np.isnan(series.values[-1 - span]):
            return float("nan")
        return float(
            growth_rate(series, span=span, formula=formula, annualised=annualised).values[-1]
        )

    return PrintRates(
        one=newest(1),
        quarter_annualised=newest(year // 4, annualised=True),
        half_annualised=newest(year // 2, annualised=True),
        year=newest(year),
        annual_average=(
            float(average_rate(series, formula=formula).values[-1])
            if series.values.size >= 2 * year and not np.isnan(series.values[-2 * year :]).any()
            else float("nan")
        ),
    )


def growing(series: Series, what: str) -> None:
    """Refuse a series that has no growth rates of its own: a rate, or a value not above zero.

    Raises
    ------
    ValueError
        One sentence that says which; `what` is what was wanted of the series.
    """
    if series.kind == "rate":
        raise ValueError(
            f"{series.name!r} must be an index or a level to have {what}, but it is a rate already"
        )
    low = np.flatnonzero(series.values <= 0)
    if low.size:
        raise ValueError(
            f"{series.name!r} must be positive to have {what}, but"
            f" {period_label(series.periods[low[0]])} is {series.values[low[0]]:g}"
        )


def average_rate(series: Series, *, formula: Formula = "percent") -> Series:
    """Change of the mean of the last year's values on the mean of the year before.

    Parameters
    ----------
    series : Series
        An index or a level, positive.
    formula : {"log", "percent"}
        Of the two means.

    Returns
    -------
    Series
        Of kind "rate". Its value in December (or the fourth quarter) is the change of
        calendar-year averages, formula 2 of the OECD Economic Outlook note on growth rates: a
        change of means, not a mean of twelve rates.

    Raises
    ------
    ValueError
        The series is a rate, is shorter than two years, has a value zero or below, or the formula
        is unknown.
    """
    growing(series, "a change of annual averages")
    year = PERIODS_PER_YEAR[series.frequency]
    noun = PERIOD_NOUN[series.frequency]
    if series.values.size < 2 * year:
        raise ValueError(
            f"{series.name!r} must have {2 * year} {noun}s for a change of annual averages, but"
            f" has {series.values.size}"
        )
    means = replace(
        series, first=series.first + (year - 1), values=trailing_mean(series.values, year)
    )
    return growth_rate(means, span=year, formula=formula)


def factor_since(series: Series, since: int = 0) -> Series:
    """How many times the value of one period every value is.

    Parameters
    ----------
    series : Series
        An index or a level, positive.
    since : int, default 0
        Place of the period that counts as 1.

    Returns
    -------
    Series
        Of kind "index", one value a period from `since` on; the first is 1.

    Raises
    ------
    ValueError
        The place is outside the series, or its value is missing, zero or below.
    """
    if not 0 <= since < series.values.size:
        raise ValueError(f"since must be from 0 to {series.values.size - 1}, but got {since}")
    base = series.values[since]
    if not base > 0:
        raise ValueError(
            f"{series.name!r} must be positive in {period_label(series.periods[since])} to count"
            f" from there, but is {base:g}"
        )
    return replace(
        series,
        first=series.first + since,
        values=series.values[since:] / base,
        kind="index",
        unit=f"{period_label(series.periods[since])} = 1",
    )


def doubling_time(rate: ArrayLike) -> FloatArray:
    """Periods in which a steady rate doubles a level.

    Parameters
    ----------
    rate : array_like of float
        Percent a period (not log).

    Returns
    -------
    ndarray of float
        ``ln 2 / ln(1 + rate/100)`` periods; infinite where the rate is zero or below, nan where it
        is nan.

    Examples
    --------
    >>> float(doubling_time(100.0)), float(doubling_time(-1.0))
    (1.0, inf)
    """
    growth = np.log1p(np.maximum(np.asarray(rate, dtype=np.float64), 0.0) / 100.0)
    with np.errstate(divide="ignore"):
        periods: FloatArray = np.log(2.0) / growth
    return periods


def equivalent_rate(rate: ArrayLike, share: float) -> FloatArray:
    """Rate over a share of a period that compounds to `rate` over the whole.

    Parameters
    ----------
    rate : array_like of float
        Percent a period, above -100.
    share : float
        Length of the other period in periods of `rate`: 1/30 for a day of a 30-day month, 12 for a
        year of months.

    Returns
    -------
    ndarray of float
        ``100 ((1 + rate/100)^share - 1)``, percent.

    Raises
    ------
    ValueError
        A rate is -100 or below.

    Examples
    --------
    >>> float(equivalent_rate(50.0, 12).round(3))
    12874.634
    """
    rates = np.asarray(rate, dtype=np.float64)
    if (rates <= -100.0).any():
        raise ValueError(f"rate must be above -100 percent, but got {rates.min():g}")
    other: FloatArray = 100.0 * np.expm1(share * np.log1p(rates / 100.0))
    return other
