"""Direct regressions: one for each horizon, on the response's own past, with or without driver."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.outlook import outlook_arrays
from analytics.outlook_target import Target
from analytics.rates import trailing_mean
from analytics.readable import Readable
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked, smallest_variance

_SPARE = 12  # rows beyond the regressors that a regression must have


@dataclass(frozen=True, eq=False)
class DirectForecasts(Readable):
    """Result of `direct_forecasts`; arrays of shape (H,), read-only.

    Attributes
    ----------
    ahead : ndarray of int
        1 .. H periods ahead.
    with_driver, without_driver : ndarray of float
        Forecasts of the target; nan where too few periods are left to regress on.
    driver_slope : ndarray of float
        Coefficient of the driver's mean: points of one-period response for one of driver, the own
        past held fixed.
    driver_gain : ndarray of float
        Share of the squared residuals of the regression without the driver that the driver takes
        away, within the sample, 0 to 1. It is never below 0, so it proves nothing by itself.
    own_lags : int
        Past periods of the response among the regressors.
    rows : ndarray of int
        Periods in each regression.
    """

    ahead: IntArray
    with_driver: FloatArray
    without_driver: FloatArray
    driver_slope: FloatArray
    driver_gain: FloatArray
    own_lags: int
    rows: IntArray


def direct_forecasts(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    own_lags: int,
    horizon: int,
    target: Target,
) -> DirectForecasts:
    """Forecast each horizon by its own regression, once with the driver and once without.

    Parameters
    ----------
    driver, response : array_like of float, shapes (m,) and (n,)
        Growth rates in percent from the same first period on; the driver may end later or earlier.
    window, shift : int
        The driver enters as its mean over `window` periods, read `shift` periods before the period
        forecast or, where that is not observed yet, as the newest mean there is.
    own_lags : int
        Newest periods of the response among the regressors, 0 or more.
    horizon : int
        Longest horizon H.
    target : Target
        What is forecast.

    Returns
    -------
    DirectForecasts

    Raises
    ------
    ValueError
        A value is not finite, or window, lags or horizon are too small.

    Notes
    -----
    At horizon h the mean of the min(h, span) newest periods of ``t + h`` is regressed by least
    squares on a constant, the response of periods ``t - own_lags + 1 .. t``, and the driver's mean
    ending in ``t + min(h - shift, lead)`` (a direct multi-step forecast: Marcellino, Stock and
    Watson 2006, Journal of Econometrics 135; from memory). An all-equal driver, or one
    that the own past repeats, adds nothing.
    """
    x, y = outlook_arrays(driver, response)
    if window < 1 or horizon < 1 or own_lags < 0:
        raise ValueError(
            "window and horizon must be 1 or more and own_lags 0 or more, but got"
            f" {window}, {horizon} and {own_lags}"
        )
    lead = x.size - y.size
    means = trailing_mean(x, min(window, x.size))
    offset = x.size - means.size  # means[i] ends in period i + offset
    cumulative = np.concatenate(([0.0], np.cumsum(y)))
    now = y.size - 1
    # Columns: own past, the driver's mean, the mean that is wanted; rows: periods.
    table = np.zeros((y.size, own_lags + 2))
    for lag in range(own_lags):
        table[lag:, lag] = y[: y.size - lag]
    centre = np.full((horizon, own_lags + 2), np.nan)
    moments = np.zeros((horizon, own_lags + 2, own_lags + 2))
    news = np.zeros((horizon, own_lags + 1))
    rows = np.zeros(horizon, dtype=np.int64)
    for place, h in enumerate(range(1, horizon + 1)):
        reach = min(h - shift, lead)
        first = max(own_lags - 1, 0, offset - reach)
        rows[place] = max(0, now - h - first + 1)
        if rows[place] < own_lags + 2 + _SPARE or now + reach < offset:
            continue
        used = slice(first, now - h + 1)
        ends = np.arange(first, now - h + 1) + h + 1
        span = min(h, target.span)
        side = means[first + reach - offset : now + reach - offset + 1]
        table[used, -2] = side[: rows[place]]
        table[used, -1] = (cumulative[ends] - cumulative[ends - span]) / span
        centre[place] = table[used].mean(axis=0)
        away = table[used] - centre[place]
        moments[place] = away.T @ away
        news[place] = np.append(table[now, :own_lags], side[-1]) - centre[place, :-1]
    found = _with_and_without(
        moments, news, np.asarray(smallest_variance(y) * rows, dtype=np.float64)
    )
    means_ahead = centre[:, -1] + found[:2]
    return DirectForecasts(
        ahead=locked(np.arange(1, horizon + 1)),
        with_driver=read_only(target.from_means(y, means_ahead[0])),
        without_driver=read_only(target.from_means(y, means_ahead[1])),
        driver_slope=read_only(np.where(np.isnan(centre[:, -1]), np.nan, found[2])),
        driver_gain=read_only(np.where(np.isnan(centre[:, -1]), np.nan, found[3])),
        own_lags=own_lags,
        rows=locked(rows),
    )


def _with_and_without(moments: FloatArray, news: FloatArray, smallest: FloatArray) -> FloatArray:
    """Deviation forecast with and without the driver, its slope, its gain; shape (4, H).

    The driver is regressed on the own past first and what is left of it on what is left of the
    target (Frisch and Waugh 1933; Lovell 1963): the same as both together.

    Parameters
    ----------
    moments : ndarray of float, shape (H, p + 2, p + 2)
        Sums of products about the means: own past, driver, target.
    news : ndarray of float, shape (H, p + 1)
        Today's own past and driver, less their means.
    smallest : ndarray of float, shape (H,)
        Sum of squares of the target at or below which it counts as constant.
    """
    own, both = moments[:, :-2, :-2], moments[:, :-2, -2:]
    inverse = np.linalg.pinv(own, rcond=1e-12, hermitian=True)
    projected = inverse @ both
    left = moments[:, -2:, -2:] - both.transpose(0, 2, 1) @ projected
    varies = left[:, 0, 0] > 1e-10 * moments[:, -2, -2]
    slope = np.where(varies, left[:, 0, 1] / np.where(varies, left[:, 0, 0], 1.0), 0.0)
    past = (news[:, None, :-1] @ projected)[:, 0, :]
    without = past[:, 1]
    with_driver = without + slope * (news[:, -1] - past[:, 0])
    rest = left[:, 1, 1]
    gain = slope * left[:, 0, 1] / np.where(rest > smallest, rest, np.inf)
    return np.stack([with_driver, without, slope, np.clip(gain, 0.0, 1.0)])
