"""What the tools of the Lag page show: slice, counts, peaks, a pinned cell, several responses."""

import hashlib
from dataclasses import dataclass, replace
from typing import Any

from analytics.cell import LagCell
from analytics.error_density import ErrorDensity, error_density
from analytics.peaks import MatchedPeaks, matched_peaks
from analytics.rates import trailing_mean
from analytics.robust import CellInference
from analytics.series import Pair
from analytics.several import holm
from analytics.slices import Counts, SlicePath, pair_counts, slice_path
from analytics.surface import LagSurface
from app.compute import Bridge, cell_span, grid, noun
from app.jobs import Work
from app.lag.cells import every_month, inference, year
from app.lag.evidence import search_work
from app.state import StateError, ViewState

MOST_RESPONSES = 12


@dataclass(frozen=True, eq=False)
class Peaks:
    """Matched peaks, and the place in the pair's calendar of the first smoothed value."""

    found: MatchedPeaks
    first: int


@dataclass(frozen=True, eq=False)
class OneCell:
    """A cell to be put beside another; `start` is the place of its sample in the calendar."""

    state: ViewState
    cell: LagCell
    inference: CellInference
    start: int


@dataclass(frozen=True, eq=False)
class OneResponse:
    """The driver against one response: best cell, and the correlation at each shift.

    `p` is search-adjusted, `p_all` also pays for the other responses (Holm); both nan, and the
    rest None, where `refusal` says why there is nothing.
    """

    name: str
    unit: str = "month"
    window: int = 0
    best: tuple[int, int, float] | None = None
    surface: LagSurface | None = None
    p: float = float("nan")
    p_all: float = float("nan")
    refusal: str = ""


def slice_of(state: ViewState, bridge: Bridge) -> SlicePath | None:
    """Sweep the band of the state along its side of the chosen cell; None where it is off."""
    if state.band == "off":
        return None
    cell = bridge.cell(state)
    sides = (cell.driver, cell.response)
    along, other = sides if state.band == "driver" else sides[::-1]
    return slice_path(along, other, width=state.band_width / 100)


def counts_of(state: ViewState, bridge: Bridge) -> Counts | None:
    """Count the pairs of the chosen cell in bins; None where the scatter shows points only."""
    if state.points == "points":
        return None
    cell = bridge.cell(state)
    return pair_counts(cell.driver, cell.response)


def density_of(state: ViewState, bridge: Bridge) -> ErrorDensity | None:
    """Joint density of intercept and slope; None where the line fits without error."""
    try:
        return error_density(inference(state, bridge))
    except ValueError:
        return None


def peaks_of(state: ViewState, bridge: Bridge) -> Peaks | None:
    """Match the peaks of both smoothed series; None where the state marks none.

    Matches are looked for within half a year of the shift, or half a window where that is longer.
    """
    if state.peaks == "off":
        return None
    pair = bridge.pair(state)
    smooth = [trailing_mean(s.values, state.window) for s in (pair.driver, pair.response)]
    found = matched_peaks(
        *smooth,
        shift=state.shift,
        reach=max(1, year(pair) // 2, state.window // 2),
        prominence=float(state.peaks),
    )
    return Peaks(found, state.window - 1)


def pinned_state(state: ViewState) -> ViewState | None:
    """Return the state with the pinned cell chosen; None where none is pinned."""
    if not state.pinned:
        return None
    window, shift = (int(part) for part in state.pinned.split(":"))
    return replace(state, window=window, shift=shift, pinned="", without="")


def two_cells(state: ViewState, bridge: Bridge) -> tuple[OneCell, OneCell] | None:
    """Return the pinned cell and the chosen one; None where none is pinned.

    Raises
    ------
    ValueError
        The pinned cell lies outside the map or has too few pairs; one sentence.
    """
    pinned = pinned_state(state)
    if pinned is None:
        return None
    pair = bridge.pair(state)
    windows, shifts = grid(pair, state)
    if pinned.window not in windows or pinned.shift not in shifts:
        raise StateError(
            f"Pinned cell must lie on this map, but got window {pinned.window} and shift"
            f" {pinned.shift}"
        )
    return _one_cell(pinned, bridge, pair), _one_cell(state, bridge, pair)


def _one_cell(state: ViewState, bridge: Bridge, pair: Pair) -> OneCell:
    start = cell_span(pair, state)[0]
    return OneCell(state, bridge.cell(state), inference(state, bridge), start)


def responses_of(state: ViewState, bridge: Bridge) -> tuple[str, ...]:
    """Return the names of the responses that the state lists, in the order of the workspace.

    Raises
    ------
    StateError
        A name is not loaded or is the driver, or there are more than twelve.
    """
    listed = [name for name in dict.fromkeys(state.other_responses.split("|")) if name]
    loaded = list(bridge.in_view(state).series)
    for name in listed:
        if name not in loaded:
            raise StateError(f"Other responses must be loaded series, but got {name!r}")
        if name == state.driver:
            raise StateError(f"Other responses must not hold the driver, but got {name!r}")
    if len(listed) > MOST_RESPONSES:
        raise StateError(f"Other responses must be at most {MOST_RESPONSES}, but got {len(listed)}")
    return tuple(name for name in loaded if name in listed)


@dataclass(frozen=True)
class _Several:
    names: tuple[str, ...]

    @property
    def chunks(self) -> int:
        return len(self.names)


def responses_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the search of the driver against each listed response as work, one chunk each."""
    names = responses_of(state, bridge)
    if not names:
        raise StateError("Other responses must name at least one series, but got none")
    question = every_month(state)
    keys = [bridge.key(replace(question, response=name).question()) for name in names]
    key = hashlib.sha256("\n".join([*keys, str(state.window)]).encode()).hexdigest()[:32]

    def chunk(plan: _Several, index: int) -> OneResponse:
        return _one_response(question, plan.names[index], bridge)

    def result(_plan: _Several, chunks: list[Any]) -> tuple[OneResponse, ...]:
        asked = [found for found in chunks if not found.refusal]
        paid = dict(zip([f.name for f in asked], holm([f.p for f in asked]).tolist(), strict=True))
        return tuple(replace(f, p_all=paid.get(f.name, float("nan"))) for f in chunks)

    return Work(f"responses:{key}", lambda: _Several(names), chunk, result)


def _one_response(state: ViewState, name: str, bridge: Bridge) -> OneResponse:
    try:
        there = bridge.fitted(replace(state, response=name))
        pair = bridge.pair(there)
        search = bridge.jobs.complete(search_work(there, bridge))
        return OneResponse(
            name=name,
            unit=noun(pair),
            window=there.window,
            best=(search.best_window, search.best_shift, float(search.best_correlation)),
            surface=bridge.surface(there),
            p=float(search.p),
        )
    except ValueError as error:
        return OneResponse(name=name, refusal=str(error))
