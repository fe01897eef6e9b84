"""Whether a series clings to its past more in one part of the sample than in the other."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray
from analytics.surface import growth_pair

STRONG = 4.0  # chance reaches it in about one steady series of a hundred
_TRIM = 0.15


@dataclass(frozen=True)
class PersistenceShift:
    """Result of `persistence_shift`.

    Attributes
    ----------
    position : int
        Place of the first value of the later part.
    before, after : float
        Lag-1 autocorrelation of the two parts, -1 to 1.
    strength : float
        Largest difference of the two over its standard error, over all splits.
    """

    position: int
    before: float
    after: float
    strength: float

    @property
    def strong(self) -> bool:
        """Whether the shift is stronger than chance makes it in a steady series."""
        return self.strength > STRONG


def persistence_shift(values: ArrayLike) -> PersistenceShift:
    """Find the split of a series at which its lag-1 autocorrelation changes most.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One value a period, no gaps, at least 60.

    Returns
    -------
    PersistenceShift

    Raises
    ------
    ValueError
        Fewer than 60 values, a gap, or a series that does not vary in a part.

    Notes
    -----
    Each part is taken from its own mean, so a shift of level alone counts for little. The standard
    error of an autocorrelation r over m values is ``sqrt((1 - r^2) / m)`` (Bartlett 1946, for a
    first-order autoregression); splits in the outer 15 percent are not tried. The threshold
    `STRONG` pays for trying the others: see tests/analytics/test_persistence.py.

    Examples
    --------
    >>> noise = np.random.default_rng(1).standard_normal(600)
    >>> walk = np.cumsum(noise[300:])
    >>> found = persistence_shift(np.concatenate((noise[:300], walk)))
    >>> found.strong, abs(found.position - 300) < 15
    (True, True)
    """
    x, _ = growth_pair(values, values)
    n = x.size
    if n < 60:
        raise ValueError(f"values must be at least 60, but got {n}")
    splits = np.arange(int(_TRIM * n), n - int(_TRIM * n))
    before = _autocorrelations(x)[splits]
    after = _autocorrelations(x[::-1])[n - splits]
    if not (np.isfinite(before).all() and np.isfinite(after).all()):
        raise ValueError("values must vary in every part, but are constant in one")
    error = np.sqrt((1 - before**2) / splits + (1 - after**2) / (n - splits))
    strength = np.abs(before - after) / np.maximum(error, 1e-12)
    best = int(np.argmax(strength))
    return PersistenceShift(
        int(splits[best]), float(before[best]), float(after[best]), float(strength[best])
    )


def _autocorrelations(x: FloatArray) -> FloatArray:
    """Lag-1 autocorrelation of the first m values, for each m; shape (n + 1,)."""
    n = x.size
    x = x - x.mean()
    total, square = np.cumsum(x), np.cumsum(x * x)
    product = np.concatenate(([0.0], np.cumsum(x[1:] * x[:-1])))
    m = np.arange(1, n + 1)
    mean = total / m
    # sum of (x_t - mean)(x_(t-1) - mean) over the m - 1 neighbours
    covariance = product - mean * (2 * total - x[0] - x) + (m - 1) * mean**2
    variance = square - m * mean**2
    with np.errstate(divide="ignore", invalid="ignore"):
        r = covariance / np.where(variance > 1e-12 * max(square[-1], 1e-300), variance, np.nan)
    return np.concatenate(([np.nan], np.clip(r, -1.0, 1.0)))
