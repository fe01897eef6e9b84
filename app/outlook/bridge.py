"""What the Outlook page says: from a `ViewState` to results of analytics.

Each part is worked out by itself: what cannot be said gives one sentence, and the rest stands.
"""

from collections.abc import Callable, Collection
from dataclasses import replace
from typing import Any, TypeVar

import numpy as np

from analytics.backtest import Backtest
from analytics.backtest_scores import Scores, backtest_scores, squared_error_gain
from analytics.combination import combination_weights, combined_backtest
from analytics.direct import direct_forecasts
from analytics.forecasts import DIRECT, OWN_PAST, RELATION, choice_at
from analytics.intervals import error_fan
from analytics.outlook import implied_path, relation_gap
from analytics.path_intervals import path_fan, relation_errors
from app.compute import Bridge
from app.outlook.inputs import Inputs, inputs, outlook_key, past_views
from app.outlook.judging import judged_statements, running
from app.outlook.result import DriverLine, Outlook
from app.outlook.statements import kept_statements
from app.outlook.work import Drivers, backtest_work, drivers_work, other_drivers
from app.state import ViewState

T = TypeVar("T")
EQUAL, WEIGHED = "mean of the drivers", "weighed by past errors"
MOST_OFFERED = 10
COMBINED = {EQUAL: "equal", WEIGHED: "past errors"}


def outlook(state: ViewState, bridge: Bridge, asked: Collection[str] = ()) -> Outlook:
    """Gather all that is known about an outlook without doing any long work.

    A window or shift outside the map gives way to the usual one, unless it is named in `asked`:
    then it is kept, and refused where the sample does not allow it.

    Raises
    ------
    ValueError
        There are no two series that can be paired.
    """
    wanted, state = state, bridge.fitted(state, asked)
    changed = tuple(
        f"A {name} of {getattr(wanted, name)} is outside the map of this sample;"
        f" {getattr(state, name)} is shown."
        for name in ("window", "shift")
        if getattr(wanted, name) != getattr(state, name)
    )
    key = outlook_key("outlook", state, bridge, ("target",))
    core = bridge.memory.once(key, lambda: _core(inputs(state, bridge)))
    refused = dict(core.refused)
    built: dict[str, Any] = {}
    if core.path is not None:
        built = _tested(state, core, bridge, refused)
    found, kept = inputs(state, bridge), kept_statements(bridge.workspace.statement_store)
    judged = judged_statements(kept, state, bridge)
    return replace(
        core,
        state=state,
        found=replace(found, notes=(*changed, *found.notes)),
        kept=kept,
        judged=judged,
        running=running(judged, kept),
        refused=refused,
        offered=_offered(state, bridge),
        **built,
    )


def _offered(state: ViewState, bridge: Bridge) -> tuple[str, ...]:
    """Name up to ten further series, those of the response's frequency first."""
    series = bridge.in_view(state).series
    frequency = series[state.response].frequency
    names = [name for name in series if name not in (state.driver, state.response)]
    names.sort(key=lambda name: series[name].frequency != frequency)
    return tuple(names[:MOST_OFFERED])


def completed_outlook(
    state: ViewState,
    bridge: Bridge,
    asked: Collection[str] = (),
    told: Callable[[int, int], None] | None = None,
) -> Outlook:
    """Do the long work as well, and gather all; `told` hears of done and total chunks."""
    known = outlook(state, bridge, asked)
    while (waiting := waiting_work(known, bridge)) is not None:
        try:
            progress = bridge.jobs.step(waiting)
        except ValueError:  # the sentence is kept, and stands in `refused` from now on
            known = outlook(state, bridge, asked)
            continue
        if told:
            told(progress.done, progress.total)
        if progress.result is not None:
            known = outlook(state, bridge, asked)
    return known


def waiting_work(known: Outlook, bridge: Bridge) -> Any:
    """Return the long work that is still to be done, or None."""
    kinds = waiting_kinds(known, bridge)
    make = {"backtest": backtest_work, "drivers": drivers_work}
    return make[kinds[0]](known.state, bridge) if kinds else None


def waiting_kinds(known: Outlook, bridge: Bridge) -> list[str]:
    """Name the long work that is still to be done, in its order."""
    if known.path is None:
        return []
    kinds = []
    if known.backtest is None and "backtest" not in known.refused:
        kinds.append("backtest")
    if known.state.others and not known.lines and "drivers" not in known.refused:
        work = drivers_work(known.state, bridge)
        if bridge.jobs.remembered(work) is None and not bridge.jobs.refusal(work):
            kinds.append("drivers")
    return kinds


def _core(found: Inputs) -> Outlook:
    """Work out each part that needs no long work."""
    refused: dict[str, str] = {}

    def part(name: str, make: Callable[[], T]) -> T | None:
        try:
            return make()
        except ValueError as error:
            refused[name] = str(error)
            return None

    state, x, y = found.state, found.driver, found.response
    cell: dict[str, Any] = {"window": state.window, "shift": state.shift}
    target = found.target(state.target)
    path = part(
        "path",
        lambda: implied_path(
            x,
            y,
            **cell,
            compounding=found.compounding,  # type: ignore[arg-type]
            periods_per_year=found.year,
        ),
    )
    built: dict[str, Any] = {
        "path": path,
        "gap": part("gap", lambda: relation_gap(x, y, **cell)),
    }
    if path is not None:
        centre = {"yearly": path.yearly, "window": path.window_mean, "single": path.single}
        errors = part("intervals", lambda: relation_errors(x, y, **cell, target=target))
        if errors is None:
            errors = np.full((0, path.ahead.size), np.nan)
        built |= {
            "fan": error_fan(centre[state.target], errors),
            "direct": part("direct", lambda: _direct(found)),
        }
    return Outlook(state=state, found=found, history=target.observed(y), refused=refused, **built)


def _direct(found: Inputs) -> Any:
    state, x, y = found.state, found.driver, found.response
    lags = choice_at(
        x,
        y,
        windows=None,
        shifts=None,
        cell=(state.window, state.shift),
        max_lags=found.year,
        periods_per_year=found.year,
    ).own_lags
    return direct_forecasts(
        x,
        y,
        window=state.window,
        shift=state.shift,
        own_lags=lags,
        horizon=found.horizon,
        target=found.target(state.target),
    )


def _tested(
    state: ViewState, core: Outlook, bridge: Bridge, refused: dict[str, str]
) -> dict[str, Any]:
    """Gather what the backtests found, so far as they are done."""
    found, built = core.found, {}
    work = backtest_work(state, bridge)
    done: Backtest | None = bridge.jobs.remembered(work)
    if done is None:
        if bridge.jobs.refusal(work):
            refused["backtest"] = bridge.jobs.refusal(work)
        return {}
    scores = bridge.memory.once(f"scores:{work.key}", lambda: _scores(done))
    places, gain = squared_error_gain(
        done, RELATION, state.against, horizon=min(found.ahead, found.horizon)
    )
    built = {
        "backtest": done,
        "scores": scores[0],
        "added": scores[1],
        "gain": (found.pair.response.periods[places], gain),
        "dated": len(past_views(found, bridge).days.keys() & set(done.origins.tolist())),
    }
    try:
        names = other_drivers(state)
        if names:
            several = drivers_work(state, bridge)
            others: Drivers | None = bridge.jobs.remembered(several)
            if others is not None:
                refused |= {f"driver {name}": why for name, why in others.refused.items()}
                built["lines"] = bridge.memory.once(
                    f"lines:{work.key}:{several.key}:{state.ahead}:{state.window}:{state.shift}",
                    lambda: _lines(state, core, done, scores[0], others, bridge),
                )
            elif bridge.jobs.refusal(several):
                refused["drivers"] = bridge.jobs.refusal(several)
    except ValueError as error:
        refused["drivers"] = str(error)
    return built


def _scores(done: Backtest) -> tuple[Scores, Scores]:
    return (
        backtest_scores(done, RELATION),
        backtest_scores(done, DIRECT, benchmarks=(OWN_PAST,)),
    )


def _lines(
    state: ViewState,
    core: Outlook,
    done: Backtest,
    scores: Scores,
    others: Drivers,
    bridge: Bridge,
) -> tuple[DriverLine, ...]:
    """Put single drivers and their combinations side by side, on the same target.

    Today's path of a driver is that of the cell that its backtest uses today, so that what is
    combined is what was judged. Beyond its shift a driver says the mean of the past.
    """
    tests = {state.driver: done, **others.tests}
    row, ahead = done.row(RELATION), min(core.found.ahead, core.found.horizon)
    weights = np.full(len(tests), 1.0 / len(tests))
    if len(tests) > 1:
        weights = combination_weights(
            np.stack([test.scale[row, -1, ahead - 1] for test in tests.values()])
        )
    lines = [
        DriverLine(
            name=name,
            window=int(test.windows[-1]),
            shift=int(test.shifts[-1]),
            path=test.forecasts[row, -1],
            scores=scores if name == state.driver else backtest_scores(test, RELATION),
            weight=float(weights[place]),
        )
        for place, (name, test) in enumerate(tests.items())
    ]
    if len(tests) > 1:
        for name, weighting in COMBINED.items():
            mixed = combined_backtest(tests, RELATION, weighting=weighting)  # type: ignore[arg-type]
            lines.append(
                DriverLine(
                    name,
                    None,
                    None,
                    mixed.forecasts[row, -1],
                    backtest_scores(mixed, RELATION),
                )
            )
    return tuple(lines)


def fans(found: Inputs) -> dict[str, Any]:
    """Return the fan of every target, as a statement keeps them.

    Raises
    ------
    ValueError
        The cell implies no path, or there is too little history for intervals.
    """
    state = found.state
    return {
        kind: path_fan(
            found.driver,
            found.response,
            window=state.window,
            shift=state.shift,
            target=found.target(kind),
        )
        for kind in ("yearly", "window", "single")
    }
