"""One cell of the surface in full: pairs, line, covariance ellipse and conditional means."""

import operator
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtr

from analytics.rates import trailing_mean
from analytics.readable import Readable
from analytics.series import FloatArray, read_only
from analytics.surface import (
    IntArray,
    growth_pair,
    locked,
    months_read,
    smallest_variance,
    without_months,
)

ELLIPSE_STEPS = 72


@dataclass(frozen=True, eq=False)
class SliceMeans(Readable):
    """Mean of one side within slices of the other, all of the same width.

    Attributes
    ----------
    edges : ndarray of float, shape (k + 1,), read-only
        From the least to the largest value of the sliced side.
    centre : ndarray of float, shape (k,), read-only
        Middle of each slice.
    mean : ndarray of float, shape (k,), read-only
        Mean of the other side over the slice's pairs; nan where there are none.
    count : ndarray of int, shape (k,), read-only
        Pairs in each slice.
    """

    edges: FloatArray
    centre: FloatArray
    mean: FloatArray
    count: IntArray


@dataclass(frozen=True, eq=False)
class LagCell(Readable):
    """One window and one shift in full; every array is read-only.

    Attributes
    ----------
    window, shift : int
        Months averaged; months by which the response is read later.
    driver, response : ndarray of float, shape (n,)
        The paired means, in the unit of the series; one pair a month.
    start : int
        First month t, counted from 0 in the series given, that the sample has a pair for: the
        last of the months that the driver averages. The response of month t ends at ``t + shift``.
    months : ndarray of int, shape (n,)
        Month t of each pair: ``start + i``, but where months are left out.
    slope, intercept : float
        Least-squares line of the response on the driver.
    correlation : float
        Pearson's r.
    n : int
        Number of pairs.
    se_naive : float
        Standard error of the slope as if the pairs were independent, which they are not.
    p_naive : float
        Two-sided p of slope 0 on Student's t with n - 2 degrees of freedom, likewise naive.
    residuals : ndarray of float, shape (n,)
        Response minus line.
    sigma : float
        Standard deviation of the residuals, with n - 2.
    ellipse : ndarray of float, shape (73, 2)
        Closed outline of the covariance ellipse at two standard deviations: driver, response.
    driver_slices : SliceMeans
        Mean of the response in slices of the driver.
    response_slices : SliceMeans
        Mean of the driver in slices of the response.
    """

    window: int
    shift: int
    driver: FloatArray
    response: FloatArray
    start: int
    months: IntArray
    slope: float
    intercept: float
    correlation: float
    n: int
    se_naive: float
    p_naive: float
    residuals: FloatArray
    sigma: float
    ellipse: FloatArray
    driver_slices: SliceMeans
    response_slices: SliceMeans

    def __repr__(self) -> str:
        return (
            f"LagCell(window {self.window}, shift {self.shift}, {self.n} pairs,"
            f" r {self.correlation:.3f}, slope {self.slope:.4g})"
        )


def lag_cell(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    slices: int = 8,
    min_pairs: int = 24,
    kept: ArrayLike | None = None,
) -> LagCell:
    """Pairs, line, ellipse and conditional means of one window and one shift.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Growth rates in percent, one a month, same months, no gaps.
    window : int
        Months in the trailing mean of both, 1 or more.
    shift : int
        Months by which the response is read later; above 0 the driver leads.
    slices : int, default 8
        Number of slices for the conditional means.
    min_pairs : int, default 24
        Fewest pairs accepted.
    kept : array_like of bool, shape (n,), optional
        Months that may be read; a pair that averages any other month on either side is left out.

    Returns
    -------
    LagCell
        With the same correlation, slope and number of pairs as that cell of `lag_surface`.

    Raises
    ------
    ValueError
        Lengths differ, a value is not finite, window or slices are below 1, too few pairs are
        left, or a side does not vary.

    Notes
    -----
    The ellipse is ``centre + 2 L (cos a, sin a)`` for a from 0 to 2 pi in 72 steps, with L the
    Cholesky factor of the covariance matrix (divisor n - 1). A value v lies in slice
    ``min(k-1, floor((v - least)/(largest - least) k))``.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(240)
    >>> lag_cell(driver, 0.5 * np.roll(driver, 6) + 1.0, window=3, shift=6)
    LagCell(window 3, shift 6, 232 pairs, r 1.000, slope 0.5)
    """
    x, y = growth_pair(driver, response)
    if kept is not None:
        x, y = without_months(x, kept), without_months(y, kept)
    window, shift, slices = (
        _whole(name, value)
        for name, value in (("window", window), ("shift", shift), ("slices", slices))
    )
    if window < 1 or slices < 1:
        raise ValueError(f"window and slices must be 1 or more, but got {window} and {slices}")
    if min_pairs < 3:
        raise ValueError(f"min_pairs must be 3 or more, but got {min_pairs}")
    n = max(0, x.size - window + 1 - abs(shift))
    if n < min_pairs:
        raise ValueError(
            f"window must leave at least {min_pairs} pairs, but window {window} and shift {shift}"
            f" leave {n} of {x.size} months"
        )
    start = window - 1 + max(0, -shift)
    first = start - window + 1
    # Centred before averaging: the moments then do not feel the level of the series.
    x_level, y_level = float(x.mean()), float(y.mean())
    xs = trailing_mean(x - x_level, window)[first : first + n]
    ys = trailing_mean(y - y_level, window)[first + shift : first + shift + n]
    months = start + np.arange(n)
    if kept is not None:
        whole = months_read(kept, window)
        chosen = whole[first : first + n] & whole[first + shift : first + shift + n]
        xs, ys, months, n = xs[chosen], ys[chosen], months[chosen], int(chosen.sum())
        if n < min_pairs:
            raise ValueError(
                f"at least {min_pairs} pairs must be left, but without the months left out window"
                f" {window} and shift {shift} have {n}"
            )
    x_mean, y_mean = float(xs.mean()), float(ys.mean())
    dx, dy = xs - x_mean, ys - y_mean
    sxx, syy, sxy = float(dx @ dx), float(dy @ dy), float(dx @ dy)
    for name, series, square in (("driver", x, sxx), ("response", y, syy)):
        if square <= smallest_variance(series) * n:
            raise ValueError(
                f"{name} must vary within the cell, but its {window}-month mean is constant"
            )
    slope = sxy / sxx
    residuals = dy - slope * dx
    sigma = float(np.sqrt(residuals @ residuals / (n - 2)))
    se = sigma / float(np.sqrt(sxx))
    correlation = min(1.0, max(-1.0, sxy / float(np.sqrt(sxx * syy))))
    paired_x, paired_y = xs + x_level, ys + y_level
    centre = (x_mean + x_level, y_mean + y_level)
    spread = (float(np.sqrt(sxx / (n - 1))), float(np.sqrt(syy / (n - 1))))
    return LagCell(
        window=window,
        shift=shift,
        driver=read_only(paired_x),
        response=read_only(paired_y),
        start=start,
        months=locked(months),
        slope=slope,
        intercept=centre[1] - slope * centre[0],
        correlation=correlation,
        n=n,
        se_naive=se,
        p_naive=float(2.0 * stdtr(n - 2, -abs(slope) / se)) if se > 0 else 0.0,
        residuals=read_only(residuals),
        sigma=sigma,
        ellipse=covariance_ellipse(centre, spread, correlation),
        driver_slices=_slice_means(paired_x, paired_y, slices),
        response_slices=_slice_means(paired_y, paired_x, slices),
    )


def _whole(name: str, value: int) -> int:
    """Return the value as an int, or say that it is not one."""
    try:
        return operator.index(value)
    except TypeError:
        raise ValueError(f"{name} must be an integer, but got {value!r}") from None


def covariance_ellipse(
    centre: tuple[float, float], spread: tuple[float, float], correlation: float
) -> FloatArray:
    """Outline at two standard deviations, shape (73, 2); first and last point are the same."""
    angle = np.linspace(0.0, 2.0 * np.pi, ELLIPSE_STEPS + 1)
    across = correlation * np.cos(angle) + np.sqrt(1.0 - correlation**2) * np.sin(angle)
    outline = np.column_stack(
        (centre[0] + 2.0 * spread[0] * np.cos(angle), centre[1] + 2.0 * spread[1] * across)
    )
    outline[-1] = outline[0]
    return read_only(outline)


def _slice_means(along: FloatArray, across: FloatArray, slices: int) -> SliceMeans:
    """Mean of `across` within equal slices of `along`."""
    low, high = float(along.min()), float(along.max())
    place = np.floor((along - low) / (high - low) * slices).astype(np.int64)
    place = np.minimum(slices - 1, place)
    count = np.bincount(place, minlength=slices)
    total = np.bincount(place, weights=across, minlength=slices)
    edges = np.linspace(low, high, slices + 1)
    return SliceMeans(
        edges=read_only(edges),
        centre=read_only((edges[:-1] + edges[1:]) / 2.0),
        mean=read_only(np.where(count > 0, total / np.maximum(1, count), np.nan)),
        count=locked(count),
    )
