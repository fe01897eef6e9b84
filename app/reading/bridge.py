"""What the Reading page says about one print: from a `ViewState` to results of analytics.

Each part is worked out by itself: what cannot be said gives one sentence, and the rest stands.
"""

import hashlib
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from analytics.carry_over import path_if
from analytics.goodness import goodness_chunk, goodness_plan, goodness_result
from analytics.series import Series
from analytics.tail import fitted_tail
from app.compute import Bridge
from app.jobs import Work
from app.opening import opening_state
from app.reading.parts import core_reading
from app.reading.result import Reading
from app.seasons import season_of
from app.state import StateError, ViewState

SAMPLE = ("series", "newest", "formula", "measure", "among", "rank_window", "since", "season")
TEST = (*SAMPLE, "family", "draws", "seed")
CORE = (*SAMPLE, "rank_kind", "split", "beyond", "level", "rank_level", "shortest", "gap")


def reading(state: ViewState, bridge: Bridge) -> Reading:
    """Gather all that is known about the print without doing any long work.

    Raises
    ------
    ValueError
        No such series, or it has no value up to the print.
    """
    loaded = chosen_series(state, bridge)
    core = _core(state, loaded, bridge)
    refused = dict(core.refused)
    path = goodness = fitted = None
    try:
        formula: Any = state.formula
        path = path_if(core.series, state.coming, formula=formula)
    except ValueError as error:
        refused["what-if"] = str(error)
    if core.fits:
        work = goodness_work(state, bridge)
        goodness = bridge.jobs.remembered(work)
        if goodness is None and bridge.jobs.refusal(work):
            refused["test"] = bridge.jobs.refusal(work)
    if goodness is not None:
        fitted = fitted_tail(goodness, core.print_value)
    return replace(core, state=state, path=path, goodness=goodness, fitted=fitted, refused=refused)


def _core(state: ViewState, loaded: Series, bridge: Bridge) -> Reading:
    return bridge.memory.once(
        reading_key("reading", state, loaded, CORE),
        lambda: core_reading(state, loaded, lambda series: season_of(series, bridge.memory)),
    )


def completed_reading(state: ViewState, bridge: Bridge) -> Reading:
    """Do the test of the fit as well, and gather all."""
    known = reading(state, bridge)
    if known.fits and known.goodness is None:
        bridge.jobs.complete(goodness_work(state, bridge))
        known = reading(state, bridge)
    return known


def chosen_series(state: ViewState, bridge: Bridge) -> Series:
    """Return the series that is read: the one named, else the one that sounds like prices."""
    in_view = bridge.in_view(state)
    return in_view.named(state.series or opening_state(in_view.series).response)


def goodness_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the test of the chosen family's fit as work."""
    loaded = chosen_series(state, bridge)

    def plan() -> Any:
        known = _core(state, loaded, bridge)
        if known.sample is None:
            raise StateError(known.refused.get("rank", "there is no rate to fit a distribution to"))
        return goodness_plan(known.sample, family=state.family, draws=state.draws, seed=state.seed)

    return Work(reading_key("goodness", state, loaded, TEST), plan, goodness_chunk, goodness_result)


WORK: dict[str, Callable[[ViewState, Bridge], Work]] = {"goodness": goodness_work}


def reading_key(part: str, state: ViewState, loaded: Series, names: tuple[str, ...]) -> str:
    """Return the key of a part: the data, then those fields of the state that it depends on."""
    kept = ViewState(**{name: getattr(state, name) for name in names})
    data = (loaded.fingerprint, loaded.name, loaded.unit, loaded.source, loaded.adjustment)
    text = "\n".join((part, *data, kept.to_query()))
    return f"{part}:{hashlib.sha256(text.encode()).hexdigest()[:32]}"
