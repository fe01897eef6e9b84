"""Seasonal adjustment where the source has none, and series brought to a lower frequency."""

from dataclasses import dataclass, replace
from typing import Literal, get_args

import numpy as np
import pandas as pd

from analytics.readable import Readable
from analytics.series import (
    PERIOD_NOUN,
    PERIODS_PER_YEAR,
    Frequency,
    Series,
    period_label,
)

Meeting = Literal["average", "last"]
HERE = "adjusted here by STL, not official"
YEARS = 5
_CALENDAR: dict[Frequency, str] = {"monthly": "M", "quarterly": "Q-DEC", "annual": "Y-DEC"}


@dataclass(frozen=True, eq=False)
class SeasonalAdjustment(Readable):
    """Result of `seasonal_adjustment`, on the calendar of the series.

    Attributes
    ----------
    adjusted : Series
        Adjustment "yes"; its source says that it was made here.
    season : Series
        Kind "rate", percent (100 times the log) by which the unadjusted value lies above the
        adjusted one; for a series of kind "rate", in its own unit.
    """

    adjusted: Series
    season: Series


def seasonal_adjustment(series: Series) -> SeasonalAdjustment:
    """Take the season out of a monthly or quarterly series by STL, robust, on logs.

    Parameters
    ----------
    series : Series
        At least five years without a gap; index and level positive. A rate is adjusted as it is.

    Raises
    ------
    ValueError
        The series is annual, has a gap, is too short, or has a value of zero or below.

    Notes
    -----
    Cleveland, Cleveland, McRae and Terpenning (1990), STL, Journal of Official Statistics 6, 3-73;
    as in statsmodels, with its defaults (seasonal smoother of 7 years) and robust weights. The
    newest values are revised as months come in; no effect of holidays or trading days is taken out.
    """
    per_year = PERIODS_PER_YEAR[series.frequency]
    noun = PERIOD_NOUN[series.frequency]
    if per_year == 1:
        raise ValueError(
            f"a season must be one of months or quarters, but {series.name!r} is annual"
        )
    if series.gaps.size:
        raise ValueError(
            f"{series.name!r} must have a value in every {noun} to be adjusted, but"
            f" {period_label(series.gaps[0])} is missing"
        )
    if series.values.size < YEARS * per_year:
        raise ValueError(
            f"{series.name!r} must have at least {YEARS * per_year} {noun}s to be adjusted, but has"
            f" {series.values.size}"
        )
    rate = series.kind == "rate"
    if not rate and (series.values <= 0).any():
        place = int(np.flatnonzero(series.values <= 0)[0])
        raise ValueError(
            f"{series.name!r} must be positive to be adjusted, but"
            f" {period_label(series.periods[place])} is {series.values[place]:g}"
        )
    from statsmodels.tsa.seasonal import STL

    used = np.array(series.values) if rate else 100.0 * np.log(series.values)
    season = np.asarray(STL(used, period=per_year, robust=True).fit().seasonal, dtype=np.float64)
    values = used - season if rate else np.exp((used - season) / 100.0)
    source = f"{series.source or series.name}; {HERE}"
    return SeasonalAdjustment(
        adjusted=replace(series, values=values, adjustment="yes", source=source),
        season=replace(
            series,
            name=f"{series.name}, season",
            values=season,
            kind="rate",
            unit=series.unit if rate else "percent",
            source=source,
        ),
    )


def at_frequency(series: Series, frequency: Frequency, by: Meeting = "average") -> Series:
    """Bring a series to a lower frequency; periods that are not whole are left out.

    Parameters
    ----------
    series : Series
        Index, level or rate.
    frequency : {"monthly", "quarterly", "annual"}
        Not higher than that of the series: nothing is interpolated.
    by : {"average", "last"}
        The mean of the values of a period, or the last of them. Of growth rates over one period,
        neither is a growth rate over the longer one; take the growth of the levels.

    Returns
    -------
    Series
        Its source says how it was made; the series itself where the frequency is its own.

    Raises
    ------
    ValueError
        The frequency is higher, `by` is unknown, or no period is whole.

    Examples
    --------
    >>> prices = Series("Prices", pd.Period("2024-02", "M"), [1.0, 2.0, 3.0, 4.0, 6.0])
    >>> at_frequency(prices, "quarterly").values, at_frequency(prices, "quarterly", "last").values
    (array([4.33333333]), array([6.]))
    """
    if by not in get_args(Meeting):
        raise ValueError(f"by must be average or last, but got {by!r}")
    if frequency == series.frequency:
        return series
    size = PERIODS_PER_YEAR[series.frequency] // PERIODS_PER_YEAR[frequency]
    if size < 1:
        raise ValueError(
            f"frequency must not be higher than that of {series.name!r}, {series.frequency}, but"
            f" got {frequency}"
        )
    calendar = _CALENDAR[frequency]
    first: pd.Period = series.first.asfreq(calendar, how="start")
    lead = series.first.ordinal - first.asfreq(series.first.freqstr, how="start").ordinal
    padded = np.r_[np.full(lead, np.nan), series.values]
    padded = np.r_[padded, np.full(-padded.size % size, np.nan)].reshape(-1, size)
    whole = np.isfinite(padded).all(axis=1)
    if not whole.any():
        raise ValueError(
            f"{series.name!r} must have a whole {PERIOD_NOUN[frequency]}, but has none"
        )
    taken = padded.mean(axis=1) if by == "average" else padded[:, -1]
    noun = PERIOD_NOUN[series.frequency]
    how = f"average of {size} {noun}s" if by == "average" else f"last of {size} {noun}s"
    return replace(
        series,
        first=first,
        values=np.where(whole, taken, np.nan),
        source=f"{series.source or series.name}; {frequency} by {how}",
    )
