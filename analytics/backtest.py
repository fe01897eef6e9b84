"""What would have been said at each past date, from the data of that date alone."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.backtest_plan import BacktestPlan, Scheme, backtest_plan, known_at
from analytics.forecasts import MODELS, Choice, choice_at, forecasts_at
from analytics.intervals import error_scale, half_width
from analytics.outlook_target import Target
from analytics.readable import Readable
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked


@dataclass(frozen=True, eq=False)
class BacktestChunk:
    """A year of dates.

    Attributes
    ----------
    forecasts : ndarray of float, shape (M, o, H), read-only
        Of every model.
    last_seen : ndarray of float, shape (o,), read-only
        The target at the date, as it stood then.
    choices : ndarray of int, shape (o, 4), read-only
        Window, shift, own lags, order of the autoregression.
    """

    forecasts: FloatArray
    last_seen: FloatArray
    choices: IntArray


@dataclass(frozen=True, eq=False)
class Backtest(Readable):
    """Result of `backtest_result`; arrays are read-only.

    M models, O dates, H horizons. Horizon h stands in column h - 1.

    Attributes
    ----------
    models : tuple of str
        Names of the models.
    target : Target
        What is forecast; forecasts and outcomes are in its unit.
    origins : ndarray of int, shape (O,)
        Last period of the response known at each date, counted from 0; one after another.
    forecasts : ndarray of float, shape (M, O, H)
        nan where a model had too few periods.
    outcomes : ndarray of float, shape (O, H)
        nan where still to come.
    last_seen : ndarray of float, shape (O,)
        The target at the date itself, as it stood then.
    scale, freedom : ndarray of float, shape (M, O, H)
        Root mean square and degrees of freedom of the errors known at the date; nan where there
        were fewer than 12.
    windows, shifts, own_lags, orders : ndarray of int, shape (O,)
        What was chosen for each date: the cell, the own lags of the direct regressions, and the
        order of the autoregression.
    scheme : {"expanding", "rolling"}
        Which periods were used at each date.
    lead : int
        Periods by which the driver was known beyond the response: a date's line reaches
        ``shifts + lead`` ahead, and says its mean beyond. Vintages may have had another.
    rechosen : bool
        Whether the cell was chosen anew every year.
    """

    models: tuple[str, ...]
    target: Target
    origins: IntArray
    forecasts: FloatArray
    outcomes: FloatArray
    last_seen: FloatArray
    scale: FloatArray
    freedom: FloatArray
    windows: IntArray
    shifts: IntArray
    own_lags: IntArray
    orders: IntArray
    scheme: Scheme
    lead: int
    rechosen: bool

    def __repr__(self) -> str:
        return (
            f"Backtest({self.target.kind} rate, {self.origins.size} dates, {self.scheme},"
            f" {self.outcomes.shape[1]} horizons, {len(self.models)} models)"
        )

    def row(self, model: str) -> int:
        """Place of a model, to index the arrays with."""
        if model not in self.models:
            raise ValueError(f"model must be one of {', '.join(self.models)}, but got {model!r}")
        return self.models.index(model)

    def errors(self, model: str) -> FloatArray:
        """Outcome less forecast, shape (O, H); nan where one of them is not known."""
        missed: FloatArray = self.outcomes - self.forecasts[self.row(model)]
        return missed

    def band(self, model: str, level: float) -> tuple[FloatArray, FloatArray]:
        """Interval of a level as it stood at each date, (low, high), shapes (O, H)."""
        row = self.row(model)
        half = half_width(self.scale[row], self.freedom[row], level)
        return self.forecasts[row] - half, self.forecasts[row] + half


def backtest_chunk(plan: BacktestPlan, index: int) -> BacktestChunk:
    """Forecast at the dates of one year; what was chosen at the first of them holds for all.

    Raises
    ------
    ValueError
        A vintage does not end where it should, or holds a value that is not finite.
    """
    year = plan.periods_per_year
    dates = plan.origins[index * year : (index + 1) * year].tolist()
    forecasts = np.empty((len(MODELS), len(dates), plan.horizon))
    last_seen = np.empty(len(dates))
    choices = np.empty((len(dates), 4), dtype=np.int64)
    choice = Choice(*plan.cell, 0)
    for place, origin in enumerate(dates):
        driver, response = known_at(plan, origin)
        if place == 0:
            choice = choice_at(
                driver,
                response,
                windows=plan.windows,
                shifts=plan.shifts,
                cell=plan.cell,
                max_lags=year,
                periods_per_year=year,
            )
        forecasts[:, place], order = forecasts_at(
            driver,
            response,
            choice,
            horizon=plan.horizon,
            target=plan.target,
            max_lags=year,
            periods_per_year=year,
        )
        last_seen[place] = plan.target.observed(response)[-1]
        choices[place] = choice.window, choice.shift, choice.own_lags, order
    return BacktestChunk(read_only(forecasts), read_only(last_seen), locked(choices))


def backtest_result(plan: BacktestPlan, chunks: list[BacktestChunk]) -> Backtest:
    """Put the chunks together and add outcomes and the spread of errors known at each date."""
    forecasts = np.concatenate([chunk.forecasts for chunk in chunks], axis=1)
    choices = np.concatenate([chunk.choices for chunk in chunks])
    observed = plan.target.observed(plan.response)
    ends = plan.origins[:, None] + np.arange(1, plan.horizon + 1)
    inside = ends < observed.size
    outcomes = np.where(inside, observed[np.minimum(ends, observed.size - 1)], np.nan)
    scale, freedom = known_spread(outcomes - forecasts)
    return Backtest(
        models=MODELS,
        target=plan.target,
        origins=plan.origins,
        forecasts=read_only(forecasts),
        outcomes=read_only(outcomes),
        last_seen=read_only(np.concatenate([chunk.last_seen for chunk in chunks])),
        scale=read_only(scale),
        freedom=read_only(freedom),
        windows=locked(choices[:, 0].copy()),
        shifts=locked(choices[:, 1].copy()),
        own_lags=locked(choices[:, 2].copy()),
        orders=locked(choices[:, 3].copy()),
        scheme=plan.scheme,
        lead=plan.lead,
        rechosen=plan.windows is not None,
    )


def known_spread(errors: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Scale and degrees of freedom at each date from the errors whose outcome it knew.

    Parameters
    ----------
    errors : ndarray of float, shape (M, O, H)
        In the order of time; at horizon h a date knows the errors of h dates ago and before.

    Returns
    -------
    scale, freedom : ndarray of float, shape (M, O, H)
    """
    found = np.full((2, *errors.shape), np.nan)
    dates = np.arange(errors.shape[1])
    for model, rows in enumerate(errors):
        for place, column in enumerate(rows.T):
            known = ~np.isnan(column)
            scale, freedom, _ = error_scale(column[known], place + 1)
            before = np.concatenate(([0], np.cumsum(known)))
            seen = before[np.maximum(0, dates - place)]
            found[0, model, :, place] = scale[seen]
            found[1, model, :, place] = freedom[seen]
    return found[0], found[1]


def backtest(driver: ArrayLike, response: ArrayLike, **rules: object) -> Backtest:
    """Do all chunks of a backtest, one after another; arguments as for `backtest_plan`.

    Examples
    --------
    >>> from analytics.outlook_target import outlook_target
    >>> driver = np.random.default_rng(1).standard_normal(40)
    >>> response = np.roll(driver, 2)
    >>> yearly = outlook_target("yearly", window=1, periods_per_year=1)
    >>> done = backtest(driver, response, window=1, shift=2, target=yearly, periods_per_year=1)
    >>> done
    Backtest(yearly rate, 14 dates, expanding, 3 horizons, 6 models)
    >>> float(np.abs(done.errors("relation")[:-2, :2]).max().round(9))
    0.0
    """
    plan = backtest_plan(driver, response, **rules)  # type: ignore[arg-type]
    return backtest_result(plan, [backtest_chunk(plan, i) for i in range(plan.chunks)])
