"""The Data page: files in, what was understood, what is wrong with them, vintages and revisions.

Files are read, shown and only then kept: assets/intake.js sends them, app/desk/routes.py answers,
and the buttons of the preview decide.
"""

from collections.abc import Callable
from typing import Any

from dash import Dash, Input, Output, dcc, html

from app import controls
from app.compute import Bridge
from app.desk import bridge as desk
from app.desk import seasons
from app.figures.data import revisions_chart
from app.jobs import Work
from app.pages import data_breaks, data_season, plain
from app.pages import data_lists as lists
from app.pages import data_parts as parts
from app.pages.as_of import day_words
from app.pages.tables import ROWS, packed
from app.places import software_version
from app.state import ViewState
from app.words import counted, signed
from app.workspace import WorkspaceView, today

PATH, TITLE = "/data", "Data"
PLACES = (
    "problems",
    "breaks",
    "series",
    "files",
    "season-words",
    "revisions-words",
    "prints",
)
CAUTION = (
    "A first print is the newest value of the vintage in which it first stands here; what was "
    "published between two files that were loaded is not known. Past revisions say little of the "
    "next one where the source has changed its method. Files stay on this machine."
)


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page for an address; refused values are named and replaced by the usual ones."""
    state, refused = ViewState.from_query_or_default(query)
    clear = html.Button("Now", type="button", **{"data-set": "as_of", "data-value": ""})
    body = [
        _drop(),
        dcc.Store(id="data-pending", data=[]),
        html.Div(id="data-preview", className="preview"),
        html.Div(id="data-problems"),
        *data_breaks.places(),
        html.Section(
            [
                html.Div(
                    [html.H2("What was understood"), _csv("series")],
                    className="view-head",
                ),
                html.Div(html.P("Reading what is kept …", className="opening"), id="data-series"),
            ]
        ),
        data_season.view(),
        plain.view(
            "data",
            "revisions",
            "First prints and revisions",
            wide=True,
            tools=[controls.select(state, "revised")],
        ),
        html.Div(id="data-prints"),
        html.Div(id="data-files"),
        html.P(_kept_words(bridge), className="quiet"),
    ]
    tools = [controls.day(state, "as_of"), clear]
    return plain.frame("data", state, tools, body, CAUTION, refused)


def answer(state: ViewState, bridge: Bridge) -> plain.Answer:
    """Return what the page shows for a state."""
    in_view = bridge.in_view(state)
    shown = desk.all_series(in_view)
    found = desk.revised(state, bridge)
    names = desk.revised_names(in_view)
    charts, subtitles = {}, {}
    if found is not None and found.result is not None:
        charts["revisions"] = revisions_chart(found.result, found.start, found.unit)
        subtitles["revisions"] = (
            f"{found.name}, {found.unit}. " + parts.revision_sentences(found)[0]
        )
    season = seasons.chosen(state, bridge)
    charts |= data_season.chart(season)
    subtitles |= data_season.subtitle(season)
    problems = in_view.problems
    hidden = bridge.workspace.hidden_files()
    files = parts.files_table(in_view, hidden)
    found_breaks = data_breaks.checked(in_view, state, bridge)
    return plain.Answer(
        state=state,
        sentence=_sentence(in_view, len(shown)),
        verdict=_verdict(in_view, found, names),
        source=f"Source: {found.vintages[-1].series.source if found else 'files in view'}."
        f" Pricewake {software_version()}.",
        stem=f"{found.name if found else ''} {state.revised} {state.as_of}",
        charts=charts,
        subtitles=subtitles,
        words={
            "problems": [
                html.H2("Found in the files"),
                lists.problem_table(problems, "", state),
            ]
            if problems
            else [],
            "breaks": data_breaks.section(in_view, found_breaks, state),
            "series": _listed(in_view, state) if shown else _nothing(in_view),
            "files": [html.H2("Files"), *files] if files else [],
            "season-words": data_season.words(season),
            "prints": parts.prints_table(found),
            "revisions-words": parts.revisions_words(found, names, in_view.placeholder),
        },
        jobs={"checks": f"Checking {len(in_view.as_read)} series"} if found_breaks is None else {},
    )


def checks(state: ViewState, bridge: Bridge) -> Work:
    """Return the checks of every series in view as work."""
    return data_breaks.work_of(bridge.in_view(state), state, bridge)


WORK: dict[str, Callable[[ViewState, Bridge], Work]] = {"checks": checks}


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callbacks of this page on an app."""
    plain.register(app, bridge, "data", answer, PLACES)

    @app.callback(
        Output("data-preview", "children"),
        Input("data-pending", "data"),
        prevent_initial_call=True,
    )
    def _preview(tokens: list[str]) -> list[Any]:
        found = [(token, bridge.pending.found(token)) for token in tokens or ()]
        return packed(preview([(t, r) for t, r in found if r is not None], bridge))


def preview(found: list[tuple[str, Any]], bridge: Bridge) -> list[Any]:
    """Return what was understood in files that are not kept yet, by token."""
    releases = [(t, desk.corrected(release, bridge.workspace)) for t, release in found]
    return parts.preview(releases, bridge.workspace.as_of(), today())


def _drop() -> html.Section:
    return html.Section(
        [
            html.H2("Open the files of a release"),
            html.P(
                "Choose one or several files, or drop them here. What was understood is shown "
                "before anything is kept.",
                className="quiet",
            ),
            html.Span(className="native", **{"data-native": "files", "data-type": "file"}),
            html.Div(
                [
                    html.Progress(id="intake-progress", max="1", **{"aria-label": "Files read"}),
                    html.Span(id="intake-progress-words"),
                    html.Button("Cancel", id="intake-cancel", type="button"),
                ],
                id="intake-work",
                className="work",
                hidden=True,
            ),
            html.Div(id="intake-message", className="message said", role="alert"),
        ],
        id="data-drop",
        className="drop",
        **{"aria-label": "Open the files of a release"},
    )


def _csv(view: str) -> html.Div:
    return html.Div(
        html.A("Save CSV", id=f"csv-{view}", className="button", **{"data-csv": view}),
        className="save",
    )


def _kept_words(bridge: Bridge) -> str:
    path = bridge.workspace.store.path
    if path is None:
        return "This workspace is in memory: what is loaded is gone when the program ends."
    return f"Every vintage is kept in {path}."


def _sentence(in_view: WorkspaceView, series: int) -> str:
    stood = f", as they stood on {day_words(in_view.day)}" if in_view.day else ""
    if in_view.placeholder:
        return "An invented economy stands here until you open files of your own."
    if not series:
        return (
            f"Nothing is in view on {day_words(in_view.day)}." if stood else "Nothing is in view."
        )
    files = counted(len(in_view.releases), "file")
    return f"{series} series from {files}{stood or ', as they stand now'}."


def _verdict(in_view: WorkspaceView, found: desk.Revised | None, names: list[str]) -> str:
    if in_view.placeholder:
        return "Every page shows it. It is put away with the first file of yours, and never kept."
    said = []
    for weight in ("error", "warning"):
        count = sum(problem.severity == weight for problem in in_view.problems)
        if count:
            said.append(counted(count, weight))
    verb = "was" if said == ["1 error"] or said == ["1 warning"] else "were"
    words = [f"{' and '.join(said)} {verb} found in the files." if said else ""]
    if not said and in_view.releases:
        words = [
            "No error and no warning came up as the files were read; what the checks of each"
            " series found is below."
        ]
    if names:
        words.append(f"{len(names)} series {'has' if len(names) == 1 else 'have'} been revised.")
    if found is not None and found.result is not None and found.result.n:
        words.append(
            f"First prints of {found.name} were revised by {signed(found.result.mean, 3)} on"
            f" average ({found.unit})."
        )
    return " ".join(word for word in words if word)


def _listed(in_view: WorkspaceView, state: ViewState) -> list[Any]:
    found = lists.series_table(in_view, state)
    total = len(desk.all_series(in_view))
    more = [html.P(f"{total} series; the CSV has them all.", className="quiet")]
    return [found, *(more if total > ROWS else [])]


def _nothing(in_view: WorkspaceView) -> list[Any]:
    if in_view.day and in_view.started:
        words = (
            f"Nothing was loaded yet on {day_words(in_view.day)}; the first file stands from"
            f" {day_words(in_view.started)}. Choose a later date above."
        )
    else:
        words = "Nothing is loaded yet. Open the files of a release above."
    return [html.P(words, className="empty")]
