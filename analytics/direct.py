"""Direct regressions: one for each horizon, on the response's own past, with or without driver."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.outlook import outlook_arrays
from analytics.outlook_target import Target
from analytics.rates import trailing_mean
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked

_SPARE = 12  # rows beyond the regressors that a regression must have


@dataclass(frozen=True, eq=False)
class DirectForecasts:
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
    Watson 2006, Journal of Econometrics 135; from memory). Where regressors repeat each other the
    smallest coefficients are taken, so an all-equal driver adds nothing.
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
    past = np.ones((y.size, 1 + own_lags))
    for lag in range(own_lags):
        past[lag:, 1 + lag] = y[: y.size - lag]
    found = np.full((4, horizon), np.nan)
    rows = np.zeros(horizon, dtype=np.int64)
    for place, h in enumerate(range(1, horizon + 1)):
        reach = min(h - shift, lead)
        first = max(own_lags - 1, 0, offset - reach)
        now, last = y.size - 1, y.size - 1 - h
        rows[place] = max(0, last - first + 1)
        if rows[place] < own_lags + 2 + _SPARE or now + reach - offset < 0:
            continue
        span = min(h, target.span)
        ends = np.arange(first, last + 1) + h + 1
        wanted = (cumulative[ends] - cumulative[ends - span]) / span
        side = means[first + reach - offset : last + reach - offset + 1]
        plain = past[first : last + 1]
        full = np.column_stack((plain, side))
        without, left = _fit(plain, wanted)
        coefficients, kept = _fit(full, wanted)
        found[:, place] = (
            past[now] @ coefficients[:-1] + coefficients[-1] * means[now + reach - offset],
            past[now] @ without,
            coefficients[-1],
            0.0 if left <= 0.0 else max(0.0, 1.0 - kept / left),
        )
    return DirectForecasts(
        ahead=locked(np.arange(1, horizon + 1)),
        with_driver=read_only(target.from_means(y, found[0])),
        without_driver=read_only(target.from_means(y, found[1])),
        driver_slope=read_only(found[2]),
        driver_gain=read_only(found[3]),
        own_lags=own_lags,
        rows=locked(rows),
    )


def _fit(regressors: FloatArray, wanted: FloatArray) -> tuple[FloatArray, float]:
    """Least squares: coefficients and sum of squared residuals."""
    found = np.linalg.lstsq(regressors, wanted, rcond=1e-10)
    coefficients = np.asarray(found[0], dtype=np.float64)
    rest = wanted - regressors @ coefficients
    return coefficients, float(rest @ rest)
