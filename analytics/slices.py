"""A band that sweeps along one side of a cell: the mean of the other side over the pairs in it."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, growth_pair, locked

STEPS = 101


@dataclass(frozen=True, eq=False)
class SlicePath:
    """Result of `slice_path`; arrays are read-only.

    Attributes
    ----------
    low, high : ndarray of float, shape (k,)
        Ends of the band at each place; a pair on either end is in it.
    centre : ndarray of float, shape (k,)
        Middle of the band.
    mean : ndarray of float, shape (k,)
        Mean of the other side over the pairs in the band; nan where there are none.
    count : ndarray of int, shape (k,)
        Pairs in the band. They overlap, so they are worth fewer independent ones.
    overall : float
        Mean of the other side over all pairs.
    """

    low: FloatArray
    high: FloatArray
    centre: FloatArray
    mean: FloatArray
    count: IntArray
    overall: float


@dataclass(frozen=True, eq=False)
class Counts:
    """Result of `pair_counts`; arrays are read-only.

    Attributes
    ----------
    driver_edges, response_edges : ndarray of float, shape (k + 1,)
        From the least to the largest value of each side.
    driver, response : ndarray of int, shape (k,)
        Pairs in each bin of one side.
    both : ndarray of int, shape (k, k)
        Pairs in each square; rows are bins of the response.
    """

    driver_edges: FloatArray
    response_edges: FloatArray
    driver: IntArray
    response: IntArray
    both: IntArray


def slice_path(
    along: ArrayLike, other: ArrayLike, *, width: float, steps: int = STEPS
) -> SlicePath:
    """Mean of the other side in a band of one width, at equal steps from end to end.

    Parameters
    ----------
    along, other : array_like of float, shape (n,)
        The side that is sliced, and the other one.
    width : float
        Of the band, as a share of the range of `along`; above 0 and at most 1.
    steps : int, default 101
        Places of the band, 2 or more. The middle goes from the least to the largest value.

    Returns
    -------
    SlicePath

    Raises
    ------
    ValueError
        Lengths differ, a value is not finite, the width or the steps are outside their bounds, or
        `along` does not vary.

    Examples
    --------
    >>> slice_path([0.0, 1.0, 2.0], [5.0, 6.0, 9.0], width=0.5, steps=3).mean
    array([5., 6., 9.])
    """
    x, y = growth_pair(along, other)
    if not 0.0 < width <= 1.0:
        raise ValueError(f"width must be above 0 and at most 1, but got {width}")
    if steps < 2:
        raise ValueError(f"steps must be 2 or more, but got {steps}")
    least, largest = _range(x)
    centre = least + (largest - least) * (np.arange(steps) / (steps - 1))
    half = 0.5 * width * (largest - least)
    low, high = centre - half, centre + half
    order = np.argsort(x, kind="stable")
    sums = np.concatenate([[0.0], np.cumsum(y[order] - y.mean())])
    first = np.searchsorted(x[order], low, side="left")
    stop = np.searchsorted(x[order], high, side="right")
    count = stop - first
    total = sums[stop] - sums[first]
    mean = np.where(count > 0, y.mean() + total / np.maximum(1, count), np.nan)
    return SlicePath(
        low=read_only(low),
        high=read_only(high),
        centre=read_only(centre),
        mean=read_only(mean),
        count=locked(count.astype(np.int64)),
        overall=float(y.mean()),
    )


def pair_counts(driver: ArrayLike, response: ArrayLike) -> Counts:
    """Count the pairs of a cell in equal bins of each side, and of both.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        The pairs.

    Returns
    -------
    Counts
        24 bins a side; 16 below 240 pairs and 8 below 96. A slice of `lag_cell`, an eighth of the
        range, holds a whole number of them.

    Raises
    ------
    ValueError
        Lengths differ, a value is not finite, or a side does not vary.

    Examples
    --------
    >>> pair_counts([0.0, 1.0, 2.0], [0.0, 0.0, 1.0]).response
    array([2, 0, 0, 0, 0, 0, 0, 1])
    """
    x, y = growth_pair(driver, response)
    bins = 24 if x.size >= 240 else 16 if x.size >= 96 else 8
    (x_place, x_edges), (y_place, y_edges) = _bins(x, bins), _bins(y, bins)
    both = np.bincount(y_place * bins + x_place, minlength=bins * bins).reshape(bins, bins)
    return Counts(
        driver_edges=x_edges,
        response_edges=y_edges,
        driver=locked(both.sum(axis=0)),
        response=locked(both.sum(axis=1)),
        both=locked(both),
    )


def _range(values: FloatArray) -> tuple[float, float]:
    least, largest = float(values.min()), float(values.max())
    if not largest > least:
        raise ValueError(f"the sliced side must vary, but is {least} throughout")
    return least, largest


def _bins(values: FloatArray, bins: int) -> tuple[NDArray[np.int64], FloatArray]:
    """Bin of each value, equal bins from the least to the largest, and their edges."""
    least, largest = _range(values)
    place = np.floor((values - least) / (largest - least) * bins).astype(np.int64)
    return np.minimum(bins - 1, place), read_only(np.linspace(least, largest, bins + 1))
