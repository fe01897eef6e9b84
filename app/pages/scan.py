"""The Scan page: every economy, driver and response in the files."""

from typing import Any

from dash import Dash, dcc, html

from app import controls
from app.compute import Bridge
from app.demo import PANEL
from app.figures import scan as figures
from app.pages import plain
from app.pages.as_of import as_of_line
from app.pages.scan_table import league_table, map_list
from app.places import software_version
from app.scan.bridge import Scan, scan
from app.scan.exports import MANY, stem
from app.scan.league import drawn_pairs, map_chart_parts, named_economies, shift_bins
from app.scan.words import (
    CAUTION,
    average_words,
    map_words,
    notes,
    sentence,
    shift_words_of,
    verdict,
)
from app.state import ViewState

PATH, TITLE, NAME = "/scan", "Scan", "scan"
PLACES = (
    "as-of",
    "notes",
    "pairs",
    "surfaces-words",
    "maps",
    "shifts-words",
    "averages-words",
)
SCREEN_ONLY = ("maps",)  # painted by a script; a brief has the chart of the same numbers


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page for an address; refused values are named and replaced by the usual ones."""
    state, refused = ViewState.from_query_or_default(query)
    return plain.frame(
        NAME,
        state,
        [
            controls.text(state, "drivers", placeholder="all money"),
            controls.text(state, "responses", placeholder="all prices"),
            controls.select(state, "sign"),
            controls.select(state, "correction"),
            controls.text(state, "first", placeholder="earliest"),
            controls.text(state, "last", placeholder="newest"),
            controls.text(state, "windows", placeholder="usual"),
            controls.text(state, "shifts", placeholder="usual"),
            controls.number(state, "surrogates"),
            controls.number(state, "seed"),
            html.Div(
                [
                    html.Button("Open a result", type="button", id="scan-open"),
                    html.Button(
                        "Back to the loaded files",
                        type="button",
                        id="scan-back",
                        hidden=not state.result,
                        **{"data-set": "result", "data-value": ""},
                    ),
                ],
                className="control result-file",
            ),
        ],
        [
            html.Div(id=f"{NAME}-as-of"),
            html.Div(id=f"{NAME}-notes"),
            html.Div(
                [
                    html.Section(
                        [
                            html.Div(
                                [html.H2("Every pair"), controls.csv_button("pairs")],
                                className="view-head",
                            ),
                            html.Div(id=f"{NAME}-pairs"),
                        ],
                        className="view wide",
                    ),
                    html.Section(
                        [
                            html.Div(
                                [
                                    html.H2("The map of each pair"),
                                    controls.save_buttons("surfaces", table=False),
                                ],
                                className="view-head",
                            ),
                            html.Div(id=f"{NAME}-surfaces-words", className="view-words"),
                            html.Div(
                                html.Div(id=f"{NAME}-maps"),
                                className="plain-plot maps",
                                id=f"{NAME}-surfaces-place",
                            ),
                        ],
                        className="view wide",
                    ),
                    plain.view(NAME, "shifts", "Where the best shifts lie"),
                    plain.view(
                        NAME,
                        "averages",
                        "Long averages across economies",
                        tools=[controls.select(state, "axes")],
                    ),
                ],
                className="board",
            ),
        ],
        CAUTION,
        refused,
    )


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callback of this page on an app."""
    plain.register(app, bridge, NAME, answer, PLACES)


def answer(state: ViewState, bridge: Bridge) -> plain.Answer:
    """Return words and charts for a state.

    Raises
    ------
    ValueError
        One sentence that says why there is no pair.
    """
    known = scan(state, bridge)
    asked = known.question
    state = asked.state
    waiting = known.panel is None
    held = waiting and len(asked.pairs) > MANY and state.begin == "no"
    unit = asked.noun
    surfaces, titles, best, stamp = map_chart_parts(known)
    charts: dict[str, Any] = {}
    words: dict[str, Any] = {
        "as-of": as_of_line(state),
        "notes": _notes(known, bridge, held=held),
        "pairs": league_table(known),
        "surfaces-words": map_words(known, len(surfaces)),
        "shifts-words": shift_words_of(known),
        "averages-words": average_words(known),
    }
    if surfaces:
        charts["surfaces"] = bridge.memory.once(
            f"scan-maps:{stamp}",
            lambda: figures.surface_maps(surfaces, titles, best, stamp).to_json(),
        )
        words["maps"] = map_list(known, drawn_pairs(known), best, stamp)
    if known.panel is not None:
        width, bins, span = shift_bins(known)
        if bins:
            charts["shifts"] = figures.shift_bars(bins, width, span, unit)
    if known.averages is not None:
        charts["averages"] = figures.average_points(
            known.averages,
            named_economies(known.averages),
            asked.roles.drivers[0],
            asked.roles.responses[0],
        )
    for name in ("shifts", "averages"):
        if name in charts:
            key = charts[name].layout.meta["key"]
            words[f"{name}-words"] = [words[f"{name}-words"], plain.key_list(key)]
    return plain.Answer(
        state,
        sentence(asked),
        verdict(known),
        _source(known, bridge),
        stem(known),
        charts,
        {
            "surfaces": f"Correlation at each window (up) and shift (across), {unit}s",
            "shifts": "Best shift of each pair",
            "averages": "Average growth, percent a year, one point an economy",
        },
        words,
        {"scan": f"Searching {len(asked.pairs)} pairs"} if waiting and not held else {},
    )


def _notes(known: Scan, bridge: Bridge, *, held: bool) -> list[Any]:
    asked = known.question
    found: list[Any] = [html.Li(note) for note in notes(known)]
    in_view = bridge.in_view(asked.state)
    if held:
        found.append(
            html.Li(
                [
                    f"{len(asked.pairs)} pairs take this page a while. The command pricewake scan"
                    " shares them among processes or machines, and goes on where it was stopped. ",
                    html.Button(
                        "Search them here",
                        type="button",
                        **{"data-set": "begin", "data-value": "yes"},
                    ),
                ]
            )
        )
    if asked.roles.economies == 1 and asked.opened is None:
        how: list[Any] = [
            "One economy is loaded. A panel is a file with the columns economy, period, series and"
            " value, or series named such as Abrisund: Broad money; open one on the ",
            dcc.Link("Data page", href="/data"),
            ". ",
        ]
        if in_view.placeholder and PANEL not in {one.name for one in in_view.releases}:
            how.append(
                html.Button("Show thirty invented economies", type="button", id="scan-panel")
            )
        found.append(html.Li(how))
    return [html.Ul(found, className="notes")] if found else []


def _source(known: Scan, bridge: Bridge) -> str:
    in_view = bridge.in_view(known.question.state)
    opened = known.question.opened
    files = [opened.name] if opened else [one.name for one in in_view.releases]
    more = f" and {len(files) - 4} more" if len(files) > 4 else ""
    return f"Source: {', '.join(files[:4])}{more}. Pricewake {software_version()}."
