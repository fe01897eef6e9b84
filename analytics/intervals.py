"""Intervals around a path, from the errors that the same rule made before."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtr, stdtrit

from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked

LEVELS = (0.5, 0.8, 0.95)
FEWEST_ERRORS = 12


@dataclass(frozen=True, eq=False)
class Fan:
    """Predictive distribution at each horizon; arrays of shape (H,) and read-only.

    Attributes
    ----------
    ahead : ndarray of int
        1 .. H periods ahead.
    centre : ndarray of float
        The forecast, in the unit of the target.
    scale : ndarray of float
        Root mean square of the past errors; nan where there are too few.
    freedom : ndarray of float
        Degrees of freedom of Student's t around the centre.
    errors : ndarray of int
        Past errors at the horizon; they overlap.
    """

    ahead: IntArray
    centre: FloatArray
    scale: FloatArray
    freedom: FloatArray
    errors: IntArray

    def band(self, level: float) -> tuple[FloatArray, FloatArray]:
        """Return the central interval of a level at every horizon: (low, high), shapes (H,)."""
        if not 0.0 < level < 1.0:
            raise ValueError(f"level must be above 0 and below 1, but got {level}")
        half = self.scale * stdtrit(self.freedom, 0.5 + level / 2.0)
        return self.centre - half, self.centre + half

    def rank(self, outcomes: ArrayLike) -> FloatArray:
        """Probability of an outcome at or below each of these, shape (H,); nan stays nan."""
        ranks: FloatArray = stdtr(
            self.freedom, (np.asarray(outcomes, dtype=np.float64) - self.centre) / self.scale
        )
        return ranks


def error_scale(errors: FloatArray, horizon: int) -> tuple[FloatArray, FloatArray, IntArray]:
    """Scale and degrees of freedom from past errors, at every moment of their history.

    Parameters
    ----------
    errors : ndarray of float, shape (n,)
        Errors at one horizon in the order of time.
    horizon : int
        Periods ahead: neighbours overlap.

    Returns
    -------
    scale, freedom : ndarray of float, shape (n + 1,)
        Entry j uses the first j errors; nan where these are fewer than 12.
    count : ndarray of int, shape (n + 1,)
        j.
    """
    n = errors.size
    count = np.arange(n + 1)
    squares = np.concatenate(([0.0], np.cumsum(errors**2)))
    inflation = np.ones(n + 1)
    with np.errstate(divide="ignore", invalid="ignore"):
        for lag in range(1, min(n, 2 * horizon)):
            products = np.zeros(n + 1)
            products[lag + 1 :] = np.cumsum(errors[lag:] * errors[:-lag])
            used = lag <= count / 3
            inflation += np.where(
                used, 2.0 * (1.0 - lag / np.maximum(count, 1)) * (products / squares) ** 2, 0.0
            )
        scale = np.sqrt(squares / count)
        freedom = np.maximum(2.0, count / inflation)
    few = (count < FEWEST_ERRORS) | ~(scale > 0.0)
    scale[few] = np.nan
    freedom[few] = np.nan
    return scale, freedom, count


def error_fan(centre: ArrayLike, errors: ArrayLike) -> Fan:
    """Predictive distribution around a forecast from past errors of the rule that made it.

    Parameters
    ----------
    centre : array_like of float, shape (H,)
        The forecast, 1 .. H periods ahead.
    errors : array_like of float, shape (O, H')
        Outcome less forecast at past origins, H' of at least H; nan where not known.

    Returns
    -------
    Fan
    """
    middle, past = np.asarray(centre, dtype=np.float64), np.asarray(errors, dtype=np.float64)
    if past.ndim != 2 or past.shape[1] < middle.size:
        raise ValueError(
            f"errors must have a column for each of {middle.size} horizons, but got {past.shape}"
        )
    parts = []
    for place in range(middle.size):
        known = past[~np.isnan(past[:, place]), place]
        parts.append([part[-1] for part in error_scale(known, place + 1)])
    scale, freedom, count = (np.array(column) for column in zip(*parts, strict=True))
    return Fan(
        ahead=locked(np.arange(1, middle.size + 1)),
        centre=read_only(middle),
        scale=read_only(scale),
        freedom=read_only(freedom),
        errors=locked(count.astype(np.int64)),
    )
