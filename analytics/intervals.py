"""Intervals around a path, from the errors that the same rule made before."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtr, stdtrit

from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked

LEVELS = (0.5, 0.8, 0.95)
NEWEST = 0.6  # share of the past errors used
FEWEST_ERRORS = 12


@dataclass(frozen=True, eq=False)
class Fan:
    """Predictive distribution at each horizon; arrays of shape (H,) unless said, read-only.

    Attributes
    ----------
    ahead : ndarray of int
        1 .. H periods ahead.
    centre : ndarray of float
        The forecast, in the unit of the target.
    scale : ndarray of float
        Root mean square of the newest past errors; nan where these are fewer than 12.
    freedom : ndarray of float
        Degrees of freedom of Student's t around the centre: what the errors are worth.
    errors : ndarray of int
        Past errors used at the horizon; they overlap.
    levels : tuple of float
        L levels at which the past was judged.
    measured : ndarray of float, shape (L, H)
        Share of past outcomes inside the interval that the errors known at their date would have
        given; nan where there was none.
    judged : ndarray of int
        Past outcomes behind `measured`; they overlap.
    """

    ahead: IntArray
    centre: FloatArray
    scale: FloatArray
    freedom: FloatArray
    errors: IntArray
    levels: tuple[float, ...]
    measured: FloatArray
    judged: IntArray

    def band(self, level: float) -> tuple[FloatArray, FloatArray]:
        """Return the central interval of a level at every horizon: (low, high), shapes (H,)."""
        if not 0.0 < level < 1.0:
            raise ValueError(f"level must be above 0 and below 1, but got {level}")
        half = half_width(self.scale, self.freedom, level)
        return self.centre - half, self.centre + half

    def rank(self, outcomes: ArrayLike) -> FloatArray:
        """Probability of an outcome at or below each of these, shape (H,); nan stays nan."""
        ranks: FloatArray = stdtr(
            self.freedom, (np.asarray(outcomes, dtype=np.float64) - self.centre) / self.scale
        )
        return ranks


def half_width(scale: FloatArray, freedom: FloatArray, level: float) -> FloatArray:
    """Half of the central interval of a level, of Student's t times a scale."""
    half: FloatArray = scale * stdtrit(freedom, 0.5 + level / 2.0)
    return half


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
        Entry j knows the first j errors and uses the newest 60 % of them; nan where those used are
        fewer than 12 or all zero.
    used : ndarray of int, shape (n + 1,)
        How many are used.

    Notes
    -----
    The root mean square is about zero, so that a rule that missed on one side is charged for it. m
    overlapping errors are worth ``m / (1 + 2 sum_k (1 - k/m) r_k^2)`` independent squares (the
    variance of a variance: Bartlett 1946, from memory), k up to 2 h and to m / 3, with r_k the
    products k apart over the squares; Student's t with so many degrees of freedom, 2 at least, pays
    for what the scale does not know. Old errors come from lines fitted to few periods and from
    other times; 60 % was chosen by coverage (tests/bench/calibration_outlook.py, where the other
    ways that were tried stand beside it).
    """
    n = errors.size
    known = np.arange(n + 1)
    start = known - np.ceil(NEWEST * known).astype(np.int64)
    used = known - start
    sums = np.concatenate(([0.0], np.cumsum(errors**2)))
    squares = sums - sums[start]
    inflation = np.ones(n + 1)
    with np.errstate(divide="ignore", invalid="ignore"):
        for lag in range(1, min(n, 2 * horizon + 1)):
            products = np.zeros(n + 1)
            products[lag + 1 :] = np.cumsum(errors[lag:] * errors[:-lag])
            ratio = (products - products[np.minimum(n, start + lag)]) / squares
            weight = np.where(lag <= used / 3, 2.0 * (1.0 - lag / np.maximum(used, 1)), 0.0)
            inflation += weight * ratio**2
        scale = np.sqrt(squares / used)
        freedom = np.maximum(2.0, used / inflation)
    few = (used < FEWEST_ERRORS) | ~(scale > 0.0)
    scale[few] = np.nan
    freedom[few] = np.nan
    return scale, freedom, used


def error_fan(centre: ArrayLike, errors: ArrayLike, *, levels: tuple[float, ...] = LEVELS) -> Fan:
    """Predictive distribution around a forecast from past errors of the rule that made it.

    Parameters
    ----------
    centre : array_like of float, shape (H,)
        The forecast, 1 .. H periods ahead.
    errors : array_like of float, shape (O, H')
        Outcome less forecast at past dates, one after another, H' of at least H; nan where not
        known.
    levels : tuple of float
        At which the past is judged.

    Returns
    -------
    Fan

    Raises
    ------
    ValueError
        There are fewer columns of errors than horizons.
    """
    middle, past = np.asarray(centre, dtype=np.float64), np.asarray(errors, dtype=np.float64)
    if past.ndim != 2 or past.shape[1] < middle.size:
        raise ValueError(
            f"errors must have a column for each of {middle.size} horizons, but got {past.shape}"
        )
    newest = np.empty((3, middle.size))
    measured = np.full((len(levels), middle.size), np.nan)
    judged = np.zeros(middle.size, dtype=np.int64)
    for place in range(middle.size):
        known = past[~np.isnan(past[:, place]), place]
        scale, freedom, used = error_scale(known, place + 1)
        newest[:, place] = scale[-1], freedom[-1], used[-1]
        seen = np.maximum(0, np.arange(known.size) - place)
        fair = ~np.isnan(scale[seen])
        judged[place] = fair.sum()
        for row, level in enumerate(levels if judged[place] else ()):
            half = half_width(scale[seen[fair]], freedom[seen[fair]], level)
            measured[row, place] = (np.abs(known[fair]) <= half).mean()
    return Fan(
        ahead=locked(np.arange(1, middle.size + 1)),
        centre=read_only(middle),
        scale=read_only(newest[0]),
        freedom=read_only(newest[1]),
        errors=locked(newest[2].astype(np.int64)),
        levels=levels,
        measured=read_only(measured),
        judged=locked(judged),
    )
