"""The compiled loop behind `hac`: one pass through each cell.

Import it only where it is needed: the compiler takes a sixth of a second to load, and the first run
on a machine a second to compile, after which the result is kept beside this file.
"""

from typing import TYPE_CHECKING

import numba
import numpy as np

from analytics.overlap import IntArray
from analytics.series import FloatArray

if TYPE_CHECKING:
    from collections.abc import Callable

_SIGNATURE = (
    "void(float64[:, ::1], float64[:, ::1], int64[::1], int64[::1], int64[::1], int64, int64,"
    " float64[:, :, ::1])"
)


def _cells(
    xs: FloatArray,
    ys: FloatArray,
    sizes: IntArray,
    shifts: IntArray,
    spans: IntArray,
    first: int,
    step: int,
    out: FloatArray,
) -> None:
    """Fill rows `first`, `first + step`, ... of `out`, shape (4, W, S).

    The four are the sums of squares of driver and response about their means, the slope, and the
    sum of squares of all sums of `span` neighbouring scores. A cell of fewer than three pairs,
    or whose driver stands still, keeps what `out` had.
    """
    sums = np.empty(xs.shape[1])
    for row in range(first, sizes.size, step):
        for column in range(shifts.size):
            shift = shifts[column]
            n = sizes[row] - abs(shift)
            if n < 3:
                continue
            x = xs[row, max(0, -shift) :][:n]
            y = ys[row, max(0, shift) :][:n]
            x_mean = y_mean = 0.0
            for i in range(n):
                x_mean += x[i]
                y_mean += y[i]
            x_mean /= n
            y_mean /= n
            sxx = syy = sxy = 0.0
            for i in range(n):
                a = x[i] - x_mean
                b = y[i] - y_mean
                sxx += a * a
                syy += b * b
                sxy += a * b
            if sxx == 0.0:
                continue
            slope = sxy / sxx
            # Scores and their running sums c; the sum of a neighbourhood is a difference of two.
            for i in range(n):
                a = x[i] - x_mean
                sums[i] = a * (y[i] - y_mean - slope * a)
            total = 0.0
            for i in range(n):
                total += sums[i]
                sums[i] = total
            span = min(spans[row], n)
            later = sums[span:n]
            squares = products = 0.0
            for i in range(n):
                squares += sums[i] * sums[i]
            for i in range(n - span):
                products += sums[i] * later[i]
            out[0, row, column] = sxx
            out[1, row, column] = syy
            out[2, row, column] = slope
            out[3, row, column] = max(0.0, 2.0 * (squares - products))


def _compiled(kept: bool) -> "Callable[..., None]":
    # Sums may be taken in any order, but nan and infinity keep their meaning.
    loose = {"reassoc", "contract", "nsz"}
    decorate = numba.njit(_SIGNATURE, nogil=True, fastmath=loose, cache=kept)
    return decorate(_cells)


try:
    fill_cells = _compiled(kept=True)
except Exception:  # no folder to keep it in, or what is kept there is broken
    fill_cells = _compiled(kept=False)
