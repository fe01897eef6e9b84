"""Weights of a price index: a table by year, price-updating, chaining at links, shares in time."""

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from analytics.readable import Readable
from analytics.series import FloatArray, read_only

IntArray = NDArray[np.int64]
TOTALS = (1.0, 100.0, 1000.0)


@dataclass(frozen=True, eq=False)
class WeightTable:
    """Weights of components, one row a year, as they were published.

    Attributes
    ----------
    years : tuple of int, length Y
        Increasing.
    names : tuple of str, length K
        Components.
    values : ndarray of float, shape (Y, K), read-only
        Not negative; nan where a component has no weight in a year.
    source : str
        File or publisher.
    """

    years: tuple[int, ...]
    names: tuple[str, ...]
    values: FloatArray
    source: str = ""

    def __post_init__(self) -> None:
        values = read_only(self.values)
        if values.shape != (len(self.years), len(self.names)) or values.size == 0:
            raise ValueError(
                f"values must have a row a year and a column a component, but got {values.shape}"
                f" for {len(self.years)} years and {len(self.names)} components"
            )
        if np.any(np.diff(self.years) <= 0):
            raise ValueError(f"years must increase, but got {list(self.years)}")
        if np.any(values < 0) or np.isinf(values).any():
            raise ValueError("weights must be finite and not negative, but one is not")
        empty = np.flatnonzero(~(np.nansum(values, axis=1) > 0))
        if empty.size:
            raise ValueError(
                f"weights of {self.years[empty[0]]} must sum to more than 0, but do not"
            )
        object.__setattr__(self, "values", values)

    @property
    def sums(self) -> FloatArray:
        """Sum of each row, shape (Y,)."""
        return np.asarray(np.nansum(self.values, axis=1))

    @property
    def total(self) -> float:
        """What a row is meant to sum to: 1, 100 or 1000, whichever the middle row is nearest."""
        middle = np.log(np.median(self.sums))
        return min(TOTALS, key=lambda total: abs(np.log(total) - middle))

    def uneven(self, tolerance: float = 0.001) -> IntArray:
        """Rows whose sum is off by more than a share `tolerance` of the total, shape (m,)."""
        return np.flatnonzero(np.abs(self.sums / self.total - 1.0) > tolerance)

    @property
    def fingerprint(self) -> str:
        """Sixteen hexadecimal digits that change when years, names or values change."""
        head = "\n".join([*map(str, self.years), *self.names]).encode()
        body = np.where(np.isnan(self.values), np.nan, self.values + 0.0).astype("<f8").tobytes()
        return hashlib.sha256(head + body).hexdigest()[:16]


def price_updated(weights: ArrayLike, relatives: ArrayLike) -> FloatArray:
    """Weights carried from one period's prices to another's.

    Parameters
    ----------
    weights : array_like of float, shape (..., K)
        Of any total; nan counts as none.
    relatives : array_like of float, shape (..., K)
        Price of the later period over price of the earlier one; nan leaves a weight as it is.

    Returns
    -------
    ndarray of float, shape (..., K)
        ``w_i r_i / sum(w_j r_j)``: they sum to 1 (Consumer Price Index Manual, 2020, chapter on
        weights; from memory).

    Examples
    --------
    >>> price_updated([0.6, 0.4], [1.05, 1.10]).round(6)
    array([0.588785, 0.411215])
    """
    relative = np.asarray(relatives, dtype=np.float64)
    moved = np.nan_to_num(np.asarray(weights, dtype=np.float64)) * np.where(
        np.isnan(relative), 1.0, relative
    )
    total = moved.sum(axis=-1, keepdims=True)
    if np.any(~(total > 0)):
        raise ValueError("weights must sum to more than 0, but do not")
    updated: FloatArray = moved / total
    return updated


@dataclass(frozen=True, eq=False)
class ChainedBasket(Readable):
    """Result of `chained_basket`; every array is read-only.

    Attributes
    ----------
    prices : ndarray of float, shape (n, K)
        Component indices; a component in the basket that has no value in a period is moved with
        the rest of the basket. nan where it is not in the basket and has no value.
    shares : ndarray of float, shape (L, K)
        Weights in use from each link on, summing to 1; 0 for a component left out.
    links : tuple of int, length L
        Place of the period whose prices each row of `shares` belongs to.
    row : ndarray of int, shape (n,)
        Row of `shares` in force in a period: that of the latest link before it; the first row at
        the first link, -1 before it.
    total : ndarray of float, shape (n,)
        The chained index, 100 at the first link; nan before.
    points : ndarray of float, shape (n, K)
        Part of each component in the change of `total` from the period before, in index points;
        0 at the first link, nan before. Rows sum to that change.
    imputed : ndarray of bool, shape (n, K)
        Where a component was moved with the rest.
    """

    prices: FloatArray
    shares: FloatArray
    links: tuple[int, ...]
    row: IntArray
    total: FloatArray
    points: FloatArray
    imputed: NDArray[np.bool_]


def chained_basket(prices: ArrayLike, shares: ArrayLike, links: Sequence[int]) -> ChainedBasket:
    """Chain component indices with weights that change at links.

    From one link to the next, the index is that of the link times the weighted mean of the
    component indices relative to the link.

    Parameters
    ----------
    prices : array_like of float, shape (n, K)
        Component indices, positive; nan where there is no value.
    shares : array_like of float, shape (L, K)
        Weights of any total, not negative; nan counts as none. Each row belongs to the prices of
        its link.
    links : sequence of int, length L
        Places in 0..n-1, increasing. A row is in force from the period after its link up to and
        including the next link, the last one to the end.

    Returns
    -------
    ChainedBasket
        A component without a price at a link, or without any before the next link, is left out of
        that stretch: its weight is spread over the others in proportion.

    Raises
    ------
    ValueError
        Shapes do not fit, a price is not positive, links do not increase, or a stretch has no
        component.

    Notes
    -----
    With December links and weights valued at December prices this is the yearly chained Laspeyres
    index of Regulation (EU) 2020/1148, article 3.

    Examples
    --------
    >>> chained_basket([[1, 1], [1.02, 0.98]], [[0.6, 0.4]], [0]).total.round(6)
    array([100. , 100.4])
    """
    filled, weights, places = _checked(prices, shares, links)
    n, components = filled.shape
    row = np.full(n, -1)
    row[places[0]] = 0
    total, points = np.full(n, np.nan), np.full((n, components), np.nan)
    used, imputed = np.zeros_like(weights), np.zeros(filled.shape, dtype=bool)
    total[places[0]], points[places[0]] = 100.0, 0.0
    for j, link in enumerate(places):
        stop = (places[j + 1] if j + 1 < len(places) else n - 1) + 1
        stretch = slice(link, stop)
        here = (weights[j] > 0) & ~np.isnan(filled[link])
        if stop > link + 1:
            here &= ~np.isnan(filled[link + 1 : stop]).all(axis=0)
        if not here.any():
            raise ValueError(f"row {j} of shares must have a component with prices, but has none")
        used[j] = np.where(here, weights[j], 0.0) / weights[j][here].sum()
        row[link + 1 : stop] = j
        relative = filled[stretch][:, here] / filled[link, here]
        absent = np.isnan(relative)
        if absent.any():
            _move_with_the_rest(relative, used[j][here])
            block, hole = filled[stretch], imputed[stretch]
            block[:, here] = np.where(absent, relative * filled[link, here], block[:, here])
            hole[:, here] |= absent
        parts = np.zeros((stop - link, components))
        parts[:, here] = total[link] * used[j][here] * relative
        total[link + 1 : stop] = parts[1:].sum(axis=1)
        points[link + 1 : stop] = np.diff(parts, axis=0)
    for array in (row, imputed):
        array.flags.writeable = False
    return ChainedBasket(
        read_only(filled),
        read_only(used),
        tuple(places),
        row,
        read_only(total),
        read_only(points),
        imputed,
    )


def effective_weights(basket: ChainedBasket) -> FloatArray:
    """Share of each component in the basket at each period's own prices.

    Returns
    -------
    ndarray of float, shape (n, K)
        Rows sum to 1: ``w_i I_i,t / I_i,link`` over the sum, with the weights in force in t. nan
        before the first link.
    """
    return basket_shares(basket, 0)


def basket_shares(basket: ChainedBasket, span: int) -> FloatArray:
    """Share of each component in the basket of t, at the prices of t - span.

    With these as weights the mean of the components' changes over `span` periods is the change in
    the cost of the basket of t.

    Returns
    -------
    ndarray of float, shape (n, K)
        Rows sum to 1; nan where t - span lies before the first link or before a component's first
        price (that component alone: the others still sum to 1).
    """
    if span < 0:
        raise ValueError(f"span must be 0 or more, but got {span}")
    n, components = basket.prices.shape
    shares = np.full((n, components), np.nan)
    start = basket.links[0] + span
    if start >= n:
        return shares
    rows = basket.row[start:]
    links = np.asarray(basket.links)[rows]
    cost = basket.shares[rows] * basket.prices[: n - span][start - span :] / basket.prices[links]
    cost = np.where(basket.shares[rows] > 0, cost, 0.0)
    shares[start:] = cost / np.nansum(cost, axis=1, keepdims=True)
    return shares


def _checked(
    prices: ArrayLike, shares: ArrayLike, links: Sequence[int]
) -> tuple[FloatArray, FloatArray, list[int]]:
    table = np.array(prices, dtype=np.float64)
    weights = np.nan_to_num(np.array(shares, dtype=np.float64))
    places = [int(link) for link in links]
    if table.ndim != 2 or weights.shape != (len(places), table.shape[1]) or not places:
        raise ValueError(
            "shares must have a row a link and a column a component, but got"
            f" {weights.shape} for {len(places)} links and prices of shape {table.shape}"
        )
    if np.any(table <= 0) or np.isinf(table).any():
        raise ValueError("prices must be positive and finite, but one is not")
    if np.any(weights < 0):
        raise ValueError(f"shares must not be negative, but got {weights.min():g}")
    if places[0] < 0 or places[-1] >= table.shape[0] or np.any(np.diff(places) <= 0):
        raise ValueError(
            f"links must increase within 0..{table.shape[0] - 1}, but got {places[:6]}"
        )
    return table, weights, places


def _move_with_the_rest(relative: FloatArray, weights: FloatArray) -> None:
    """Fill what is absent, in place, with the change of what is there (overall mean imputation)."""
    for t in np.flatnonzero(np.isnan(relative).any(axis=1)):
        known = ~np.isnan(relative[t])
        if not known.any():
            growth = 1.0
        else:
            growth = (weights[known] @ relative[t, known]) / (
                weights[known] @ relative[t - 1, known]
            )
        relative[t, ~known] = relative[t - 1, ~known] * growth
