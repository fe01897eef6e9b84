"""How a path that was stated earlier turned out."""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.forecast_tests import wilson
from analytics.intervals import LEVELS, Fan
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked


@dataclass(frozen=True, eq=False)
class StatementScore:
    """Result of `statement_score`; arrays read-only, horizon h in column h - 1.

    Attributes
    ----------
    ahead : ndarray of int, shape (H,)
        1 .. H periods ahead.
    outcome, error : ndarray of float, shape (H,)
        What came, and that less the centre; nan where still to come.
    inside : ndarray of float, shape (L, H)
        1 a hit, 0 a miss, nan where there is no outcome or no interval.
    levels : tuple of float
        L levels of the intervals.
    rank : ndarray of float, shape (H,)
        Rank of the outcome in the predicted distribution, 0 to 100: near 50 is the middle. nan
        where there is no outcome.
    known : int
        Outcomes so far.
    """

    ahead: IntArray
    outcome: FloatArray
    error: FloatArray
    inside: FloatArray
    levels: tuple[float, ...]
    rank: FloatArray
    known: int


@dataclass(frozen=True, eq=False)
class RunningCoverage:
    """Result of `running_coverage`; arrays of shape (L,), read-only.

    Attributes
    ----------
    levels : tuple of float
        L levels of the intervals.
    n, hits : ndarray of int
        Outcomes judged, and those inside.
    share, low, high : ndarray of float
        hits / n with Wilson's 95 % interval, 0 to 1; nan without outcomes. It takes outcomes for
        independent: statements that overlap in time are worth fewer.
    """

    levels: tuple[float, ...]
    n: IntArray
    hits: IntArray
    share: FloatArray
    low: FloatArray
    high: FloatArray


def statement_score(
    fan: Fan, outcomes: ArrayLike, *, levels: tuple[float, ...] = LEVELS
) -> StatementScore:
    """Judge a stated fan by what came.

    Parameters
    ----------
    fan : Fan
        As it was stated; rebuild it with `Fan` from what was saved.
    outcomes : array_like of float, shape (k,)
        The target 1 .. k periods after the statement, nan where not known; more than the fan has
        are ignored, fewer leave the rest open.
    levels : tuple of float
        Of the intervals.

    Returns
    -------
    StatementScore
    """
    given = np.asarray(outcomes, dtype=np.float64)
    if given.ndim != 1:
        raise ValueError(f"outcomes must be one series, but got shape {given.shape}")
    came = np.full(fan.centre.size, np.nan)
    came[: given.size] = given[: came.size]
    inside = np.full((len(levels), came.size), np.nan)
    for row, level in enumerate(levels):
        low, high = fan.band(level)
        judged = ~np.isnan(came) & ~np.isnan(low)
        inside[row, judged] = (came[judged] >= low[judged]) & (came[judged] <= high[judged])
    return StatementScore(
        ahead=fan.ahead,
        outcome=read_only(came),
        error=read_only(came - fan.centre),
        inside=read_only(inside),
        levels=levels,
        rank=read_only(100.0 * fan.rank(came)),
        known=int((~np.isnan(came)).sum()),
    )


def running_coverage(
    scores: Iterable[StatementScore], *, horizon: int | None = None
) -> RunningCoverage:
    """Count hits over several statements, at one horizon or over all.

    Parameters
    ----------
    scores : iterable of StatementScore
        With the same levels.
    horizon : int, optional
        Periods ahead; by default all horizons together.

    Returns
    -------
    RunningCoverage

    Raises
    ------
    ValueError
        There is no statement, or the levels differ.
    """
    listed = list(scores)
    if not listed:
        raise ValueError("coverage must have a statement to count, but got none")
    levels = listed[0].levels
    if any(score.levels != levels for score in listed):
        raise ValueError("statements must have the same levels to be counted together")
    columns = slice(None) if horizon is None else slice(horizon - 1, horizon)
    inside = np.concatenate([score.inside[:, columns] for score in listed], axis=1)
    n = (~np.isnan(inside)).sum(axis=1)
    hits = np.nansum(inside, axis=1).astype(np.int64)
    ends = np.array([wilson(int(k), int(m)) for k, m in zip(hits, n, strict=True)])
    share = np.where(n > 0, hits / np.maximum(1, n), np.nan)
    return RunningCoverage(
        levels,
        locked(n),
        locked(hits),
        read_only(share),
        read_only(ends[:, 0]),
        read_only(ends[:, 1]),
    )
