"""Price index formulas between two periods, and chained over many."""

from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray

Weighted = Literal["laspeyres", "paasche", "fisher", "tornqvist", "walsh"]
Elementary = Literal["carli", "jevons", "harmonic"]


def price_index(
    prices: ArrayLike, quantities: ArrayLike, *, formula: Weighted, chained: bool = False
) -> FloatArray:
    """Price index of goods whose prices and quantities are known in every period.

    Parameters
    ----------
    prices, quantities : array_like of float, shape (n, K)
        Positive prices and quantities that are not negative, a row a period.
    formula : {"laspeyres", "paasche", "fisher", "tornqvist", "walsh"}
        Bilateral formula.
    chained : bool, default False
        Link each period to the one before; else compare each with the first.

    Returns
    -------
    ndarray of float, shape (n,)
        The first period is 1.

    Raises
    ------
    ValueError
        Shapes differ, a price is not positive, a quantity negative, or the formula unknown.

    References
    ----------
    International Labour Office and others (2004), Consumer Price Index Manual, chapters 15 to 19;
    the formulas are from memory.
    """
    p, q = np.asarray(prices, dtype=np.float64), np.asarray(quantities, dtype=np.float64)
    if p.ndim != 2 or p.shape != q.shape:
        raise ValueError(
            f"prices and quantities must be tables of one shape, but got {p.shape} and {q.shape}"
        )
    if not np.all(p > 0) or not np.all(q >= 0) or np.any(q.sum(axis=1) <= 0):
        raise ValueError("prices must be positive and quantities not negative, but one is not so")
    if formula not in get_args(Weighted):
        raise ValueError(
            f"formula must be one of {', '.join(get_args(Weighted))}, but got {formula!r}"
        )
    before = slice(0, -1) if chained else slice(0, 1)
    start_p, start_q = p[before], q[before]
    links = _bilateral(start_p, p[1:], start_q, q[1:], formula)
    index = np.concatenate([[1.0], np.cumprod(links) if chained else links])
    return np.asarray(index)


def elementary_index(prices: ArrayLike, *, formula: Elementary) -> FloatArray:
    """Unweighted index of price relatives to the first period.

    Parameters
    ----------
    prices : array_like of float, shape (n, K)
        Positive, a row a period.
    formula : {"carli", "jevons", "harmonic"}
        Arithmetic, geometric or harmonic mean of the relatives.

    Returns
    -------
    ndarray of float, shape (n,)
        The first period is 1. Carli is never below Jevons, nor Jevons below the harmonic mean.

    Raises
    ------
    ValueError
        A price is not positive, or the formula is unknown.
    """
    p = np.asarray(prices, dtype=np.float64)
    if p.ndim != 2 or not np.all(p > 0):
        raise ValueError("prices must be a table of positive numbers, but are not")
    relatives = p / p[0]
    match formula:
        case "carli":
            return np.asarray(relatives.mean(axis=1))
        case "jevons":
            return np.asarray(np.exp(np.log(relatives).mean(axis=1)))
        case "harmonic":
            return np.asarray(1.0 / (1.0 / relatives).mean(axis=1))
        case _:
            raise ValueError(
                f"formula must be one of {', '.join(get_args(Elementary))}, but got {formula!r}"
            )


def _bilateral(
    p0: FloatArray, p1: FloatArray, q0: FloatArray, q1: FloatArray, formula: Weighted
) -> FloatArray:
    def cost(p: FloatArray, q: FloatArray) -> FloatArray:
        total: FloatArray = (p * q).sum(axis=1)
        return total

    laspeyres, paasche = cost(p1, q0) / cost(p0, q0), cost(p1, q1) / cost(p0, q1)
    match formula:
        case "laspeyres":
            return laspeyres
        case "paasche":
            return paasche
        case "fisher":
            return np.asarray(np.sqrt(laspeyres * paasche))
        case "tornqvist":
            shares = 0.5 * (p0 * q0 / cost(p0, q0)[:, None] + p1 * q1 / cost(p1, q1)[:, None])
            return np.asarray(np.exp((shares * np.log(p1 / p0)).sum(axis=1)))
        case "walsh":
            middle = np.sqrt(q0 * q1)
            return cost(p1, middle) / cost(p0, middle)
