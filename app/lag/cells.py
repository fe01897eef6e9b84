"""Quick inference for a state: the chosen cell, its episodes, and every cell of the map."""

from dataclasses import replace
from typing import Any

import numpy as np

from analytics.hac import HacSurface, hac_surface
from analytics.influence import CellWithout, Episode, InfluenceResult, cell_without, episodes
from analytics.partial_cell import PartialCell, Relation
from analytics.robust import CellInference, SurfaceInference, cell_inference, surface_inference
from analytics.series import PERIODS_PER_YEAR, Pair, period_code
from app.compute import Bridge, cell_span, grid
from app.lag.left_out import kept_months
from app.state import StateError, ViewState


def every_month(state: ViewState) -> ViewState:
    """Return the state with no month left out: what all but map and cell are computed from."""
    return replace(state, left_out="")


def relation_left(state: ViewState, bridge: Bridge) -> Relation | None:
    """Return the chosen cell without the months left out; None where none is."""
    pair = bridge.pair(state)
    if kept_months(pair, state) is None:
        return None

    def make() -> Relation:
        cell = PartialCell(**cell_of(state, bridge))
        kept = np.zeros(cell.n, dtype=bool)
        kept[bridge.cell(state).months - cell.first_month] = True
        return cell.relation(kept)

    return bridge.memory.once("relation-left:" + bridge.key(state), make)


def inference(state: ViewState, bridge: Bridge) -> CellInference:
    """Slope, correlation and their intervals by effective months, for the chosen cell."""
    return bridge.memory.once(
        "inference:" + bridge.key(every_month(state)),
        lambda: cell_inference(**cell_of(state, bridge)),
    )


def influence(state: ViewState, bridge: Bridge) -> InfluenceResult:
    """Refit the chosen cell without each episode of the driver."""
    return bridge.memory.once(
        "influence:" + bridge.key(every_month(state)), lambda: episodes(**cell_of(state, bridge))
    )


def map_inference(state: ViewState, bridge: Bridge) -> SurfaceInference:
    """Per-cell p and naive p in every cell of the map."""

    def make() -> SurfaceInference:
        pair, question = bridge.pair(state), state.question()
        windows, shifts = grid(pair, question)
        return surface_inference(
            pair.driver.values,
            pair.response.values,
            windows=windows,
            shifts=shifts,
            same_months=question.months == "same",
            periods_per_year=year(pair),
        )

    return bridge.memory.once("map-inference:" + bridge.key(every_month(state).question()), make)


def map_hac(state: ViewState, bridge: Bridge) -> HacSurface:
    """Bartlett HAC errors with fixed-b p in every cell of the map; each cell its own months."""

    def make() -> HacSurface:
        pair = bridge.pair(state)
        windows, shifts = grid(pair, state.question())
        return hac_surface(pair.driver.values, pair.response.values, windows=windows, shifts=shifts)

    return bridge.memory.once("map-hac:" + bridge.key(every_month(state).question()), make)


def episode_code(episode: Episode, pair: Pair, state: ViewState) -> str:
    """Name an episode by the driver's first and last month in it, for example 1978-03:1983-05."""
    start = cell_span(pair, state)[0]
    first = pair.periods[start + episode.first_month]
    last = pair.periods[start + episode.stop_month - 1]
    return f"{period_code(first)}:{period_code(last)}"


def without_episode(state: ViewState, bridge: Bridge) -> tuple[Episode, CellWithout] | None:
    """Return the episode that the state leaves out and the cell without it, if it names one.

    Raises
    ------
    StateError
        No episode of the chosen cell has these months.
    """
    if not state.without:
        return None
    pair = bridge.pair(state)
    for episode in influence(state, bridge).episodes:
        if episode_code(episode, pair, state) == state.without:
            return episode, cell_without(**cell_of(state, bridge), episode=episode)
    raise StateError(f"Without must name an episode of this cell, but got {state.without!r}")


def cell_of(state: ViewState, bridge: Bridge) -> dict[str, Any]:
    """Return the series and the place of the chosen cell, as functions of analytics take them."""
    pair = bridge.pair(state)
    first, last = cell_span(pair, state)
    return {
        "driver": pair.driver.values[first:last],
        "response": pair.response.values[first:last],
        "window": state.window,
        "shift": state.shift,
        "periods_per_year": year(pair),
    }


def year(pair: Pair) -> int:
    """Return the periods of a year."""
    return PERIODS_PER_YEAR[pair.driver.frequency]
