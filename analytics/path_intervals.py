"""The errors that one cell's line made before, and the intervals that follow from them."""

import numpy as np
from numpy.typing import ArrayLike

from analytics.intervals import Fan, error_fan
from analytics.outlook import outlook_arrays, path_reach
from analytics.outlook_target import Target
from analytics.rates import trailing_mean
from analytics.relation import MIN_PAIRS, relation_forecasts
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, smallest_variance


def relation_errors(
    driver: ArrayLike, response: ArrayLike, *, window: int, shift: int, target: Target
) -> FloatArray:
    """Errors of a cell's path at every past date, its line fitted to the periods before.

    Parameters
    ----------
    driver, response : array_like of float, shapes (m,) and (n,)
        Growth rates in percent from the same first period on.
    window, shift : int
        The cell, the same at every date.
    target : Target
        What is forecast.

    Returns
    -------
    ndarray of float, shape (O, H), read-only
        Outcome less forecast for the dates at which 24 pairs were known, oldest first, and H =
        shift + lead; nan where the outcome is still to come.

    Raises
    ------
    ValueError
        The cell implies no path, or no date has 24 pairs and an outcome.
    """
    x, y = outlook_arrays(driver, response)
    lead = x.size - y.size
    reach = path_reach(shift, lead)
    first = max(window - 1 + shift + MIN_PAIRS + max(0, -lead), target.span)
    if first >= y.size:
        raise ValueError(
            f"intervals must have at least {first + 1} periods to look back on, but the response"
            f" has {y.size}"
        )
    known = np.arange(first, y.size)  # periods of the response known at each date
    intercept, slope, level = _lines(x, y, known, lead, window=window, shift=shift)
    # Columns: the span before the first period ahead, then the periods ahead.
    column = np.arange(1 - target.span, reach) if target.kind == "window" else np.arange(reach)
    at = known[:, None] + column - shift
    spans = intercept[:, None] + slope[:, None] * np.where(
        at < known[:, None] + lead, x[np.clip(at, 0, x.size - 1)], level[:, None]
    )
    if target.kind != "window":
        seen = y[known[:, None] + np.arange(1 - target.span, 0)]
        spans = np.concatenate((seen, spans), axis=1)
    forecasts = target.rate(np.lib.stride_tricks.sliding_window_view(spans, target.span, axis=1))
    ends = known[:, None] + np.arange(reach)
    observed = np.append(target.observed(y), np.nan)
    errors = observed[np.minimum(ends, y.size)] - forecasts
    return read_only(errors)


def _lines(
    x: FloatArray, y: FloatArray, known: IntArray, lead: int, *, window: int, shift: int
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Intercept, slope and driver's mean of the cell at every date, as `cell_line` has them."""
    pairs = known + min(0, lead) - window + 1 - shift
    xs = trailing_mean(x, window)[: pairs[-1]]
    ys = trailing_mean(y, window)[shift : shift + pairs[-1]]
    centre, level = xs[:MIN_PAIRS].mean(), ys[:MIN_PAIRS].mean()
    away, rise = xs - centre, ys - level
    sums = np.cumsum([away, rise, away**2, away * rise], axis=1)[:, pairs - 1]
    mean_x, mean_y = sums[:2] / pairs
    square = sums[2] - pairs * mean_x**2
    varies = square > smallest_variance(x) * pairs
    slope = np.where(varies, (sums[3] - pairs * mean_x * mean_y) / np.where(varies, square, 1.0), 0)
    return level + mean_y - slope * (centre + mean_x), slope, centre + mean_x


def path_fan(
    driver: ArrayLike, response: ArrayLike, *, window: int, shift: int, target: Target
) -> Fan:
    """Path of the target by a cell's line, with the distribution of its errors.

    Parameters
    ----------
    driver, response, window, shift, target
        As for `relation_errors`.

    Returns
    -------
    Fan
        Over shift + lead periods; its centre is that of `implied_path`.

    Raises
    ------
    ValueError
        As in `relation_errors`.
    """
    x, y = outlook_arrays(driver, response)
    errors = relation_errors(x, y, window=window, shift=shift, target=target)
    centre = relation_forecasts(
        x, y, window=window, shift=shift, horizon=errors.shape[1], target=target
    )
    return error_fan(centre, errors)
