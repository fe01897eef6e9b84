"""Which dates a backtest looks from, with which data and by which rules."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.outlook import outlook_arrays, path_reach
from analytics.outlook_target import Target
from analytics.relation import MIN_PAIRS
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, lag_grid, locked

Scheme = Literal["expanding", "rolling"]
Vintages = Callable[[int], tuple[ArrayLike, ArrayLike]]
FIRST_YEARS, JUDGED_YEARS, HORIZON_YEARS = 10, 2, 3


@dataclass(frozen=True, eq=False)
class BacktestPlan:
    """Result of `backtest_plan`: the data, the dates and the rules; a chunk is a year of dates.

    Attributes
    ----------
    driver, response : ndarray of float, read-only
        As given; the outcomes are taken from this response.
    origins : ndarray of int, shape (O,)
        Last period of the response known at each date, counted from 0. The newest is the last
        period there is, whose outcomes are all still to come.
    lead : int
        Periods by which the driver is known beyond the response, at every date.
    horizon : int
        Longest horizon H.
    target : Target
        What is forecast.
    cell : tuple of int
        Window and shift that are kept where there is no grid.
    windows, shifts : tuple of int or None
        Grid of the yearly choice.
    scheme : {"expanding", "rolling"}
        All periods up to the date, or the newest `width`.
    width : int
        Periods of the rolling scheme.
    periods_per_year : int
        Dates in a chunk; cell and own lags are chosen at the first of them.
    vintages : callable or None
        From the last period known to driver and response as they stood then.
    """

    driver: FloatArray
    response: FloatArray
    origins: IntArray
    lead: int
    horizon: int
    target: Target
    cell: tuple[int, int]
    windows: tuple[int, ...] | None
    shifts: tuple[int, ...] | None
    scheme: Scheme
    width: int
    periods_per_year: int
    vintages: Vintages | None

    @property
    def chunks(self) -> int:
        """Number of chunks that `backtest_result` wants."""
        return -(-self.origins.size // self.periods_per_year)


def backtest_plan(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    target: Target,
    windows: Iterable[int] | None = None,
    shifts: Iterable[int] | None = None,
    scheme: Scheme = "expanding",
    width: int | None = None,
    first: int | None = None,
    horizon: int | None = None,
    periods_per_year: int = 12,
    vintages: Vintages | None = None,
) -> BacktestPlan:
    """Lay out a backtest: which dates, from which data, by which rules.

    Parameters
    ----------
    driver, response : array_like of float, shapes (m,) and (n,)
        Growth rates in percent from the same first period on, no gaps.
    window, shift : int
        The cell of the reader; kept at every date where there is no grid.
    target : Target
        What is forecast.
    windows, shifts : iterable of int, optional
        Grid from which the cell is chosen anew every year with the data of that date.
    scheme : {"expanding", "rolling"}
        Whether a date uses all periods before it or the newest `width`.
    width : int, optional
        By default `first`.
    first : int, optional
        Periods of the response known at the first date: by default ten years, half the sample
        where that is less, and enough for the cell.
    horizon : int, optional
        Longest horizon, by default three years.
    periods_per_year : int, default 12
        12, 4 or 1.
    vintages : callable, optional
        Given the place of the response's last known period, returns driver and response as they
        stood when it was the newest, both from the same first period as here. Outcomes are those
        of `response` all the same.

    Returns
    -------
    BacktestPlan

    Raises
    ------
    ValueError
        The cell implies no path, too little history is left, or a rule is not one of those named.
    """
    x, y = outlook_arrays(driver, response)
    path_reach(shift, x.size - y.size)
    if scheme not in get_args(Scheme):
        raise ValueError(f"scheme must be expanding or rolling, but got {scheme!r}")
    if (windows is None) != (shifts is None):
        raise ValueError("windows and shifts must be given together, but only one was")
    year = periods_per_year
    grid = None
    if windows is not None and shifts is not None:
        grid = [tuple(axis.tolist()) for axis in lag_grid(windows, shifts, 10**9)]
        if grid[1][-1] < 1:
            raise ValueError(f"shifts must reach 1 or more, but end at {grid[1][-1]}")
    needed = window + shift + MIN_PAIRS
    start = max(needed, min(FIRST_YEARS * year, y.size // 2)) if first is None else first
    if start < needed or y.size - start < JUDGED_YEARS * year:
        raise ValueError(
            f"a backtest must have at least {needed} periods before its first date and"
            f" {JUDGED_YEARS * year} after it, but the response has {y.size}"
            + (f" and the first date was put at {first}" if first is not None else "")
        )
    steps = HORIZON_YEARS * year if horizon is None else horizon
    if steps < 1:
        raise ValueError(f"horizon must be 1 or more, but got {steps}")
    newest = start if width is None else width
    if newest < needed:
        raise ValueError(f"width must be {needed} periods or more for this cell, but got {newest}")
    return BacktestPlan(
        driver=read_only(x),
        response=read_only(y),
        origins=locked(np.arange(start - 1, y.size)),
        lead=x.size - y.size,
        horizon=steps,
        target=target,
        cell=(window, shift),
        windows=grid[0] if grid else None,
        shifts=grid[1] if grid else None,
        scheme=scheme,
        width=newest,
        periods_per_year=year,
        vintages=vintages,
    )


def known_at(plan: BacktestPlan, origin: int) -> tuple[FloatArray, FloatArray]:
    """Driver and response as a date knew them, cut to the newest where the scheme rolls.

    Raises
    ------
    ValueError
        A vintage does not end where it should, or holds a value that is not finite.
    """
    if plan.vintages is None:
        driver, response = plan.driver[: origin + 1 + plan.lead], plan.response[: origin + 1]
    else:
        driver, response = outlook_arrays(*plan.vintages(origin))
        if response.size != origin + 1:
            raise ValueError(
                f"a vintage must end with period {origin} of the response, but ends with"
                f" {response.size - 1}"
            )
    start = 0 if plan.scheme == "expanding" else max(0, origin + 1 - plan.width)
    return driver[start:], response[start:]
