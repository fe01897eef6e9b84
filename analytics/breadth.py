"""How broad a price change is: contributions that add up, baskets without, diffusion, ranks."""

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray
from analytics.weights import ChainedBasket, chained_basket


def change(levels: ArrayLike, span: int) -> FloatArray:
    """Percent change over `span` periods down the first axis, nan where either value is absent.

    Returns
    -------
    ndarray of float, shape of `levels`
        ``100 (p_t / p_(t-span) - 1)``; the first `span` rows are nan.
    """
    values = np.asarray(levels, dtype=np.float64)
    if span < 1:
        raise ValueError(f"span must be 1 or more, but got {span}")
    rates = np.full(values.shape, np.nan)
    if span < values.shape[0]:
        rates[span:] = 100.0 * (values[span:] / values[:-span] - 1.0)
    return rates


def contributions(basket: ChainedBasket, span: int) -> FloatArray:
    """Percentage points that each component gave to the change of the total over `span` periods.

    Parameters
    ----------
    basket : ChainedBasket
        Components and total.
    span : int
        Periods: 1 for the one-month rate, 12 for the 12-month rate.

    Returns
    -------
    ndarray of float, shape (n, K)
        Each row sums to the percent change of ``basket.total``, whatever number of links lies in
        between; nan where that change does not exist.

    Notes
    -----
    The index points that a component added from period to period, each with the weights in force
    then, are cumulated and divided by the total of the earlier period. Over one December link this
    is the formula of Ribe in the HICP Methodological Manual (from memory):
    ``w'_i (I'_i,Dec - I'_i,m) / I'_m + (I'_Dec / I'_m) w_i (I_i,m - 1)`` with short links I' and
    I. The plain product of weight and rate does not add up across a link.

    Examples
    --------
    >>> import numpy as np
    >>> prices = np.array([[1.02, 1.06], [1.05, 1.10], [1.05 * 1.03, 1.10 * 0.99]])
    >>> old = np.array([0.6, 0.4]) * prices[0]   # December's weights at the first month's prices
    >>> basket = chained_basket(prices, [old, [0.55, 0.45]], [0, 1])
    >>> contributions(basket, 2)[2].round(6)
    array([3.441602, 1.079633])
    """
    if span < 1:
        raise ValueError(f"span must be 1 or more, but got {span}")
    parts = np.full(basket.points.shape, np.nan)
    start = basket.links[0]
    n = basket.total.size
    if start + span < n:
        cumulated = np.cumsum(basket.points[start:], axis=0)
        gained = cumulated[span:] - cumulated[:-span]
        parts[start + span :] = 100.0 * gained / basket.total[start : n - span, None]
    return parts


def total_without(basket: ChainedBasket, left_out: ArrayLike) -> FloatArray:
    """Chained index of the components that are kept, their weights scaled to sum to 1.

    Parameters
    ----------
    basket : ChainedBasket
        Components and weights.
    left_out : array_like of bool, shape (K,)
        Components to leave out.

    Returns
    -------
    ndarray of float, shape (n,)
        100 at the first link, nan before.

    Raises
    ------
    ValueError
        Nothing is kept at some link.
    """
    out = np.asarray(left_out, dtype=bool)
    if out.shape != (basket.shares.shape[1],):
        raise ValueError(
            f"left_out must have {basket.shares.shape[1]} entries, but got shape {out.shape}"
        )
    kept = np.where(out, 0.0, basket.shares)
    if np.any(kept.sum(axis=1) <= 0):
        raise ValueError("left_out must keep a component with weight in every year, but does not")
    return chained_basket(basket.prices, kept, basket.links).total


def diffusion_index(changes: ArrayLike, weights: ArrayLike | None = None) -> FloatArray:
    """Share of components that rise, plus half of those unchanged.

    Parameters
    ----------
    changes : array_like of float, shape (..., K)
        Percent changes; nan where a component is not there.
    weights : array_like of float, shape (..., K), optional
        Of any total; without them every component counts the same.

    Returns
    -------
    ndarray of float, shape (...)
        0 to 100; nan where no component is there. 50: as many rise as fall. Common practice; the
        definition is from memory.

    Examples
    --------
    >>> float(diffusion_index([-1.0, 0.0, 0.3, 0.8]))
    62.5
    """
    values = np.asarray(changes, dtype=np.float64)
    return _share(np.where(values > 0, 1.0, np.where(values == 0, 0.5, 0.0)), values, weights)


def share_above(changes: ArrayLike, pace: float, weights: ArrayLike | None = None) -> FloatArray:
    """Share of components, in percent, whose change is above `pace`.

    Parameters
    ----------
    changes : array_like of float, shape (..., K)
        Percent changes; nan where a component is not there.
    pace : float
        In the unit of the changes.
    weights : array_like of float, shape (..., K), optional
        Of any total; without them every component counts the same.

    Returns
    -------
    ndarray of float, shape (...)
        0 to 100; nan where no component is there.
    """
    values = np.asarray(changes, dtype=np.float64)
    return _share((values > pace).astype(np.float64), values, weights)


def own_history_rank(rates: ArrayLike, first: int = 0) -> FloatArray:
    """Rank of each value within its own column, 0 to 100, ties in the middle.

    Parameters
    ----------
    rates : array_like of float, shape (n, K)
        nan where there is no value.
    first : int, default 0
        Row from which ranks are wanted; the history is always the entire column.

    Returns
    -------
    ndarray of float, shape (n - first, K)
        ``100 (below + equal / 2) / count``, the value itself among the equal ones: the rank that
        scipy.stats.percentileofscore calls "mean". nan stays nan.
    """
    values = np.asarray(rates, dtype=np.float64).T
    k, n = values.shape
    order = np.argsort(values, axis=1)  # nan last
    ordered = np.take_along_axis(values, order, axis=1)
    place = np.broadcast_to(np.arange(n), (k, n))
    new = np.ones((k, n + 1), dtype=bool)  # where a run of equal values begins; the end as well
    new[:, 1:-1] = ordered[:, 1:] != ordered[:, :-1]
    below = np.maximum.accumulate(np.where(new[:, :-1], place, 0), axis=1)
    ends = np.where(new[:, 1:], place + 1, n)
    upto = np.minimum.accumulate(ends[:, ::-1], axis=1)[:, ::-1]
    counts = np.count_nonzero(~np.isnan(values), axis=1)[:, None]
    ranks = np.empty((k, n))
    np.put_along_axis(ranks, order, 50.0 * (below + upto) / np.maximum(counts, 1), axis=1)
    ranks[np.isnan(values)] = np.nan
    return np.ascontiguousarray(ranks[:, first:].T)


def _share(score: FloatArray, values: FloatArray, weights: ArrayLike | None) -> FloatArray:
    counted = np.ones(values.shape) if weights is None else np.nan_to_num(np.asarray(weights))
    counted = np.where(np.isnan(values), 0.0, np.broadcast_to(counted, values.shape))
    total = counted.sum(axis=-1)
    with np.errstate(invalid="ignore", divide="ignore"):
        share: FloatArray = 100.0 * (score * counted).sum(axis=-1) / total
    return share
