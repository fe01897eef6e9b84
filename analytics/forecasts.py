"""Every forecast that is compared, made at one date from the data of that date alone."""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from analytics.benchmarks import autoregressive, chosen_autoregression, no_change, past_mean
from analytics.direct import direct_forecasts
from analytics.outlook_target import Target
from analytics.relation import MIN_PAIRS, relation_forecasts
from analytics.robust import surface_inference
from analytics.series import FloatArray
from analytics.surface import growth_pair

RELATION, DIRECT, OWN_PAST = "relation", "direct with driver", "direct without driver"
NO_CHANGE, AUTOREGRESSION, PAST_MEAN = "no change", "autoregression", "mean so far"
MODELS = (RELATION, DIRECT, OWN_PAST, NO_CHANGE, AUTOREGRESSION, PAST_MEAN)
BENCHMARKS = (NO_CHANGE, AUTOREGRESSION, PAST_MEAN)


@dataclass(frozen=True)
class Choice:
    """What is chosen anew at a date.

    Attributes
    ----------
    window, shift : int
        The cell.
    own_lags : int
        Periods of the response's past in the direct regressions: the order of its autoregression.
    """

    window: int
    shift: int
    own_lags: int


def choice_at(
    driver: FloatArray,
    response: FloatArray,
    *,
    windows: Iterable[int] | None,
    shifts: Iterable[int] | None,
    cell: tuple[int, int],
    max_lags: int,
    periods_per_year: int,
) -> Choice:
    """Choose cell and own lags from the data given and nothing else.

    Parameters
    ----------
    driver, response : ndarray of float, shapes (m,) and (n,)
        What is known at the date.
    windows, shifts : iterable of int or None
        Grid of the choice; None keeps `cell`. Windows stop at a quarter of the sample, and shifts
        begin at 1, because another cell implies no path.
    cell : tuple of int
        Window and shift kept where there is no grid, or nothing in it is defined.
    max_lags : int
        Most lags of the response's own past.
    periods_per_year : int
        12, 4 or 1.

    Returns
    -------
    Choice
        The cell with the smallest per-cell p (by effective months), the order by Akaike's
        criterion.
    """
    common = min(driver.size, response.size)
    x, y = growth_pair(driver[:common], response[:common])
    order = chosen_autoregression(response, max_order=max_lags).order
    if windows is None or shifts is None:
        return Choice(*cell, order)
    lengths = [w for w in windows if 1 <= w <= max(1, common // 4)]
    leads = [s for s in shifts if 1 <= s < common - MIN_PAIRS]
    if not lengths or not leads or common - lengths[0] + 1 - leads[0] < MIN_PAIRS:
        return Choice(*cell, order)
    found = surface_inference(
        x, y, windows=lengths, shifts=leads, periods_per_year=periods_per_year
    )
    if not np.isfinite(found.p).any():
        return Choice(*cell, order)
    row, column = np.unravel_index(int(np.nanargmin(found.p)), found.p.shape)
    return Choice(int(found.windows[row]), int(found.shifts[column]), order)


def forecasts_at(
    driver: FloatArray,
    response: FloatArray,
    choice: Choice,
    *,
    horizon: int,
    target: Target,
    max_lags: int,
    periods_per_year: int,
) -> tuple[FloatArray, int]:
    """Return the forecasts of every model and the order of the autoregression.

    Parameters
    ----------
    driver, response : ndarray of float, shapes (m,) and (n,)
        What is known at the date, from the same first period on.
    choice : Choice
        Cell and own lags.
    horizon : int
        Longest horizon H.
    target : Target
        What is forecast.
    max_lags : int
        Most lags of the autoregression, whose order is chosen at every date.
    periods_per_year : int
        12, 4 or 1.

    Returns
    -------
    ndarray of float, shape (6, H)
        In the order of `MODELS`.
    int
        Order of the autoregression.
    """
    direct = direct_forecasts(
        driver,
        response,
        window=choice.window,
        shift=choice.shift,
        own_lags=choice.own_lags,
        horizon=horizon,
        target=target,
    )
    own = chosen_autoregression(response, max_order=max_lags)
    rows = (
        relation_forecasts(
            driver,
            response,
            window=choice.window,
            shift=choice.shift,
            horizon=horizon,
            target=target,
        ),
        direct.with_driver,
        direct.without_driver,
        no_change(response, horizon=horizon, target=target, year=periods_per_year),
        autoregressive(response, own, horizon=horizon, target=target),
        past_mean(response, horizon=horizon, target=target),
    )
    return np.stack(rows), own.order
