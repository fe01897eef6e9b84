"""Local projections: the response at each horizon on today's driver growth."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.lag_profile import (
    LagProfile,
    fixed_b_critical,
    lag_profile,
    lagged,
    long_run_products,
    neighbour_matrix,
    usual_truncation,
)
from analytics.series import FloatArray
from analytics.surface import growth_pair

_FEWEST = 24


@dataclass(frozen=True, eq=False)
class LocalProjections:
    """Result of `local_projections`.

    Attributes
    ----------
    monthly : LagProfile
        Response in the month `shift` months after one unexpected point of driver growth.
    cumulative : LagProfile
        Response of the level: sum of the months 0 .. shift.
    averaged : LagProfile
        Mean of the months within `window` around the shift, on which `peak` rests.
    window : int
        Months averaged.
    own_lags : int
        Months of both series' past that each regression holds fixed.
    n : int
        Months in the regression at shift 0; it has fewer at longer ones.
    """

    monthly: LagProfile
    cumulative: LagProfile
    averaged: LagProfile
    window: int
    own_lags: int
    n: int

    @property
    def peak(self) -> int:
        """Shift, in months, around which the response is strongest."""
        return self.averaged.peak


def local_projections(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    max_shift: int,
    own_lags: int = 12,
    window: int = 1,
    level: float = 0.95,
) -> LocalProjections:
    """Regress the response 0 .. K months ahead on driver growth, the past of both held fixed.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates in percent, one a month, same months, no gaps. Not smoothed.
    max_shift : int
        Longest horizon K, in months.
    own_lags : int, default 12
        Past months of driver and of response among the regressors.
    window : int, default 1
        Neighbouring horizons averaged before the peak is looked for.
    level : float, default 0.95
        Confidence of the bands, one horizon at a time.

    Returns
    -------
    LocalProjections

    Raises
    ------
    ValueError
        The series cannot be paired, fewer than 24 months beyond the regressors are left at the
        longest horizon, or a series follows exactly from the past of the two.

    Notes
    -----
    Jorda (2005), eq. 2: for each h, ``y_(t+h) = a_h + b_h x_t + controls + e_(t+h)``, with
    y_(t+h) replaced by the sum y_t + .. + y_(t+h) for the level and by a centred mean for
    `averaged`. The errors overlap, so the bands use Newey and West's (1987) variance with a
    truncation of 1.3 times the root of the sample or the horizon plus the months averaged,
    whichever is longer, times n over n less the regressors, and the critical values of Kiefer
    and Vogelsang (2005). The number of Jorda's equation is cited from memory.

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> driver = rng.standard_normal(400)
    >>> response = 0.5 * np.roll(driver, 9) + 0.3 * rng.standard_normal(400)
    >>> local_projections(driver, response, max_shift=24).peak
    9
    """
    x, y = growth_pair(driver, response)
    if max_shift < 0 or own_lags < 0:
        raise ValueError(
            f"max_shift and own_lags must be 0 or more, but got {max_shift} and {own_lags}"
        )
    means = neighbour_matrix(max_shift, window)
    ahead = means.shape[1] - 1
    rows = x.size - own_lags
    regressors = 2 * own_lags + 2
    if rows - ahead < regressors + _FEWEST:
        raise ValueError(
            f"the longest horizon must leave at least {regressors + _FEWEST} months, but"
            f" {x.size} months leave {max(0, rows - ahead)}"
        )
    past = np.arange(1, own_lags + 1)
    controls = np.hstack([np.ones((rows, 1)), lagged(x, past, own_lags), lagged(y, past, own_lags)])
    news, later = x[own_lags:], y[own_lags:]
    if np.linalg.matrix_rank(np.column_stack([controls, news])) < regressors:
        raise ValueError("driver and response must bring news, but one follows from their past")
    # The same space in an even basis: without the last rows it is still far from singular.
    controls = np.linalg.qr(controls)[0]
    found = np.empty((3, 3, max_shift + 1))  # monthly, cumulative, averaged: b, variance, cv
    for h in range(max_shift + 1):
        targets = np.zeros((3, ahead + 1))
        targets[0, h] = 1.0
        targets[1, : h + 1] = 1.0
        targets[2] = means[h]
        reach = (h, h, int(np.flatnonzero(means[h])[-1]))
        for farthest in set(reach):
            chosen = [row for row in range(3) if reach[row] == farthest]
            found[chosen, :, h] = _projection(
                controls, news, later, targets[chosen, : farthest + 1], level
            )
    monthly, cumulative, averaged = (
        lag_profile(estimate, variance, critical=critical, level=level)
        for estimate, variance, critical in found
    )
    return LocalProjections(monthly, cumulative, averaged, window, own_lags, rows)


def _projection(
    controls: FloatArray, news: FloatArray, later: FloatArray, targets: FloatArray, level: float
) -> FloatArray:
    """Estimate, variance and critical value for each target, shape (targets, 3).

    A target weighs the response of the months 0, 1, .. after the driver's month.
    """
    n = news.size - targets.shape[1] + 1
    ahead = np.lib.stride_tricks.sliding_window_view(later, targets.shape[1]) @ targets.T
    space = controls[:n]
    both = np.column_stack([news[:n], ahead])
    both -= space @ np.linalg.solve(space.T @ space, space.T @ both)
    surprise, ahead = both[:, 0], both[:, 1:]
    size = float(surprise @ surprise)
    slopes = surprise @ ahead / size
    scores = surprise[:, None] * (ahead - np.outer(surprise, slopes))
    truncation = max(usual_truncation(n), min(n - 1, targets.shape[1]))
    spread = np.array(
        [float(long_run_products(column[:, None], truncation)[0, 0]) for column in scores.T]
    )
    critical = fixed_b_critical(truncation, n, level)
    variance = spread / size**2 * n / (n - controls.shape[1] - 1.0)
    return np.column_stack([slopes, variance, np.full(slopes.size, critical)])
