"""The errors that one cell's line made before, and the intervals that follow from them."""

import numpy as np
from numpy.typing import ArrayLike

from analytics.intervals import Fan, error_fan
from analytics.outlook import outlook_arrays, path_reach
from analytics.outlook_target import Target
from analytics.relation import MIN_PAIRS, relation_forecasts
from analytics.series import FloatArray, read_only


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
    observed = target.observed(y)
    errors = np.full((y.size - first, reach), np.nan)
    for row, known in enumerate(range(first, y.size)):
        forecast = relation_forecasts(
            x[: known + lead],
            y[:known],
            window=window,
            shift=shift,
            horizon=reach,
            target=target,
        )
        outcomes = observed[known : known + reach]
        errors[row, : outcomes.size] = outcomes - forecast[: outcomes.size]
    return read_only(errors)


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
