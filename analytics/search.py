"""What the best cell of a searched surface is worth: the search-adjusted p.

The work is a plan and a sequence of seeded chunks, so that a page can ask for one after another;
`lag_search` runs them in a loop. Order of the chunks and number of workers change nothing.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from analytics.search_plan import CHUNK, SHIFTS, WINDOWS, SearchPlan, search_plan
from analytics.series import FloatArray, read_only
from analytics.surface import IntArray
from analytics.surrogates import phase_surrogates

__all__ = [
    "SearchChunk",
    "SearchPlan",
    "SearchResult",
    "lag_search",
    "search_chunk",
    "search_plan",
    "search_result",
]


@dataclass(frozen=True, eq=False)
class SearchChunk:
    """Some of the surrogates, for `search_result`.

    Attributes
    ----------
    index : int
        From 0 to ``plan.chunks - 1``.
    surfaces : tuple of ndarray of float32, shape (W, S, b)
        ``atanh(r)`` of b surrogates, for each run of the plan.
    """

    index: int
    surfaces: tuple[NDArray[np.float32], ...]


@dataclass(frozen=True, eq=False)
class SearchResult:
    """What the search was worth. Where level shifts were removed it is about the pair without them.

    Attributes
    ----------
    p : float
        Probability of a largest ``|z|`` as large as the one found, if driver and response were
        unrelated: ``(1 + #) / (surrogates + 1)``.
    p_one_sided : float
        The same for the largest z: only positive relations count.
    p_error, p_one_sided_error : float
        Monte Carlo standard error of each: about how far p moves with another seed.
    p_with_level_shifts : float or None
        p of the pair as given; None where no level shift was removed.
    level_shifts_removed : bool
        Whether both series had strong shifts of level or of spread, and were freed of the level
        shifts.
    spreads_evened : bool
        Whether both had strong shifts of spread, and were also divided by their spread.
    driver_steps, response_steps : tuple of int
        Positions in the series given where a new level or an evened spread begins; empty where
        nothing was removed.
    surrogates, seed : int
        Number of surrogate drivers and what they were drawn from.
    method : str
        The null hypothesis and how it was tested, in words.
    windows, shifts : ndarray of int, shapes (W,) and (S,), read-only
        The grid searched. p holds for this grid and no other.
    best_window, best_shift : int
        Cell with the largest ``|z|``: the one that p is about.
    best_correlation : float
        Its correlation, -1 to 1.
    largest_window, largest_shift : int
        Cell with the largest ``|r|``; wide windows at far shifts, with their few independent
        months, often own it by chance.
    largest_correlation : float
        Its correlation, -1 to 1.
    p_cell : ndarray of float, shape (W, S), read-only
        Search-adjusted p of each cell: how often the largest ``|z|`` of an unrelated driver reaches
        the cell's. nan where the cell is not defined.
    correlation, z : ndarray of float, shape (W, S), read-only
        Correlation, and ``atanh(r)`` over its root mean square among unrelated drivers.
    months_used, months_dropped : int
        Periods in the search, and oldest ones left out so that it covers whole years.
    """

    p: float
    p_one_sided: float
    p_error: float
    p_one_sided_error: float
    p_with_level_shifts: float | None
    level_shifts_removed: bool
    spreads_evened: bool
    driver_steps: tuple[int, ...]
    response_steps: tuple[int, ...]
    surrogates: int
    seed: int
    method: str
    windows: IntArray
    shifts: IntArray
    best_window: int
    best_shift: int
    best_correlation: float
    largest_window: int
    largest_shift: int
    largest_correlation: float
    p_cell: FloatArray
    correlation: FloatArray
    z: FloatArray
    months_used: int
    months_dropped: int

    def __repr__(self) -> str:
        return (
            f"SearchResult(best cell window {self.best_window}, shift {self.best_shift},"
            f" r {self.best_correlation:.2f}, search-adjusted p {self.p:.3g})"
        )

    @property
    def verdict(self) -> str:
        """The result in one sentence, for reading; windows and shifts count periods."""
        p = "below .001" if self.p < 0.001 else f"{self.p:.3f}".lstrip("0")
        removed = ", level shifts removed," if self.level_shifts_removed else ""
        return (
            f"Of windows {self.windows[0]} to {self.windows[-1]} and shifts {self.shifts[0]:+d} to"
            f" {self.shifts[-1]:+d}{removed} window {self.best_window} at shift"
            f" {self.best_shift:+d} stands out most (correlation {self.best_correlation:+.2f});"
            f" an unrelated driver does as well with probability {p} (search-adjusted, two-sided,"
            f" {self.surrogates} surrogates, seed {self.seed}). An association, not a cause."
        )

    def to_frame(self) -> pd.DataFrame:
        """One line a cell: window, shift, correlation, z, search-adjusted p."""
        return pd.DataFrame(
            {
                "window": np.repeat(self.windows, self.shifts.size),
                "shift": np.tile(self.shifts, self.windows.size),
                "correlation": self.correlation.ravel(),
                "z": self.z.ravel(),
                "p": self.p_cell.ravel(),
            }
        )


def search_chunk(plan: SearchPlan, index: int, *, threads: int = 2) -> SearchChunk:
    """Surfaces of up to 250 surrogate drivers, drawn from the plan's seed and the chunk's index.

    `threads` changes nothing but the time.

    Raises
    ------
    ValueError
        The index is not from 0 to ``plan.chunks - 1``.
    """
    if not 0 <= index < plan.chunks:
        raise ValueError(f"index must be from 0 to {plan.chunks - 1}, but got {index}")
    draws = min(CHUNK, plan.surrogates - index * CHUNK)
    surfaces = []
    for run in plan.runs:
        rng = np.random.default_rng([plan.seed, index])
        copies = phase_surrogates(run.driver, draws, rng)
        correlation = run.kernel.correlations(copies, threads=threads).transpose(1, 2, 0)
        surface = np.empty(correlation.shape, dtype=np.float32)
        for row, cells in enumerate(correlation):
            _fisher(cells, surface[row])
        surfaces.append(surface)
    return SearchChunk(index, tuple(surfaces))


def search_result(plan: SearchPlan, chunks: Sequence[SearchChunk]) -> SearchResult:
    """Search-adjusted p from all the chunks of a plan, in any order.

    Raises
    ------
    ValueError
        A chunk is missing, comes twice, or belongs to another plan.
    """
    ordered = sorted(chunks, key=lambda chunk: chunk.index)
    if [chunk.index for chunk in ordered] != list(range(plan.chunks)):
        raise ValueError(
            f"chunks must be 0 to {plan.chunks - 1}, each once,"
            f" but got {[chunk.index for chunk in ordered]}"
        )
    for chunk in ordered:
        draws = min(CHUNK, plan.surrogates - chunk.index * CHUNK)
        if [s.shape for s in chunk.surfaces] != [(*r.observed.shape, draws) for r in plan.runs]:
            raise ValueError(f"chunk {chunk.index} must be of the same plan, but has another shape")
    raw, *adjusted = (
        _judged(run.observed, [chunk.surfaces[place] for chunk in ordered])
        for place, run in enumerate(plan.runs)
    )
    judged = adjusted[0] if adjusted else raw
    kernel, r = plan.runs[-1].kernel, plan.runs[-1].observed
    best = np.unravel_index(np.nanargmax(np.abs(judged.z)), r.shape)
    largest = np.unravel_index(np.nanargmax(np.abs(r)), r.shape)
    removed = bool(adjusted)
    return SearchResult(
        p=judged.p,
        p_one_sided=judged.p_one_sided,
        p_error=judged.p_error,
        p_one_sided_error=judged.p_one_sided_error,
        p_with_level_shifts=raw.p if removed else None,
        level_shifts_removed=removed,
        spreads_evened=plan.spreads_evened,
        driver_steps=_places(plan, 0, removed),
        response_steps=_places(plan, 1, removed),
        surrogates=plan.surrogates,
        seed=plan.seed,
        method=_method(plan, removed),
        windows=kernel.windows,
        shifts=kernel.shifts,
        best_window=int(kernel.windows[best[0]]),
        best_shift=int(kernel.shifts[best[1]]),
        best_correlation=float(r[best]),
        largest_window=int(kernel.windows[largest[0]]),
        largest_shift=int(kernel.shifts[largest[1]]),
        largest_correlation=float(r[largest]),
        p_cell=read_only(judged.p_cell),
        correlation=r,
        z=read_only(judged.z),
        months_used=plan.months_used,
        months_dropped=plan.months_dropped,
    )


def lag_search(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    windows: Iterable[int] = WINDOWS,
    shifts: Iterable[int] = SHIFTS,
    surrogates: int = 2000,
    seed: int = 1,
    periods_per_year: int = 12,
) -> SearchResult:
    """Search all windows and shifts for a relation, and say what the best one is worth.

    Parameters
    ----------
    driver, response, windows, shifts, surrogates, seed, periods_per_year
        As in `search_plan`, which also says what it raises.

    Returns
    -------
    SearchResult

    Notes
    -----
    The statistic is the largest ``|z|`` over the cells, ``z = atanh(r) / s``, where s is the root
    mean square of atanh(r) in that cell over the surrogates and the pair itself, so that a cell
    counts for what it deviates from its own chance. The largest statistic of each phase
    surrogate of the driver (Theiler et al. 1992) gives the distribution under the null; p per
    cell is the single-step adjustment of Westfall and Young (1993), Resampling-Based Multiple
    Testing (both cited from memory).

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> driver = rng.standard_normal(240)
    >>> response = np.roll(driver, 6) + rng.standard_normal(240)
    >>> found = lag_search(driver, response, windows=[1, 3], shifts=range(13), surrogates=199)
    >>> found.best_window, found.best_shift, found.p
    (1, 6, 0.005)
    """
    plan = search_plan(
        driver,
        response,
        windows=windows,
        shifts=shifts,
        surrogates=surrogates,
        seed=seed,
        periods_per_year=periods_per_year,
    )
    return search_result(plan, [search_chunk(plan, index) for index in range(plan.chunks)])


@dataclass(frozen=True, eq=False)
class _Judged:
    """One run against its surrogates."""

    p: float
    p_one_sided: float
    p_error: float
    p_one_sided_error: float
    p_cell: FloatArray
    z: FloatArray


def _judged(observed: FloatArray, surfaces: list[NDArray[np.float32]]) -> _Judged:
    """Compare the largest standardised cell with those of the surrogates."""
    own = np.empty(observed.shape, dtype=np.float32)
    _fisher(observed, own)
    squares = own.astype(np.float64) ** 2
    draws = sum(surface.shape[2] for surface in surfaces)
    for surface in surfaces:
        for row, cells in enumerate(surface):
            squares[row] += np.einsum("sb,sb->s", cells, cells)
    usable = np.isfinite(observed) & (squares > 0)
    if not usable.any():
        raise ValueError("a cell of the grid must have a correlation, but none has")
    scale = np.zeros(observed.shape, dtype=np.float32)
    scale[usable] = np.sqrt((draws + 1) / squares[usable])

    highest = [np.zeros(surface.shape[2], dtype=np.float32) for surface in surfaces]
    lowest = [np.zeros(surface.shape[2], dtype=np.float32) for surface in surfaces]
    for top, bottom, surface in zip(highest, lowest, surfaces, strict=True):
        for row, cells in enumerate(surface):
            z = cells * scale[row][:, None]
            np.maximum(top, z.max(axis=0), out=top)
            np.minimum(bottom, z.min(axis=0), out=bottom)
    top, bottom = np.concatenate(highest), np.concatenate(lowest)
    either = np.sort(np.maximum(top, -bottom))

    z = np.where(usable, own * scale, np.nan)
    reached = draws - np.searchsorted(either, np.abs(z), side="left")
    p_cell = np.where(usable, (1.0 + reached) / (draws + 1.0), np.nan)
    above = np.count_nonzero(top >= np.nanmax(z))
    return _Judged(
        float(np.nanmin(p_cell)),
        float((1.0 + above) / (draws + 1.0)) if np.nanmax(z) > 0 else 1.0,
        _monte_carlo_error(np.abs(z), either, surfaces),
        _monte_carlo_error(z, np.sort(top), surfaces),
        p_cell,
        z.astype(np.float64),
    )


def _monte_carlo_error(
    size: FloatArray, heights: NDArray[np.float32], surfaces: list[NDArray[np.float32]]
) -> float:
    """Return the standard error of p from a finite number of draws, by the delta method.

    Two things are drawn: how many of the sorted `heights` reach the best cell of `size`, and the
    scale of that cell, whose error moves the cell's own z.
    """
    row, column = np.unravel_index(np.nanargmax(size), size.shape)
    best, draws = float(size[row, column]), heights.size
    squares = np.concatenate([s[row, column] for s in surfaces]).astype(np.float64) ** 2
    mean = squares.mean()
    if best <= 0.0 or mean == 0.0:
        return 0.0
    moved = squares.std() / (2.0 * mean * np.sqrt(draws))  # of the scale, relative
    at = best * np.array([1.0 - moved, 1.0, 1.0 + moved])
    low, p, high = (1.0 + draws - np.searchsorted(heights, at, side="left")) / (draws + 1.0)
    return float(np.hypot(np.sqrt(p * (1.0 - p) / draws), (low - high) / 2.0))


def _fisher(correlation: FloatArray, out: NDArray[np.float32]) -> None:
    """Write ``atanh(r)`` in single precision; a cell without correlation becomes 0."""
    r = np.clip(correlation, -1.0 + 1e-6, 1.0 - 1e-6).astype(np.float32)
    np.divide(np.float32(1.0) + r, np.float32(1.0) - r, out=out)
    np.log(out, out=out)
    out *= np.float32(0.5)
    missing = np.isnan(out)
    if missing.any():
        out[missing] = 0.0


def _places(plan: SearchPlan, series: int, removed: bool) -> tuple[int, ...]:
    """Positions in the series as given where a new level, or an evened spread, begins."""
    if not removed:
        return ()
    steps = set(plan.level_shifts[series].steps)
    if plan.spreads_evened:
        steps |= set(plan.spread_shifts[series].steps)
    return tuple(step + plan.months_dropped for step in sorted(steps))


def _method(plan: SearchPlan, removed: bool) -> str:
    """Say what is tested and how."""
    freed = ""
    if removed:
        spread = " and of shifts in their spread" if plan.spreads_evened else ""
        freed = f", both freed of their level shifts{spread},"
    return (
        f"Null hypothesis: driver and response{freed} are unrelated at every window and shift"
        f" searched; the largest standardised correlation is compared with the largest ones of"
        f" {plan.surrogates} phase-randomised copies of the driver (Theiler et al. 1992)."
    )
