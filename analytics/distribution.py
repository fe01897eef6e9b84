"""Distributions of growth rates: four families fitted by maximum likelihood, and a kernel."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from analytics.families import FAMILIES
from analytics.readable import Readable
from analytics.series import FloatArray, read_only

FEWEST = 20
_LOG_2PI = float(np.log(2.0 * np.pi))


@dataclass(frozen=True, eq=False)
class Fit(Readable):
    """Result of `distribution_fit`.

    Attributes
    ----------
    family : str
        Key of `analytics.families.FAMILIES`.
    parameters : dict of str to float
        Location and scale in the unit of the values; shapes are pure numbers.
    n : int
        Values fitted.
    loglik : float
        Log-likelihood at its maximum, natural logarithm.
    aic, bic : float
        ``2 k - 2 loglik`` (Akaike 1974) and ``k ln n - 2 loglik`` (Schwarz 1978). They take the
        values as independent.
    """

    family: str
    parameters: dict[str, float]
    n: int
    loglik: float
    aic: float
    bic: float

    def density(self, values: ArrayLike) -> FloatArray:
        """Probability density at `values`, per unit of the values."""
        density: FloatArray = np.exp(self._at("log_density", values))
        return density

    def cdf(self, values: ArrayLike) -> FloatArray:
        """Probability of a value at or below `values`, 0 to 1."""
        return self._at("cdf", values)

    def quantile(self, probability: ArrayLike) -> FloatArray:
        """Value that is not exceeded with a probability, 0 to 1."""
        family, shares = FAMILIES[self.family], np.asarray(probability, dtype=np.float64)
        found: FloatArray = family.quantile(shares, *self.parameters.values())
        return found

    def _at(self, what: str, values: ArrayLike) -> FloatArray:
        array = np.asarray(values, dtype=np.float64)
        found: FloatArray = getattr(FAMILIES[self.family], what)(array, *self.parameters.values())
        return found


@dataclass(frozen=True, eq=False)
class KernelFit(Readable):
    """Result of `kernel_fit`: a sum of normal bells, one on each value.

    Attributes
    ----------
    values : ndarray of float, shape (n,), read-only
        Ascending.
    bandwidth : float
        Standard deviation of a bell, in the unit of the values.
    loglik : float
        Leave-one-out log-likelihood: each value under the bells of the others. It is no maximum
        likelihood, so there is no AIC and no BIC.
    """

    values: FloatArray
    bandwidth: float
    loglik: float

    @property
    def n(self) -> int:
        """Number of values."""
        return int(self.values.size)

    def density(self, at: ArrayLike) -> FloatArray:
        """Probability density, per unit of the values."""
        z = (np.asarray(at, float)[..., None] - self.values) / self.bandwidth
        bells: FloatArray = np.exp(-0.5 * z**2).mean(axis=-1)
        bells /= self.bandwidth * np.sqrt(2.0 * np.pi)
        return bells

    def cdf(self, at: ArrayLike) -> FloatArray:
        """Probability of a value at or below, 0 to 1."""
        z = (np.asarray(at, float)[..., None] - self.values) / self.bandwidth
        steps: FloatArray = special.ndtr(z).mean(axis=-1)
        return steps


def distribution_fit(values: ArrayLike, family: str) -> Fit:
    """Fit one family to values by maximum likelihood.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        Growth rates in percent; nan is left out.
    family : {"laplace", "asymmetric_laplace", "normal", "student_t"}
        What to fit.

    Returns
    -------
    Fit

    Raises
    ------
    ValueError
        Fewer than 20 values, values that do not vary, or an unknown family.

    Notes
    -----
    Laplace: median (mid-point for even n) and mean absolute deviation about it. Asymmetric Laplace:
    Kotz, Kozubowski and Podgorski (2001), ch. 3, with the mode at the order statistic that
    minimises sqrt(a) + sqrt(b), a and b the mean excess and shortfall (from memory; held against
    scipy). Student t: profile over 1/df between 0.0001 and 2, location and scale by the
    parameter-expanded steps of Liu, Rubin and Wu (1998).

    Examples
    --------
    >>> fit = distribution_fit(np.r_[-3.0, np.zeros(19), 3.0], "laplace")
    >>> fit.parameters["location"], round(fit.parameters["scale"], 4)
    (0.0, 0.2857)
    """
    if family not in FAMILIES:
        raise ValueError(f"family must be one of {', '.join(FAMILIES)}, but got {family!r}")
    kind, rows = FAMILIES[family], sample(values)[None, :]
    estimate = kind.estimate(rows)
    loglik = float(kind.log_density(rows, *estimate[:, :, None]).sum())
    k, n = len(kind.parameters), rows.shape[1]
    return Fit(
        family,
        {name: float(value[0]) for name, value in zip(kind.parameters, estimate, strict=True)},
        n,
        loglik,
        2.0 * k - 2.0 * loglik,
        k * float(np.log(n)) - 2.0 * loglik,
    )


def kernel_fit(values: ArrayLike) -> KernelFit:
    """Kernel estimate of the density of values, bandwidth by Silverman (1986), eq. 3.31.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        nan is left out.

    Returns
    -------
    KernelFit
        Bandwidth ``0.9 min(sd, interquartile range / 1.34) n^(-1/5)``; where more than half of the
        values are equal, the standard deviation alone counts.

    Raises
    ------
    ValueError
        Fewer than 20 values, or values that do not vary.
    """
    array = sample(values)
    spread = float(array.std(ddof=1))
    low, high = np.quantile(array, [0.25, 0.75])
    if high > low:
        spread = min(spread, float(high - low) / 1.34)
    bandwidth = 0.9 * spread * array.size ** (-0.2)
    z = (array[:, None] - array) / bandwidth
    bells = np.exp(-0.5 * z**2)
    np.fill_diagonal(bells, 0.0)
    with np.errstate(divide="ignore"):
        each = np.log(bells.sum(axis=1) / ((array.size - 1) * bandwidth)) - 0.5 * _LOG_2PI
    return KernelFit(read_only(array), bandwidth, float(each.sum()))


def sample(values: ArrayLike) -> FloatArray:
    """Values in ascending order without nan; refuses too few or constant ones.

    Raises
    ------
    ValueError
        Fewer than 20 values, an infinite one, or values that do not vary.
    """
    array = np.asarray(values, dtype=np.float64).ravel()
    array = np.sort(array[~np.isnan(array)])
    if array.size < FEWEST:
        raise ValueError(
            f"a distribution must have {FEWEST} values to be fitted to, but there are {array.size}"
        )
    if not np.isfinite(array[[0, -1]]).all():
        raise ValueError("values must be finite, but one is infinite")
    if array[-1] - array[0] <= 1e-9 * np.abs(array).max():
        raise ValueError(
            f"values must vary to have a distribution, but all {array.size} are {array[0]:g}"
        )
    return array
