"""Series made comparable over time: breaks spliced, old and new series linked, indices re-based."""

from collections.abc import Collection
from dataclasses import dataclass, replace
from typing import Literal, get_args

import numpy as np
import pandas as pd

from analytics.readable import Readable
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, Series, period_label

Treatment = Literal["exclude", "before", "after", "overlap", "overlap_mean"]


@dataclass(frozen=True, eq=False)
class Linked(Readable):
    """A series with its earlier or its whole part multiplied by a factor.

    Attributes
    ----------
    series : Series
        The result; name, kind and source are those of the newer series.
    factor : float
        What the older values were multiplied by.
    """

    series: Series
    factor: float


def break_treated(
    series: Series,
    period: pd.Period,
    treatment: Treatment = "exclude",
    *,
    other: Series | None = None,
    marked: Collection[pd.Period] = (),
) -> Linked:
    """Splice a series at a break: the growth into one period is replaced by another growth.

    All values before the break are multiplied by one factor, so the newest values stay as
    published and every other one-period growth rate is unchanged.

    Parameters
    ----------
    series : Series
        Of kind index or level, positive around the break.
    period : pandas.Period
        First period of the new definition.
    treatment : {"exclude", "before", "after", "overlap", "overlap_mean"}
        What the growth into `period` becomes. "before" and "after": the log growth of the period
        before or after. "exclude": the mean of the two, since a lag cell needs a value in every
        period; nothing of the published growth is left in it. "overlap": the growth of `other`,
        which is one definition on both sides of the break; this is the overlap ratio.
        "overlap_mean": the same ratio of means over a year before and a year from the break on,
        which a single odd period moves less.
    other : Series, optional
        The overlapping series, with values in the periods that its ratio needs.
    marked : collection of pandas.Period
        Other breaks of the series; none of them can lend its growth.

    Returns
    -------
    Linked
        `factor` multiplies the values before the break.

    Raises
    ------
    ValueError
        The series is a rate, the treatment is unknown, or a value that it needs is missing, not
        positive or itself behind a break.

    Notes
    -----
    With break b and wanted log growth g, ``factor = p_b / (p_(b-1) exp(g))``. A series with a
    season takes the season of the period that lends its growth. By the mean of an overlap q,
    ``factor = (mean p / mean q) from b on / (mean p / mean q) before b``: where q is the old
    definition carried on, or the new one carried back, this is the ratio of the two means over
    their overlap, as in `linked`.

    Examples
    --------
    >>> money = Series("Money", pd.Period("2024-01", "M"), [100.0, 110.0, 242.0, 266.2])
    >>> done = break_treated(money, pd.Period("2024-03", "M"), "before")
    >>> round(done.factor, 12), done.series.values.round(9)
    (2.0, array([200. , 220. , 242. , 266.2]))
    """
    if treatment not in get_args(Treatment):
        raise ValueError(
            f"treatment must be one of {', '.join(get_args(Treatment))}, but got {treatment!r}"
        )
    if series.kind == "rate":
        raise ValueError(
            f"a break must be in an index or a level, but {series.name!r} is a rate already"
        )
    published = _log_growth(series, period)
    if treatment in ("overlap", "overlap_mean"):
        if other is None:
            raise ValueError("a splice by overlap must have an overlapping series, but got none")
        wanted = _log_growth(other, period)
        if treatment == "overlap_mean":
            wanted = published - _log_step(series, other, period, marked)
    else:
        lenders = {"before": (-1,), "after": (1,), "exclude": (-1, 1)}[treatment]
        for step in lenders:
            if period + step in marked:
                raise ValueError(
                    f"the growth of {period_label(period + step)} must stand without a break, but"
                    f" one of {series.name!r} is marked there too"
                )
        wanted = float(np.mean([_log_growth(series, period + step) for step in lenders]))
    factor = float(np.exp(published - wanted))
    values = np.array(series.values)
    values[: period.ordinal - series.first.ordinal] *= factor
    return Linked(replace(series, values=values), factor)


def linked(old: Series, new: Series, first: pd.Period, last: pd.Period | None = None) -> Linked:
    """Link an old series to a new one by their overlap; the new one takes over at `first`.

    Parameters
    ----------
    old, new : Series
        Of one calendar; both have every period of the overlap.
    first, last : pandas.Period
        The overlap. Without `last` it is one period; else the ratio of the two means is taken,
        as where statistical offices link by twelve-month averages.

    Returns
    -------
    Linked
        The old series times `factor` before `first`, the new one from there on. Growth of the
        old before, and of the new after, is kept; linked at one period, growth into it is that of
        the old.

    Raises
    ------
    ValueError
        The calendars differ, a value of the overlap is missing, or a mean is not positive.

    Examples
    --------
    >>> old = Series("Prices", pd.Period("2023-11", "M"), [150.0, 160.0, 168.0])
    >>> new = Series("Prices", pd.Period("2023-12", "M"), [100.0, 105.0, 106.0])
    >>> done = linked(old, new, pd.Period("2023-12", "M"))
    >>> done.factor, done.series.values
    (0.625, array([ 93.75, 100.  , 105.  , 106.  ]))
    """
    if old.frequency != new.frequency:
        raise ValueError(
            f"old and new must have the same frequency, but got {old.frequency} and {new.frequency}"
        )
    factor = _mean(new, first, last) / _mean(old, first, last)
    before = old.values[: max(0, first.ordinal - old.first.ordinal)] * factor
    after = new.values[first.ordinal - new.first.ordinal :]
    start = min(old.first, first)
    return Linked(replace(new, first=start, values=np.concatenate([before, after])), factor)


def rereferenced(
    series: Series, first: pd.Period, last: pd.Period | None = None, *, to: float = 100.0
) -> Linked:
    """Scale an index so that a period, or the mean of several, is 100.

    Parameters
    ----------
    series : Series
        Of kind index or level.
    first, last : pandas.Period
        The reference period; without `last` it is one period.
    to : float, default 100
        The mean there afterwards.

    Raises
    ------
    ValueError
        The series is a rate, a value of the reference period is missing, or the mean or `to` is
        not positive.

    Examples
    --------
    >>> old = Series("Prices", pd.Period("2011Q3", "Q"), [179.4, 179.4, 179.5, 180.4])
    >>> done = rereferenced(old, old.first, old.last)
    >>> round(done.factor, 4), round(float(done.series.values[-1]), 1)  # as published
    (0.5566, 100.4)
    """
    if series.kind == "rate":
        raise ValueError(
            f"re-referencing must be of an index or a level, but {series.name!r} is a rate"
        )
    if not (np.isfinite(to) and to > 0):
        raise ValueError(f"to must be positive, but got {to}")
    factor = to / _mean(series, first, last)
    unit = f"{period_label(first)}{f' to {period_label(last)}' if last else ''} = {to:g}"
    return Linked(replace(series, values=series.values * factor, unit=unit), factor)


def _value(series: Series, period: pd.Period) -> float:
    if period.freqstr != series.first.freqstr:
        raise ValueError(
            f"periods of {series.name!r} must be {PERIOD_NOUN[series.frequency]}s, but got {period}"
        )
    place = period.ordinal - series.first.ordinal
    value = float(series.values[place]) if 0 <= place < series.values.size else np.nan
    if np.isnan(value):
        raise ValueError(
            f"{series.name!r} must have a value in {period_label(period)}, but has none"
        )
    return value


def _log_growth(series: Series, period: pd.Period) -> float:
    after, before = _value(series, period), _value(series, period - 1)
    if min(after, before) <= 0:
        raise ValueError(
            f"{series.name!r} must be positive up to {period_label(period)}, but got"
            f" {min(after, before):g}"
        )
    return float(np.log(after / before))


def _log_step(
    series: Series, other: Series, period: pd.Period, marked: Collection[pd.Period]
) -> float:
    """Log of the step in the ratio of two series at a break, each side by means of a year."""
    year = PERIODS_PER_YEAR[series.frequency]
    crossed = [each for each in marked if period - year < each < period + year]
    if crossed:
        raise ValueError(
            f"a year on each side of {period_label(period)} must stand without a break, but one of"
            f" {series.name!r} is marked in {period_label(crossed[0])}"
        )
    before, after = ((period + k, period + (k + year - 1)) for k in (-year, 0))
    ratios = [_mean(series, *span) / _mean(other, *span) for span in (before, after)]
    return float(np.log(ratios[1] / ratios[0]))


def _mean(series: Series, first: pd.Period, last: pd.Period | None) -> float:
    last = first if last is None else last
    if last < first:
        raise ValueError(
            f"last must not be before first, but got {period_label(first)} to {period_label(last)}"
        )
    mean = float(np.mean([_value(series, p) for p in pd.period_range(first, last)]))
    if mean <= 0:
        raise ValueError(
            f"the mean of {series.name!r} over the overlap must be positive, but got {mean:g}"
        )
    return mean
