"""Growth rates and trailing means. Every rate is in percent."""

from dataclasses import replace
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, FloatArray, Series, period_label

Formula = Literal["log", "percent"]


def growth_rate(
    series: Series, *, span: int = 1, formula: Formula = "log", annualised: bool = False
) -> Series:
    """Growth of an index or a level over `span` periods; a rate comes back as it is.

    Parameters
    ----------
    series : Series
        Values must be positive, except for a series of kind "rate".
    span : int, default 1
        Periods between the two values compared: 1 for the one-month rate, 12 for the
        12-month rate of a monthly series.
    formula : {"log", "percent"}
        ``100 ln(p_t / p_(t-span))`` or ``100 (p_t / p_(t-span) - 1)``.
    annualised : bool, default False
        Compound (percent) or scale (log) the rate to twelve months: with Y periods a year,
        ``100 ((p_t / p_(t-span))^(Y/span) - 1)`` or ``100 (Y/span) ln(...)``. The percent
        form is formula 1 of the OECD Economic Outlook note on growth rates for span 1.

    Returns
    -------
    Series
        Of kind "rate", in percent; nan where either value is missing. It runs from the first
        period to the last that has a rate: n - span values where there is no gap.

    Raises
    ------
    ValueError
        A value is zero or below, the span is not positive or leaves no pair of values, or the
        formula is unknown. Of a rate only the formula is checked.

    Examples
    --------
    >>> import pandas as pd
    >>> cpi = Series("Prices", pd.Period("2016-04", "M"), [239.261, 240.236])
    >>> round(float(growth_rate(cpi, formula="percent").values[0]), 4)  # 0.4 as published
    0.4075
    """
    if formula not in get_args(Formula):
        raise ValueError(f"formula must be log or percent, but got {formula!r}")
    if series.kind == "rate":
        return series
    low = np.flatnonzero(series.values <= 0)
    if low.size:
        raise ValueError(
            f"{series.name!r} must be positive to have a growth rate, but"
            f" {period_label(series.periods[low[0]])} is {series.values[low[0]]:g}"
        )
    noun = PERIOD_NOUN[series.frequency]
    if span < 1 or span >= series.values.size:
        raise ValueError(
            f"span must be at least 1 and below the {series.values.size} {noun}s of"
            f" {series.name!r}, but got {span}"
        )
    ratio = series.values[span:] / series.values[:-span]
    power = PERIODS_PER_YEAR[series.frequency] / span if annualised else 1.0
    if np.isnan(ratio).all():
        apart = f"one {noun}" if span == 1 else f"{span} {noun}s"
        raise ValueError(
            f"{series.name!r} must have two values {apart} apart, but its gaps leave none"
        )
    rate = 100.0 * power * np.log(ratio) if formula == "log" else 100.0 * (ratio**power - 1.0)
    over = "year" if annualised else (noun if span == 1 else f"{span} {noun}s")
    return replace(
        series,
        first=series.first + span,
        values=rate,
        kind="rate",
        unit=f"percent a {over}" if annualised or span == 1 else f"percent over {over}",
    )


def trailing_mean(values: ArrayLike, window: int) -> FloatArray:
    """Mean of the last `window` values, at each place where all of them exist.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One a period.
    window : int
        Periods averaged, from 1 to n.

    Returns
    -------
    ndarray of float, shape (n - window + 1,)
        Entry i averages ``values[i : i + window]``; nan where one of them is nan. A constant
        series gives a constant: every window is summed by itself, so no dust accumulates.

    Raises
    ------
    ValueError
        The window is not from 1 to n.

    Examples
    --------
    >>> trailing_mean([1.0, 2.0, 6.0], 2)
    array([1.5, 4. ])
    """
    array = np.asarray(values, dtype=np.float64)
    if array.ndim != 1:
        raise ValueError(f"values must be one-dimensional, but got shape {array.shape}")
    if not 1 <= window <= array.size:
        raise ValueError(f"window must be from 1 to {array.size}, but got {window}")
    means: FloatArray = np.lib.stride_tricks.sliding_window_view(array, window).mean(axis=1)
    return means
