"""What the exploration was worth: inference, search, shift set and influence for a state.

Quick parts are computed when they are asked for. Long ones are `Work` for `app.jobs`, done chunk by
chunk, by the page or by the command.
"""

import contextlib
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from analytics.influence import InfluenceResult
from analytics.opinions import SecondOpinions, second_opinions
from analytics.partial_cell import Relation
from analytics.persistence import PersistenceShift
from analytics.robust import CellInference
from analytics.search import (
    SearchPlan,
    SearchResult,
    search_chunk,
    search_plan,
    search_result,
)
from analytics.series import Pair
from analytics.shiftset import ShiftSet, shift_set_chunk, shift_set_plan, shift_set_result
from analytics.stability import Stability, rolling_stability
from app.compute import Bridge, grid
from app.jobs import Work
from app.lag.cells import cell_of, every_month, inference, influence, relation_left, year
from app.lag.regimes import regimes
from app.state import StateError, ViewState

SIGNIFICANT = 0.05


@dataclass(frozen=True, eq=False)
class Evidence:
    """What is known about a state so far; a part that is not there yet is None.

    Attributes
    ----------
    naive_p, n : float, int
        p of the chosen cell as if its overlapping months were independent, and its pairs.
    inference : CellInference
        The chosen cell, as if it had been the only one looked at; no month left out.
    rest : Relation or None
        The chosen cell without the months left out, where the state names some. All other parts
        read every month of the sample.
    influence : InfluenceResult
        The chosen cell without each episode.
    search : SearchResult or None
        The whole map against unrelated drivers.
    shift_set : ShiftSet or None
        Shifts that fit as well, at the chosen window.
    refusal : str
        Why there can be no search, in one sentence; empty where there can.
    set_refusal : str
        Why there can be no shift set although the search holds; empty where there can.
    regimes : tuple of PersistenceShift or None
        Of driver and response, where both cling to their past more in one part of the sample: the
        search then finds too much.
    """

    naive_p: float
    inference: CellInference
    influence: InfluenceResult
    search: SearchResult | None
    shift_set: ShiftSet | None
    refusal: str = ""
    set_refusal: str = ""
    regimes: tuple[PersistenceShift, PersistenceShift] | None = None
    rest: Relation | None = None
    n: int = 0

    @property
    def found(self) -> bool:
        """Whether the search is done and holds at 5 %."""
        return self.search is not None and self.search.p <= SIGNIFICANT

    def p_searched(self, window: int, shift: int) -> float | None:
        """Search-adjusted p of a cell; None without a search, nan where the cell is undefined."""
        found = self.search
        if found is None or window not in found.windows or shift not in found.shifts:
            return None
        row = int(np.flatnonzero(found.windows == window)[0])
        column = int(np.flatnonzero(found.shifts == shift)[0])
        return float(found.p_cell[row, column])


@dataclass(frozen=True, eq=False)
class Directions:
    """The search once with the driver leading only, and once with the response leading only."""

    forward: SearchResult
    backward: SearchResult


@dataclass(frozen=True)
class _BothPlans:
    forward: SearchPlan
    backward: SearchPlan

    @property
    def chunks(self) -> int:
        return self.forward.chunks + self.backward.chunks


def evidence(state: ViewState, bridge: Bridge) -> Evidence:
    """Gather what is known about a state without doing any long work.

    Raises
    ------
    ValueError
        One sentence that says why the chosen cell cannot be judged.
    """
    whole = every_month(state)
    search, shifts = bridge.jobs.remembered(search_work(state, bridge)), None
    refusal, set_refusal = "" if search else _search_refusal(state, bridge), ""
    if search is not None:
        work = shift_set_work(state, bridge)
        shifts = bridge.jobs.remembered(work)
        set_refusal = "" if shifts else bridge.jobs.refusal(work)
    return Evidence(
        naive_p=bridge.cell(state).p_naive,
        inference=inference(state, bridge),
        influence=influence(state, bridge),
        search=search,
        shift_set=shifts,
        refusal=refusal,
        set_refusal=set_refusal,
        regimes=regimes(whole, bridge) if search is not None else None,
        rest=relation_left(state, bridge),
        n=bridge.cell(state).n,
    )


def completed(state: ViewState, bridge: Bridge) -> Evidence:
    """Do the search, and the shift set where the search holds, and return all that is known."""
    known = evidence(state, bridge)
    if known.search is None and not known.refusal:
        bridge.jobs.complete(search_work(state, bridge))
        known = evidence(state, bridge)
    if known.found and known.shift_set is None:
        with contextlib.suppress(ValueError):  # kept as the set's refusal
            bridge.jobs.complete(shift_set_work(state, bridge))
        known = evidence(state, bridge)
    return known


def search_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the search over the whole map as work."""
    question = every_month(state).question()
    return Work(
        "search:" + bridge.key(question),
        lambda: search_plan_or_refuse(question, bridge),
        search_chunk,
        search_result,
    )


def search_plan_or_refuse(state: ViewState, bridge: Bridge) -> SearchPlan:
    """Return the plan of the search.

    Raises
    ------
    ValueError
        One sentence that says why there can be no search.
    """
    pair = bridge.pair(state)
    windows, shifts = grid(pair, state)
    return _plan(pair.driver.values, pair.response.values, pair, state, windows, shifts)


def _search_refusal(state: ViewState, bridge: Bridge) -> str:
    """Say why there can be no search; nothing where there can."""

    def make() -> str:
        try:
            search_plan_or_refuse(state.question(), bridge)
        except ValueError as error:
            return str(error)
        return ""

    return bridge.memory.once("search-refusal:" + bridge.key(every_month(state).question()), make)


def shift_set_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the search for shifts that fit as well at the chosen window as work."""
    pair = bridge.pair(state)

    def plan() -> Any:
        return shift_set_plan(
            pair.driver.values,
            pair.response.values,
            window=state.window,
            shifts=grid(pair, state)[1],
            seed=state.seed,
        )

    key = bridge.key(replace(state, shift=ViewState.shift, without="", left_out=""))
    return Work("shift-set:" + key, plan, shift_set_chunk, shift_set_result)


def directions_work(state: ViewState, bridge: Bridge) -> Work:
    """Return two searches as work: the driver leading only, and the response leading only."""
    question = every_month(state).question()

    def plan() -> _BothPlans:
        pair = bridge.pair(question)
        windows, shifts = grid(pair, question)
        ahead = range(1, shifts[-1] + 1)
        if len(ahead) < 1:
            raise StateError("the map has no shift above 0, so there is no direction to compare")
        sides = pair.driver.values, pair.response.values
        return _BothPlans(
            _plan(*sides, pair, question, windows, ahead),
            _plan(*sides[::-1], pair, question, windows, ahead),
        )

    def chunk(plans: _BothPlans, index: int) -> Any:
        first = plans.forward.chunks
        if index < first:
            return search_chunk(plans.forward, index)
        return search_chunk(plans.backward, index - first)

    def result(plans: _BothPlans, chunks: list[Any]) -> Directions:
        first = plans.forward.chunks
        return Directions(
            search_result(plans.forward, chunks[:first]),
            search_result(plans.backward, chunks[first:]),
        )

    return Work("directions:" + bridge.key(question), plan, chunk, result)


def opinions_work(state: ViewState, bridge: Bridge) -> Work:
    """Return other methods, the other growth formula and the sample's halves as work."""

    def make() -> SecondOpinions:
        pair = bridge.pair(state)
        other = "percent" if state.growth == "log" else "log"
        changed = bridge.pair(replace(state, growth=other))
        farthest = grid(pair, state)[1][-1]
        if farthest < 1:
            raise StateError("the map has no shift above 0, so no lag can be asked for")
        return second_opinions(
            pair.driver.values,
            pair.response.values,
            window=state.window,
            shift=state.shift,
            max_shift=farthest,
            periods_per_year=year(pair),
            variants={f"{other} growth": (changed.driver.values, changed.response.values)},
        )

    return _whole_work("opinions:" + bridge.key(replace(state, without="", left_out="")), make)


def stability_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the chosen cell over rolling and growing samples as work.

    A rolling sample is ten years long, or half of the pairs where there are not as many.
    """

    def make() -> Stability:
        cell = cell_of(state, bridge)
        pairs, fewest = bridge.cell(every_month(state)).n, max(24, 2 * state.window)
        span = max(10 * cell["periods_per_year"], fewest)
        if span >= pairs:  # no ten years that could move
            span = max(pairs // 2, fewest)
        if span >= pairs:
            raise StateError(
                f"the cell must have more than {fewest} pairs for its slope to be followed,"
                f" but has {pairs}"
            )
        return rolling_stability(**cell, span=span, rng=np.random.default_rng(state.seed))

    return _whole_work("stability:" + bridge.key(replace(state, without="", left_out="")), make)


@dataclass(frozen=True)
class _OneChunk:
    chunks: int = 1


def _whole_work(key: str, make: Callable[[], Any]) -> Work:
    """Work that is short enough to be one chunk."""
    return Work(key, _OneChunk, lambda _plan, _index: make(), lambda _plan, chunks: chunks[0])


def _plan(
    driver: Any, response: Any, pair: Pair, state: ViewState, windows: range, shifts: range
) -> SearchPlan:
    return search_plan(
        driver,
        response,
        windows=windows,
        shifts=shifts,
        surrogates=state.surrogates,
        seed=state.seed,
        periods_per_year=year(pair),
    )
