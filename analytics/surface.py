"""Correlation and slope of response on driver over every window and every shift."""

import operator
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any, Literal, TypeVar, get_args

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from analytics.overlap import kept_moments, overlap_moments, smoothed_rows, span_moments
from analytics.series import FloatArray, read_only

IntArray = NDArray[np.int64]
PeakBy = Literal["absolute", "correlation"]
_Number = TypeVar("_Number", bound=np.generic)


@dataclass(frozen=True, eq=False)
class LagSurface:
    """Correlation and slope in every cell of a grid of windows and shifts; arrays are read-only.

    Attributes
    ----------
    windows : ndarray of int, shape (W,)
        Months in the trailing mean of both series.
    shifts : ndarray of int, shape (S,)
        Months by which the response is read later; above 0 the driver leads.
    correlation : ndarray of float, shape (W, S)
        Pearson's r, -1 to 1; nan in a cell with too few pairs or with a side that does not vary.
    slope : ndarray of float, shape (W, S)
        Least-squares slope of the response on the driver; nan where the correlation is.
    pairs : ndarray of int, shape (W, S)
        Overlapping pairs in each cell. Neighbours share months, so they are not independent.
    same_months : bool
        Whether every cell uses the same months of the driver.
    """

    windows: IntArray
    shifts: IntArray
    correlation: FloatArray
    slope: FloatArray
    pairs: IntArray
    same_months: bool = False

    def __repr__(self) -> str:
        defined = int(np.isfinite(self.correlation).sum())
        text = (
            f"LagSurface(windows {self.windows[0]} to {self.windows[-1]},"
            f" shifts {self.shifts[0]} to {self.shifts[-1]},"
            f" {defined} of {self.correlation.size} cells defined"
        )
        if defined:
            window, shift = self.peak()
            r = self.correlation[self.cell(window, shift)]
            text += f", largest r {r:.3f} at window {window} and shift {shift}"
        return text + ")"

    def peak(self, by: PeakBy = "absolute") -> tuple[int, int]:
        """Window and shift, in months, of the cell with the largest correlation.

        Parameters
        ----------
        by : {"absolute", "correlation"}
            Largest absolute r, or largest r; of cells equal to 1e-12 the first, row by row.

        Raises
        ------
        ValueError
            No cell has a correlation, or `by` is unknown.
        """
        if by not in get_args(PeakBy):
            raise ValueError(f"by must be absolute or correlation, but got {by!r}")
        if not np.isfinite(self.correlation).any():
            raise ValueError("a peak must be a cell with a correlation, but no cell has one")
        height = np.abs(self.correlation) if by == "absolute" else self.correlation
        first = np.flatnonzero(height >= np.nanmax(height) - 1e-12)[0]
        row, column = np.unravel_index(first, height.shape)
        return int(self.windows[row]), int(self.shifts[column])

    def cell(self, window: int, shift: int) -> tuple[int, int]:
        """Row and column of a cell, to index the arrays with.

        Raises
        ------
        ValueError
            The grid has no such window or shift.
        """
        return _place("window", self.windows, window), _place("shift", self.shifts, shift)

    def to_frame(self) -> pd.DataFrame:
        """One line a cell: window, shift, correlation, slope, pairs."""
        return pd.DataFrame(
            {
                "window": np.repeat(self.windows, self.shifts.size),
                "shift": np.tile(self.shifts, self.windows.size),
                "correlation": self.correlation.ravel(),
                "slope": self.slope.ravel(),
                "pairs": self.pairs.ravel(),
            }
        )


def _place(name: str, months: IntArray, wanted: int) -> int:
    """Where `wanted` stands in `months`."""
    found = np.flatnonzero(months == wanted)
    if found.size == 0:
        raise ValueError(f"{name} must be one of the grid, but got {wanted!r}")
    return int(found[0])


def locked(array: NDArray[_Number]) -> NDArray[_Number]:
    """Return the same array, which cannot be written to any more."""
    array.flags.writeable = False
    return array


def growth_pair(driver: ArrayLike, response: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Check that two series can be paired, and return them as arrays of shape (n,).

    Raises
    ------
    ValueError
        A series is not one-dimensional, a value is not finite, or the lengths differ.
    """
    checked = []
    for name, values in (("driver", driver), ("response", response)):
        array = np.asarray(values, dtype=np.float64)
        if array.ndim != 1:
            raise ValueError(f"{name} must be one-dimensional, but got shape {array.shape}")
        wrong = np.flatnonzero(~np.isfinite(array))
        if wrong.size:
            raise ValueError(
                f"{name} must be finite, but got {array[wrong[0]]} at position {wrong[0]}"
            )
        checked.append(array)
    if checked[0].size != checked[1].size:
        raise ValueError(
            "driver and response must have the same length,"
            f" but got {checked[0].size} and {checked[1].size}"
        )
    return checked[0], checked[1]


def lag_grid(
    windows: Iterable[int], shifts: Iterable[int], months: int
) -> tuple[IntArray, IntArray]:
    """Check the windows and shifts of a grid against a sample of `months` months.

    Raises
    ------
    ValueError
        Windows or shifts are not increasing integers or lie outside the sample.
    """
    checked = []
    for name, values in (("windows", windows), ("shifts", shifts)):
        listed: list[Any] = list(values)
        try:
            array = np.array([operator.index(value) for value in listed], dtype=np.int64)
        except TypeError:
            raise ValueError(f"{name} must be integers, but got {listed!r}") from None
        if array.size == 0 or (np.diff(array) <= 0).any():
            raise ValueError(f"{name} must be increasing integers, but got {listed!r}")
        checked.append(array)
    lengths, leads = checked
    if lengths[0] < 1 or lengths[-1] > months:
        outside = lengths[0] if lengths[0] < 1 else lengths[-1]
        raise ValueError(f"windows must be from 1 to {months} months, but got {outside}")
    farthest = leads[np.abs(leads).argmax()]
    if abs(farthest) >= months:
        raise ValueError(
            f"shifts must be from {1 - months} to {months - 1} months, but got {farthest}"
        )
    return lengths, leads


def smallest_variance(values: FloatArray) -> float:
    """Variance at or below which a stretch of a series counts as constant.

    It is 1e-12 of the variance of the whole series, and no less than the square of 1e-12 of its
    largest absolute value: a constant series leaves only rounding, and rounding has no
    correlation.
    """
    return max(1e-12 * float(values.var()), float(1e-12 * np.abs(values).max()) ** 2)


def lag_surface(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    windows: Iterable[int],
    shifts: Iterable[int],
    same_months: bool = False,
    min_pairs: int = 24,
    kept: ArrayLike | None = None,
) -> LagSurface:
    """Correlation and slope of the response on the driver, both averaged, `shift` months later.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Growth rates in percent, one a month, same months, no gaps.
    windows, shifts : iterable of int, shapes (W,) and (S,)
        Months, increasing. Windows from 1; shifts may be negative.
    same_months : bool, default False
        Let every cell use only the driver months that every cell has, so that cells differ by
        window and shift alone and not by sample. By default a cell uses all the pairs it has.
    min_pairs : int, default 24
        A cell with fewer pairs is nan.
    kept : array_like of bool, shape (n,), optional
        Months that may be read; a pair that averages any other month on either side is left out.

    Returns
    -------
    LagSurface
        `correlation`, `slope` and `pairs` have shape (W, S).

    Raises
    ------
    ValueError
        Lengths differ, a value is not finite, windows or shifts are not increasing integers or
        lie outside the sample, or no cell has `min_pairs` pairs.

    Notes
    -----
    The cell (w, s) pairs the driver's mean over months t-w+1..t with the response's mean over
    t+s-w+1..t+s, for the n = T - w + 1 - abs(s) months t that have both. A positive shift reads the
    response later: the driver leads. With window 1 and all the pairs, r is close to the sample
    cross-correlation function (Box and Jenkins 1976, ch. 11; chapter from memory), which
    divides by the moments of the whole sample instead of the cell's own.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(240)
    >>> response = np.roll(driver, 6)  # the driver's values, six months later
    >>> surface = lag_surface(driver, response, windows=[1, 3], shifts=range(-12, 13))
    >>> surface.peak()
    (1, 6)
    """
    x, y = growth_pair(driver, response)
    if kept is not None:
        x, y = without_months(x, kept), without_months(y, kept)
    lengths, leads = lag_grid(windows, shifts, x.size)
    if min_pairs < 3:
        raise ValueError(f"min_pairs must be 3 or more, but got {min_pairs}")
    first, last = _common_months(lengths, leads, x.size)
    if same_months:
        pairs = np.full((lengths.size, leads.size), max(0, last - first))
    else:
        pairs = np.maximum(0, x.size - lengths[:, None] + 1 - np.abs(leads))
    _check_pairs(pairs, min_pairs, x.size)
    xs, ys = (smoothed_rows(values - values.mean(), lengths) for values in (x, y))
    sizes = x.size - lengths + 1
    if kept is not None:
        places = np.arange(x.size)
        found = np.empty((4, lengths.size, leads.size))
        for row, window in enumerate(lengths.tolist()):
            n, read = sizes[row], months_read(kept, window)
            ends = places[window - 1 :]
            driven = read & (ends >= first) & (ends < last) if same_months else read
            found[:, row] = kept_moments(xs[row, :n], ys[row, :n], driven, read, leads)
        pairs, moments = np.rint(found[0]).astype(np.int64), found[1:]
        _check_pairs(pairs, min_pairs, x.size)
    elif same_months:
        spans = [(first - window + 1, last - window + 1) for window in lengths.tolist()]
        rows = zip(xs, ys, sizes, spans, strict=True)
        moments = np.stack([span_moments(a[:n], b[:n], leads, span) for a, b, n, span in rows], 1)
    else:
        moments = overlap_moments(xs, ys, sizes, leads)[2:]
    sxx, syy, sxy = moments
    usable = (
        (pairs >= min_pairs)
        & (sxx > smallest_variance(x) * pairs)
        & (syy > smallest_variance(y) * pairs)
    )
    sxx, syy, sxy = (np.where(usable, moment, np.nan) for moment in moments)
    return LagSurface(
        windows=locked(lengths),
        shifts=locked(leads),
        correlation=read_only(np.clip(sxy / np.sqrt(sxx * syy), -1.0, 1.0)),
        slope=read_only(sxy / sxx),
        pairs=locked(pairs),
        same_months=same_months,
    )


def _check_pairs(pairs: IntArray, min_pairs: int, months: int) -> None:
    if pairs.max() < min_pairs:
        raise ValueError(
            f"a cell must have at least {min_pairs} pairs, but no cell of the grid has more than"
            f" {pairs.max()} of {months} months"
        )


def without_months(values: FloatArray, kept: ArrayLike) -> FloatArray:
    """Put the mean of the months kept in the place of the others, so that nothing feels these.

    Raises
    ------
    ValueError
        `kept` does not have one entry a month, or keeps none.
    """
    mask = np.asarray(kept, dtype=bool)
    if mask.shape != values.shape:
        raise ValueError(f"kept must have shape {values.shape}, but got {mask.shape}")
    if not mask.any():
        raise ValueError("some months must be kept, but all are left out")
    return np.where(mask, values, values[mask].mean())


def months_read(kept: ArrayLike, window: int) -> NDArray[np.bool_]:
    """Which trailing means read kept months only, shape (n - window + 1,)."""
    mask = np.asarray(kept, dtype=bool)
    return np.asarray(np.lib.stride_tricks.sliding_window_view(mask, window).all(axis=1))


def _common_months(windows: IntArray, shifts: IntArray, months: int) -> tuple[int, int]:
    """First month t that every cell of the grid has, and the month after the last one."""
    first = int(windows[-1]) - 1 + max(0, -int(shifts[0]))
    return first, months - max(0, int(shifts[-1]))
