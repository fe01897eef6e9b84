"""Correlations of many drivers with one response over all windows and shifts, by exact algebra.

`lag_surface` judges one pair; a search needs the same surface for thousands of surrogate
drivers, and this module gives it in the time of a matrix product. Every number equals the one
that a loop over the overlapping means gives; only the order of the sums differs:

* Products of trailing sums over *all* offsets, with zeros outside the sample, are triangular
  sums of the lag products of the plain series, and these come from one Fourier transform.
* That counts windows that stick out of the sample. What they add is linear in the driver's
  cumulative sums near its two ends, so one small matrix product per window takes it away, and
  the product of the means with it.
* The driver's variance in a cell is that of all its windows less the few that a shift leaves
  out.
"""

from collections.abc import Iterable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import fft

from analytics.series import FloatArray, read_only
from analytics.surface import lag_grid, locked, smallest_variance

IntArray = NDArray[np.int64]

MIN_PAIRS = 24
_BATCH = 128  # drivers worked on together: small enough for the processor's cache
_SMALL = 2**18  # products up to this size run in the calling thread of the common BLAS


@dataclass(frozen=True, eq=False)
class ResponseKernel:
    """What the search needs of one response, prepared once; `correlations` takes the drivers.

    Attributes
    ----------
    response : ndarray of float, shape (T,), read-only
        One value a period.
    windows : ndarray of int, shape (W,)
        Periods averaged.
    shifts : ndarray of int, shape (S,)
        Periods by which the driver leads.
    min_pairs : int
        Cells with fewer pairs are nan.
    """

    response: FloatArray
    windows: IntArray
    shifts: IntArray
    min_pairs: int
    _spectrum: NDArray[np.complex128]
    _length: int
    _cells: "tuple[_WindowCells | None, ...]"

    @property
    def pairs(self) -> IntArray:
        """Overlapping pairs ``T - w + 1 - |s|`` of each cell, at least 0, shape (W, S)."""
        n = self.response.size + 1 - self.windows[:, None] - np.abs(self.shifts)[None, :]
        return np.maximum(n, 0)

    def correlations(self, drivers: ArrayLike, *, threads: int = 2) -> FloatArray:
        """Pearson's r of each driver with the response in every cell.

        Parameters
        ----------
        drivers : array_like of float, shape (B, T) or (T,)
            One driver a row, the same periods as the response.
        threads : int, default 2
            Batches worked on at a time. The result does not depend on it.

        Returns
        -------
        ndarray of float, shape (B, W, S)
            nan where a cell has fewer than `min_pairs` pairs or a side does not vary. The
            memory runs along the drivers: ``result.transpose(1, 2, 0)`` is contiguous.

        Raises
        ------
        ValueError
            The drivers' length differs from the response's, or a value is not finite.
        """
        rows = np.atleast_2d(np.asarray(drivers, dtype=np.float64))
        if rows.ndim != 2 or rows.shape[1] != self.response.size:
            raise ValueError(
                f"drivers must have shape (B, {self.response.size}), but got {rows.shape}"
            )
        if not np.isfinite(rows).all():
            raise ValueError("drivers must be finite, but got a gap or an infinite value")
        shape = (self.windows.size, self.shifts.size, rows.shape[0])
        out = np.empty(shape)
        batches = -(-rows.shape[0] // _BATCH)
        size = -(-rows.shape[0] // batches)
        starts = range(0, rows.shape[0], size)

        def work(start: int) -> None:
            batch = rows[start : start + size]
            padded = batch[np.arange(-(-len(batch) // 16) * 16) % len(batch)]
            self._fill(padded, out[:, :, start : start + len(batch)])

        if threads > 1 and batches > 1:
            with ThreadPoolExecutor(threads) as pool:
                list(pool.map(work, starts))
        else:
            for start in starts:
                work(start)
        return out.transpose(2, 0, 1)

    def _fill(self, rows: FloatArray, out: FloatArray) -> None:
        """Write the correlations of one batch, shape (b, T), into `out`, (W, S, b or fewer)."""
        low, high = min(0, int(self.shifts.min())), max(0, int(self.shifts.max()))
        widest = int(self.windows.max())
        driver = rows - rows.mean(axis=1, keepdims=True)
        smallest = np.maximum(
            1e-12 * np.einsum("bt,bt->b", driver, driver) / rows.shape[1],
            (1e-12 * np.abs(rows).max(axis=1)) ** 2,
        )

        spectrum = fft.rfft(driver, self._length, axis=1)
        cross = fft.irfft(spectrum.conj() * self._spectrum, self._length, axis=1)
        auto = fft.irfft(spectrum.real**2 + spectrum.imag**2, self._length, axis=1)
        # Lag products in rows, from lag low - widest + 1 to high + widest - 1, summed twice.
        lags = np.arange(low - widest + 1, high + widest)
        triangle = np.zeros((lags.size + 2, rows.shape[0]))
        np.cumsum(np.cumsum(cross[:, lags % self._length], axis=1).T, axis=0, out=triangle[2:])
        twice = 2.0 * triangle
        power = np.zeros((widest + 1, rows.shape[0]))
        np.cumsum(np.cumsum(auto[:, :widest], axis=1).T, axis=0, out=power[1:])

        # Cumulative sums C[j] near both ends: left[j] = C[j], right[j] = C[T - j]; C[T] = 0.
        reach = min(rows.shape[1], widest + max(high, -low))
        left, right = np.zeros((2, reach + 1, rows.shape[0]))
        np.cumsum(driver[:, :reach].T, axis=0, out=left[1:])
        np.cumsum(-driver[:, : -reach - 1 : -1].T, axis=0, out=right[1:])
        ends = np.concatenate((left[::-1], right))
        left_sums, right_sums = np.zeros((2, reach + 2, rows.shape[0]))
        np.cumsum(left, axis=0, out=left_sums[1:])
        np.cumsum(right, axis=0, out=right_sums[1:])
        left_squares, right_squares = np.zeros((2, reach + 2, rows.shape[0]))
        np.cumsum(left**2, axis=0, out=left_squares[1:])
        np.cumsum(right**2, axis=0, out=right_squares[1:])

        ones = np.tri(max(high, -low))
        for index, cells in enumerate(self._cells):
            if cells is None:
                out[index] = np.nan
                continue
            w, a, b = cells.window, cells.leads_back, cells.leads
            zero = -low + widest  # row of `triangle` that belongs to shift 0
            product = np.empty((a + b + 1, rows.shape[0]))
            for end, part in zip(cells.ends, (product[:a], product[a:]), strict=True):
                _product(end.weights, ends[reach + 1 - end.left : reach + 1 + end.right], part)
            product += triangle[zero - a + w : zero + b + 1 + w]
            product -= twice[zero - a : zero + b + 1]
            product += triangle[zero - a - w : zero + b + 1 - w]

            # Sum and sum of squares of the driver's trailing sums in each cell.
            total = np.empty_like(product)
            np.subtract(right_sums[w : w + b + 1], right_sums[: b + 1], out=total[a:])
            total[a:] -= left_sums[w]
            back = total[:a][::-1]
            np.subtract(left_sums[1 : a + 1], left_sums[w + 1 : w + a + 1], out=back)
            back += right_sums[w]

            spread = np.empty_like(product)
            spread[a] = 2.0 * power[w] - w * auto[:, 0] - left_squares[w] - right_squares[w]
            lost = right[:b] - right[w : w + b]
            lost *= lost
            _product(ones[:b, :b], lost, spread[a + 1 :])
            np.subtract(spread[a], spread[a + 1 :], out=spread[a + 1 :])
            lost = left[w : w + a] - left[:a]
            lost *= lost
            _product(ones[:a, :a][::-1], lost, spread[:a])
            np.subtract(spread[a], spread[:a], out=spread[:a])

            total *= total
            total *= cells.inverse_pairs
            spread -= total
            level = w * w * smallest
            if (spread.min(axis=0) <= level * rows.shape[1]).any():
                spread[spread * cells.inverse_pairs <= level] = np.nan
            np.sqrt(spread, out=spread)
            product /= spread
            product *= cells.inverse_spread
            np.clip(product, -1.0, 1.0, out=product)
            if cells.target.size < self.shifts.size:
                out[index] = np.nan
            out[index, _span(cells.target)] = product[_span(cells.source), : out.shape[2]]


@dataclass(frozen=True, eq=False)
class _EndWeights:
    """Weights of the driver's cumulative sums near both ends, for some of a window's cells."""

    left: int  # multiplies C[left - 1 .. 0], then
    right: int  # C[T .. T - right + 1]
    weights: FloatArray  # shape (rows, left + right)


@dataclass(frozen=True, eq=False)
class _WindowCells:
    """One window's cells over the contiguous shifts ``-leads_back .. leads``, n of them."""

    window: int
    leads_back: int
    leads: int
    ends: tuple[_EndWeights, _EndWeights]  # shifts below 0, shifts from 0
    inverse_pairs: FloatArray  # shape (n, 1)
    inverse_spread: FloatArray  # shape (n, 1): 1 / sqrt of the response's sum of squares
    source: IntArray  # rows asked for
    target: IntArray  # where they go among the shifts


def _span(places: IntArray) -> slice | IntArray:
    """Turn places that follow one another into a slice, which costs no copy."""
    first, last = int(places[0]), int(places[-1])
    return slice(first, last + 1) if last - first + 1 == places.size else places


def _product(matrix: FloatArray, rows: FloatArray, out: FloatArray) -> None:
    """Matrix product in column blocks, each so small that BLAS starts no threads of its own.

    Batches already run side by side; two of them inside a threaded product wait for each other.
    """
    columns = rows.shape[1]
    width = _BATCH
    while width > 1 and (matrix.size * width > _SMALL or columns % width):
        width //= 2
    blocks = rows.reshape(rows.shape[0], columns // width, width).transpose(1, 0, 2)
    views = out.reshape(out.shape[0], columns // width, width).transpose(1, 0, 2)
    np.matmul(matrix, blocks, out=views)


def response_kernel(
    response: ArrayLike,
    *,
    windows: Iterable[int],
    shifts: Iterable[int],
    min_pairs: int = MIN_PAIRS,
) -> ResponseKernel:
    """Prepare a response for `ResponseKernel.correlations`.

    Parameters
    ----------
    response : array_like of float, shape (T,)
        One value a period, no gaps.
    windows, shifts : iterable of int, shapes (W,) and (S,)
        Strictly increasing; windows from 1. A shift above 0 means that the driver leads.
    min_pairs : int, default 24
        Cells with fewer pairs are nan.

    Returns
    -------
    ResponseKernel

    Raises
    ------
    ValueError
        A value is not finite, or windows or shifts are not increasing integers or lie outside
        the sample.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(240)
    >>> kernel = response_kernel(np.roll(driver, 6), windows=[1, 3], shifts=range(-12, 13))
    >>> r = kernel.correlations(driver)
    >>> r.shape, int(kernel.shifts[r[0, 0].argmax()])
    ((1, 2, 25), 6)
    """
    values = np.asarray(response, dtype=np.float64)
    if values.ndim != 1 or values.size < 2 or not np.isfinite(values).all():
        raise ValueError(f"response must be a finite series, but got shape {values.shape}")
    window_array, shift_array = lag_grid(windows, shifts, values.size)
    low, high = min(0, int(shift_array[0])), max(0, int(shift_array[-1]))
    widest = int(window_array[-1])
    length = fft.next_fast_len(values.size + widest + max(high, -low), real=True)
    centred = values - values.mean()
    cells = tuple(
        _window_cells(centred, int(w), shift_array, low, high, min_pairs, smallest_variance(values))
        for w in window_array
    )
    return ResponseKernel(
        read_only(values),
        locked(window_array),
        locked(shift_array),
        min_pairs,
        fft.rfft(centred, length),
        length,
        cells,
    )


def _window_cells(
    response: FloatArray,
    window: int,
    shifts: IntArray,
    low: int,
    high: int,
    min_pairs: int,
    smallest: float,
) -> _WindowCells | None:
    """Everything about one window that does not depend on the driver."""
    n_values = response.size
    room = n_values - window + 1 - max(min_pairs, 2)
    back, lead = min(-low, room), min(high, room)
    kept = np.flatnonzero((shifts >= -back) & (shifts <= lead))
    if room < 0 or kept.size == 0:
        return None
    shift = np.arange(-back, lead + 1)
    first = np.maximum(0, -shift)[:, None]  # the driver's windows run from first to stop - 1
    stop = n_values - window + 1 - np.maximum(0, shift)[:, None]
    pairs = (stop - first).astype(np.float64)

    # The response's cell means and sums of squares, from its own trailing sums.
    sums = np.lib.stride_tricks.sliding_window_view(response, window).sum(axis=1)
    head = np.concatenate(([[0.0], [0.0]], np.cumsum([sums, sums**2], axis=1)), axis=1)
    total, squares = head[:, stop + shift[:, None]] - head[:, first + shift[:, None]]
    mean = total / pairs
    spread = squares - total * mean
    spread[spread <= window**2 * smallest * pairs] = np.nan
    return _WindowCells(
        window,
        back,
        lead,
        (
            _end_weights(
                response, sums, window, shift[:back], first[:back], stop[:back], mean[:back]
            ),
            _end_weights(
                response, sums, window, shift[back:], first[back:], stop[back:], mean[back:]
            ),
        ),
        1.0 / pairs,
        1.0 / np.sqrt(spread),
        shifts[kept] + back,
        kept,
    )


def _end_weights(
    response: FloatArray,
    sums: FloatArray,
    window: int,
    shift: IntArray,
    first: IntArray,
    stop: IntArray,
    mean: FloatArray,
) -> _EndWeights:
    """Weight of each cumulative sum C[j] of the driver: in the cell, less in the padded sum."""
    n_values = response.size
    reach_left = window + int(-shift.min(initial=0))
    reach_right = window + int(shift.max(initial=0))
    left = min(reach_left, n_values + 1)
    right = min(reach_right, n_values + 1 - left)
    place = np.concatenate((np.arange(left)[::-1], n_values - np.arange(right)))[None, :]
    cumulative = np.concatenate(([0.0], np.cumsum(response)))
    cumulative[-1] = 0.0
    pad = reach_left + reach_right
    padded, padded_sums = np.pad(cumulative, pad), np.pad(sums, pad)

    later = place + shift[:, None] + pad
    weights = padded[later + window] - 2.0 * padded[later] + padded[later - window]
    ends_inside = (place - window >= first) & (place - window < stop)
    weights += ends_inside * (padded_sums[later - window] - mean)
    starts_inside = (place >= first) & (place < stop)
    weights -= starts_inside * (padded_sums[later] - mean)
    return _EndWeights(left, right, weights)
