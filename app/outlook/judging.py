"""What came of earlier statements, by the series as they stand now."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from analytics.outlook_target import outlook_target
from analytics.series import PERIODS_PER_YEAR, FloatArray
from analytics.statement_scores import (
    RunningCoverage,
    StatementScore,
    running_coverage,
    statement_score,
)
from app.compute import Bridge
from app.outlook.result import Judged
from app.outlook.statements import Kept, Statement
from app.state import ViewState

TARGETS = ("yearly", "window", "single")


def judged_statements(kept: Kept, state: ViewState, bridge: Bridge) -> tuple[Judged, ...]:
    """Score each statement that was made by the date looked at, on the target of the state."""
    found = []
    for said in kept.statements:
        if state.as_of and said.day > state.as_of:
            continue
        try:
            found.append(Judged(said, _score(said, state, bridge)))
        except ValueError as error:
            found.append(Judged(said, None, str(error)))
    return tuple(found)


def _score(said: Statement, state: ViewState, bridge: Bridge) -> StatementScore:
    fan = said.paths.get(state.target)
    if fan is None:
        raise ValueError("it has no path of this rate")
    return statement_score(fan, outcomes(said, state.target, state, bridge), levels=said.levels)


def outcomes(said: Statement, target: str, state: ViewState, bridge: Bridge) -> FloatArray:
    """Return what the stated rate was in the periods after the origin, as known now.

    Raises
    ------
    ValueError
        The response is not loaded, or has another frequency now.
    """
    was = ViewState.from_query(said.state)
    now = replace(was, as_of=state.as_of, first="", last="")
    response = bridge.rates(now)[1]
    if response.frequency != said.frequency:
        raise ValueError(f"{said.response!r} is {response.frequency} now, not {said.frequency}")
    rate = outlook_target(
        target,  # type: ignore[arg-type]
        window=said.window,
        compounding=said.compounding,  # type: ignore[arg-type]
        periods_per_year=PERIODS_PER_YEAR[response.frequency],
    ).observed(response.values)
    start = said.start.ordinal + 1 - response.first.ordinal
    known: FloatArray = np.concatenate((np.full(max(0, -start), np.nan), rate[max(0, start) :]))
    return known


def running(judged: Sequence[Judged], kept: Kept) -> dict[str, RunningCoverage]:
    """Count the hits of the statements that stand, by response and all horizons together."""
    by_response: dict[str, list[Judged]] = {}
    for one in judged:
        if one.score is not None and one.score.known and one.said.id not in kept.successor:
            by_response.setdefault(one.said.response, []).append(one)
    found = {}
    for name, each in by_response.items():
        levels = each[-1].said.levels
        same = [one.score for one in each if one.score is not None and one.said.levels == levels]
        found[name] = running_coverage(same)
    return found
