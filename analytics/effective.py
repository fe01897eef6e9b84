"""Effective months: how many independent months smoothed, serially correlated pairs are worth."""

import numpy as np
from numpy.typing import ArrayLike
from scipy import fft

from analytics.overlap import IntArray, smoothed_rows
from analytics.series import FloatArray
from analytics.surface import smallest_variance

FEWEST_EFFECTIVE = 3.1


def without_season(values: ArrayLike, periods_per_year: int = 12) -> FloatArray:
    """Take the mean of each month of the year out of a series, and put its overall mean back.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One a period, no gaps.
    periods_per_year : int, default 12
        12 for months, 4 for quarters; 1 leaves the series as it is.

    Returns
    -------
    ndarray of float, shape (n,)
        A series that is nothing but its seasonal pattern comes back constant.

    Raises
    ------
    ValueError
        `periods_per_year` is below 1.

    Examples
    --------
    >>> without_season([1.0, 5.0, 2.0, 6.0], 2)
    array([3., 3., 4., 4.])
    """
    series = np.asarray(values, dtype=np.float64)
    if periods_per_year < 1:
        raise ValueError(f"periods_per_year must be 1 or more, but got {periods_per_year}")
    if periods_per_year == 1:
        return series
    level = series.mean()
    place = np.arange(series.size) % periods_per_year
    means = np.bincount(place, series - level) / np.maximum(1, np.bincount(place))
    rest = series - level - means[place]
    if rest.var() <= smallest_variance(series):
        rest = np.zeros(series.size)
    adjusted: FloatArray = rest + level
    return adjusted


def effective_months(
    driver_autocorrelation: ArrayLike, response_autocorrelation: ArrayLike, pairs: ArrayLike
) -> FloatArray:
    """How many independent months the pairs of two serially correlated series are worth.

    Parameters
    ----------
    driver_autocorrelation, response_autocorrelation : array_like of float, shape (L + 1,)
        From lag 0, which is 1, to lag L.
    pairs : array_like of int, any shape
        Number of pairs n.

    Returns
    -------
    ndarray of float, shape of `pairs`
        ``n / max(1, 1 + 2 sum_k (1 - k/n) r_x(k) r_y(k))`` over k = 1 .. min(L, n - 1), and
        3.1 at least, so that a t distribution remains.

    Raises
    ------
    ValueError
        The two autocorrelations differ in length.

    Notes
    -----
    The sum is n times the variance of the correlation of two unrelated linear processes
    (Bartlett 1946, J. R. Statist. Soc. Suppl. 8; with the weights 1 - k/n Bretherton et al. 1999,
    J. Climate 12; both from memory). For autoregressions of order 1 with coefficients a and b it
    tends to n (1 - ab) / (1 + ab).

    Examples
    --------
    >>> rho = 0.8 ** np.arange(200)
    >>> float(effective_months(rho, rho, 100_000).round(-1))  # 100,000 (1 - 0.64) / (1 + 0.64)
    21950.0
    """
    r_x = np.asarray(driver_autocorrelation, dtype=np.float64)
    r_y = np.asarray(response_autocorrelation, dtype=np.float64)
    if r_x.shape != r_y.shape or r_x.ndim != 1:
        raise ValueError(
            f"the autocorrelations must have one length, but got {r_x.shape} and {r_y.shape}"
        )
    n = np.maximum(1, np.asarray(pairs))
    products = r_x * r_y
    products[0] = 0.0
    sums = np.cumsum(products)
    weighted = np.cumsum(products * np.arange(products.size))
    last = np.minimum(products.size - 1, n - 1)
    inflation = 1.0 + 2.0 * (sums[last] - weighted[last] / n)
    effective: FloatArray = np.maximum(FEWEST_EFFECTIVE, n / np.maximum(1.0, inflation))
    return effective


def student_t(correlation: ArrayLike, count: ArrayLike) -> FloatArray:
    """Student's t of a correlation from `count` independent pairs."""
    with np.errstate(divide="ignore"):
        spread = (1.0 - np.square(correlation)) / np.maximum(1.0, np.asarray(count) - 2.0)
        t: FloatArray = np.asarray(correlation) / np.sqrt(spread)
    return t


def smoothed_autocorrelations(values: FloatArray, windows: IntArray) -> list[FloatArray]:
    """Autocorrelations of the trailing means of a whole series, one array a window.

    Each runs from lag 0 to a third of the T - w + 1 means, with the usual divisor; nan where the
    means do not vary.
    """
    rows = smoothed_rows(values - values.mean(), windows)
    sizes = values.size - windows + 1
    outside = np.arange(values.size) >= sizes[:, None]
    rows -= rows.sum(axis=1, keepdims=True) / sizes[:, None]
    rows[outside] = 0.0
    length = fft.next_fast_len(values.size + values.size // 3, real=True)
    power = np.abs(fft.rfft(rows, length)) ** 2
    products: FloatArray = fft.irfft(power, length)
    with np.errstate(invalid="ignore", divide="ignore"):
        ratios = products / products[:, :1]
    return [row[: size // 3 + 1] for row, size in zip(ratios, sizes.tolist(), strict=True)]
