"""What the driver's observed months imply for the response's months ahead."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.cell import lag_cell
from analytics.outlook_target import Compounding, outlook_target
from analytics.rates import trailing_mean
from analytics.readable import Readable
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked


@dataclass(frozen=True, eq=False)
class ImpliedPath(Readable):
    """Result of `implied_path`; arrays are read-only.

    Attributes
    ----------
    window, shift : int
        The cell.
    intercept, slope, correlation : float
        Its line, in the unit of the series.
    pairs : int
        Pairs that the line was fitted to.
    lead : int
        Periods by which the driver is known beyond the response; below 0 where it ends earlier.
    ahead : ndarray of int, shape (H,)
        1 .. H periods after the last one of the response; H is shift + lead.
    window_mean : ndarray of float, shape (H,)
        Response's mean over the window that ends there, by the line: intercept + slope times the
        driver's mean `shift` periods earlier.
    single : ndarray of float, shape (H,)
        One-period rates consistent with it: intercept + slope times the driver's own rate `shift`
        periods earlier. Their means over a whole window of coming periods are `window_mean`.
    yearly : ndarray of float, shape (H,)
        Rate over a year: observed periods as they were, coming ones as in `single`.
    """

    window: int
    shift: int
    intercept: float
    slope: float
    correlation: float
    pairs: int
    lead: int
    ahead: IntArray
    window_mean: FloatArray
    single: FloatArray
    yearly: FloatArray

    def __repr__(self) -> str:
        return (
            f"ImpliedPath(window {self.window}, shift {self.shift}, {self.ahead.size} periods"
            f" ahead, yearly rate {self.yearly[-1]:.3g} at the end)"
        )


@dataclass(frozen=True, eq=False)
class RelationGap(Readable):
    """Result of `relation_gap`; arrays of shape (m,), read-only.

    Attributes
    ----------
    place : ndarray of int
        Period of the response at which the window ends, counted from 0.
    observed : ndarray of float
        Response's mean over the window, in its own unit.
    expected : ndarray of float
        What the line of the whole sample says for it.
    gap : ndarray of float
        Observed less expected: above 0 the response grew faster than the relation says.
    """

    place: IntArray
    observed: FloatArray
    expected: FloatArray
    gap: FloatArray


def outlook_arrays(driver: ArrayLike, response: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Check two series that begin in the same period and may end in different ones.

    Raises
    ------
    ValueError
        A series is not one-dimensional, is empty, or holds a value that is not finite.
    """
    checked = []
    for name, values in (("driver", driver), ("response", response)):
        array = np.asarray(values, dtype=np.float64)
        if array.ndim != 1 or array.size == 0:
            raise ValueError(f"{name} must be one series with values, but got {array.shape}")
        wrong = np.flatnonzero(~np.isfinite(array))
        if wrong.size:
            raise ValueError(
                f"{name} must be finite, but got {array[wrong[0]]} at position {wrong[0]}"
            )
        checked.append(array)
    return checked[0], checked[1]


def path_reach(shift: int, lead: int) -> int:
    """Periods ahead that observed driver periods speak of.

    Raises
    ------
    ValueError
        There is none: the driver does not lead, or ends too long before the response.
    """
    if shift < 1:
        raise ValueError(
            f"shift must be 1 or more to imply a path, but got {shift}: where the driver does not"
            " lead, its observed periods say nothing about coming ones"
        )
    if shift + lead < 1:
        raise ValueError(
            f"the driver must be known to within {shift - 1} periods of the response's end to imply"
            f" a path at shift {shift}, but ends {-lead} before it"
        )
    return shift + lead


def expected_periods(
    driver: FloatArray, periods: int, line: tuple[float, float], shift: int, horizon: int
) -> FloatArray:
    """One-period rates by the line for the response's periods 0 .. periods + horizon - 1.

    nan where the driver does not reach, before its beginning or beyond its end.
    """
    expected = np.full(periods + horizon, np.nan)
    first, last = max(0, shift), min(periods + horizon, driver.size + shift)
    if first < last:
        expected[first:last] = line[0] + line[1] * driver[first - shift : last - shift]
    return expected


def implied_path(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    compounding: Compounding = "log",
    periods_per_year: int = 12,
    min_pairs: int = 24,
) -> ImpliedPath:
    """Path of the response that a cell implies, from driver periods already observed.

    Parameters
    ----------
    driver, response : array_like of float, shapes (m,) and (n,)
        Growth rates in percent, one a period, no gaps, from the same first period on. The driver
        may end later or earlier than the response.
    window, shift : int
        The cell; the driver must lead, so the shift is 1 or more.
    compounding : {"log", "percent", "mean"}
        How one-period rates make a yearly one: as they were taken, or "mean" for a series that is
        a rate itself.
    periods_per_year : int, default 12
        12, 4 or 1.
    min_pairs : int, default 24
        Fewest pairs to fit the line to.

    Returns
    -------
    ImpliedPath
        Over ``shift + m - n`` periods. The line is that of `lag_cell` over the common periods.

    Raises
    ------
    ValueError
        The shift is not positive, the driver ends too early or does not vary, too few pairs are
        left, the response is shorter than a year, or a value is not finite.

    Notes
    -----
    The path says what the line says and no more: today's gap between observed and expected
    (`relation_gap`) is neither carried on nor made up for.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(240)
    >>> response = 0.1 + 0.4 * np.concatenate([np.zeros(9), driver[:-9]])
    >>> path = implied_path(driver[9:], response[9:], window=3, shift=9)
    >>> bool(np.allclose(path.single, 0.1 + 0.4 * driver[-9:]))
    True
    """
    x, y = outlook_arrays(driver, response)
    lead = x.size - y.size
    reach = path_reach(shift, lead)
    target = outlook_target(
        "yearly", window=window, compounding=compounding, periods_per_year=periods_per_year
    )
    if y.size < target.span:
        raise ValueError(f"response must have a year, {target.span} periods, but got {y.size}")
    common = min(x.size, y.size)
    cell = lag_cell(x[:common], y[:common], window=window, shift=shift, min_pairs=min_pairs)
    single = cell.intercept + cell.slope * x[x.size - reach :]
    means = trailing_mean(x, window)
    return ImpliedPath(
        window=cell.window,
        shift=cell.shift,
        intercept=cell.intercept,
        slope=cell.slope,
        correlation=cell.correlation,
        pairs=cell.n,
        lead=lead,
        ahead=locked(np.arange(1, reach + 1)),
        window_mean=read_only(cell.intercept + cell.slope * means[means.size - reach :]),
        single=read_only(single),
        yearly=read_only(target.from_path(y, single)),
    )


def relation_gap(
    driver: ArrayLike, response: ArrayLike, *, window: int, shift: int, min_pairs: int = 24
) -> RelationGap:
    """Response's mean over the window less what the line says for it, through time.

    Parameters
    ----------
    driver, response : array_like of float, shapes (m,) and (n,)
        As for `implied_path`.
    window, shift : int
        The cell; any shift.
    min_pairs : int, default 24
        Fewest pairs to fit the line to.

    Returns
    -------
    RelationGap
        For every period that has both. The line is that of the whole sample, so the gaps of the
        common periods are its residuals: their mean is zero, and none of them is a forecast error.

    Raises
    ------
    ValueError
        As in `lag_cell`, or a value is not finite.
    """
    x, y = outlook_arrays(driver, response)
    common = min(x.size, y.size)
    cell = lag_cell(x[:common], y[:common], window=window, shift=shift, min_pairs=min_pairs)
    xs, ys = trailing_mean(x, window), trailing_mean(y, window)
    first, last = max(0, shift), min(ys.size, xs.size + shift)
    expected = cell.intercept + cell.slope * xs[first - shift : last - shift]
    observed = ys[first:last]
    return RelationGap(
        place=locked(np.arange(first, last) + window - 1),
        observed=read_only(observed),
        expected=read_only(expected),
        gap=read_only(observed - expected),
    )
