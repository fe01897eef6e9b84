"""How often a reading at least as high comes: from a fitted distribution and from the data."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from analytics.families import FAMILIES
from analytics.goodness import Goodness
from analytics.readable import Readable
from analytics.series import FloatArray


@dataclass(frozen=True)
class Tail(Readable):
    """Probability of a reading at least as high, and its interval.

    Attributes
    ----------
    value : float
        The reading.
    probability, low, high : float
        0 to 1; the interval has the coverage asked for.
    level : float
        That coverage, 0 to 1.
    """

    value: float
    probability: float
    low: float
    high: float
    level: float

    @property
    def return_period(self) -> float:
        """Periods between such readings on average; infinite where the probability is zero."""
        return _inverse(self.probability)

    @property
    def return_low(self) -> float:
        """Lower end of the return period's interval, periods."""
        return _inverse(self.high)

    @property
    def return_high(self) -> float:
        """Upper end of the return period's interval, periods; may be infinite."""
        return _inverse(self.low)


def fitted_tail(goodness: Goodness, value: float, *, level: float = 0.9) -> Tail:
    """Tail probability under the fitted family; the interval from the refits to its own draws.

    Parameters
    ----------
    goodness : Goodness
        Its draws carry the dependence of the data.
    value : float
        The reading, percent.
    level : float, default 0.9
        Coverage of the interval, 0 to 1.

    Returns
    -------
    Tail
        Percentile interval of a parametric bootstrap. It covers what chance does to the
        parameters, and not that the family may be wrong.

    Raises
    ------
    ValueError
        The level is not between 0 and 1.
    """
    low, high = _ends(level)
    family = FAMILIES[goodness.fit.family]
    drawn = 1.0 - family.cdf(
        np.full((goodness.parameters.shape[1], 1), float(value)),
        *[row[:, None] for row in goodness.parameters],
    )
    ends = np.quantile(drawn[:, 0], [low, high])
    own = 1.0 - float(goodness.fit.cdf(value))
    return Tail(float(value), own, float(ends[0]), float(ends[1]), level)


def observed_tail(values: ArrayLike, value: float, *, level: float = 0.9) -> Tail:
    """Share of readings at least as high, with an interval that knows that they come in runs.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        Readings in the order of time; nan is left out.
    value : float
        The reading.
    level : float, default 0.9
        Coverage of the interval, 0 to 1.

    Returns
    -------
    Tail
        Score interval of Wilson (1927) with n taken down to effective months.

    Raises
    ------
    ValueError
        No value, or a level that is not between 0 and 1.

    Notes
    -----
    Effective months are ``n / (1 + 2 sum_k (1 - k/(L+1)) r_k)``, r the autocorrelation of the
    mark "at least as high" and L = n^(1/3) (Bartlett weights), at most n. Where no or every reading
    is marked, the autocorrelation of the readings themselves takes its place.

    Examples
    --------
    >>> tail = observed_tail(np.random.default_rng(1).permutation(100), 90)
    >>> tail.probability, 0.05 < tail.low < 0.1 < tail.high < 0.2
    (0.1, True)
    """
    _, high = _ends(level)
    array = np.asarray(values, dtype=np.float64).ravel()
    array = array[~np.isnan(array)]
    if array.size == 0:
        raise ValueError("values must hold at least one number, but there is none")
    marks = (array >= value).astype(np.float64)
    share = float(marks.mean())
    effective = _effective(marks if 0.0 < share < 1.0 else array)
    z = float(special.ndtri(high))
    centre = (share + z**2 / (2 * effective)) / (1 + z**2 / effective)
    spread = share * (1 - share) / effective + z**2 / (4 * effective**2)
    half = z / (1 + z**2 / effective) * float(np.sqrt(spread))
    lowest = 0.0 if share == 0.0 else max(0.0, centre - half)
    highest = 1.0 if share == 1.0 else min(1.0, centre + half)
    return Tail(float(value), share, lowest, highest, level)


def _effective(values: FloatArray) -> float:
    n = values.size
    deviations = values - values.mean()
    variance = float(deviations @ deviations)
    if variance <= 0.0 or n < 4:
        return float(n)
    lags = max(1, round(n ** (1 / 3)))
    total = 1.0
    for lag in range(1, lags + 1):
        weight = 1.0 - lag / (lags + 1.0)
        total += 2.0 * weight * float(deviations[lag:] @ deviations[:-lag]) / variance
    return float(n / max(1.0, total))


def _ends(level: float) -> tuple[float, float]:
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be between 0 and 1, but got {level:g}")
    return 0.5 * (1.0 - level), 0.5 * (1.0 + level)


def _inverse(probability: float) -> float:
    return float("inf") if probability <= 0.0 else 1.0 / probability
