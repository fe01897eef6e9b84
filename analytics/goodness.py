"""Goodness of fit when the parameters were fitted and the months are dependent.

Three distances between the data and the fitted distribution, and what chance gives them: samples
are drawn from the fitted distribution with the data's own serial dependence, each is fitted anew,
and its distances are measured to its own fit.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from analytics.autoregression import autoregression
from analytics.distribution import Fit, distribution_fit, sample
from analytics.families import FAMILIES
from analytics.readable import Readable
from analytics.series import FloatArray, read_only

CHUNK = 50  # draws that are simulated and fitted at a time
_FINE = np.linspace(-8.0, 8.0, 4001)  # normal scores at which a slow quantile function is tabled

# Upper-tail points of A2 and W2 for a Laplace distribution with both parameters estimated and
# independent values: Puig and Stephens (2000), Technometrics 42, 417-424, as the R package diagL1
# carries them. Odd and even sizes differ, so nothing is interpolated: the last row is for n > 100.
LAPLACE_LEVELS = (0.5, 0.25, 0.1, 0.05, 0.025, 0.01)
LAPLACE_POINTS: dict[str, dict[int, tuple[float, ...]]] = {
    "anderson_darling": {
        15: (0.397, 0.570, 0.807, 0.991, 1.160, 1.415),
        20: (0.381, 0.541, 0.760, 0.930, 1.103, 1.336),
        35: (0.396, 0.568, 0.797, 0.987, 1.179, 1.438),
        100: (0.394, 0.561, 0.792, 0.972, 1.156, 1.408),
        101: (0.396, 0.567, 0.798, 0.983, 1.177, 1.442),
    },
    "cramer_von_mises": {
        35: (0.054, 0.080, 0.116, 0.144, 0.173, 0.213),
        100: (0.053, 0.079, 0.114, 0.141, 0.169, 0.208),
        101: (0.054, 0.080, 0.116, 0.144, 0.173, 0.214),
    },
}


@dataclass(frozen=True, eq=False)
class EdfDistances:
    """Distances between the empirical distribution of d samples and a distribution.

    Attributes
    ----------
    anderson_darling, cramer_von_mises, watson : ndarray of float, shape (d,)
        A2, W2 and U2.
    kolmogorov, kuiper : ndarray of float, shape (d,)
        ``sqrt(n) D`` and ``sqrt(n) V``.
    """

    anderson_darling: FloatArray
    cramer_von_mises: FloatArray
    watson: FloatArray
    kolmogorov: FloatArray
    kuiper: FloatArray


@dataclass(frozen=True, eq=False)
class GoodnessPlan:
    """What the draws are made from; see `goodness_plan`.

    Attributes
    ----------
    fit : Fit
        The distribution under test.
    values : ndarray of float, shape (n,), read-only
        In the order of time.
    coefficients : ndarray of float, shape (p,), read-only
        Autoregression of the normal scores; empty where the months count as independent.
    draws, seed : int
        How many samples, from which seed.
    """

    fit: Fit
    values: FloatArray
    coefficients: FloatArray
    draws: int
    seed: int

    @property
    def chunks(self) -> int:
        """Number of chunks of at most 50 draws."""
        return -(-self.draws // CHUNK)


@dataclass(frozen=True, eq=False)
class GoodnessChunk:
    """Distances of some draws to their own fits, and the parameters of those fits.

    Attributes
    ----------
    distances : EdfDistances
        Shape (d,) each.
    parameters : ndarray of float, shape (k, d), read-only
        As `Fit.parameters`, in their order.
    """

    distances: EdfDistances
    parameters: FloatArray


@dataclass(frozen=True, eq=False)
class Goodness(Readable):
    """Result of `goodness_result`.

    Attributes
    ----------
    fit : Fit
        The distribution under test.
    anderson_darling, cramer_von_mises, kolmogorov : float
        A2, W2 and ``sqrt(n) D`` of the data to the fit.
    p_anderson_darling, p_cramer_von_mises, p_kolmogorov : float
        Share of draws at least as far, the data counted as one of them.
    order : int
        Order of the autoregression that carries the dependence; 0 for independent months.
    draws, seed : int
        Samples drawn and the seed.
    parameters : ndarray of float, shape (k, draws), read-only
        Parameters refitted to each draw: how far chance alone moves them.
    ties : float
        Share of values that occur more than once, 0 to 1. Rounded indices give ties, and rounding
        alone can make a continuous distribution fail.
    """

    fit: Fit
    anderson_darling: float
    cramer_von_mises: float
    kolmogorov: float
    p_anderson_darling: float
    p_cramer_von_mises: float
    p_kolmogorov: float
    order: int
    draws: int
    seed: int
    parameters: FloatArray
    ties: float


def edf_distances(probabilities: ArrayLike) -> EdfDistances:
    """Anderson-Darling, Cramer-von Mises, Watson, Kolmogorov and Kuiper statistics.

    Parameters
    ----------
    probabilities : array_like of float, shape (n,) or (d, n)
        The distribution function at the values, ascending along the last axis.

    Returns
    -------
    EdfDistances
        Arrays of shape (1,) or (d,).

    Notes
    -----
    Computing formulas of Stephens (1974), J. Am. Statist. Assoc. 69, 730-737 (from memory; held
    against scipy).
    """
    u = np.clip(np.atleast_2d(np.asarray(probabilities, dtype=np.float64)), 1e-300, 1.0 - 1e-16)
    n = u.shape[1]
    place = np.arange(1, n + 1)
    odd = (2 * place - 1) / (2.0 * n)
    square: FloatArray = ((u - odd) ** 2).sum(axis=1) + 1.0 / (12 * n)
    upper: FloatArray = (place / n - u).max(axis=1)
    lower: FloatArray = (u - (place - 1) / n).max(axis=1)
    # ln u_i has weight 2i - 1 and ln(1 - u_i) weight 2n + 1 - 2i.
    weighted = np.log(u) @ (2.0 * place - 1.0) + np.log1p(-u) @ (2.0 * n + 1.0 - 2.0 * place)
    return EdfDistances(
        anderson_darling=-n - weighted / n,
        cramer_von_mises=square,
        watson=square - n * (u.mean(axis=1) - 0.5) ** 2,
        kolmogorov=np.sqrt(n) * np.maximum(upper, lower),
        kuiper=np.sqrt(n) * (upper + lower),
    )


def laplace_bracket(statistic: float, n: int, *, name: str) -> tuple[float, float] | None:
    """Two levels between which the p-value of a Laplace fit to independent values lies.

    Parameters
    ----------
    statistic : float
        A2 or W2 with location and scale estimated by maximum likelihood.
    n : int
        Values fitted.
    name : {"anderson_darling", "cramer_von_mises"}
        Which of the two.

    Returns
    -------
    tuple of float or None
        (low, high), 0 to 1; None where the published table has no row for n.

    Raises
    ------
    ValueError
        The table has no such statistic.

    Examples
    --------
    >>> laplace_bracket(1.05, 500, name="anderson_darling")
    (0.025, 0.05)
    """
    if name not in LAPLACE_POINTS:
        raise ValueError(f"name must be one of {', '.join(LAPLACE_POINTS)}, but got {name!r}")
    row = LAPLACE_POINTS[name].get(min(n, 101))
    if row is None:
        return None
    beyond = int(np.searchsorted(row, statistic, side="right"))
    levels = (1.0, *LAPLACE_LEVELS, 0.0)
    return levels[beyond + 1], levels[beyond]


def goodness_plan(
    values: ArrayLike, *, family: str, draws: int = 2000, seed: int = 1, dependent: bool = True
) -> GoodnessPlan:
    """Fit the family and the dependence that the draws are to have.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        Growth rates in the order of time, percent; nan is left out.
    family : str
        Key of `analytics.families.FAMILIES`.
    draws : int, default 2000
        Samples to draw.
    seed : int, default 1
        What they are drawn from.
    dependent : bool, default True
        False takes the months as independent.

    Returns
    -------
    GoodnessPlan

    Raises
    ------
    ValueError
        Fewer than 20 values, values that do not vary, an unknown family, or no draws.

    Notes
    -----
    The dependence is a sieve: the values' normal scores follow an autoregression, its order by AIC
    (Burg). A draw is a Gaussian autoregression whose values are carried over by the fitted
    quantile function, so that the family is exactly true of it: the null hypothesis. Refitting
    pays for the estimated parameters. Bühlmann (1997) has the sieve, Stute, Gonzalez Manteiga and
    Presedo Quindimil (1993) the parametric bootstrap of such statistics (both from memory). Own
    measurement, see tests/bench/goodness.py: of 400 samples of 300 Laplace months with
    autoregression .5, a 5 % test rejects 5 to 7 of 100 (independent draws: 9 to 16), with
    autoregression .9 8 to 9 (independent draws: over 40).
    """
    if draws < 1:
        raise ValueError(f"draws must be 1 or more, but got {draws}")
    array = np.asarray(values, dtype=np.float64).ravel()
    array = array[~np.isnan(array)]
    fit = distribution_fit(array, family)
    coefficients = np.zeros(0)
    if dependent:
        coefficients = autoregression(_normal_scores(array)).coefficients
    return GoodnessPlan(fit, read_only(array), read_only(coefficients), draws, seed)


def goodness_chunk(plan: GoodnessPlan, index: int) -> GoodnessChunk:
    """Simulate, refit and measure the draws of one chunk; its number and the seed fix them."""
    count = min(CHUNK, plan.draws - index * CHUNK)
    rng = np.random.default_rng([plan.seed, index])
    family, n = FAMILIES[plan.fit.family], plan.values.size
    rows = np.sort(_quantiles(_scores(plan.coefficients, count, n, rng), plan.fit), axis=1)
    parameters = family.estimate(rows)
    distances = edf_distances(family.cdf(rows, *parameters[:, :, None]))
    return GoodnessChunk(distances, read_only(parameters))


def goodness_result(plan: GoodnessPlan, chunks: list[GoodnessChunk]) -> Goodness:
    """Put the chunks together: distances of the data and their p-values."""
    ordered = sample(plan.values)
    own = edf_distances(plan.fit.cdf(ordered))
    found: dict[str, float] = {}
    for name in ("anderson_darling", "cramer_von_mises", "kolmogorov"):
        drawn = np.concatenate([getattr(chunk.distances, name) for chunk in chunks])
        distance = float(getattr(own, name)[0])
        found[name] = distance
        found[f"p_{name}"] = (1 + int(np.count_nonzero(drawn >= distance))) / (1 + drawn.size)
    _, counts = np.unique(ordered, return_counts=True)
    return Goodness(
        fit=plan.fit,
        **found,
        order=int(plan.coefficients.size),
        draws=plan.draws,
        seed=plan.seed,
        parameters=read_only(np.concatenate([chunk.parameters for chunk in chunks], axis=1)),
        ties=float(counts[counts > 1].sum() / ordered.size),
    )


def goodness_of_fit(
    values: ArrayLike, *, family: str, draws: int = 2000, seed: int = 1, dependent: bool = True
) -> Goodness:
    """Do the whole plan at once; see `goodness_plan`.

    Parameters
    ----------
    values, family, draws, seed, dependent
        As for `goodness_plan`.

    Returns
    -------
    Goodness

    Examples
    --------
    >>> values = np.random.default_rng(1).exponential(size=200)
    >>> goodness_of_fit(values, family="normal", draws=99).p_anderson_darling
    0.01
    """
    plan = goodness_plan(values, family=family, draws=draws, seed=seed, dependent=dependent)
    return goodness_result(plan, [goodness_chunk(plan, i) for i in range(plan.chunks)])


def _normal_scores(values: FloatArray) -> FloatArray:
    """Return normal quantiles of the mid-ranks: the dependence without the distribution."""
    ordered = np.sort(values)
    below = np.searchsorted(ordered, values, side="left")
    upto = np.searchsorted(ordered, values, side="right")
    scores: FloatArray = special.ndtri((0.5 * (below + upto + 1)) / (values.size + 1.0))
    return scores


def _scores(coefficients: FloatArray, count: int, n: int, rng: np.random.Generator) -> FloatArray:
    """Rows of a Gaussian autoregression of variance 1."""
    if coefficients.size == 0:
        return rng.standard_normal((count, n))
    denominator = np.concatenate([[1.0], -coefficients])
    pulse = np.zeros(2000)
    pulse[0] = 1.0
    from scipy.signal import lfilter

    response = lfilter([1.0], denominator, pulse)
    memory = int(np.flatnonzero(np.abs(response) > 1e-3)[-1]) + 1
    shocks = rng.standard_normal((count, memory + n))
    rows: FloatArray = lfilter([1.0], denominator, shocks, axis=1)[:, memory:]
    rows /= np.sqrt(float(response @ response))
    return rows


def _quantiles(scores: FloatArray, fit: Fit) -> FloatArray:
    """Carry normal scores over to the fitted distribution."""
    if fit.family == "normal":
        rows: FloatArray = fit.parameters["location"] + fit.parameters["scale"] * scores
        return rows
    if fit.family == "student_t":  # its quantile function is slow: read it off a fine table
        table = fit.quantile(special.ndtr(_FINE))
        return np.interp(scores, _FINE, table)
    return fit.quantile(special.ndtr(scores))
