"""Autoregressions by Burg's method, with the order chosen by Akaike's criterion."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray, read_only


@dataclass(frozen=True, eq=False)
class Autoregression:
    """``v_t = c_1 v_(t-1) + .. + c_p v_(t-p) + e_t`` for a series in deviations from its mean.

    Attributes
    ----------
    coefficients : ndarray of float, shape (p,), read-only
        c_1 .. c_p; empty for order 0.
    variance : float
        Of e, in squared units of the series.
    """

    coefficients: FloatArray
    variance: float

    @property
    def order(self) -> int:
        """Number of coefficients."""
        return int(self.coefficients.size)


def autoregression(
    values: ArrayLike, *, max_order: int | None = None, order: int | None = None
) -> Autoregression:
    """Fit an autoregression by Burg (1975); the order by AIC (Akaike 1974) unless given.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One a period, no gaps. The mean is taken out.
    max_order : int, optional
        Orders tried are 0 to `max_order`; by default ``10 log10(n)``, and at most n / 4.
    order : int, optional
        Fit this order and no other.

    Returns
    -------
    Autoregression

    Raises
    ------
    ValueError
        A value is not finite, the series does not vary, or an order is negative or not below
        n / 2.

    Notes
    -----
    Burg's coefficients always give a stationary process, so that simulated series stay bounded
    near a unit root. ``AIC(p) = n ln(variance_p) + 2 p``. Burg's thesis is cited from memory.

    Examples
    --------
    >>> noise = np.random.default_rng(1).standard_normal(2000)
    >>> walk = np.zeros(2000)
    >>> for t in range(1, 2000):
    ...     walk[t] = 0.8 * walk[t - 1] + noise[t]
    >>> autoregression(walk, order=1).coefficients.round(1)
    array([0.8])
    """
    array = np.asarray(values, dtype=np.float64)
    if array.ndim != 1 or not np.isfinite(array).all():
        raise ValueError("values must be one finite series, but got a gap or several columns")
    if array.size == 0 or np.ptp(array) <= 1e-12 * np.abs(array).max():
        raise ValueError("values must vary, but got a constant series")
    n = array.size
    usual = min(n // 4, int(10 * np.log10(n)))
    highest = order if order is not None else (usual if max_order is None else max_order)
    if not 0 <= highest < n / 2:
        raise ValueError(f"the order must be from 0 to below {n / 2:g}, but got {highest}")

    forward = array - array.mean()
    backward = forward
    variance = float(forward @ forward) / n
    coefficients = np.zeros(0)
    best, least = Autoregression(read_only(coefficients), variance), n * np.log(variance)
    for p in range(1, highest + 1):
        f, b = forward[1:], backward[:-1]
        reflection = 2.0 * float(f @ b) / float(f @ f + b @ b)
        forward, backward = f - reflection * b, b - reflection * f
        coefficients = np.append(coefficients - reflection * coefficients[::-1], reflection)
        variance *= 1.0 - reflection**2
        aic = n * np.log(variance) + 2 * p
        if order is not None or aic < least:
            best, least = Autoregression(read_only(coefficients), variance), aic
    return best
