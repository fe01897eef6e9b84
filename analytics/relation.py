"""A cell's line as a forecast: fitted to what a date knew, read at the periods ahead."""

import numpy as np

from analytics.outlook import expected_periods
from analytics.outlook_target import Target
from analytics.rates import trailing_mean
from analytics.series import FloatArray
from analytics.surface import smallest_variance

MIN_PAIRS = 24


def cell_line(
    driver: FloatArray, response: FloatArray, *, window: int, shift: int
) -> tuple[float, float, float]:
    """Intercept, slope and mean of the driver of a cell: the line of `lag_cell`, for shifts from 0.

    The slope is 0 where the driver's mean does not vary or fewer than 24 pairs are left; the
    intercept is then the mean of the response.
    """
    common = min(driver.size, response.size)
    x, y = driver[:common], response[:common]
    n = common - window + 1 - shift
    if n < MIN_PAIRS:
        return float(y.mean()), 0.0, float(x.mean())
    level = float(x.mean())
    xs, ys = trailing_mean(x - level, window)[:n], trailing_mean(y, window)[shift:]
    mean, centre = float(xs.mean()), float(ys.mean())
    away = xs - mean
    square = float(away @ away)
    varies = square > smallest_variance(x) * n
    slope = float(away @ (ys - centre)) / square if varies else 0.0
    return centre - slope * (mean + level), slope, mean + level


def relation_forecasts(
    driver: FloatArray,
    response: FloatArray,
    *,
    window: int,
    shift: int,
    horizon: int,
    target: Target,
) -> FloatArray:
    """Forecast 1 .. H periods ahead by a cell's line.

    Parameters
    ----------
    driver, response : ndarray of float, shapes (m,) and (n,)
        Growth rates in percent from the same first period on, as known at the date.
    window, shift : int
        The cell, shift from 0.
    horizon : int
        Periods ahead H.
    target : Target
        What is forecast.

    Returns
    -------
    ndarray of float, shape (H,)

    Notes
    -----
    Beyond the driver periods observed the driver is taken to be at the mean of the cell, so that
    the line says the mean of the response. The target "window" is the line's own word for the whole
    window; the others keep periods that are already observed.
    """
    intercept, slope, level = cell_line(driver, response, window=window, shift=shift)
    beyond = max(0, response.size + horizon - shift - driver.size)
    filled = np.concatenate((driver, np.full(beyond, level)))
    expected = expected_periods(filled, response.size, (intercept, slope), shift, horizon)
    if target.kind == "window":
        spans = expected[response.size - target.span + 1 :]
        return trailing_mean(spans, target.span)
    return target.from_path(response, expected[response.size :])
