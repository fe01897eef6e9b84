"""Several drivers' forecasts made into one."""

from collections.abc import Mapping
from dataclasses import replace
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.backtest import Backtest, known_spread
from analytics.series import FloatArray, read_only

Weighting = Literal["equal", "past errors"]


def combined_backtest(
    tests: Mapping[str, Backtest], model: str, *, weighting: Weighting = "equal"
) -> Backtest:
    """Combine one model of several drivers' backtests, with weights that each date knew.

    Parameters
    ----------
    tests : mapping from driver to Backtest
        Of the same response and target; only dates that all of them have are kept.
    model : str
        The model combined, for example the relation.
    weighting : {"equal", "past errors"}
        The mean, or weights in proportion to the inverse of the mean squared error over the errors
        known at the date (Bates and Granger 1969, without covariances; from memory); equal where a
        driver has none yet.

    Returns
    -------
    Backtest
        The first one's, with the combination in place of `model`: it is scored in the same way.

    Raises
    ------
    ValueError
        There is no backtest, targets differ, or no date is common.
    """
    if not tests:
        raise ValueError("a combination must have a driver, but got none")
    if weighting not in get_args(Weighting):
        raise ValueError(f"weighting must be equal or past errors, but got {weighting!r}")
    listed = list(tests.values())
    if len({(each.target, each.outcomes.shape[1]) for each in listed}) > 1:
        raise ValueError("a combination must have one target and one horizon, but they differ")
    dates = listed[0].origins
    for each in listed[1:]:
        dates = np.intersect1d(dates, each.origins)
    if dates.size == 0:
        raise ValueError("a combination must have dates that all its drivers share, but has none")
    rows = [np.searchsorted(each.origins, dates) for each in listed]
    forecasts = np.stack(
        [each.forecasts[each.row(model)][kept] for each, kept in zip(listed, rows, strict=True)]
    )
    weights = np.full(forecasts.shape, 1.0 / len(listed))
    if weighting == "past errors":
        scales = np.stack(
            [each.scale[each.row(model)][kept] for each, kept in zip(listed, rows, strict=True)]
        )
        weights = combination_weights(scales)
    base, kept = listed[0], rows[0]
    row = base.row(model)
    every, scale, freedom = (
        values[:, kept].copy() for values in (base.forecasts, base.scale, base.freedom)
    )
    every[row] = (weights * forecasts).sum(axis=0)
    scale[row], freedom[row] = (
        found[0] for found in known_spread((base.outcomes[kept] - every[row])[None])
    )
    return replace(
        base,
        origins=base.origins[kept],
        forecasts=read_only(every),
        outcomes=read_only(base.outcomes[kept]),
        last_seen=read_only(base.last_seen[kept]),
        scale=read_only(scale),
        freedom=read_only(freedom),
        **{name: getattr(base, name)[kept] for name in ("windows", "shifts", "own_lags", "orders")},
    )


def combination_weights(scales: ArrayLike) -> FloatArray:
    """Weights in proportion to the inverse of the squared scales of past errors.

    Parameters
    ----------
    scales : array_like of float, shape (D, ...)
        Root mean square errors of D drivers; where one of them is nan, all weigh the same.

    Returns
    -------
    ndarray of float, shape (D, ...)
        Each column sums to 1.

    Examples
    --------
    >>> combination_weights([1.0, 2.0])
    array([0.8, 0.2])
    """
    inverse = np.asarray(scales, dtype=np.float64) ** -2.0
    weights = inverse / inverse.sum(axis=0)
    unknown = np.isnan(weights).any(axis=0)
    equal: FloatArray = np.where(unknown, 1.0 / weights.shape[0], weights)
    return equal


def combined_path(paths: ArrayLike, weights: ArrayLike | None = None) -> FloatArray:
    """Combine D paths over the horizons that all of them reach.

    Parameters
    ----------
    paths : sequence of array_like of float, shapes (H_d,)
        One a driver, from the first period ahead on.
    weights : array_like of float, shape (D,) or (D, H), optional
        By default equal.

    Returns
    -------
    ndarray of float, shape (H,)
        H is the length of the shortest path.
    """
    listed = [np.asarray(path, dtype=np.float64) for path in paths]  # type: ignore[union-attr]
    if not listed:
        raise ValueError("a combination must have a path, but got none")
    shortest = min(path.size for path in listed)
    stack = np.stack([path[:shortest] for path in listed])
    if weights is None:
        return read_only(stack.mean(axis=0))
    share = np.asarray(weights, dtype=np.float64)
    if share.shape[0] != len(listed):
        raise ValueError(f"weights must be {len(listed)}, one a path, but got {share.shape[0]}")
    share = share[:, None] if share.ndim == 1 else share[:, :shortest]
    return read_only((share * stack).sum(axis=0) / share.sum(axis=0))
