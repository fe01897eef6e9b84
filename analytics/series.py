"""A named economic series on a calendar of months, quarters or years, and the pairing of two."""

import hashlib
from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Literal, get_args

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
Frequency = Literal["monthly", "quarterly", "annual"]
Kind = Literal["index", "level", "rate"]
Adjustment = Literal["yes", "no", "unknown"]

PERIODS_PER_YEAR: dict[Frequency, int] = {"monthly": 12, "quarterly": 4, "annual": 1}
# In English whatever the machine is set to, unlike strftime.
MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
PERIOD_NOUN: dict[Frequency, str] = {"monthly": "month", "quarterly": "quarter", "annual": "year"}
_FREQUENCY_OF: dict[str, Frequency] = {"M": "monthly", "Q-DEC": "quarterly", "Y-DEC": "annual"}


def read_only(values: ArrayLike) -> FloatArray:
    """Return a float64 copy of `values` that cannot be written to."""
    array = np.array(values, dtype=np.float64)
    array.flags.writeable = False
    return array


def frequency_of(period: pd.Period) -> Frequency:
    """Name the calendar of a period: monthly, quarterly or annual.

    Raises
    ------
    ValueError
        The period is weekly, daily, of a fiscal year or of any other calendar.
    """
    if period.freqstr not in _FREQUENCY_OF:
        raise ValueError(
            f"periods must be months, quarters or years of the calendar, but got {period.freqstr!r}"
        )
    return _FREQUENCY_OF[period.freqstr]


def period_label(period: pd.Period) -> str:
    """Write a period as people read it: ``Mar 2024``, ``2024 Q1`` or ``2024``."""
    match frequency_of(period):
        case "monthly":
            return f"{MONTHS[period.month - 1]} {period.year:04d}"
        case "quarterly":
            return f"{period.year} Q{period.quarter}"
        case "annual":
            return str(period.year)


def period_code(period: pd.Period) -> str:
    """Write a period as files and addresses carry it: ``2024-03``, ``2024-Q1`` or ``2024``."""
    if frequency_of(period) == "quarterly":
        return f"{period.year}-Q{period.quarter}"
    return str(period)


@dataclass(frozen=True, eq=False)
class Series:
    """Values of one economic quantity, one for each period from `first` on.

    Attributes
    ----------
    name : str
        What the series is called in its file.
    first : pandas.Period
        Month, quarter or year of ``values[0]``.
    values : ndarray of float, shape (n,), read-only
        One value a period; nan where the source has none. Neither end is nan.
    kind : {"index", "level", "rate"}
        Index and level are turned into growth rates before use; a rate is used as it is.
    unit : str
        For example ``"2015 = 100"`` or ``"million crowns"``.
    adjustment : {"yes", "no", "unknown"}
        Whether the source removed the seasonal pattern.
    source : str
        File or publisher.

    Raises
    ------
    ValueError
        No value at all, a value that is infinite, or a kind or adjustment outside the list.
    """

    name: str
    first: pd.Period
    values: FloatArray
    kind: Kind = "index"
    unit: str = ""
    adjustment: Adjustment = "unknown"
    source: str = ""

    def __post_init__(self) -> None:
        frequency_of(self.first)
        array = np.array(self.values, dtype=np.float64)
        if array.ndim != 1:
            raise ValueError(f"values must be one-dimensional, but got shape {array.shape}")
        if np.isinf(array).any():
            raise ValueError(f"values of {self.name!r} must be finite, but got an infinite one")
        known = np.flatnonzero(~np.isnan(array))
        if known.size == 0:
            raise ValueError(f"{self.name!r} must have at least one value, but got none")
        for field, allowed in (("kind", Kind), ("adjustment", Adjustment)):
            if getattr(self, field) not in get_args(allowed):
                raise ValueError(
                    f"{field} must be one of {', '.join(get_args(allowed))},"
                    f" but got {getattr(self, field)!r}"
                )
        object.__setattr__(self, "first", self.first + int(known[0]))
        object.__setattr__(self, "values", read_only(array[known[0] : known[-1] + 1]))

    def __repr__(self) -> str:
        return (
            f"Series({self.name!r}, {self.frequency} {self.kind},"
            f" {period_label(self.first)} to {period_label(self.last)}, {self.values.size} values)"
        )

    @property
    def frequency(self) -> Frequency:
        """Calendar of the series: monthly, quarterly or annual."""
        return frequency_of(self.first)

    @property
    def last(self) -> pd.Period:
        """Period of the newest value."""
        return self.first + (self.values.size - 1)

    @property
    def periods(self) -> pd.PeriodIndex:
        """The calendar, shape (n,)."""
        return pd.period_range(self.first, periods=self.values.size)

    @property
    def gaps(self) -> pd.PeriodIndex:
        """Periods between first and last that have no value."""
        return self.periods[np.isnan(self.values)]

    @property
    def fingerprint(self) -> str:
        """Sixteen hexadecimal digits that change when calendar, values or kind change."""
        start = f"{self.frequency}:{self.kind}:{self.first.ordinal}:".encode()
        body = np.where(np.isnan(self.values), np.nan, self.values + 0.0).astype("<f8").tobytes()
        return hashlib.sha256(start + body).hexdigest()[:16]

    def to_frame(self) -> pd.DataFrame:
        """One column named after the series, on its PeriodIndex."""
        return pd.DataFrame({self.name: self.values}, index=self.periods)

    def between(self, first: pd.Period | None = None, last: pd.Period | None = None) -> "Series":
        """Return the part from `first` to `last`, both included; None leaves that end open.

        Raises
        ------
        ValueError
            Nothing lies between the two, or one is of another calendar than the series.
        """
        for end in (first, last):
            if end is not None and frequency_of(end) != self.frequency:
                raise ValueError(
                    f"the sample of {self.name!r} must be given in {PERIOD_NOUN[self.frequency]}s,"
                    f" but got {period_code(end)}"
                )
        start = 0 if first is None else max(0, first.ordinal - self.first.ordinal)
        stop = None if last is None else max(0, last.ordinal - self.first.ordinal + 1)
        part = self.values[start:stop]
        if part.size == 0 or np.isnan(part).all():
            raise ValueError(
                f"{self.name!r} has no value in the sample chosen; it runs from"
                f" {period_label(self.first)} to {period_label(self.last)}"
            )
        return replace(self, first=self.first + start, values=part)


def series_from_periods(
    name: str, periods: Iterable[pd.Period], values: ArrayLike, **attributes: str
) -> Series:
    """Build a series from periods in calendar order; periods left out become nan.

    Parameters
    ----------
    name : str
        Name of the series.
    periods : iterable of pandas.Period, length n
        All of one calendar, strictly increasing.
    values : array_like of float, shape (n,)
        nan for a missing value.
    **attributes : str
        `kind`, `unit`, `adjustment`, `source` of the `Series`.

    Raises
    ------
    ValueError
        A period stands twice or out of order, the calendars differ, or there is no value.

    Examples
    --------
    >>> months = [pd.Period("2024-01", "M"), pd.Period("2024-03", "M")]
    >>> series_from_periods("Prices", months, [100.0, 101.0]).values
    array([100.,  nan, 101.])
    """
    calendar = list(periods)
    array = np.asarray(values, dtype=np.float64)
    if len(calendar) != array.size or array.ndim != 1:
        raise ValueError(f"{name!r} must have a value a period, but got {array.shape} values")
    if not calendar:
        raise ValueError(f"{name!r} must have at least one value, but got none")
    if len({period.freqstr for period in calendar}) > 1:
        raise ValueError(f"{name!r} must keep to one calendar, but mixes several")
    ordinals = np.array([period.ordinal for period in calendar])
    wrong = np.flatnonzero(np.diff(ordinals) <= 0)
    if wrong.size:
        earlier, later = calendar[wrong[0]], calendar[wrong[0] + 1]
        raise ValueError(
            f"periods of {name!r} must increase, but {period_label(later)}"
            f" follows {period_label(earlier)}"
        )
    filled = np.full(int(ordinals[-1] - ordinals[0]) + 1, np.nan)
    filled[ordinals - ordinals[0]] = array
    return Series(name, calendar[0], filled, **attributes)  # type: ignore[arg-type]


@dataclass(frozen=True, eq=False)
class Pair:
    """Driver and response over the months that both have.

    Attributes
    ----------
    driver, response : Series
        Same calendar, same first and last period, no gaps.
    lost_driver, lost_response : int
        Periods of each that the other does not have, and that are left out.
    """

    driver: Series
    response: Series
    lost_driver: int
    lost_response: int

    def __repr__(self) -> str:
        return (
            f"Pair({self.driver.name!r} with {self.response.name!r},"
            f" {period_label(self.driver.first)} to {period_label(self.driver.last)},"
            f" {self.n} {PERIOD_NOUN[self.driver.frequency]}s)"
        )

    def to_frame(self) -> pd.DataFrame:
        """Two columns, driver and response, on the common calendar."""
        columns = {"driver": self.driver.values, "response": self.response.values}
        return pd.DataFrame(columns, index=self.periods)

    @property
    def periods(self) -> pd.PeriodIndex:
        """The common calendar, shape (n,)."""
        return self.driver.periods

    @property
    def n(self) -> int:
        """Number of common periods."""
        return int(self.driver.values.size)


def align(driver: Series, response: Series) -> Pair:
    """Cut two series to the stretch that both cover.

    Raises
    ------
    ValueError
        The calendars differ, the series do not overlap, or one has a gap in the overlap.

    Examples
    --------
    >>> money = Series("Money", pd.Period("2024-01", "M"), [1.0, 2.0, 3.0])
    >>> prices = Series("Prices", pd.Period("2024-02", "M"), [5.0, 6.0, 7.0, 8.0])
    >>> pair = align(money, prices)
    >>> pair.n, pair.lost_driver, pair.lost_response
    (2, 1, 2)
    """
    if driver.frequency != response.frequency:
        raise ValueError(
            f"driver and response must have the same frequency, but {driver.name!r} is"
            f" {driver.frequency} and {response.name!r} is {response.frequency}"
        )
    first, last = max(driver.first, response.first), min(driver.last, response.last)
    if last < first:
        spans = " and ".join(
            f"{series.name!r} runs from {period_label(series.first)} to {period_label(series.last)}"
            for series in (driver, response)
        )
        raise ValueError(f"driver and response must overlap in time, but {spans}")
    cut = []
    for series in (driver, response):
        part = series.between(first, last)
        if part.gaps.size or part.first != first or part.last != last:
            gap = part.gaps[0] if part.gaps.size else (first if part.first != first else last)
            noun = PERIOD_NOUN[series.frequency]
            raise ValueError(
                f"{series.name!r} must have a value in every {noun} of the sample, but"
                f" {period_label(gap)} is missing; {_longest_span(driver, response)}"
            )
        cut.append(part)
    return Pair(
        cut[0],
        cut[1],
        lost_driver=driver.values.size - cut[0].values.size,
        lost_response=response.values.size - cut[1].values.size,
    )


def _longest_span(driver: Series, response: Series) -> str:
    """Say which stretch without gaps is the longest, the earliest where several are."""
    joint = pd.concat([driver.to_frame(), response.to_frame()], axis=1, join="inner")
    whole = joint.notna().all(axis=1)
    if not whole.any():
        return f"no {PERIOD_NOUN[driver.frequency]} has both"
    runs = (~whole).cumsum()[whole]
    best = runs[runs == runs.value_counts(sort=False).idxmax()].index
    return (
        f"the longest stretch without gaps is {period_label(best[0])} to {period_label(best[-1])}"
    )
