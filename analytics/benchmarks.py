"""Forecasts that know no driver: what a relation has to beat."""

import numpy as np
from numpy.typing import ArrayLike

from analytics.autoregression import Autoregression, autoregression
from analytics.outlook_target import Target
from analytics.series import FloatArray


def no_change(response: ArrayLike, *, horizon: int, target: Target, year: int = 12) -> FloatArray:
    """Let the last year go on: the naive forecast of Atkeson and Ohanian.

    Parameters
    ----------
    response : array_like of float, shape (n,)
        One-period rates, at least a year of them.
    horizon : int
        Periods ahead H.
    target : Target
        What is forecast.
    year : int, default 12
        Periods in a year.

    Returns
    -------
    ndarray of float, shape (H,)
        For the yearly rate: its last value, at every horizon. For other targets the mean
        one-period rate of the last year.

    Raises
    ------
    ValueError
        There is less than a year.

    Notes
    -----
    Atkeson and Ohanian (2001), Federal Reserve Bank of Minneapolis Quarterly Review 25(1):
    inflation over the next year equals inflation over the last one.
    """
    values = np.asarray(response, dtype=np.float64)
    if values.size < year:
        raise ValueError(f"response must have a year, {year} periods, but got {values.size}")
    last = target.observed(values)[-1] if target.kind == "yearly" else values[-year:].mean()
    return np.full(horizon, float(last))


def past_mean(response: ArrayLike, *, horizon: int, target: Target) -> FloatArray:
    """Let every coming period bring the mean of all the past ones; shape (H,).

    Over periods that are already observed when the span begins before the origin, the target keeps
    what was observed, so that the benchmark knows as much as the others.
    """
    values = np.asarray(response, dtype=np.float64)
    return target.from_path(values, np.full(horizon, values.mean()))


def chosen_autoregression(response: ArrayLike, *, max_order: int) -> Autoregression:
    """Autoregression of the response with its order chosen by Akaike's criterion.

    A series that does not vary comes back as order 0.
    """
    values = np.asarray(response, dtype=np.float64)
    if np.ptp(values) <= 1e-12 * np.abs(values).max():
        return Autoregression(np.zeros(0), 0.0)
    return autoregression(values, max_order=min(max_order, values.size // 4))


def autoregressive(
    response: ArrayLike, model: Autoregression, *, horizon: int, target: Target
) -> FloatArray:
    """Iterate an autoregression around the mean of the response.

    Parameters
    ----------
    response : array_like of float, shape (n,)
        One-period rates that the model was fitted to.
    model : Autoregression
        In deviations from the mean.
    horizon : int
        Periods ahead H.
    target : Target
        What is forecast.

    Returns
    -------
    ndarray of float, shape (H,)

    Examples
    --------
    >>> from analytics.outlook_target import outlook_target
    >>> model = Autoregression(np.array([0.5]), 1.0)
    >>> single = outlook_target("single", window=1)
    >>> autoregressive([0.0, 0.0, 4.0, 0.0, 1.0, 3.0, 8.0], model, horizon=2, target=single)
    array([5.14285714, 3.71428571])
    """
    values = np.asarray(response, dtype=np.float64)
    mean, order = float(values.mean()), model.order
    state = np.concatenate((values[values.size - order :] - mean, np.empty(horizon)))
    for step in range(order, order + horizon):
        state[step] = float(model.coefficients @ state[step - order : step][::-1])
    return target.from_path(values, mean + state[order:])
