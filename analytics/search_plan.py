"""What is searched: a pair over whole years, as given and freed of its shifts."""

import operator
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.kernel import MIN_PAIRS, ResponseKernel, response_kernel
from analytics.level_shifts import LevelShifts, level_shifts
from analytics.series import FloatArray, read_only
from analytics.surface import growth_pair

WINDOWS = range(1, 61)
SHIFTS = range(-36, 61)
CHUNK = 250  # surrogates drawn and judged at a time
SHORTEST = 60
PEGGED = 0.05  # spread, as a share of the largest, below which a stretch is left as it is
STRONG = 1.5  # strength of the level shifts, in both series, above which they are removed
STRONG_SPREAD = 2.0  # the same for the shifts of spread


@dataclass(frozen=True, eq=False)
class SearchRun:
    """A pair as it is searched: as given, or with level shifts removed.

    Attributes
    ----------
    driver : ndarray of float, shape (n,), read-only
        One value a period.
    kernel : ResponseKernel
        The response, prepared.
    observed : ndarray of float, shape (W, S), read-only
        Correlation of the two in each cell.
    """

    driver: FloatArray
    kernel: ResponseKernel
    observed: FloatArray


@dataclass(frozen=True, eq=False)
class SearchPlan:
    """Result of `search_plan`: everything but the surrogates.

    Attributes
    ----------
    runs : tuple of SearchRun
        The pair as given; where level or spread shifts are strong in both series, the pair
        without them follows.
    level_shifts : tuple of LevelShifts
        Those of driver and response, removed or not; positions count from the first period used.
    spread_shifts : tuple of LevelShifts
        Those of the absolute residuals of the level shifts, evened out or not.
    spreads_evened : bool
        Whether the second run also has the residuals divided by their spread.
    surrogates, seed : int
        Number of surrogate drivers and what they are drawn from.
    months_used, months_dropped : int
        Periods in the search, and oldest ones left out so that it covers whole years.
    """

    runs: tuple[SearchRun, ...]
    level_shifts: tuple[LevelShifts, LevelShifts]
    spread_shifts: tuple[LevelShifts, LevelShifts]
    spreads_evened: bool
    surrogates: int
    seed: int
    months_used: int
    months_dropped: int

    @property
    def chunks(self) -> int:
        """Number of chunks that `search_result` wants."""
        return -(-self.surrogates // CHUNK)


def search_plan(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    windows: Iterable[int] = WINDOWS,
    shifts: Iterable[int] = SHIFTS,
    surrogates: int = 2000,
    seed: int = 1,
    periods_per_year: int = 12,
) -> SearchPlan:
    """Trim the pair to whole years, look for level shifts, and prepare the surface.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Growth rates in percent, same periods, no gaps, at least 60.
    windows, shifts : iterable of int, shapes (W,) and (S,)
        Periods, increasing; a shift above 0 means that the driver leads.
    surrogates : int, default 2000
        Surrogate drivers; p cannot be below ``1 / (surrogates + 1)``.
    seed : int, default 1
        What the surrogates are drawn from, 0 or more.
    periods_per_year : int, default 12
        12, 4 or 1. The oldest periods beyond a whole number of years are left out, because a
        surrogate repeats the seasonal pattern exactly only over whole years.

    Returns
    -------
    SearchPlan

    Raises
    ------
    ValueError
        Fewer than 60 periods, a gap, different lengths, a constant series, a response that is
        the driver itself, a window that leaves fewer than 24 pairs, a grid that lies outside the
        sample, no surrogate, or a seed that is not an integer from 0.

    Notes
    -----
    The guard against shifts is our own, tuned and measured by tests/bench/calibration. Shifts of
    level or of spread are what phase surrogates do not survive, and a single shift that both
    series have is one event, not evidence of a lag. Where the one or two steps of `level_shifts`
    have a strength above 1.5 in both series, both are freed of them; where those of the absolute
    residuals have one above 2 in both, these are also divided by their spread, unless a stretch
    hardly moves at all. A trend that explains about as much as two steps is taken out in their
    place. What no guard here mends is persistence that itself changes in both series, from .3 to
    .95 at one month, say: 12 to 14 % of such unrelated pairs have p <= .05 (own measurement, 400
    pairs at 240 and 760 months; 4 to 8 % for the 16 other shapes).
    """
    x, y = growth_pair(driver, response)
    count = whole("surrogates", surrogates, 1)
    start = whole("seed", seed, 0)
    if periods_per_year not in (12, 4, 1):
        raise ValueError(f"periods_per_year must be 12, 4 or 1, but got {periods_per_year!r}")
    if x.size < SHORTEST:
        raise ValueError(f"a search must have at least {SHORTEST} periods, but got {x.size}")
    dropped = x.size % periods_per_year
    x, y = x[dropped:], y[dropped:]
    for name, values in (("driver", x), ("response", y)):
        if np.ptp(values) <= 1e-12 * np.abs(values).max():
            raise ValueError(f"{name} must vary, but is {values[0]:g} in every period searched")
    lengths, leads = list(windows), list(shifts)
    kernel = response_kernel(y, windows=lengths, shifts=leads)
    fewest = kernel.pairs.max(axis=1)
    if fewest[-1] < MIN_PAIRS:
        raise ValueError(
            f"windows must leave at least {MIN_PAIRS} pairs, but window {lengths[-1]} leaves"
            f" {fewest[-1]} of {x.size} periods"
        )
    if abs(np.corrcoef(x, y)[0, 1]) > 1.0 - 1e-9:
        raise ValueError("driver and response must differ, but they are the same series (r = 1)")
    runs = [_run(x, kernel)]
    levels = level_shifts(x, trend=True), level_shifts(y, trend=True)
    spreads = tuple(level_shifts(np.abs(found.residual)) for found in levels)
    evened = _strong(spreads, STRONG_SPREAD) and all(
        found.levels.min() > PEGGED * found.levels.max() for found in spreads
    )
    if evened or _strong(levels, STRONG):
        for name, found, values in zip(("driver", "response"), levels, (x, y), strict=True):
            if np.abs(found.residual).max() <= 1e-12 * np.abs(values).max():
                raise ValueError(f"{name} must vary between its level shifts, but does not")
        pair = [found.residual for found in levels]
        if evened:
            pair = [v / found.levels for v, found in zip(pair, spreads, strict=True)]
        runs.append(_run(pair[0], response_kernel(pair[1], windows=lengths, shifts=leads)))
    return SearchPlan(
        tuple(runs), levels, (spreads[0], spreads[1]), evened, count, start, x.size, dropped
    )


def _run(driver: FloatArray, kernel: ResponseKernel) -> SearchRun:
    """Pair a driver with a prepared response."""
    return SearchRun(read_only(driver), kernel, read_only(kernel.correlations(driver)[0]))


def _strong(found: Sequence[LevelShifts], threshold: float) -> bool:
    """Whether the shifts of both series are stronger than the threshold."""
    return min(shifts.strength for shifts in found) > threshold


def whole(name: str, value: int, least: int) -> int:
    """Check a whole number of at least `least`."""
    try:
        number = operator.index(value)
    except TypeError:
        raise ValueError(f"{name} must be an integer, but got {value!r}") from None
    if number < least:
        raise ValueError(f"{name} must be {least} or more, but got {number}")
    return number
