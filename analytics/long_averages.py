"""Long averages across economies: does the one with more money growth have more inflation."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtrit

from analytics.cell import covariance_ellipse
from analytics.series import PERIODS_PER_YEAR, FloatArray, Series, read_only

FEWEST = 4


@dataclass(frozen=True, eq=False)
class LongAverages:
    """Result of `long_averages`; arrays are read-only.

    Attributes
    ----------
    names : tuple of str, length n
        Economies in the fit, in the order given.
    driver, response : ndarray of float, shape (n,)
        Averages of each, percent a year.
    log : bool
        Whether the fit is between base-10 logarithms of the averages.
    slope, intercept : float
        Least-squares line: percent per percent, or on logarithms the elasticity and the logarithm
        of the response where the driver is 1.
    slope_interval : tuple of float
        95 % interval of the slope, as if the economies were independent of each other.
    correlation : float
        Pearson's r, of the logarithms where `log`.
    line : ndarray of float, shape (64, 2)
        The line over the economies' range, driver and response in percent a year.
    ellipse : ndarray of float, shape (73, 2)
        Outline at two standard deviations, in percent a year.
    slope_without, intercept_without : ndarray of float, shape (n,)
        The line when one economy is left out.
    most_telling : str
        Economy whose removal changes the slope most.
    left_out : tuple of str
        Economies that have no logarithm: an average at or below zero.
    """

    names: tuple[str, ...]
    driver: FloatArray
    response: FloatArray
    log: bool
    slope: float
    intercept: float
    slope_interval: tuple[float, float]
    correlation: float
    line: FloatArray
    ellipse: FloatArray
    slope_without: FloatArray
    intercept_without: FloatArray
    most_telling: str
    left_out: tuple[str, ...]

    def __repr__(self) -> str:
        return (
            f"LongAverages({len(self.names)} economies{', logarithms' if self.log else ''},"
            f" slope {self.slope:.3f}, r {self.correlation:.3f})"
        )

    def line_without(self, place: int) -> FloatArray:
        """Line without one economy over the range of all, shape (64, 2), percent a year."""
        return _line(
            self.driver, self.intercept_without[place], self.slope_without[place], log=self.log
        )


def yearly_average(rate: Series, *, periods_per_year: int | None = None) -> float:
    """Mean of a growth rate, in percent a year.

    Parameters
    ----------
    rate : Series
        Percent a period.
    periods_per_year : int, optional
        What the mean is multiplied by; the periods that a year has by default. 1 for a rate that
        is a yearly one to begin with.

    Returns
    -------
    float
        Of log growth rates it is exact: the log change from first to last over the years between.

    Raises
    ------
    ValueError
        A period has no value.
    """
    if rate.gaps.size:
        raise ValueError(f"{rate.name!r} must have no gap, but {rate.gaps[0]} is missing")
    factor = PERIODS_PER_YEAR[rate.frequency] if periods_per_year is None else periods_per_year
    return float(rate.values.mean()) * factor


def long_averages(
    names: Sequence[str], driver: ArrayLike, response: ArrayLike, *, log: bool = False
) -> LongAverages:
    """Fit averages of the response on averages of the driver, one point an economy.

    Parameters
    ----------
    names : sequence of str, length N
        Economies.
    driver, response : array_like of float, shape (N,)
        Averages in percent a year, over the same span for both sides of an economy.
    log : bool, default False
        Fit logarithms, so that hyperinflations do not own the line; economies with an average at
        or below zero are left out and named.

    Returns
    -------
    LongAverages

    Raises
    ------
    ValueError
        Lengths differ, a value is not finite, fewer than four economies are left, or the driver's
        or response's averages are all the same, with all economies or without one.

    Notes
    -----
    Leaving one out uses ``b - (x_i - mean) e_i / (Sxx (1 - h_i))`` with h_i the leverage (Belsley,
    Kuh and Welsch 1980, Regression Diagnostics, ch. 2; chapter from memory), not n refits.

    Examples
    --------
    >>> found = long_averages(list("abcde"), [1, 2, 3, 4, 50], [2, 3, 4, 5, 51.0])
    >>> round(found.slope, 6), round(found.intercept, 6), found.left_out
    (1.0, 1.0, ())
    """
    x, y = (np.asarray(values, dtype=np.float64) for values in (driver, response))
    labels = tuple(names)
    if x.ndim != 1 or y.shape != x.shape or len(labels) != x.size:
        raise ValueError(
            f"names, driver and response must have one value an economy, but got {len(labels)},"
            f" {x.shape} and {y.shape}"
        )
    if not (np.isfinite(x).all() and np.isfinite(y).all()):
        raise ValueError("averages must be finite, but one is not")
    kept = (x > 0) & (y > 0) if log else np.ones(x.size, dtype=bool)
    left_out = tuple(label for label, there in zip(labels, kept, strict=True) if not there)
    labels = tuple(label for label, there in zip(labels, kept, strict=True) if there)
    x, y = x[kept], y[kept]
    if x.size < FEWEST:
        above = " with averages above zero" if log else ""
        raise ValueError(
            f"long averages must have at least {FEWEST} economies{above}, but got {x.size}"
        )
    u, v = (np.log10(x), np.log10(y)) if log else (x, y)
    du, dv = u - u.mean(), v - v.mean()
    suu, svv, suv = float(du @ du), float(dv @ dv), float(du @ dv)
    leverage = 1.0 / u.size + du**2 / suu if suu > 0 else np.ones(u.size)
    if svv <= 0 or suu <= 1e-24 * float(u @ u) or leverage.max() > 1.0 - 1e-9:
        raise ValueError("averages of the economies must differ, but all or all but one are equal")
    slope, r = suv / suu, suv / float(np.sqrt(suu * svv))
    intercept = float(v.mean() - slope * u.mean())
    residual = dv - slope * du
    spread = float(np.sqrt(residual @ residual / (u.size - 2) / suu))
    reach = float(stdtrit(u.size - 2, 0.975)) * spread
    without = slope - du * residual / (suu * (1.0 - leverage))
    centre_u = (u.sum() - u) / (u.size - 1)
    centre_v = (v.sum() - v) / (u.size - 1)
    outline = covariance_ellipse(
        (float(u.mean()), float(v.mean())),
        (float(np.sqrt(suu / (u.size - 1))), float(np.sqrt(svv / (u.size - 1)))),
        min(1.0, max(-1.0, r)),
    )
    return LongAverages(
        names=labels,
        driver=read_only(x),
        response=read_only(y),
        log=log,
        slope=slope,
        intercept=intercept,
        slope_interval=(slope - reach, slope + reach),
        correlation=r,
        line=_line(x, intercept, slope, log=log),
        ellipse=read_only(10.0**outline) if log else outline,
        slope_without=read_only(without),
        intercept_without=read_only(centre_v - without * centre_u),
        most_telling=labels[int(np.abs(without - slope).argmax())],
        left_out=left_out,
    )


def _line(x: FloatArray, intercept: float, slope: float, *, log: bool) -> FloatArray:
    """Points of a line over the range of x; on logarithms it is a power."""
    low, high = float(x.min()), float(x.max())
    if log:
        along = np.geomspace(low, high, 64)
        return read_only(np.column_stack((along, 10.0 ** (intercept + slope * np.log10(along)))))
    along = np.linspace(low, high, 64)
    return read_only(np.column_stack((along, intercept + slope * along)))
