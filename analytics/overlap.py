"""Moments of overlapping trailing means, for a whole grid of windows and shifts at once.

The functions take centred series, so that no level is left to subtract, in the rows that
`smoothed_rows` makes.
"""

import numpy as np
from numpy.typing import NDArray

from analytics.series import FloatArray

IntArray = NDArray[np.int64]


def smoothed_rows(values: FloatArray, windows: IntArray) -> FloatArray:
    """Trailing means of a series, one row a window.

    Parameters
    ----------
    values : ndarray of float, shape (T,)
        One a period.
    windows : ndarray of int, shape (W,)
        Increasing, from 1 to T.

    Returns
    -------
    ndarray of float, shape (W, T)
        Row i starts with the T - w + 1 means of window w and goes on with zeros. Each sum is
        that of the window before plus one value, so that a constant series stays constant.
    """
    rows = np.zeros((windows.size, values.size))
    sums, length = values, 1
    for row, window in zip(rows, windows.tolist(), strict=True):
        while length < window:
            sums = sums[:-1] + values[length:]
            length += 1
        row[: sums.size] = sums / window
    return rows


def overlap_moments(
    xs: FloatArray, ys: FloatArray, sizes: IntArray, shifts: IntArray
) -> FloatArray:
    """Return the moments of every cell's own overlap: means, sums of squares, sum of products.

    For a shift s >= 0 the first n means of the driver meet the last n of the response, for s < 0
    the other way round, so the moments of one side are those of stretches that grow from an end.

    Parameters
    ----------
    xs, ys : ndarray of float, shape (W, C)
        Rows of driver and response from `smoothed_rows`.
    sizes : ndarray of int, shape (W,)
        Means in each row, T - w + 1.
    shifts : ndarray of int, shape (S,)
        Increasing. Where a shift reaches the size, nothing overlaps and the moments mean nothing.

    Returns
    -------
    ndarray of float, shape (5, W, S)
        Mean of driver and of response; squares and products about these means.
    """
    n = np.maximum(1, sizes[:, None] - np.abs(shifts))
    extra = int(np.abs(shifts).max())
    core = np.maximum(1, sizes - extra)
    step = np.arange(extra)
    heads = np.zeros_like(core), core[:, None] + step
    tails = sizes - core, (sizes - core)[:, None] - 1 - step
    moments = np.empty((5, sizes.size, shifts.size))
    for side, (rows, leads) in enumerate(((xs, shifts >= 0), (ys, shifts < 0))):
        for part, chosen in ((heads, leads), (tails, ~leads)):
            mean, squares = _growing(rows, core, *part)
            at = n[:, chosen] - core[:, None]
            moments[side][:, chosen] = np.take_along_axis(mean, at, axis=1)
            moments[2 + side][:, chosen] = np.take_along_axis(squares, at, axis=1)
    before, after = max(0, -int(shifts[0])), max(0, int(shifts[-1]))
    padded = np.pad(ys, ((0, 0), (before, after)))
    for row, size in enumerate(sizes.tolist()):
        reached = padded[row, : before + size + after]
        products = np.correlate(reached, xs[row, :size], mode="valid")
        moments[4, row] = products[shifts + before]
    moments[4] -= n * moments[0] * moments[1]
    return moments


def _growing(
    rows: FloatArray, core: IntArray, first: IntArray, beyond: IntArray
) -> tuple[FloatArray, FloatArray]:
    """Means and sums of squares about them of stretches that grow by one column at a time.

    The stretch starts as `core` columns from `first` on and takes in the columns `beyond`, shape
    (W, E), one after another (Welford 1962); both results have shape (W, E + 1). Columns outside
    the table stand for stretches that no cell has.
    """
    column = np.arange(rows.shape[1])
    inside = (column >= first[:, None]) & (column < (first + core)[:, None])
    count = core[:, None].astype(np.float64)
    start = np.where(inside, rows, 0.0).sum(axis=1, keepdims=True) / count
    away = np.where(inside, rows - start, 0.0)
    squares = np.einsum("wc,wc->w", away, away)[:, None]
    added = np.take_along_axis(rows, np.clip(beyond, 0, rows.shape[1] - 1), axis=1)
    k = count + np.arange(1, beyond.shape[1] + 1)
    mean = np.concatenate([start, start + np.cumsum(added - start, axis=1) / k], axis=1)
    growth = (added - mean[:, :-1]) ** 2 * (k - 1.0) / k
    return mean, np.cumsum(np.concatenate([squares, growth], axis=1), axis=1)


def span_moments(
    xs: FloatArray, ys: FloatArray, shifts: IntArray, span: tuple[int, int]
) -> FloatArray:
    """Return the moments over the same months of the driver at every shift.

    Parameters
    ----------
    xs, ys : ndarray of float, shape (N,)
        Smoothed driver and response of one window.
    shifts : ndarray of int, shape (S,)
        Increasing.
    span : tuple of int
        First of the driver's means, and the one after the last.

    Returns
    -------
    ndarray of float, shape (3, S)
        Sums of squares of driver and response and sum of products, about the means.
    """
    x = xs[span[0] : span[1]] - xs[span[0] : span[1]].mean()
    y = np.lib.stride_tricks.sliding_window_view(ys, x.size)[span[0] + shifts]
    y -= y.mean(axis=1, keepdims=True)
    squares = np.einsum("ij,ij->i", y, y)
    return np.stack([np.full(shifts.size, x @ x), squares, y @ x])


def kept_moments(
    xs: FloatArray,
    ys: FloatArray,
    x_kept: NDArray[np.bool_],
    y_kept: NDArray[np.bool_],
    shifts: IntArray,
) -> FloatArray:
    """Return the moments over the pairs whose two means are both kept, at every shift.

    Parameters
    ----------
    xs, ys : ndarray of float, shape (N,)
        Smoothed driver and response of one window.
    x_kept, y_kept : ndarray of bool, shape (N,)
        Means of driver and response that may be paired.
    shifts : ndarray of int, shape (S,)
        Increasing.

    Returns
    -------
    ndarray of float, shape (4, S)
        Pairs; sums of squares of driver and response and sum of products, about the means.
    """
    x_in, y_in = x_kept.astype(np.float64), y_kept.astype(np.float64)
    before, after = max(0, -int(shifts[0])), max(0, int(shifts[-1]))

    def sums(left: FloatArray, right: FloatArray) -> FloatArray:
        reached = np.pad(right, (before, after))
        return np.correlate(reached, left, mode="valid")[shifts + before]

    x, y = xs * x_in, ys * y_in
    n = sums(x_in, y_in)
    most = np.maximum(1.0, n)
    x_sum, y_sum = sums(x, y_in), sums(x_in, y)
    return np.stack(
        [
            n,
            sums(x * x, y_in) - x_sum**2 / most,
            sums(x_in, y * y) - y_sum**2 / most,
            sums(x, y) - x_sum * y_sum / most,
        ]
    )
