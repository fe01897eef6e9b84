"""Level shifts of a series: the one or two steps that explain most of it, and how strongly."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray, read_only

# 5 % points of the largest F over all dates of one and of two steps in the mean, as Bai and
# Perron (1998, 2003) tabulate them for 15 % trimming; from memory. Only the ratio to them is used.
_ONE_STEP, _TWO_STEPS = 8.85, 7.6
_SHORTEST = 0.12  # of the sample, between steps and at both ends


@dataclass(frozen=True, eq=False)
class LevelShifts:
    """Result of `level_shifts`.

    Attributes
    ----------
    steps : tuple of int
        Positions where a new level begins: one or two, increasing, counted from 0; none where a
        trend was taken for them.
    levels : ndarray of float, shape (n,), read-only
        The step function or the trend, in the unit of the series.
    residual : ndarray of float, shape (n,), read-only
        The series less `levels`.
    strength : float
        The F of the steps over the 5 % point of its largest value when there is no step, with
        the long-run variance of the residual below the line. Above 1 means steps more than
        chance explains, if the series is otherwise stationary.
    """

    steps: tuple[int, ...]
    levels: FloatArray
    residual: FloatArray
    strength: float


def level_shifts(values: ArrayLike, *, trend: bool = False) -> LevelShifts:
    """Fit one step and two steps in the mean, and keep the stronger.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One a period, no gaps, at least 24.
    trend : bool, default False
        Let a straight line take the place of the steps, unless two steps explain more than it
        does by over 7.6 long-run variances: steps cut from a trend leave teeth, and two trends
        leave them at the same dates.

    Returns
    -------
    LevelShifts
        Without steps where the line was taken.

    Raises
    ------
    ValueError
        A value is not finite, or there are fewer than 24.

    Notes
    -----
    Least squares over all dates, no stretch shorter than 12 % of the sample (Bai and Perron
    1998, Econometrica 66, 47-78; from memory). With the fall ``d_k`` of the sum of squares from k
    steps, ``F_k = d_k / (k LRV_k)``, where LRV_k is the Bartlett long-run variance of the
    residual with bandwidth 1.3 sqrt(n); the strength is the larger of F_1 / 8.85 and F_2 / 7.6.
    A persistent series, a trend or a hump is strong too: this is a guard, not a dating of breaks.

    Examples
    --------
    >>> noise = np.random.default_rng(1).standard_normal(120)
    >>> found = level_shifts(noise + 5.0 * (np.arange(120) >= 70))
    >>> found.steps, found.strength > 1.5
    ((70,), True)
    """
    array = np.asarray(values, dtype=np.float64)
    if array.ndim != 1 or array.size < 24 or not np.isfinite(array).all():
        raise ValueError("values must be at least 24 finite numbers, but got fewer or a gap")
    n = array.size
    shortest = max(2, int(np.ceil(_SHORTEST * n)))
    centred = array - array.mean()
    total = np.concatenate(([0.0], np.cumsum(centred)))

    # The fall of the sum of squares is the sum over stretches of (sum of values)^2 / length.
    dates = np.arange(shortest, n - shortest + 1)
    first = total[dates] ** 2 / dates
    last = total[dates] ** 2 / (n - dates)
    one: tuple[int, ...] = (int(dates[np.argmax(first + last)]),)

    two: tuple[int, ...] = ()
    best = -np.inf
    for place, date in enumerate(dates[:-shortest]):
        later = dates[place + shortest :]
        middle = (total[later] - total[date]) ** 2 / (later - date)
        fall = first[place] + middle + last[place + shortest :]
        highest = int(np.argmax(fall))
        if fall[highest] > best:
            two, best = (int(date), int(later[highest])), float(fall[highest])

    candidates = []
    for steps, critical in ((one, _ONE_STEP), (two, _TWO_STEPS)):
        levels = _step_function(array, steps)
        residual = array - levels
        fall = float(centred @ centred - residual @ residual)
        noise = long_run_variance(residual)
        strength = fall / (len(steps) * noise * critical) if noise > 0 else np.inf
        candidates.append(LevelShifts(steps, read_only(levels), read_only(residual), strength))
    found = max(candidates, key=lambda found: found.strength)
    if trend:
        time = np.arange(n) - (n - 1) / 2
        line = array.mean() + time * float(time @ array) / float(time @ time)
        residual = array - line
        two_steps = candidates[1].residual
        gain = residual @ residual - two_steps @ two_steps
        if gain <= _TWO_STEPS * long_run_variance(two_steps):
            return LevelShifts((), read_only(line), read_only(residual), found.strength)
    return found


def long_run_variance(residual: FloatArray) -> float:
    """Bartlett long-run variance with bandwidth 1.3 sqrt(n), after Newey and West (1987).

    Parameters
    ----------
    residual : ndarray of float, shape (n,)
        With mean zero.

    Returns
    -------
    float
        ``g_0 + 2 sum_k (1 - k/M) g_k`` for k below M, with autocovariances over n.
    """
    n = residual.size
    bandwidth = max(1, round(1.3 * np.sqrt(n)))
    covariances = np.array([residual[k:] @ residual[: n - k] for k in range(bandwidth)]) / n
    weights = 2.0 * (1.0 - np.arange(bandwidth) / bandwidth)
    weights[0] = 1.0
    return float(weights @ covariances)


def _step_function(values: FloatArray, steps: tuple[int, ...]) -> FloatArray:
    """Mean of each stretch, repeated over it."""
    stretches = np.split(values, steps)
    return np.concatenate([np.full(stretch.size, stretch.mean()) for stretch in stretches])
