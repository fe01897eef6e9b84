"""Cross-correlation of the driver's surprises with the response, passed through one filter."""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtr

from analytics.autoregression import autoregression
from analytics.lag_profile import neighbour_weights
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, growth_pair, lag_grid, locked


@dataclass(frozen=True, eq=False)
class PrewhitenedCorrelation:
    """Result of `prewhitened_correlation`; arrays are read-only.

    Attributes
    ----------
    shifts : ndarray of int, shape (S,)
        Months; above 0 the driver leads.
    correlation : ndarray of float, shape (S,)
        Cross-correlation of the two filtered series.
    bound : float
        ``2 / sqrt(n)``: without a relation about 19 of 20 correlations stay within it.
    averaged : ndarray of float, shape (S,)
        Centred mean of the correlation over `window` neighbouring shifts.
    averaged_bound : float
        The same bound for the mean.
    window : int
        Shifts averaged.
    ar, ma : ndarray of float
        Model of the driver behind the filter, lag 1 first.
    n : int
        Months of the filtered series.
    """

    shifts: IntArray
    correlation: FloatArray
    bound: float
    averaged: FloatArray
    averaged_bound: float
    window: int
    ar: FloatArray
    ma: FloatArray
    n: int

    @property
    def peak(self) -> int:
        """Shift where the averaged correlation is largest in size."""
        return int(self.shifts[int(np.argmax(np.abs(self.averaged)))])

    @property
    def p_peak(self) -> float:
        """Chance of a peak this high among so many shifts without any relation.

        One normal tail for every shift, combined as if the shifts were independent (Sidak
        1967), which errs towards a larger p where they are not.
        """
        z = 2.0 * float(np.abs(self.averaged).max()) / self.averaged_bound
        return float(-np.expm1(self.shifts.size * np.log1p(-2.0 * ndtr(-z))))


def cross_correlation(
    driver: ArrayLike, response: ArrayLike, *, shifts: Iterable[int]
) -> FloatArray:
    """Sample cross-correlation of the driver with the response `shift` months later.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        One value a month, same months, no gaps.
    shifts : iterable of int, shape (S,)
        Months, increasing; above 0 the driver leads.

    Returns
    -------
    ndarray of float, shape (S,)
        Sums of products divided by the moments of the whole sample (Box and Jenkins 1976,
        eq. 11.1.7; number from memory), so values far out shrink towards 0.

    Raises
    ------
    ValueError
        The series cannot be paired, one of them is constant, or a shift leaves the sample.

    Examples
    --------
    >>> cross_correlation([0, 1, 0, 0, 0], [0, 0, 0, 1, 0], shifts=[-2, 0, 2]).round(2)
    array([ 0.15, -0.25,  0.9 ])
    """
    x, y = growth_pair(driver, response)
    _, leads = lag_grid([1], shifts, x.size)
    for name, values in (("driver", x), ("response", y)):
        if np.ptp(values) <= 1e-12 * np.abs(values).max():
            raise ValueError(f"{name} must vary, but got a constant series")
    x, y = x - x.mean(), y - y.mean()
    size = float(np.sqrt((x @ x) * (y @ y)))
    products = np.correlate(y, x, mode="full")
    correlations: FloatArray = products[leads + x.size - 1] / size
    return correlations


def prewhitened_correlation(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    shifts: Iterable[int],
    window: int = 1,
    ar: ArrayLike | None = None,
    ma: ArrayLike | None = None,
) -> PrewhitenedCorrelation:
    """Cross-correlate the driver's surprises with the response passed through the same filter.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates, one a month, same months, no gaps. Not smoothed.
    shifts : iterable of int, shape (S,)
        Months, increasing; above 0 the driver leads.
    window : int, default 1
        Neighbouring shifts averaged before the peak is looked for.
    ar, ma : array_like of float, optional
        Model of the driver, ``x_t - ar_1 x_(t-1) - .. = a_t + ma_1 a_(t-1) + ..`` in
        deviations from the mean. If neither is given, an autoregression chosen by AIC.

    Returns
    -------
    PrewhitenedCorrelation

    Raises
    ------
    ValueError
        The series cannot be paired, one is constant, a shift with its neighbours leaves the
        sample, or the moving-average part cannot be inverted.

    Notes
    -----
    The driver's own memory smears its correlation with the response over many shifts. Box and
    Jenkins (1976, sec. 11.2; section from memory) model the driver, keep its surprises a_t, put
    the response through the same filter and correlate the two: at each shift the result is
    proportional to the response's reaction to a surprise that many months ago. The first months,
    as many as the order of `ar`, only start the filter and are dropped. With a white driver the
    correlations at shifts i and j have covariance ``rho_b(i - j) / n``, rho_b being the
    autocorrelation of the filtered response (Bartlett 1955); the bound of the mean over
    `window` shifts is twice the standard deviation that follows.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(240).cumsum()
    >>> found = prewhitened_correlation(driver, np.roll(driver, 6), shifts=range(-12, 13))
    >>> found.peak, found.p_peak < 0.001
    (6, True)
    """
    x, y = growth_pair(driver, response)
    leads = np.array(list(shifts))
    half = window // 2
    weights = neighbour_weights(window)
    if ar is None and ma is None:
        phi = autoregression(x).coefficients
        theta = np.zeros(0)
    else:
        phi, theta = (np.zeros(0) if part is None else np.array(part, float) for part in (ar, ma))
    if theta.size and np.abs(np.roots(np.append(1.0, theta))).max() >= 1.0:
        raise ValueError(f"ma must be invertible, but got {theta.tolist()}")
    surprises, filtered = (_surprises(values, phi, theta) for values in (x, y))
    n = surprises.size
    _, leads = lag_grid([1], leads, n - half)
    every = np.arange(leads[0] - half, leads[-1] + half + 1)
    correlation = cross_correlation(surprises, filtered, shifts=every)
    averaged = np.convolve(correlation, weights, mode="valid")
    memory = cross_correlation(filtered, filtered, shifts=range(2 * half + 1))
    apart = np.abs(np.subtract.outer(np.arange(weights.size), np.arange(weights.size)))
    spread = max(float(weights @ memory[apart] @ weights), 0.0)
    place = leads - leads[0]
    return PrewhitenedCorrelation(
        shifts=locked(leads),
        correlation=read_only(correlation[place + half]),
        bound=2.0 / float(np.sqrt(n)),
        averaged=read_only(averaged[place]),
        averaged_bound=2.0 * float(np.sqrt(spread / n)),
        window=window,
        ar=read_only(phi),
        ma=read_only(theta),
        n=n,
    )


def _surprises(values: FloatArray, phi: FloatArray, theta: FloatArray) -> FloatArray:
    """Invert the driver's model: a_t of a series in deviations from its mean."""
    from scipy.signal import lfilter  # costs a second at import

    centred = values - values.mean()
    filtered: FloatArray = lfilter(np.append(1.0, -phi), np.append(1.0, theta), centred)
    return filtered[phi.size :]
