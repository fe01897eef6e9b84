"""The long work of the Outlook page: the backtest of a driver, and of further ones."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from analytics.backtest import Backtest, backtest_chunk, backtest_result
from analytics.backtest_plan import BacktestPlan, backtest_plan
from analytics.outlook import path_reach
from analytics.series import align
from app.compute import Bridge, grid
from app.jobs import Work
from app.outlook.inputs import Inputs, inputs, outlook_key, past_views, vintages_of
from app.state import StateError, ViewState

JUDGED_BY = ("target", "scheme", "cells", "windows", "shifts")
MOST_DRIVERS = 8


@dataclass(frozen=True, eq=False)
class Drivers:
    """Backtests of further drivers by name, and a sentence on each that has none."""

    tests: dict[str, Backtest]
    refused: dict[str, str]


def backtest_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the backtest of the state's driver as work.

    Where window and shift are chosen anew at every date those of the state play no part, and
    moving them asks for nothing new.
    """
    found = inputs(state, bridge)
    path_reach(state.shift, found.pair.lead)
    used = state
    if state.cells == "remade" and state.target != "window":
        used = replace(state, window=found.year, shift=2 * found.year)
    key = outlook_key("backtest", used, bridge, JUDGED_BY)
    return Work(
        f"{key}:{past_views(found, bridge).key}",
        lambda: _plan(inputs(used, bridge), bridge),
        backtest_chunk,
        backtest_result,
    )


def _plan(found: Inputs, bridge: Bridge) -> BacktestPlan:
    state = found.state
    windows = shifts = None
    if state.cells == "remade":
        windows, shifts = grid(align(found.pair.driver, found.pair.response), state)
        shifts = range(max(1, shifts[0]), shifts[-1] + 1)
    return backtest_plan(
        found.driver,
        found.response,
        window=state.window,
        shift=state.shift,
        target=found.target(state.target),
        windows=windows,
        shifts=shifts,
        scheme=state.scheme,  # type: ignore[arg-type]
        horizon=found.horizon,
        periods_per_year=found.year,
        vintages=vintages_of(found, past_views(found, bridge), bridge),
    )


def other_drivers(state: ViewState) -> tuple[str, ...]:
    """Return the further drivers that the state names, without the first one and the response.

    Raises
    ------
    StateError
        There are too many.
    """
    named = [name.strip() for name in state.others.split("|")]
    kept = tuple(
        name for name in dict.fromkeys(named) if name and name not in (state.driver, state.response)
    )
    if len(kept) >= MOST_DRIVERS:
        raise StateError(f"at most {MOST_DRIVERS} drivers can be combined, but got {len(kept) + 1}")
    return kept


def drivers_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the backtests of the further drivers as one piece of work."""
    names = other_drivers(state)
    works: dict[str, Work] = {}
    refused: dict[str, str] = {}
    for name in names:
        try:
            works[name] = backtest_work(replace(state, driver=name), bridge)
        except ValueError as error:
            refused[name] = str(error)

    def plan() -> _Several:
        plans = {}
        for name, work in works.items():
            try:
                plans[name] = work.plan()
            except ValueError as error:
                refused[name] = str(error)
        return _Several(plans)

    def result(several: _Several, chunks: list[Any]) -> Drivers:
        tests, start = {}, 0
        for name, each in several.plans.items():
            tests[name] = backtest_result(each, chunks[start : start + each.chunks])
            start += each.chunks
        return Drivers(tests, refused)

    key = "|".join(["drivers", *(works[n].key if n in works else n for n in names)])
    return Work(key, plan, lambda several, index: several.chunk(index), result)


@dataclass(frozen=True, eq=False)
class _Several:
    """Plans one after another, as one plan; without any there is one empty chunk."""

    plans: dict[str, BacktestPlan]

    @property
    def chunks(self) -> int:
        return max(1, sum(plan.chunks for plan in self.plans.values()))

    def chunk(self, index: int) -> Any:
        for plan in self.plans.values():
            if index < plan.chunks:
                return backtest_chunk(plan, index)
            index -= plan.chunks
        return None


WORK: dict[str, Callable[[ViewState, Bridge], Work]] = {
    "backtest": backtest_work,
    "drivers": drivers_work,
}
