"""Families of distributions: maximum likelihood, density, distribution and quantile functions.

Every function works on many samples at once, one a row, so that a bootstrap refits thousands.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy import special

from analytics.series import FloatArray

_LOG_2PI = float(np.log(2.0 * np.pi))


@dataclass(frozen=True, eq=False)
class Family:
    """A family of distributions with location, scale and perhaps a shape.

    Attributes
    ----------
    name, label : str
        Key and words.
    parameters : tuple of str
        Names of the k parameters.
    estimate : callable
        Ascending rows, shape (d, n), to parameters, shape (k, d).
    cdf, log_density : callable
        Values, shape (d, n), and parameters, each of shape (d, 1), to shape (d, n).
    quantile : callable
        Probabilities, shape (n,), and parameters, k floats, to shape (n,).
    """

    name: str
    label: str
    parameters: tuple[str, ...]
    estimate: Callable[[FloatArray], FloatArray]
    cdf: Callable[..., FloatArray]
    log_density: Callable[..., FloatArray]
    quantile: Callable[..., FloatArray]


# Laplace ------------------------------------------------------------------------------------


def _middle(rows: FloatArray) -> FloatArray:
    """Median of ascending rows."""
    n = rows.shape[1]
    return 0.5 * (rows[:, (n - 1) // 2] + rows[:, n // 2])


def _laplace_estimate(rows: FloatArray) -> FloatArray:
    n = rows.shape[1]
    upper, lower = rows[:, n - n // 2 :], rows[:, : n // 2]
    # The mean absolute deviation about the median needs the halves' sums and no absolute values.
    scale = (upper.sum(axis=1) - lower.sum(axis=1)) / n
    return np.stack([_middle(rows), scale])


def _laplace_cdf(x: FloatArray, location: FloatArray, scale: FloatArray) -> FloatArray:
    z = (x - location) / scale
    tail = 0.5 * np.exp(-np.abs(z))
    return np.where(z < 0, tail, 1.0 - tail)


def _laplace_log_density(x: FloatArray, location: FloatArray, scale: FloatArray) -> FloatArray:
    return -np.abs(x - location) / scale - np.log(2.0 * scale)


def _laplace_quantile(u: FloatArray, location: float, scale: float) -> FloatArray:
    return location - scale * np.sign(u - 0.5) * np.log1p(-2.0 * np.abs(u - 0.5))


# Asymmetric Laplace -------------------------------------------------------------------------


def _asymmetric_estimate(rows: FloatArray) -> FloatArray:
    d, n = rows.shape
    sums = np.cumsum(rows, axis=1)
    count = np.arange(1, n + 1)
    short = np.maximum(rows * count - sums, 0.0) / n  # mean shortfall below each value
    excess = np.maximum(sums[:, -1:] - sums - rows * (n - count), 0.0) / n
    cost = np.sqrt(short) + np.sqrt(excess)
    # At the lowest and highest value one side is empty and the skewness has no finite estimate.
    cost[(short <= 1e-14 * short[:, -1:]) | (excess <= 1e-14 * excess[:, :1])] = np.inf
    best = np.argmin(cost, axis=1)
    at = np.arange(d)
    short, excess = short[at, best], excess[at, best]
    skew = (short / excess) ** 0.25
    return np.stack([rows[at, best], excess * skew + short / skew, skew])


def _asymmetric_cdf(
    x: FloatArray, location: FloatArray, scale: FloatArray, skew: FloatArray
) -> FloatArray:
    z = (x - location) / scale
    total = skew + 1.0 / skew
    below = skew / total * np.exp(np.minimum(z, 0.0) / skew)
    above = 1.0 - np.exp(-np.maximum(z, 0.0) * skew) / (skew * total)
    return np.where(z < 0, below, above)


def _asymmetric_log_density(
    x: FloatArray, location: FloatArray, scale: FloatArray, skew: FloatArray
) -> FloatArray:
    z = (x - location) / scale
    return np.where(z < 0, z / skew, -z * skew) - np.log(scale * (skew + 1.0 / skew))


def _asymmetric_quantile(u: FloatArray, location: float, scale: float, skew: float) -> FloatArray:
    total = skew + 1.0 / skew
    middle = skew / total
    with np.errstate(divide="ignore"):
        below = skew * np.log(u / middle)
        above = -np.log((1.0 - u) * skew * total) / skew
    return location + scale * np.where(u < middle, below, above)


# Normal -------------------------------------------------------------------------------------


def _normal_estimate(rows: FloatArray) -> FloatArray:
    return np.stack([rows.mean(axis=1), rows.std(axis=1)])


def _normal_cdf(x: FloatArray, location: FloatArray, scale: FloatArray) -> FloatArray:
    found: FloatArray = special.ndtr((x - location) / scale)
    return found


def _normal_log_density(x: FloatArray, location: FloatArray, scale: FloatArray) -> FloatArray:
    return -0.5 * ((x - location) / scale) ** 2 - np.log(scale) - 0.5 * _LOG_2PI


def _normal_quantile(u: FloatArray, location: float, scale: float) -> FloatArray:
    found: FloatArray = location + scale * special.ndtri(u)
    return found


# Student t ----------------------------------------------------------------------------------


def _student_estimate(rows: FloatArray) -> FloatArray:
    """Profile likelihood over ln(1/df) by golden section, all rows at once.

    One sample is fitted to rounding; the many of a bootstrap only as far as its test needs.
    """
    searches, steps = (30, 40) if len(rows) == 1 else (12, 2)
    location: FloatArray = _middle(rows)[:, None]
    n = rows.shape[1]
    quarter = rows[:, (3 * n) // 4] - rows[:, n // 4]
    spread: FloatArray = rows.std(axis=1)
    scale: FloatArray = np.where(quarter > 0, np.minimum(quarter / 1.5, spread), 0.5 * spread)
    scale = scale[:, None]
    low, high = np.full((len(rows), 1), np.log(1e-4)), np.full((len(rows), 1), np.log(2.0))
    ratio = (np.sqrt(5.0) - 1.0) / 2.0

    def profile(place: FloatArray, rounds: int) -> FloatArray:
        nonlocal location, scale
        df = np.exp(-place)
        for _ in range(rounds):
            square: FloatArray = ((rows - location) / scale) ** 2
            weight: FloatArray = (df + 1.0) / (df + square)
            total = weight.sum(axis=1, keepdims=True)
            location = (weight * rows).sum(axis=1, keepdims=True) / total
            around = (weight * (rows - location) ** 2).sum(axis=1, keepdims=True)
            scale = np.sqrt(around / total)
        loglik: FloatArray = _student_log_density(rows, location, scale, df).sum(axis=1)
        return loglik[:, None]

    left, right = high - ratio * (high - low), low + ratio * (high - low)
    at_left, at_right = profile(left, 4), profile(right, 4)
    for _ in range(searches):
        better = at_left > at_right
        high, low = np.where(better, right, high), np.where(better, low, left)
        new = np.where(better, high - ratio * (high - low), low + ratio * (high - low))
        value = profile(new, steps)
        left, right = np.where(better, new, right), np.where(better, left, new)
        at_left, at_right = np.where(better, value, at_right), np.where(better, at_left, value)
    place = 0.5 * (low + high)
    profile(place, 4)
    return np.stack([location[:, 0], scale[:, 0], np.exp(-place[:, 0])])


def _student_cdf(
    x: FloatArray, location: FloatArray, scale: FloatArray, df: FloatArray
) -> FloatArray:
    found: FloatArray = special.stdtr(df, (x - location) / scale)
    return found


def _student_log_density(
    x: FloatArray, location: FloatArray, scale: FloatArray, df: FloatArray
) -> FloatArray:
    constant = (
        special.gammaln(0.5 * (df + 1.0))
        - special.gammaln(0.5 * df)
        - 0.5 * np.log(np.pi * df)
        - np.log(scale)
    )
    found: FloatArray = constant - 0.5 * (df + 1.0) * np.log1p(((x - location) / scale) ** 2 / df)
    return found


def _student_quantile(u: FloatArray, location: float, scale: float, df: float) -> FloatArray:
    found: FloatArray = location + scale * np.asarray(special.stdtrit(df, u), dtype=np.float64)
    return found


FAMILIES: dict[str, Family] = {
    "laplace": Family(
        "laplace",
        "Laplace",
        ("location", "scale"),
        _laplace_estimate,
        _laplace_cdf,
        _laplace_log_density,
        _laplace_quantile,
    ),
    "asymmetric_laplace": Family(
        "asymmetric_laplace",
        "asymmetric Laplace",
        ("location", "scale", "skew"),
        _asymmetric_estimate,
        _asymmetric_cdf,
        _asymmetric_log_density,
        _asymmetric_quantile,
    ),
    "normal": Family(
        "normal",
        "normal",
        ("location", "scale"),
        _normal_estimate,
        _normal_cdf,
        _normal_log_density,
        _normal_quantile,
    ),
    "student_t": Family(
        "student_t",
        "Student t",
        ("location", "scale", "df"),
        _student_estimate,
        _student_cdf,
        _student_log_density,
        _student_quantile,
    ),
}
