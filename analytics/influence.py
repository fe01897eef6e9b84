"""How much of a relation rests on one episode: the cell refitted without each run of months."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike

from analytics.partial_cell import BoolArray, PartialCell, Relation
from analytics.readable import Readable
from analytics.series import FloatArray, read_only
from analytics.surface import locked

Band = Literal["spread over history", "leans on one episode", "one-episode result"]

_TURN = 0.5  # robust z beyond which the driver counts as high or low


@dataclass(frozen=True, eq=False)
class Episode(Readable):
    """A run of pairs in which the driver stays high or low, and the cell without that run.

    Attributes
    ----------
    start, stop : int
        The pairs ``start .. stop - 1`` of the cell.
    first_month, stop_month : int
        The same run in positions of the driver: the last months of its windows are
        ``first_month .. stop_month - 1``. The response is read `shift` months later.
    high : bool
        Whether the driver is above its median there.
    share : float
        Part of the cell's covariance, 1 = all of it; below 0 where the run works against the
        rest. The shares of all episodes add to 1.
    slope_without, correlation_without, p_without : float
        The cell refitted without the run, with its per-cell p by effective months; nan where
        fewer than three pairs are left or a side does not vary.
    effective_without : float
        Effective months left.
    change : float
        ``slope_without / slope - 1``: -0.62 means that the slope shrinks by 62 percent.
    too_few_left : bool
        Whether fewer than five windows of pairs are left, too few for a refit to mean much.
    """

    start: int
    stop: int
    first_month: int
    stop_month: int
    high: bool
    share: float
    slope_without: float
    correlation_without: float
    p_without: float
    effective_without: float
    change: float
    too_few_left: bool

    @property
    def weight(self) -> float:
        """Size of `change`; at least 1 where too few pairs are left, and never nan."""
        size = abs(self.change)
        if not self.too_few_left:
            return size
        return max(1.0, size) if np.isfinite(size) else 1.0


@dataclass(frozen=True, eq=False)
class InfluenceResult(Readable):
    """Result of `episodes`.

    Attributes
    ----------
    window, shift : int
        The cell, in months.
    slope, correlation, p, effective_months : float
        The cell with all its pairs, as `cell_inference` has it.
    episodes : tuple of Episode
        In calendar order; they tile the pairs.
    fragility : float
        Largest relative change of the slope when one episode is removed.
    cause : int
        Position in `episodes` of the one that changes the slope most.
    band : {"spread over history", "leans on one episode", "one-episode result"}
        Fragility below 1/3, below 1/2, or from 1/2 on.
    removals : int
        How many episodes it takes until the relation is no longer significant at `level`, when
        at each step the one that raises p most is removed; 0 if it is not to begin with.
    level : float
        Significance level behind `removals`.
    """

    window: int
    shift: int
    slope: float
    correlation: float
    p: float
    effective_months: float
    episodes: tuple[Episode, ...]
    fragility: float
    cause: int
    band: Band
    removals: int
    level: float

    def to_frame(self) -> pd.DataFrame:
        """One line an episode, in calendar order: its place, share, and the slope without it."""
        return pd.concat([episode.to_frame() for episode in self.episodes], ignore_index=True)


@dataclass(frozen=True, eq=False)
class CellWithout(Readable):
    """Result of `cell_without`; arrays are read-only.

    Attributes
    ----------
    driver, response : ndarray of float, shape (n,)
        All pairs of the cell without seasonal means, the ones left out included.
    kept : ndarray of bool, shape (n,)
        Pairs that the line is fitted to.
    slope, intercept, correlation, p, effective_months : float
        The relation over the pairs kept.
    """

    driver: FloatArray
    response: FloatArray
    kept: BoolArray
    slope: float
    intercept: float
    correlation: float
    p: float
    effective_months: float


def _runs(driver: FloatArray, shortest: int) -> list[int]:
    """Borders 0 = b_0 < .. < b_K = n of the runs in which the smoothed driver is high or low."""
    deviation = driver - np.median(driver)
    spread = 1.4826 * float(np.median(np.abs(deviation)))
    if spread == 0.0:  # more than half of the values are equal
        spread = 1.2533 * float(np.mean(np.abs(deviation)))
    mark = np.where(deviation > _TURN * spread, 1, np.where(deviation < -_TURN * spread, -1, 0))
    placed = np.flatnonzero(mark)
    if placed.size == 0:
        return [0, driver.size]
    latest = np.maximum.accumulate(np.where(mark != 0, np.arange(mark.size), -1))
    state = mark[np.where(latest < 0, placed[0], latest)]  # before the first mark: as the first
    borders = [0, *(np.flatnonzero(np.diff(state)) + 1).tolist(), driver.size]
    while len(borders) > 2:
        lengths = np.diff(borders)
        short = int(lengths.argmin())
        if lengths[short] >= shortest:
            break
        # The run turns over and joins its neighbours: both of its borders inside the sample go.
        inside = {borders[short], borders[short + 1]} - {0, driver.size}
        borders = [border for border in borders if border not in inside]
    return borders


def episodes(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    periods_per_year: int = 12,
    level: float = 0.05,
) -> InfluenceResult:
    """Cut the history into episodes of the driver and refit the cell without each of them.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates in percent, one a month, same months, no gaps.
    window, shift : int
        The cell, in months; shift > 0 means that the driver leads.
    periods_per_year : int, default 12
        An episode lasts at least a year and at least a window. Seasonal means are taken out of
        both series first, as `cell_inference` does; 1 leaves them in.
    level : float, default 0.05
        Per-cell significance level behind `InfluenceResult.removals`.

    Returns
    -------
    InfluenceResult

    Raises
    ------
    ValueError
        The series cannot be paired, the cell has fewer than 24 pairs, or a side is constant.

    Notes
    -----
    The smoothed driver's robust z (deviation from the median over 1.4826 times the median
    absolute deviation) turns the state to high above +0.5 and to low below -0.5; in between the
    state stays. The shortest run, while it is shorter than a year or a window, turns over and
    joins its neighbours. So the runs tile the sample, and with deviations from the means of all
    pairs the shares of the covariance add to 1.

    Without a run, p is that of the pairs left, each at its place in the calendar: see
    `partial_cell`.

    Examples
    --------
    >>> rng = np.random.default_rng(3)
    >>> driver, response = rng.standard_normal((2, 360))
    >>> hump = 4 * np.exp(-0.5 * ((np.arange(360) - 180) / 12) ** 2)  # one shared event
    >>> result = episodes(driver + hump, response + hump, window=6, shift=0)
    >>> result.band, result.removals, result.episodes[result.cause].high
    ('one-episode result', 1, True)
    """
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be between 0 and 1, but got {level}")
    cell = PartialCell(
        driver, response, window=window, shift=shift, periods_per_year=periods_per_year
    )
    borders = _runs(cell.driver, max(periods_per_year, window))
    spans = list(pairwise(borders))
    whole, *rest = cell.relations(
        np.stack([cell.all_pairs, *(_kept(cell.n, [span]) for span in spans)])
    )
    found = tuple(
        _episode(cell, whole, without, *span) for without, span in zip(rest, spans, strict=True)
    )
    cause = int(np.argmax([episode.weight for episode in found]))
    fragility = found[cause].weight
    return InfluenceResult(
        window=window,
        shift=shift,
        slope=whole.slope,
        correlation=whole.correlation,
        p=whole.p,
        effective_months=whole.effective_months,
        episodes=found,
        fragility=fragility,
        cause=cause,
        band=_band(fragility),
        removals=_removals(cell, spans, whole.p, level),
        level=level,
    )


def _episode(
    cell: PartialCell, whole: Relation, without: Relation, start: int, stop: int
) -> Episode:
    """Measure one run of pairs; `without` is the relation over the others."""
    x, y = cell.driver - cell.driver.mean(), cell.response - cell.response.mean()
    products = x * y
    return Episode(
        start=start,
        stop=stop,
        first_month=cell.first_month + start,
        stop_month=cell.first_month + stop,
        high=bool(np.median(cell.driver[start:stop]) > np.median(cell.driver)),
        share=float(products[start:stop].sum() / products.sum()),
        slope_without=without.slope,
        correlation_without=without.correlation,
        p_without=without.p,
        effective_without=without.effective_months,
        change=without.slope / whole.slope - 1.0,
        too_few_left=cell.n - (stop - start) < 5 * cell.window or not np.isfinite(without.slope),
    )


def _kept(n: int, spans: Sequence[tuple[int, int]]) -> BoolArray:
    """Mask of the n pairs without some runs."""
    kept = np.ones(n, dtype=bool)
    for start, stop in spans:
        kept[start:stop] = False
    return kept


def _band(fragility: float) -> Band:
    if fragility < 1 / 3:
        return "spread over history"
    return "leans on one episode" if fragility < 1 / 2 else "one-episode result"


def _removals(cell: PartialCell, spans: list[tuple[int, int]], p: float, level: float) -> int:
    """How many runs have to go, the most telling first, until p exceeds `level`."""
    gone: list[tuple[int, int]] = []
    left = list(spans)
    while p <= level and left:
        kept = np.stack([_kept(cell.n, [*gone, span]) for span in left])
        enough = kept.sum(axis=1) >= 5 * cell.window
        trials = [
            relation.p if usable and np.isfinite(relation.p) else 1.0
            for relation, usable in zip(cell.relations(kept), enough, strict=True)
        ]
        most = int(np.argmax(trials))
        p = trials[most]
        gone.append(left.pop(most))
    return len(gone)


def cell_without(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    episode: Episode,
    periods_per_year: int = 12,
) -> CellWithout:
    """One cell without the pairs of an episode that `episodes` found in the same cell.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates in percent, one a month, same months, no gaps.
    window, shift : int
        The cell, in months.
    episode : Episode
        Run of pairs to leave out.
    periods_per_year : int, default 12
        As for `episodes`.

    Returns
    -------
    CellWithout

    Raises
    ------
    ValueError
        The series cannot be paired, the cell has fewer than 24 pairs, a side is constant, or
        the episode lies outside the cell.
    """
    cell = PartialCell(
        driver, response, window=window, shift=shift, periods_per_year=periods_per_year
    )
    if not 0 <= episode.start < episode.stop <= cell.n:
        raise ValueError(
            f"episode must lie within the {cell.n} pairs of the cell, but got"
            f" {episode.start} to {episode.stop}"
        )
    kept = _kept(cell.n, [(episode.start, episode.stop)])
    rest = cell.relation(kept)
    return CellWithout(
        driver=read_only(cell.driver),
        response=read_only(cell.response),
        kept=locked(kept),
        slope=rest.slope,
        intercept=rest.intercept,
        correlation=rest.correlation,
        p=rest.p,
        effective_months=rest.effective_months,
    )
