"""Per-cell inference: what one cell is worth once overlap and serial correlation are paid for.

The smoothed months of a cell are worth fewer independent ones, its *effective months*. Everything
here counts those: t, p, the intervals, the region of intercept and slope. None of it pays for a
search over cells.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import fdtri, stdtr, stdtrit

from analytics.autoregression import autoregression
from analytics.cell import LagCell, lag_cell
from analytics.effective import (
    effective_months,
    smoothed_autocorrelations,
    student_t,
    without_season,
)
from analytics.readable import Readable
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, growth_pair, lag_surface, smallest_variance

OUTLINE_STEPS = 72


class Interval(NamedTuple):
    """Ends of a confidence interval."""

    low: float
    high: float


@dataclass(frozen=True, eq=False)
class ParameterPlane:
    """Where intercept and slope may lie together; arrays are read-only.

    Attributes
    ----------
    estimate : ndarray of float, shape (2,)
        Intercept, slope.
    covariance : ndarray of float, shape (2, 2)
        Of the two, paid for overlap and serial correlation.
    robust : ndarray of float, shape (73, 2)
        Closed outline of the joint confidence region from `covariance`: intercept, slope.
    naive : ndarray of float, shape (73, 2)
        The same as if the pairs were independent.
    level : float
        Confidence level of both, 0 to 1.
    """

    estimate: FloatArray
    covariance: FloatArray
    robust: FloatArray
    naive: FloatArray
    level: float


@dataclass(frozen=True, eq=False)
class CellInference(Readable):
    """Inference on one cell, as if it had been the only one looked at.

    Attributes
    ----------
    window, shift, n : int
        The cell and its number of pairs.
    periods_per_year : int
        Seasonal means taken out of both series first: 12, 4, or 1 for none.
    level : float
        Confidence level of the intervals, 0 to 1.
    correlation, slope, intercept : float
        Of the cell once the seasonal means are out. Equal to those of `lag_cell` when the window
        is a whole number of years, and close to them when the series have no seasonal pattern.
    effective_months : float
        How many independent months the n pairs are worth; 3.1 at least, n at most.
    t, p : float
        ``slope / se_robust``, and its two-sided p on Student's t with `effective_months` - 2.
    correlation_interval, slope_interval, intercept_interval : Interval
        Correlation and slope leave out zero exactly when p is below 1 - `level`.
    se_robust, se_intercept : float
        Standard errors of slope and intercept.
    plane : ParameterPlane
        Joint region of intercept and slope, with the naive one beside it.
    """

    window: int
    shift: int
    n: int
    periods_per_year: int
    level: float
    correlation: float
    slope: float
    intercept: float
    effective_months: float
    t: float
    p: float
    correlation_interval: Interval
    slope_interval: Interval
    intercept_interval: Interval
    se_robust: float
    se_intercept: float
    plane: ParameterPlane

    def __repr__(self) -> str:
        return (
            f"CellInference(window {self.window}, shift {self.shift}, {self.n} pairs worth"
            f" {self.effective_months:.1f} months, t {self.t:.2f}, p {self.p:.3g})"
        )


@dataclass(frozen=True, eq=False)
class SurfaceInference(Readable):
    """Per-cell inference in every cell of a grid; arrays are read-only.

    Attributes
    ----------
    windows : ndarray of int, shape (W,)
        Months averaged.
    shifts : ndarray of int, shape (S,)
        Months by which the driver leads.
    periods_per_year : int
        Seasonal means taken out of both series first: 12, 4, or 1 for none.
    correlation : ndarray of float, shape (W, S)
        Once the seasonal means are out: the correlation that `t` and `p` speak of.
    effective_months, t, p : ndarray of float, shape (W, S)
        As in `CellInference`; nan where the cell has too few pairs or does not vary.
    p_naive : ndarray of float, shape (W, S)
        Two-sided p of the cell as `lag_cell` has it: pairs taken for independent.
    """

    windows: IntArray
    shifts: IntArray
    periods_per_year: int
    correlation: FloatArray
    effective_months: FloatArray
    t: FloatArray
    p: FloatArray
    p_naive: FloatArray

    def __repr__(self) -> str:
        return (
            f"SurfaceInference(windows {self.windows[0]} to {self.windows[-1]}, shifts"
            f" {self.shifts[0]} to {self.shifts[-1]}, {int(np.isfinite(self.p).sum())} cells)"
        )


def cell_inference(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    periods_per_year: int = 12,
    level: float = 0.95,
    min_pairs: int = 24,
) -> CellInference:
    """t, p, intervals and joint region of one cell, paid for overlap and serial correlation.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Growth rates in percent, one a period, same periods, no gaps.
    window, shift : int
        The cell; shift above 0: the driver leads.
    periods_per_year : int, default 12
        12 for months, 4 for quarters; 1 when the series carry no seasonal pattern.
    level : float, default 0.95
        Confidence level, above 0 and below 1.
    min_pairs : int, default 24
        Fewest pairs accepted.

    Returns
    -------
    CellInference

    Raises
    ------
    ValueError
        As in `lag_cell`, or `level` is not between 0 and 1.

    Notes
    -----
    *Seasonal means.* Two series with a fixed seasonal pattern are correlated at every short
    window by chance of the calendar alone, and no count of effective months mends that: with
    the raw r, unrelated seasonal series are called related in 8 to 57 % of trials at a nominal
    5 %. Estimate, effective months and p therefore all refer to the series without their
    seasonal means, which held 4.0 to 6.6 % (own measurement, tests/bench/calibration_cells.py).

    *Effective months* N take the autocorrelations of the two whole smoothed series up to a third
    of their length. The slope's standard error is ``sqrt(SSR / (Sxx (N - 2)))``, so that
    ``t = r sqrt((N - 2) / (1 - r^2))``. The interval of the correlation holds every r_0 that a
    test on Fisher's scale, atanh r, would keep, with the variance that holds under r_0 when
    driver and residual are unrelated:
    ``(1 - r_0^2) / N + r_0^2 (1 / N_x + 1 / N_e) / 2``, N_x and N_e from the squares of the
    autocorrelations of driver and residual (the delta method on Bartlett's variances).

    *Intercept.* The level of the line is a mean, and the autocorrelations of a smoothed series
    say too little about the variance of its mean. That variance is the long-run variance of the
    monthly residuals over n, ``s^2 / (1 - c_1 - .. - c_p)^2 / n``, from an autoregression by
    Burg's method; level and slope are taken for uncorrelated. The joint region is
    ``(v - estimate)' C^-1 (v - estimate) <= 2 F(2, N - 2)``, and the naive one ordinary least
    squares of the same line with n - 2.
    """
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be above 0 and below 1, but got {level}")
    x, y = (without_season(v, periods_per_year) for v in growth_pair(driver, response))
    cell = lag_cell(x, y, window=window, shift=shift, min_pairs=min_pairs)
    rho = [smoothed_autocorrelations(series, np.array([cell.window]))[0] for series in (x, y)]
    effective = float(effective_months(rho[0], rho[1], cell.n))
    freedom = effective - 2.0
    t = float(student_t(cell.correlation, effective))
    quantile = float(stdtrit(freedom, 0.5 + level / 2.0))
    rest = smoothed_autocorrelations(cell.residuals, np.array([1]))[0]
    own = [float(effective_months(each, each, cell.n)) for each in (rho[0], rest)]
    added_variance = effective * (0.5 / own[0] + 0.5 / own[1])

    mean = float(cell.driver.mean())
    sxx = float(((cell.driver - mean) ** 2).sum())
    slope_variance = float(cell.residuals @ cell.residuals) / (sxx * freedom)
    level_variance = _level_variance(x, y, cell)
    covariance = _line_covariance(level_variance, slope_variance, mean)
    naive = _line_covariance(cell.sigma**2 / cell.n, cell.se_naive**2, mean)
    estimate = np.array([cell.intercept, cell.slope])
    se_slope, se_intercept = float(np.sqrt(covariance[1, 1])), float(np.sqrt(covariance[0, 0]))
    return CellInference(
        window=cell.window,
        shift=cell.shift,
        n=cell.n,
        periods_per_year=periods_per_year,
        level=level,
        correlation=cell.correlation,
        slope=cell.slope,
        intercept=cell.intercept,
        effective_months=effective,
        t=t,
        p=float(2.0 * stdtr(freedom, -abs(t))),
        correlation_interval=_correlation_interval(
            cell.correlation, quantile, freedom, added_variance
        ),
        slope_interval=_around(cell.slope, quantile * se_slope),
        intercept_interval=_around(cell.intercept, quantile * se_intercept),
        se_robust=se_slope,
        se_intercept=se_intercept,
        plane=ParameterPlane(
            estimate=read_only(estimate),
            covariance=read_only(covariance),
            robust=_outline(estimate, covariance, float(fdtri(2.0, freedom, level))),
            naive=_outline(estimate, naive, float(fdtri(2.0, cell.n - 2.0, level))),
            level=level,
        ),
    )


def surface_inference(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    windows: Iterable[int],
    shifts: Iterable[int],
    same_months: bool = False,
    periods_per_year: int = 12,
    min_pairs: int = 24,
) -> SurfaceInference:
    """Effective months, t and p of every cell of a grid: `cell_inference` without its intervals.

    Parameters
    ----------
    driver, response, windows, shifts, same_months, min_pairs
        As for `lag_surface`.
    periods_per_year : int, default 12
        As for `cell_inference`.

    Returns
    -------
    SurfaceInference
        Arrays of shape (W, S).

    Raises
    ------
    ValueError
        As in `lag_surface`.
    """
    raw = growth_pair(driver, response)
    lengths, leads = list(windows), list(shifts)
    x, y = (without_season(v, periods_per_year) for v in raw)
    shown, surface = (
        lag_surface(
            *pair, windows=lengths, shifts=leads, same_months=same_months, min_pairs=min_pairs
        )
        for pair in (raw, (x, y))
    )
    defined = np.isfinite(surface.correlation)
    effective = np.full(surface.pairs.shape, np.nan)
    rho = [smoothed_autocorrelations(series, surface.windows) for series in (x, y)]
    for row in np.flatnonzero(defined.any(axis=1)):
        effective[row] = effective_months(rho[0][row], rho[1][row], surface.pairs[row])
    effective = np.where(defined, effective, np.nan)
    t = student_t(surface.correlation, effective)
    t_naive = student_t(shown.correlation, surface.pairs)
    return SurfaceInference(
        windows=surface.windows,
        shifts=surface.shifts,
        periods_per_year=periods_per_year,
        correlation=surface.correlation,
        effective_months=read_only(effective),
        t=read_only(t),
        p=read_only(2.0 * stdtr(effective - 2.0, -np.abs(t))),
        p_naive=read_only(2.0 * stdtr(np.maximum(1.0, surface.pairs - 2.0), -np.abs(t_naive))),
    )


def _level_variance(x: FloatArray, y: FloatArray, cell: LagCell) -> float:
    """Variance of the mean residual: long-run variance of the monthly residuals over n."""
    first = cell.start - cell.window + 1
    months = np.arange(first, first + cell.n + cell.window - 1)
    residuals = y[months + cell.shift] - cell.slope * x[months]
    residuals -= residuals.mean()
    if residuals.var() <= smallest_variance(y):
        return 0.0
    noise = autoregression(residuals)
    return noise.variance / (1.0 - float(noise.coefficients.sum())) ** 2 / cell.n


def _line_covariance(level: float, slope: float, mean: float) -> FloatArray:
    """Covariance of intercept and slope from the variances of level and slope at `mean`."""
    return np.array([[level + mean**2 * slope, -mean * slope], [-mean * slope, slope]])


def _outline(estimate: FloatArray, covariance: FloatArray, quantile: float) -> FloatArray:
    """Outline of (v - estimate)' C^-1 (v - estimate) = 2 F, shape (73, 2)."""
    angle = np.linspace(0.0, 2.0 * np.pi, OUTLINE_STEPS + 1)
    # From the slope upwards, so that a line without level variance still has a factor.
    slope = np.sqrt(covariance[1, 1])
    tilt = covariance[0, 1] / slope if slope > 0 else 0.0
    rest = np.sqrt(max(0.0, covariance[0, 0] - tilt**2))
    factor = np.array([[tilt, rest], [slope, 0.0]])
    circle = np.stack([np.cos(angle), np.sin(angle)])
    outline = estimate + np.sqrt(2.0 * quantile) * (factor @ circle).T
    outline[-1] = outline[0]
    return read_only(outline)


def _around(centre: float, half: float) -> Interval:
    return Interval(centre - half, centre + half)


def _correlation_interval(
    r: float, quantile: float, freedom: float, added_variance: float
) -> Interval:
    """All r_0 that a test with the variance under r_0 keeps; `added_variance` is that of r_0^2."""
    if abs(r) == 1.0:
        return Interval(r, r)
    z = float(np.arctanh(r))
    half = float(np.arctanh(quantile / np.sqrt(freedom + quantile**2)))
    widest = half * max(1.0, added_variance) ** 0.5

    def end(sign: float) -> float:
        near, far = z, z + sign * widest
        for _ in range(60):
            middle = (near + far) / 2.0
            square = float(np.tanh(middle)) ** 2
            reach = half * (1.0 - square + square * added_variance) ** 0.5
            near, far = (middle, far) if sign * (middle - z) < reach else (near, middle)
        return float(np.tanh(near))

    return Interval(end(-1.0), end(1.0))
