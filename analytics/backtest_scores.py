"""How the forecasts of a backtest turned out: errors, tests against benchmarks, coverage."""

from dataclasses import dataclass

import numpy as np

from analytics.backtest import Backtest
from analytics.forecast_tests import (
    Coverage,
    DieboldMariano,
    diebold_mariano,
    interval_coverage,
    theil_u2,
)
from analytics.forecasts import BENCHMARKS
from analytics.intervals import LEVELS
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked


@dataclass(frozen=True, eq=False)
class Scores:
    """Result of `backtest_scores`; arrays read-only, horizon h in column h - 1.

    Every figure of a horizon is over the dates for which model and all benchmarks have a forecast
    and the outcome is known.

    Attributes
    ----------
    model : str
        Whose scores.
    benchmarks : tuple of str
        B names.
    ahead, n : ndarray of int, shape (H,)
        Horizon, and dates compared.
    rmse, mae, bias : ndarray of float, shape (H,)
        Root mean square, mean absolute and mean error (outcome less forecast), in the target's
        unit.
    u2 : ndarray of float, shape (H,)
        Theil's U2 against the target's last value.
    benchmark_rmse, ratio : ndarray of float, shape (B, H)
        Of each benchmark; ratio is the model's rmse over it, below 1 where the model was better.
    dm : tuple of tuple of DieboldMariano
        ``dm[b][h - 1]``, squared errors.
    levels : tuple of float
        L nominal levels of the intervals.
    coverage : tuple of tuple of Coverage
        ``coverage[l][h - 1]`` over every h-th date, which do not overlap.
    share : ndarray of float, shape (L, H)
        Share of outcomes inside over all dates with an interval, overlapping.
    intervals : ndarray of int, shape (H,)
        Dates with an interval and an outcome.
    """

    model: str
    benchmarks: tuple[str, ...]
    ahead: IntArray
    n: IntArray
    rmse: FloatArray
    mae: FloatArray
    bias: FloatArray
    u2: FloatArray
    benchmark_rmse: FloatArray
    ratio: FloatArray
    dm: tuple[tuple[DieboldMariano, ...], ...]
    levels: tuple[float, ...]
    coverage: tuple[tuple[Coverage, ...], ...]
    share: FloatArray
    intervals: IntArray

    def beats(self, benchmark: str, horizon: int, level: float = 0.05) -> bool:
        """Whether the model beat a benchmark at a horizon: smaller errors, one-sided p at most."""
        row = self.benchmarks.index(benchmark)
        found = self.dm[row][horizon - 1]
        return bool(self.ratio[row, horizon - 1] < 1.0 and found.p_better <= level)


def backtest_scores(
    done: Backtest,
    model: str,
    *,
    benchmarks: tuple[str, ...] = BENCHMARKS,
    levels: tuple[float, ...] = LEVELS,
) -> Scores:
    """Score one model of a backtest against benchmarks of the same backtest.

    Parameters
    ----------
    done : Backtest
        Forecasts and outcomes.
    model : str
        Whose scores.
    benchmarks : tuple of str
        Against whom.
    levels : tuple of float
        Of the intervals.

    Returns
    -------
    Scores

    Raises
    ------
    ValueError
        A name is not one of the models.
    """
    errors = done.errors(model)
    others = np.stack([done.errors(name) for name in benchmarks])
    common = ~np.isnan(errors) & ~np.isnan(others).any(axis=0)
    bands = [done.band(model, level) for level in levels]
    horizons = errors.shape[1]
    moments = np.full((4, horizons), np.nan)
    against = np.full((len(benchmarks), horizons), np.nan)
    share = np.full((len(levels), horizons), np.nan)
    intervals = np.zeros(horizons, dtype=np.int64)
    tests: list[list[DieboldMariano]] = [[] for _ in benchmarks]
    covered: list[list[Coverage]] = [[] for _ in levels]
    for place in range(horizons):
        rows = np.flatnonzero(common[:, place])
        mine = errors[rows, place]
        if rows.size:
            moments[:, place] = (
                np.sqrt(np.mean(mine**2)),
                np.abs(mine).mean(),
                mine.mean(),
                theil_u2(
                    done.forecasts[done.row(model), rows, place],
                    done.outcomes[rows, place],
                    done.last_seen[rows],
                ),
            )
        for b, column in enumerate(others[:, rows, place]):
            tests[b].append(diebold_mariano(mine**2, column**2, horizon=place + 1))
            if rows.size:
                against[b, place] = np.sqrt(np.mean(column**2))
        for k, (low, high) in enumerate(bands):
            judged = ~np.isnan(low[:, place]) & ~np.isnan(errors[:, place])
            outcome = done.outcomes[judged, place]
            inside = (outcome >= low[judged, place]) & (outcome <= high[judged, place])
            intervals[place] = inside.size
            if inside.size:
                share[k, place] = inside.mean()
            # Counted back from the newest, so that the last outcome is among them.
            covered[k].append(interval_coverage(inside[:: -(place + 1)][::-1], levels[k]))
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = moments[0] / against
    return Scores(
        model=model,
        benchmarks=benchmarks,
        ahead=locked(np.arange(1, horizons + 1)),
        n=locked(common.sum(axis=0)),
        rmse=read_only(moments[0]),
        mae=read_only(moments[1]),
        bias=read_only(moments[2]),
        u2=read_only(moments[3]),
        benchmark_rmse=read_only(against),
        ratio=read_only(ratio),
        dm=tuple(tuple(row) for row in tests),
        levels=levels,
        coverage=tuple(tuple(row) for row in covered),
        share=read_only(share),
        intervals=locked(intervals),
    )


def squared_error_gain(
    done: Backtest, model: str, benchmark: str, *, horizon: int
) -> tuple[IntArray, FloatArray]:
    """Cumulative squared error of a benchmark less that of a model, through time.

    Parameters
    ----------
    done : Backtest
        Forecasts and outcomes.
    model, benchmark : str
        Two of its models.
    horizon : int
        Periods ahead, from 1.

    Returns
    -------
    origins : ndarray of int, shape (k,)
        Dates at which both had a forecast and whose outcome is known.
    gain : ndarray of float, shape (k,)
        It rises where the model helped (Goyal and Welch 2008, Review of Financial Studies 21).
    """
    if not 1 <= horizon <= done.outcomes.shape[1]:
        raise ValueError(f"horizon must be from 1 to {done.outcomes.shape[1]}, but got {horizon}")
    mine, other = (done.errors(name)[:, horizon - 1] for name in (model, benchmark))
    known = ~np.isnan(mine) & ~np.isnan(other)
    return locked(done.origins[known].copy()), read_only(
        np.cumsum(other[known] ** 2 - mine[known] ** 2)
    )
