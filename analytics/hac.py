"""Bartlett-kernel standard errors of the slope in every cell at once, with fixed-b p-values.

A second opinion beside the effective months of `robust`: on long windows it calls too many
unrelated pairs related.
"""

from collections.abc import Iterable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtr

from analytics.overlap import smoothed_rows
from analytics.series import FloatArray, read_only
from analytics.surface import (
    IntArray,
    growth_pair,
    lag_grid,
    locked,
    smallest_variance,
)

_THREADS = 2  # the result does not depend on it
_FIXED_B: dict[float, tuple[float, float, float, float]] = {
    0.90: (1.2816, 1.3040, 0.5135, -0.3386),
    0.95: (1.6449, 2.1859, 0.3142, -0.3427),
    0.975: (1.9600, 2.9694, 0.4160, -0.5324),
    0.99: (2.3263, 4.1618, 0.5368, -0.9060),
}


@dataclass(frozen=True, eq=False)
class HacSurface:
    """Slope, its Bartlett-kernel standard error and fixed-b p in every cell; arrays read-only.

    Attributes
    ----------
    windows : ndarray of int, shape (W,)
        Months averaged.
    shifts : ndarray of int, shape (S,)
        Months by which the driver leads.
    slope : ndarray of float, shape (W, S)
        As in `LagSurface`; nan where the cell has too few pairs or does not vary.
    se : ndarray of float, shape (W, S)
        Heteroskedasticity and autocorrelation consistent, no small-sample factor.
    t, p : ndarray of float, shape (W, S)
        ``slope / se`` and its two-sided fixed-b p.
    bandwidth : ndarray of int, shape (W, S)
        M: autocovariances at lags below M count, with weight 1 - lag / M.
    pairs : ndarray of int, shape (W, S)
        Overlapping pairs n.
    """

    windows: IntArray
    shifts: IntArray
    slope: FloatArray
    se: FloatArray
    t: FloatArray
    p: FloatArray
    bandwidth: IntArray
    pairs: IntArray

    def __repr__(self) -> str:
        return (
            f"HacSurface(windows {self.windows[0]} to {self.windows[-1]}, shifts"
            f" {self.shifts[0]} to {self.shifts[-1]}, bandwidth {self.bandwidth.min()} to"
            f" {self.bandwidth.max()})"
        )


def fixed_b_critical_value(share: ArrayLike, probability: float = 0.975) -> FloatArray:
    """Quantile of Student's t with a Bartlett-kernel standard error whose bandwidth is b n.

    Parameters
    ----------
    share : array_like of float
        b, above 0 and at most 1.
    probability : {0.90, 0.95, 0.975, 0.99}
        Of the quantile; 0.975 gives the two-sided 5 % point.

    Returns
    -------
    ndarray of float, shape of `share`

    Raises
    ------
    ValueError
        The probability is not one of the four, or b is outside (0, 1].

    Notes
    -----
    Cubic in b from Kiefer and Vogelsang (2005, Econometric Theory 21, table 1; coefficients from
    memory, and confirmed by the simulation in tests/analytics/test_hac.py).

    Examples
    --------
    >>> float(fixed_b_critical_value(0.1).round(3))
    2.261
    """
    if probability not in _FIXED_B:
        raise ValueError(
            f"probability must be one of {', '.join(map(str, _FIXED_B))}, but got {probability}"
        )
    b = _share(share)
    value: FloatArray = np.polynomial.Polynomial(_FIXED_B[probability])(b)
    return value


def fixed_b_p(t: ArrayLike, share: ArrayLike) -> FloatArray:
    """Two-sided p of a t value whose Bartlett-kernel standard error has bandwidth b n.

    Parameters
    ----------
    t, share : array_like of float
        The t value, and b above 0 and at most 1.

    Returns
    -------
    ndarray of float
        ``2 P(T > |t| / c)`` with T Student's on ``1.345 / b + 4.53`` degrees of freedom and
        ``c = 1 + 0.801 b + 0.098 b^2``: a fit of ours to the limiting distribution, whose true
        tail at a nominal 5 % is 4.6 to 5.7 % for any b (own measurement, see
        tests/analytics/test_hac.py).

    Raises
    ------
    ValueError
        b is outside (0, 1].
    """
    b = _share(share)
    scale = 1.0 + 0.801 * b + 0.098 * b**2
    p: FloatArray = 2.0 * stdtr(1.345 / b + 4.53, -np.abs(np.asarray(t)) / scale)
    return p


def _share(share: ArrayLike) -> FloatArray:
    """Check b."""
    b = np.asarray(share, dtype=np.float64)
    if not ((b > 0.0) & (b <= 1.0)).all():
        raise ValueError(f"the bandwidth's share must be above 0 and at most 1, but got {b!r}")
    return b


def hac_surface(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    windows: Iterable[int],
    shifts: Iterable[int],
    bandwidth: int | None = None,
    min_pairs: int = 24,
) -> HacSurface:
    """Slope with Bartlett-kernel standard error and fixed-b p, in every cell in one pass.

    Parameters
    ----------
    driver, response, windows, shifts, min_pairs
        As for `lag_surface`; every cell uses all the pairs it has.
    bandwidth : int, optional
        M of every cell, 1 or more, and n where the cell has fewer pairs. By default
        ``ceil(1.3 sqrt(n))`` with n the smoothed months T - w + 1 of the window, so that the
        cells of a window share it (rule of Lazarus, Lewis, Stock and Watson 2018, J. Bus. Econ.
        Stat. 36; rounding up from memory).

    Returns
    -------
    HacSurface

    Raises
    ------
    ValueError
        As in `lag_surface`, or the bandwidth is below 1.

    Notes
    -----
    With scores v = (x - mean x) e and their running sums c, which end at 0, the Bartlett
    estimate (Newey and West 1987) of n times the long-run variance is the sum of squares of
    all sums of M neighbouring scores, over M: ``2 (sum c_i^2 - sum c_i c_(i+M)) / M``. Hence
    ``se = sqrt(that) / Sxx`` without a loop over lags.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(240)
    >>> response = 0.5 * np.roll(driver, 6) + np.random.default_rng(2).standard_normal(240)
    >>> surface = hac_surface(driver, response, windows=[1, 3], shifts=range(0, 13))
    >>> surface.bandwidth[0, 0], bool(surface.p[0, 6] < 0.001)
    (np.int64(21), True)
    """
    x, y = growth_pair(driver, response)
    lengths, leads = lag_grid(windows, shifts, x.size)
    if bandwidth is not None and bandwidth < 1:
        raise ValueError(f"bandwidth must be 1 or more, but got {bandwidth}")
    if min_pairs < 3:
        raise ValueError(f"min_pairs must be 3 or more, but got {min_pairs}")
    pairs = np.maximum(0, x.size - lengths[:, None] + 1 - np.abs(leads))
    most = pairs.max()
    if most < min_pairs:
        raise ValueError(
            f"a cell must have at least {min_pairs} pairs, but no cell of the grid has more than"
            f" {most} of {x.size} months"
        )
    usual = np.ceil(1.3 * np.sqrt(x.size - lengths + 1)).astype(np.int64)
    spans = usual if bandwidth is None else np.full(lengths.size, bandwidth)

    from analytics.hac_loop import fill_cells  # compiled: loaded only where it is needed

    xs, ys = (smoothed_rows(values - values.mean(), lengths) for values in (x, y))
    cells = np.zeros((4, lengths.size, leads.size))

    def fill(first: int) -> None:
        fill_cells(xs, ys, x.size - lengths + 1, leads, spans, first, _THREADS, cells)

    with ThreadPoolExecutor(_THREADS) as pool:
        list(pool.map(fill, range(_THREADS)))
    usable = pairs >= min_pairs
    for square, series in zip(cells[:2], (x, y), strict=True):
        usable &= square > smallest_variance(series) * pairs
    used = np.minimum(spans[:, None], np.maximum(1, pairs))
    slope = np.where(usable, cells[2], np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        se = np.where(usable, np.sqrt(cells[3] / used) / cells[0], np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        t = slope / se
    return HacSurface(
        windows=locked(lengths),
        shifts=locked(leads),
        slope=read_only(slope),
        se=read_only(se),
        t=read_only(t),
        p=read_only(fixed_b_p(t, used / np.maximum(1, pairs))),
        bandwidth=locked(used),
        pairs=locked(pairs),
    )
