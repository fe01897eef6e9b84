"""The shifts that the data cannot tell from the best one, at one window.

The work is a plan and a sequence of seeded chunks over the candidate shifts, as in `search`;
`shift_set` runs them in a loop. The window is taken as given: a window chosen because it looked
best makes the set too narrow.
"""

from collections.abc import Iterable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike

from analytics.kernel import response_kernel
from analytics.readable import Readable
from analytics.search_plan import SHIFTS, whole
from analytics.series import FloatArray, read_only
from analytics.shift_simulation import (
    DriverCells,
    correlation_profile,
    driver_cells,
    effect_width,
    simulated_responses,
    slope_profile,
)
from analytics.surface import IntArray, growth_pair

DRAWS = 199
CHUNK = 16  # candidate shifts
_CHI_SQUARE = 3.841458820694124  # 95 % point, one degree of freedom


@dataclass(frozen=True, eq=False)
class ShiftSetPlan:
    """Result of `shift_set_plan`: the profile, and what the simulation needs.

    Attributes
    ----------
    driver, response : ndarray of float, shape (n,), read-only
        One value a period.
    window : int
        Periods averaged.
    shifts : ndarray of int, shape (S,), read-only
        Candidates.
    correlation, slope : ndarray of float, shape (S,), read-only
        Of the response's mean on the driver's, at each candidate.
    deficit : ndarray of float, shape (S,), read-only
        ``log(1 - r^2) - log(1 - max r^2)``: 0 at the best shift.
    preview : ndarray of int, read-only
        Candidates that the closed form keeps.
    level : float
        Confidence, 0 to 1.
    draws, seed : int
        Simulated responses for each candidate, and what they are drawn from.
    """

    driver: FloatArray
    response: FloatArray
    window: int
    shifts: IntArray
    correlation: FloatArray
    slope: FloatArray
    deficit: FloatArray
    preview: IntArray
    level: float
    draws: int
    seed: int
    _cells: DriverCells

    @property
    def chunks(self) -> int:
        """Number of chunks that `shift_set_result` wants."""
        return -(-self.shifts.size // CHUNK)


@dataclass(frozen=True, eq=False)
class ShiftSetChunk:
    """p of up to 16 candidate shifts: those from ``16 index`` on."""

    index: int
    p: FloatArray


@dataclass(frozen=True, eq=False)
class ShiftSet(Readable):
    """Result of `shift_set`; every array is read-only.

    Attributes
    ----------
    level : float
        Confidence, 0 to 1.
    window : int
        Periods averaged.
    shifts : ndarray of int
        The set: candidates that are not rejected at ``1 - level``, increasing.
    identified : bool
        False where the set reaches over more than half of the range of candidates: the lag is
        then not identified.
    candidates : ndarray of int, shape (S,)
        Every shift looked at.
    p_by_shift : ndarray of float, shape (S,)
        p of each candidate as the true shift; nan where its cell is not defined.
    correlation : ndarray of float, shape (S,)
        Correlation at each candidate.
    preview : ndarray of int
        Candidates that the closed form keeps.
    draws, seed : int
        Simulated responses for each candidate, and what they were drawn from.
    """

    level: float
    window: int
    shifts: IntArray
    identified: bool
    candidates: IntArray
    p_by_shift: FloatArray
    correlation: FloatArray
    preview: IntArray
    draws: int
    seed: int

    def to_frame(self) -> pd.DataFrame:
        """One line a candidate: shift, correlation, p as the true shift, in the set or not."""
        return pd.DataFrame(
            {
                "shift": self.candidates,
                "correlation": self.correlation,
                "p": self.p_by_shift,
                "in_set": np.isin(self.candidates, self.shifts),
            }
        )


def shift_set_preview(
    driver: ArrayLike, response: ArrayLike, *, window: int, shifts: Iterable[int] = SHIFTS
) -> IntArray:
    """Shifts that a quasi-likelihood ratio keeps: the 95 % set in closed form.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Growth rates in percent, same periods, no gaps.
    window : int
        Periods averaged.
    shifts : iterable of int, shape (S,)
        Candidates, increasing; above 0 the driver leads.

    Returns
    -------
    ndarray of int, read-only
        Candidates with ``(n / max(2 w, 24)) q <= 3.84``, where
        ``q = log(1 - r^2) - log(1 - max r^2)`` and n is the candidate's number of pairs.

    Raises
    ------
    ValueError
        As `shift_set_plan`.

    Notes
    -----
    The divisor stands for the smoothing: our own choice, wide enough in tests/bench/calibration
    for windows from 3. At window 1 it is too wide to be of use.
    """
    return shift_set_plan(driver, response, window=window, shifts=shifts).preview


def shift_set_plan(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shifts: Iterable[int] = SHIFTS,
    level: float = 0.95,
    draws: int = DRAWS,
    seed: int = 1,
) -> ShiftSetPlan:
    """Correlations at one window, and the closed-form preview of the set.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Growth rates in percent, same periods, no gaps.
    window : int
        Periods averaged, chosen in advance.
    shifts : iterable of int, shape (S,)
        Candidates, increasing; above 0 the driver leads.
    level : float, default 0.95
        Confidence, above 0 and below 1.
    draws : int, default 199
        Simulated responses for each candidate.
    seed : int, default 1
        What they are drawn from, 0 or more.

    Returns
    -------
    ShiftSetPlan

    Raises
    ------
    ValueError
        A gap, different lengths, a window or shifts outside the sample, no candidate with 24
        pairs that vary, a response that the driver gives exactly, or a level, number of draws or
        seed out of range.
    """
    x, y = growth_pair(driver, response)
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be above 0 and below 1, but got {level}")
    count, start = whole("draws", draws, 1), whole("seed", seed, 0)
    kernel = response_kernel(y, windows=[window], shifts=shifts)
    r = kernel.correlations(x)[0, 0]
    if not np.isfinite(r).any():
        raise ValueError("a candidate shift must have 24 pairs that vary, but none has")
    if np.nanmax(np.abs(r)) > 1.0 - 1e-9:
        raise ValueError("the response must not follow the driver exactly, but r is 1")
    deficit = _deficit(r[None])[0]
    ratio = np.where(np.isfinite(r), kernel.pairs[0] / effect_width(window) * deficit, np.inf)
    kept = ratio <= _CHI_SQUARE
    preview = kernel.shifts[kept]
    preview.flags.writeable = False
    return ShiftSetPlan(
        read_only(x),
        read_only(y),
        window,
        kernel.shifts,
        read_only(r),
        read_only(slope_profile(x, y, window, kernel.shifts, r)),
        read_only(deficit),
        preview,
        level,
        count,
        start,
        driver_cells(x, window, kernel.shifts, np.isfinite(r)),
    )


def shift_set_chunk(plan: ShiftSetPlan, index: int, *, threads: int = 2) -> ShiftSetChunk:
    """Simulate responses under up to 16 candidate shifts.

    `threads` changes nothing but the time.

    Raises
    ------
    ValueError
        The index is not from 0 to ``plan.chunks - 1``.
    """
    if not 0 <= index < plan.chunks:
        raise ValueError(f"index must be from 0 to {plan.chunks - 1}, but got {index}")
    places = np.arange(index * CHUNK, min(plan.shifts.size, (index + 1) * CHUNK))
    with ThreadPoolExecutor(threads) as pool:  # the transforms run outside Python's lock
        p = list(pool.map(lambda place: _candidate_p(plan, int(place)), places))
    return ShiftSetChunk(index, read_only(p))


def shift_set_result(plan: ShiftSetPlan, chunks: Sequence[ShiftSetChunk]) -> ShiftSet:
    """Put all the chunks of a plan together, in any order.

    Raises
    ------
    ValueError
        A chunk is missing or comes twice.
    """
    ordered = sorted(chunks, key=lambda chunk: chunk.index)
    if [chunk.index for chunk in ordered] != list(range(plan.chunks)):
        raise ValueError(
            f"chunks must be 0 to {plan.chunks - 1}, each once,"
            f" but got {[chunk.index for chunk in ordered]}"
        )
    p = np.concatenate([chunk.p for chunk in ordered])
    kept = plan.shifts[np.nan_to_num(p, nan=0.0) > 1.0 - plan.level]
    kept.flags.writeable = False
    reach = kept[-1] - kept[0] + 1 if kept.size else 0
    whole_range = plan.shifts[-1] - plan.shifts[0] + 1
    return ShiftSet(
        level=plan.level,
        window=plan.window,
        shifts=kept,
        identified=bool(kept.size and reach <= whole_range / 2),
        candidates=plan.shifts,
        p_by_shift=read_only(p),
        correlation=plan.correlation,
        preview=plan.preview,
        draws=plan.draws,
        seed=plan.seed,
    )


def shift_set(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shifts: Iterable[int] = SHIFTS,
    level: float = 0.95,
    draws: int = DRAWS,
    seed: int = 1,
) -> ShiftSet:
    """Shifts that the data cannot tell from the best one, by inverting a simulated test.

    Parameters
    ----------
    driver, response, window, shifts, level, draws, seed
        As in `shift_set_plan`, which also says what it raises.

    Returns
    -------
    ShiftSet

    Notes
    -----
    Each candidate s is tested as the true shift: responses are simulated as a multiple of the
    driver's centred mean over K = max(2 w, 24) periods, s periods earlier, plus autoregressive
    noise like the residual of that fit, the multiple being such that their smoothed slope at s
    is the one observed. The candidate stays where its deficit ``log(1 - r_s^2) - log(1 - max
    r^2)`` is not among the largest of the simulated ones. Test inversion is textbook (for example
    Casella and Berger 2002, section 9.2; from memory); the shape of the effect and its width are
    our own choice, measured in tests/bench/calibration.

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> driver = rng.standard_normal(240)
    >>> response = np.roll(driver, 6) + rng.standard_normal(240)
    >>> found = shift_set(driver, response, window=6, shifts=range(-12, 25))
    >>> 6 in found.shifts, found.identified
    (True, True)
    """
    plan = shift_set_plan(
        driver, response, window=window, shifts=shifts, level=level, draws=draws, seed=seed
    )
    return shift_set_result(plan, [shift_set_chunk(plan, index) for index in range(plan.chunks)])


def _candidate_p(plan: ShiftSetPlan, place: int) -> float:
    """Give p of one candidate as the true shift; nan where its cell is not defined."""
    if np.isnan(plan.correlation[place]):
        return float("nan")
    simulated = simulated_responses(
        plan.driver,
        plan.response,
        window=plan.window,
        shift=int(plan.shifts[place]),
        slope=float(plan.slope[place]),
        draws=plan.draws,
        rng=np.random.default_rng([plan.seed, place]),
    )
    drawn = _deficit(correlation_profile(simulated, plan._cells))
    reached = np.count_nonzero(drawn[:, place] >= plan.deficit[place])
    return (1.0 + reached) / (plan.draws + 1.0)


def _deficit(correlation: FloatArray) -> FloatArray:
    """``log(1 - r^2) - log(1 - max r^2)`` along the last axis; nan where r is."""
    unexplained = np.log1p(-np.square(correlation))
    deficit: FloatArray = unexplained - np.nanmin(unexplained, axis=-1, keepdims=True)
    return deficit
