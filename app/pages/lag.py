"""The Lag page: two sliders, the map of all cells and the scatter of one, linked both ways.

The server answers a *question* (pair, growth formula, sample, map); moving a slider inside an
answered question needs no server: assets/page-lag.js computes the cell from the same series, and a
browser test holds its numbers to those of `analytics.cell`.
"""

from collections.abc import Collection
from dataclasses import asdict, dataclass
from typing import Any

from dash import ClientsideFunction, Dash, Input, Output, State, html
from plotly.graph_objects import Figure
from plotly.io.json import to_json_plotly

from analytics.cell import LagCell
from analytics.series import PERIODS_PER_YEAR, FloatArray, Pair, Series
from analytics.surface import LagSurface
from app import controls
from app.compute import MIN_PAIRS, Bridge, Overlay, cell_span, noun, span_words
from app.figures import lag as figures
from app.lag.cells import map_hac, map_inference
from app.lag.left_out import left_out_spans, left_out_words
from app.lag.tools import counts_of, slice_of
from app.pages import lag_evidence, lag_layout
from app.places import software_version
from app.state import StateError, ViewState
from app.words import as_sentence

PATH, TITLE = "/lag", "Lag"
CAUTION = (
    "An association in past data, not a cause, and not investment or policy advice. Official "
    "statistics and your desk's own qualified judgement come first."
)


@dataclass(frozen=True, eq=False)
class LagView:
    """Everything that the page shows for one state.

    `loaded` are the two series as read; `breaks` says how their marked breaks are treated,
    `made` how season and frequency are.
    """

    state: ViewState
    pair: Pair
    surface: LagSurface
    cell: LagCell
    overlay: Overlay
    start: int
    loaded: tuple[Series, Series]
    breaks: tuple[str, ...] = ()
    made: tuple[str, ...] = ()

    @property
    def sentence(self) -> str:
        """The state in one sentence."""
        without = left_out_words(self.pair, self.state)
        return self.state.sentence(noun(self.pair), span_words(self.pair), without)


def view(state: ViewState, bridge: Bridge, asked: Collection[str] = ()) -> LagView:
    """Compute what the page shows.

    A window or shift outside the map gives way to the calendar's usual one, unless it is named in
    `asked`: then it is kept, and refused where the sample does not allow it.

    Raises
    ------
    ValueError
        One sentence that says why there is nothing to show.
    """
    state = bridge.fitted(state, asked)
    pair = bridge.pair(state)
    cell = bridge.cell(state)
    start = cell_span(pair, state)[0] + cell.start
    in_view = bridge.in_view(state)
    sides = state.driver, state.response
    return LagView(
        state=state,
        pair=pair,
        surface=bridge.surface(state),
        cell=cell,
        overlay=bridge.overlay(state),
        start=start,
        loaded=(in_view.as_read[sides[0]], in_view.as_read[sides[1]]),
        breaks=tuple(f"{name}: {said}" for name in sides for said in in_view.breaks(name)),
        made=bridge.prepared(state).said,
    )


def payload(state: ViewState, bridge: Bridge) -> dict[str, Any]:
    """Return the view as the browser takes it: series, bounds, charts; or one sentence."""
    try:
        shown = view(state, bridge)
    except ValueError as error:
        return {"error": str(error), "state": asdict(state), "defaults": asdict(ViewState())}
    pair, surface = shown.pair, shown.surface
    return {
        "state": asdict(shown.state),
        "defaults": asdict(ViewState()),
        "notes": _notes(state, shown),
        "noun": noun(pair),
        "span": span_words(pair),
        "perYear": PERIODS_PER_YEAR[pair.driver.frequency],
        "ordinal": pair.periods[0].ordinal,
        "driver": _side(pair, "driver"),
        "response": _side(pair, "response"),
        "windows": [int(surface.windows[0]), int(surface.windows[-1])],
        "shifts": [int(surface.shifts[0]), int(surface.shifts[-1])],
        "same": shown.state.months == "same",
        "minPairs": MIN_PAIRS,
        "lost": [pair.lost_driver, pair.lost_response],
        "leftOut": left_out_spans(pair, shown.state),
        "without": left_out_words(pair, shown.state),
        "figures": _drawn(shown, bridge),
        "source": _source_line(pair),
        "invented": any("(invented)" in s.source for s in (pair.driver, pair.response)),
    }


def charts(shown: LagView, bridge: Bridge) -> dict[str, Figure]:
    """Draw the map, the chosen cell and both series through time."""
    pair, state = shown.pair, shown.state
    return {
        "surface": figures.surface_heatmap(shown.surface, pair, state, p_map(state, bridge)),
        "scatter": scatter(shown, bridge),
        "overlay": figures.overlay_lines(shown.overlay, pair, state, left_out_spans(pair, state)),
    }


def _drawn(shown: LagView, bridge: Bridge) -> dict[str, str]:
    """Return the charts as text; drawing takes longer than computing, so they are kept.

    The page puts the numbers of the chosen cell into scatter and overlay itself, at every move:
    they are sent without.
    """
    state = shown.state
    units = f"{shown.pair.driver.unit}|{shown.pair.response.unit}"

    def make() -> dict[str, str]:
        drawn = {name: chart.to_dict() for name, chart in charts(shown, bridge).items()}
        for trace in (*drawn["scatter"]["data"], *drawn["overlay"]["data"]):
            for numbers in ("x", "y", "z", "text", "customdata"):
                trace.pop(numbers, None)
        del drawn["scatter"]["data"][0]["marker"]["color"]
        return {name: to_json_plotly(chart) for name, chart in drawn.items()}

    return bridge.memory.once(f"drawn:{bridge.key(state)}:{state.to_query()}:{units}", make)


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page for an address; refused values are named and replaced by the usual ones."""
    state, refused = ViewState.from_query_or_default(query)
    named = {part.split("=")[0] for part in query.lstrip("?").split("&")}
    opening = bridge.in_view(state).opening_state()
    if not named & {"driver", "response", "window", "shift"}:
        state = _with(state, window=opening.window, shift=opening.shift)
    for side in {"driver", "response"} - named:
        state = _with(state, **{side: getattr(opening, side)})
    data = payload(state, bridge)
    data |= {"fresh": True, "notes": [*map(as_sentence, refused), *data.get("notes", [])]}
    shown = ViewState(**data["state"])
    names = list(bridge.in_view(shown).series)
    ranges = data.get("windows", [1, 60]), data.get("shifts", [-36, 60])
    return lag_layout.body(shown, data, names, ranges, CAUTION)


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callbacks of this page on an app."""
    app.clientside_callback(
        ClientsideFunction("lag", "question"),
        Output("lag-question", "data"),
        Input("lag-state", "data"),
    )

    @app.callback(
        Output("lag-data", "data"),
        Input("lag-question", "data"),
        State("lag-state", "data"),
        prevent_initial_call=True,
    )
    def _answer(_question: str, state: dict[str, Any]) -> dict[str, Any]:
        try:
            return payload(controls.sent_state(state), bridge)
        except StateError as error:
            return {"error": str(error), "state": state}

    lag_evidence.register(app, bridge)
    app.clientside_callback(
        ClientsideFunction("evidence", "adopt"),
        Output("lag-adopted", "data"),
        Input("lag-evidence", "data"),
        prevent_initial_call=True,
    )
    app.clientside_callback(
        ClientsideFunction("lag", "adopt"),
        Output("lag-message", "children"),
        Input("lag-data", "data"),
    )


def scatter(shown: LagView, bridge: Bridge) -> Figure:
    """Draw the chosen cell with what the state asks for besides its points."""
    return figures.cell_scatter(
        shown.cell,
        shown.pair,
        shown.state,
        shown.start,
        slice_of(shown.state, bridge),
        counts_of(shown.state, bridge),
    )


def p_map(state: ViewState, bridge: Bridge) -> FloatArray | None:
    """Return the p-values that the map shows, shape (W, S); None where it shows none."""
    if state.quantity == "p_hac":
        return map_hac(state, bridge).p
    if state.quantity in ("p_cell", "p_naive"):
        found = map_inference(state, bridge)
        return found.p if state.quantity == "p_cell" else found.p_naive
    return None


def _with(state: ViewState, **changes: Any) -> ViewState:
    return ViewState(**{**asdict(state), **changes})


def _notes(asked: ViewState, shown: LagView) -> list[str]:
    """Say what was changed or left out on the way from the state asked for to the one shown."""
    unit, notes = noun(shown.pair), []
    for name in ("window", "shift"):
        wanted, got = getattr(asked, name), getattr(shown.state, name)
        if wanted != got:
            bounds = getattr(shown.surface, name + "s")
            notes.append(
                f"A {name} of {wanted} {unit}s is outside this map ({bounds[0]} to {bounds[-1]});"
                f" {got} is shown."
            )
    return [*notes, *(f"{said}." for said in (*shown.breaks, *shown.made))]


def _source_line(pair: Pair) -> str:
    """Name sources and program, for the foot of a saved chart."""
    sources = dict.fromkeys(s.source or s.name for s in (pair.driver, pair.response))
    lost = pair.lost_driver + pair.lost_response
    left = f" {lost} {noun(pair)}s without a partner left out." if lost else ""
    return f"Source: {'; '.join(sources)}.{left} Pricewake {software_version()}."


def _side(pair: Pair, side: str) -> dict[str, Any]:
    series = getattr(pair, side)
    return {
        "name": series.name,
        "values": series.values.tolist(),
        "unit": figures.rate_unit(series),
        "source": series.source,
    }
