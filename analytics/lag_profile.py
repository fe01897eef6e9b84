"""Estimates by lag with their bands, and the long-run variance behind the bands."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked


@dataclass(frozen=True, eq=False)
class LagProfile:
    """One estimate a lag; arrays have shape (K + 1,) and are read-only.

    Attributes
    ----------
    shifts : ndarray of int
        Months after the driver, 0 .. K.
    estimate : ndarray of float
        Response to one percentage point of driver growth, in percentage points.
    se : ndarray of float
        Standard error that allows for serial correlation and uneven variance.
    low, high : ndarray of float
        Pointwise band.
    level : float
        Confidence of the band, one lag at a time.
    """

    shifts: IntArray
    estimate: FloatArray
    se: FloatArray
    low: FloatArray
    high: FloatArray
    level: float

    @property
    def peak(self) -> int:
        """Lag of the largest estimate in size, in months; of equal ones the shortest."""
        return int(self.shifts[int(np.argmax(np.abs(self.estimate)))])

    def at(self, shift: int) -> tuple[float, float, float]:
        """Estimate and band (low, high) at one lag."""
        place = int(np.flatnonzero(self.shifts == shift)[0])
        return float(self.estimate[place]), float(self.low[place]), float(self.high[place])


def lag_profile(
    estimate: FloatArray, variance: FloatArray, *, critical: FloatArray | float, level: float
) -> LagProfile:
    """Put estimates at lags 0 .. K and their variances into a profile with bands.

    Parameters
    ----------
    estimate, variance : ndarray of float, shape (K + 1,)
        Variances in squared units of the estimates.
    critical : float or ndarray of float, shape (K + 1,)
        Half-width of the band in standard errors.
    level : float
        Confidence that `critical` stands for.
    """
    se = np.sqrt(np.maximum(variance, 0.0))
    return LagProfile(
        shifts=locked(np.arange(estimate.size, dtype=np.int64)),
        estimate=read_only(estimate),
        se=read_only(se),
        low=read_only(estimate - critical * se),
        high=read_only(estimate + critical * se),
        level=level,
    )


def neighbour_weights(window: int) -> FloatArray:
    """Weights of a centred mean over `window` lags, adding to 1, shape (2 (window // 2) + 1,).

    An even window takes half of the lag at each end, as the centred twelve-month mean does.

    Raises
    ------
    ValueError
        The window is below 1.

    Examples
    --------
    >>> neighbour_weights(2)
    array([0.25, 0.5 , 0.25])
    """
    if window < 1:
        raise ValueError(f"window must be 1 or more, but got {window}")
    weights = np.ones(2 * (window // 2) + 1)
    if window % 2 == 0:
        weights[[0, -1]] = 0.5
    weights /= weights.sum()
    return weights


def neighbour_matrix(max_shift: int, window: int) -> FloatArray:
    """Centred means of a profile, shape (K + 1, K + 1 + window // 2).

    Row k averages the lags around k; lags below 0 do not exist, and the rest is scaled up.
    """
    weights = neighbour_weights(window)
    half = window // 2
    matrix = np.zeros((max_shift + 1, max_shift + 1 + half))
    for lag in range(max_shift + 1):
        first = max(0, lag - half)
        part = weights[first - (lag - half) :]
        matrix[lag, first : lag + half + 1] = part / part.sum()
    return matrix


def long_run_products(scores: FloatArray, truncation: int) -> FloatArray:
    """Sum of products of scores over all pairs of months, Bartlett weights, shape (p, p).

    Parameters
    ----------
    scores : ndarray of float, shape (n, p)
        Regressor times residual.
    truncation : int
        Last lag with a weight above 0 (Newey and West 1987).

    Notes
    -----
    With M = truncation + 1, Bartlett's weights are what the products of moving sums of M
    months give, zeros outside the sample, divided by M.
    """
    n, columns = scores.shape
    length = truncation + 1
    cumulative = np.zeros((n + 2 * length, columns))
    np.cumsum(scores, axis=0, out=cumulative[length : length + n])
    cumulative[length + n :] = cumulative[length + n - 1]
    sums = cumulative[length:] - cumulative[:-length]
    products: FloatArray = sums.T @ sums / length
    return products


def usual_truncation(n: int) -> int:
    """1.3 times the root of n, rounded up (Lazarus, Lewis, Stock and Watson 2018)."""
    return min(n - 1, int(np.ceil(1.3 * np.sqrt(n))))


def fixed_b_critical(truncation: int, n: int, level: float) -> float:
    """Two-sided critical value of t with Bartlett weights that cover a share b of the sample.

    Parameters
    ----------
    truncation, n : int
        ``b = (truncation + 1) / n``, from 0 to 1.
    level : float
        Confidence, for example 0.95.

    Notes
    -----
    The limit distribution is that of Kiefer and Vogelsang (2005). It is approximated by a
    scaled t: ``(1 + 0.801 b + 0.098 b^2) t_nu`` with ``nu = 1.345 / b + 4.53``, fitted to a
    simulation of the limit and within 5 percent of their table for 80 to 98 percent.

    Examples
    --------
    >>> round(fixed_b_critical(9, 100, 0.95), 1), round(fixed_b_critical(0, 10**9, 0.95), 2)
    (2.3, 1.96)
    """
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be between 0 and 1, but got {level}")
    b = (truncation + 1) / n
    scale = 1.0 + 0.801 * b + 0.098 * b**2
    return float(scale * stdtrit(1.345 / b + 4.53, 0.5 + level / 2.0))


def lagged(values: FloatArray, lags: NDArray[np.int64], start: int) -> FloatArray:
    """Columns ``values[t - lag]`` for t = start .. n - 1, shape (n - start, lags)."""
    rows = np.arange(start, values.size)
    columns: FloatArray = values[rows[:, None] - lags[None, :]]
    return columns
