"""Measures of the general price change: weighted median, trimmed mean, and how each one tracked."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from analytics.readable import Readable
from analytics.series import FloatArray, read_only

_TIE = 1e-12  # cumulated weights this near one half count as one half


def weighted_median(changes: ArrayLike, weights: ArrayLike) -> FloatArray:
    """Change of the component that holds the 50th percentile of the weight.

    Parameters
    ----------
    changes, weights : array_like of float, shape (..., K)
        Percent changes, and weights of any total; a component with nan in either is left out.

    Returns
    -------
    ndarray of float, shape (...)
        Where exactly half of the weight lies below, the mean of the two neighbours; nan where no
        component is there.

    References
    ----------
    Kearns, J. (1998), "The Distribution and Measurement of Inflation", Reserve Bank of Australia
    Research Discussion Paper 9810, appendix C.

    Examples
    --------
    >>> changes = [-1.0, 0.0, 0.3, 0.8, 0.9, 2.0]
    >>> float(weighted_median(changes, [0.10, 0.15, 0.20, 0.25, 0.15, 0.15]))
    0.8
    """
    ordered, upto, there = _ranked(changes, weights)
    half = np.argmax(upto >= 0.5 - _TIE, axis=-1)[..., None]
    at = np.take_along_axis(ordered, half, axis=-1)
    heavy = np.diff(upto, axis=-1, prepend=0.0) > 0
    after = heavy & (np.arange(ordered.shape[-1]) > half)
    following = np.argmax(after, axis=-1)[..., None]
    tied = (np.take_along_axis(upto, half, axis=-1) <= 0.5 + _TIE) & after.any(
        axis=-1, keepdims=True
    )
    next_one = np.take_along_axis(ordered, following, axis=-1)
    median = np.where(tied, 0.5 * (at + next_one), at)[..., 0]
    return np.where(there, median, np.nan)


def trimmed_mean(
    changes: ArrayLike, weights: ArrayLike, *, lower: float, upper: float | None = None
) -> FloatArray:
    """Weighted mean of the changes without the tails.

    Parameters
    ----------
    changes, weights : array_like of float, shape (..., K)
        Percent changes, and weights of any total; a component with nan in either is left out.
    lower, upper : float
        Percent of the weight cut from below and from above, together below 100; `upper` is
        `lower` unless given. A component on the edge keeps the part of its weight that is inside.

    Returns
    -------
    ndarray of float, shape (...)
        nan where no component is there.

    Raises
    ------
    ValueError
        A cut is negative, or nothing is left.

    References
    ----------
    Kearns, J. (1998), Reserve Bank of Australia Research Discussion Paper 9810, appendix C.

    Examples
    --------
    >>> changes = [-1.0, 0.0, 0.3, 0.8, 0.9, 2.0]
    >>> weights = [0.10, 0.15, 0.20, 0.25, 0.15, 0.15]
    >>> round(float(trimmed_mean(changes, weights, lower=25)), 9)
    0.61
    """
    high = lower if upper is None else upper
    if not (lower >= 0 and high >= 0 and lower + high < 100):
        raise ValueError(
            f"lower and upper must not be negative and sum to below 100, but got {lower:g} and"
            f" {high:g}"
        )
    ordered, upto, there = _ranked(changes, weights)
    below = np.concatenate([np.zeros((*upto.shape[:-1], 1)), upto[..., :-1]], axis=-1)
    inside = np.minimum(upto, 1.0 - high / 100.0) - np.maximum(below, lower / 100.0)
    kept = np.clip(inside, 0.0, None)
    mean = (kept * np.where(kept > 0, ordered, 0.0)).sum(axis=-1) / (1.0 - (lower + high) / 100.0)
    return np.where(there, mean, np.nan)


def compounded(monthly: ArrayLike, span: int) -> FloatArray:
    """Percent change over `span` periods of the index that one-period changes build.

    Parameters
    ----------
    monthly : array_like of float, shape (n,)
        Percent a period; nan where there is none.
    span : int
        Periods.

    Returns
    -------
    ndarray of float, shape (n,)
        nan where one of the last `span` changes is absent.
    """
    logs = np.log1p(np.asarray(monthly, dtype=np.float64) / 100.0)
    whole = np.full(logs.size, np.nan)
    if logs.size >= span:
        whole[span - 1 :] = np.lib.stride_tricks.sliding_window_view(logs, span).sum(axis=-1)
    growth: FloatArray = 100.0 * np.expm1(whole)
    return growth


def centred_mean(values: ArrayLike, width: int) -> FloatArray:
    """Mean of the `width` values around each one, nan at the ends and beside gaps.

    Raises
    ------
    ValueError
        The width is even or below 1.
    """
    if width < 1 or width % 2 == 0:
        raise ValueError(f"width must be odd and at least 1, but got {width}")
    array = np.asarray(values, dtype=np.float64)
    means = np.full(array.size, np.nan)
    half = width // 2
    if array.size >= width:
        windows = np.lib.stride_tricks.sliding_window_view(array, width)
        means[half : array.size - half] = windows.mean(axis=-1)
    return means


@dataclass(frozen=True, eq=False)
class Tracking(Readable):
    """Result of `core_tracking`; all in percentage points.

    Attributes
    ----------
    names : tuple of str, length M
        The measures; the first is the one that the others are held against.
    trend_rmse, trend_bias : ndarray of float, shape (M,)
        Root mean square, and mean, of measure less trend.
    next_rmse, next_bias : ndarray of float, shape (M,)
        The same of measure less the total's change over the year that followed.
    trend_n, next_n : int
        Periods on which each comparison rests, the same for every measure. Neighbours overlap.
    trend : ndarray of float, shape (n,)
        The centred mean, percent a year; nan at the ends.
    """

    names: tuple[str, ...]
    trend_rmse: FloatArray
    trend_bias: FloatArray
    next_rmse: FloatArray
    next_bias: FloatArray
    trend_n: int
    next_n: int
    trend: FloatArray


def core_tracking(
    measures: Mapping[str, ArrayLike], total: ArrayLike, *, per_year: int, width: int
) -> Tracking:
    """Tell how near each measure came to the trend around it, and to the year that followed.

    Parameters
    ----------
    measures : mapping of str to array_like of float, shape (n,)
        Percent a year, on the periods of `total`; nan where there is none.
    total : array_like of float, shape (n,)
        All-items index.
    per_year : int
        Periods in a year.
    width : int
        Periods of the centred mean, odd: 25 for months.

    Returns
    -------
    Tracking
        The trend is the centred mean of the total's one-period changes, times `per_year` (after
        Bryan and Cecchetti, 1994, "Measuring Core Inflation", who centre three years; from
        memory). nan where no period has every measure.

    Raises
    ------
    ValueError
        There is no measure, or the width is even.
    """
    if not measures:
        raise ValueError("measures must hold at least one, but got none")
    index = np.asarray(total, dtype=np.float64)
    table = np.array([np.asarray(values, dtype=np.float64) for values in measures.values()])
    monthly = np.full(index.size, np.nan)
    monthly[1:] = 100.0 * (index[1:] / index[:-1] - 1.0)
    trend = per_year * centred_mean(monthly, width)
    following = np.full(index.size, np.nan)
    if index.size > per_year:
        following[:-per_year] = 100.0 * (index[per_year:] / index[:-per_year] - 1.0)
    found = []
    for target in (trend, following):
        both = ~np.isnan(table).any(axis=0) & ~np.isnan(target)
        gap = table[:, both] - target[both]
        n = int(both.sum())
        empty = np.full(len(table), np.nan)
        found.append(
            (np.sqrt((gap**2).mean(axis=1)) if n else empty, gap.mean(axis=1) if n else empty, n)
        )
    return Tracking(
        tuple(measures),
        read_only(found[0][0]),
        read_only(found[0][1]),
        read_only(found[1][0]),
        read_only(found[1][1]),
        found[0][2],
        found[1][2],
        read_only(trend),
    )


def _ranked(
    changes: ArrayLike, weights: ArrayLike
) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
    """Order changes; return them, the weight up to each as a share of 1, and where any is there."""
    values = np.asarray(changes, dtype=np.float64)
    heavy = np.broadcast_to(np.asarray(weights, dtype=np.float64), values.shape)
    if np.any(heavy < 0):
        raise ValueError(f"weights must not be negative, but got {np.nanmin(heavy):g}")
    absent = np.isnan(values) | np.isnan(heavy)
    heavy = np.where(absent, 0.0, heavy)
    order = np.argsort(np.where(absent, np.inf, values), axis=-1, kind="stable")
    ordered = np.take_along_axis(np.where(absent, 0.0, values), order, axis=-1)
    upto = np.cumsum(np.take_along_axis(heavy, order, axis=-1), axis=-1)
    total = upto[..., -1:]
    there = total[..., 0] > 0
    share: FloatArray = upto / np.where(total > 0, total, 1.0)
    return ordered, share, there
