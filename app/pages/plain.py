"""What pages share that the server answers whole: frame, one callback, charts by way of the theme.

A page of this kind has ``answer(state, bridge)``, which returns the words of each place and the
charts of each view. assets/plain-page.js is the other half.
"""

import hashlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import asdict, dataclass, field
from typing import Any

from dash import ClientsideFunction, Dash, Input, Output, State, dcc, html
from plotly.graph_objects import Figure

from app import controls
from app.compute import Bridge
from app.figures.theme import CONFIG
from app.pages.tables import packed
from app.state import ViewState
from app.words import as_sentence


@dataclass(frozen=True, eq=False)
class Answer:
    """What a page shows for a state.

    Attributes
    ----------
    state : ViewState
        The state shown, which may differ from the one asked for.
    sentence : str
        The state in one sentence: the headline, and the title of saved charts.
    verdict : str
        One or two sentences with their numbers.
    source : str
        Foot of saved charts: sources and program.
    stem : str
        Words for file names, after the view's name.
    charts : mapping of str to Figure or str
        One a view, as a figure or as its JSON; a view that is left out is not shown.
    subtitles : mapping of str to str
        Second line of saved charts.
    words : mapping of str to component
        Children of each place named in `places` of `frame`.
    jobs : mapping of str to str
        Long work that the page is to ask for, chunk by chunk, before it asks again, in words.
    """

    state: ViewState
    sentence: str
    verdict: str
    source: str
    stem: str
    charts: Mapping[str, Figure | str]
    subtitles: Mapping[str, str] = field(default_factory=dict)
    words: Mapping[str, Any] = field(default_factory=dict)
    jobs: Mapping[str, str] = field(default_factory=dict)


def frame(
    name: str,
    state: ViewState,
    tools: Sequence[Any],
    body: Sequence[Any],
    caution: str,
    refused: Sequence[str] = (),
) -> html.Div:
    """Return a page: headline, verdict, message, controls, body and the standing caution."""
    return html.Div(
        [
            dcc.Store(id=f"{name}-state", data=asdict(state)),
            dcc.Store(id=f"{name}-answer"),
            dcc.Store(id=f"{name}-adopted"),
            dcc.Store(id=f"{name}-drawn", data={}),
            dcc.Store(id=f"{name}-tick", data=0),
            html.Header(
                [
                    html.H1(id=f"{name}-sentence"),
                    html.P(id=f"{name}-verdict", className="verdict", **{"aria-live": "polite"}),
                    html.P(
                        " ".join(map(as_sentence, refused)),
                        id=f"{name}-message",
                        className="message",
                    ),
                    html.Div(
                        [
                            html.Progress(id=f"{name}-progress", value="0", max="1"),
                            html.Span(id=f"{name}-progress-words"),
                            html.Button("Stop", id=f"{name}-cancel", type="button"),
                            html.Button("Go on", id=f"{name}-resume", type="button", hidden=True),
                        ],
                        id=f"{name}-work",
                        className="work",
                        hidden=True,
                    ),
                ],
                className="headline",
            ),
            html.Div(
                list(tools), className="controls", role="group", **{"aria-label": "What is shown"}
            ),
            html.Div(list(body), id=f"{name}-body"),
            html.P(caution, className="caution"),
        ],
        className=f"plain-page {name}-page",
        **{"data-page": name},
    )


def view(
    name: str, chart: str, words: str, *, wide: bool = False, tools: Sequence[Any] = ()
) -> html.Section:
    """Return a section with a heading, save buttons, its own controls, words and a chart."""
    graph = dcc.Graph(id=f"{name}-{chart}", config=CONFIG, responsive=True)
    return html.Section(
        [
            controls.view_head(chart, words),
            *([html.Div(list(tools), className="controls")] if tools else []),
            html.Div(id=f"{name}-{chart}-words", className="view-words"),
            html.Div(graph, className=f"plot plain-plot {chart}", id=f"{name}-{chart}-place"),
        ],
        className="view wide" if wide else "view",
    )


def register(
    app: Dash,
    bridge: Bridge,
    name: str,
    answer: Callable[[ViewState, Bridge], Answer],
    places: Sequence[str],
) -> None:
    """Register the one callback of such a page; `places` are the ids that take ``words``.

    The page says which charts it shows, by their marks; those are not sent again.
    """

    @app.callback(
        Output(f"{name}-sentence", "children"),
        Output(f"{name}-verdict", "children"),
        Output(f"{name}-message", "children"),
        Output(f"{name}-body", "hidden"),
        *[Output(f"{name}-{place}", "children") for place in places],
        Output(f"{name}-answer", "data"),
        Input(f"{name}-state", "data"),
        Input(f"{name}-tick", "data"),
        State(f"{name}-drawn", "data"),
    )
    def _answer(
        values: dict[str, Any], _tick: int, drawn: dict[str, str] | None
    ) -> tuple[Any, ...]:
        nothing = [[] for _ in places]
        defaults = asdict(ViewState())
        try:
            shown = answer(controls.sent_state(values), bridge)
        except ValueError as error:
            data = {
                "asked": values,
                "state": values,
                "defaults": defaults,
                "figures": {},
                "sentence": "",
            }
            return (
                "Nothing to show for this choice.",
                "",
                as_sentence(str(error)),
                True,
                *nothing,
                data,
            )
        data = {
            "asked": values,
            "state": asdict(shown.state),
            "defaults": defaults,
            "sentence": shown.sentence,
            "subtitles": dict(shown.subtitles),
            "source": shown.source,
            "stem": shown.stem,
            "jobs": list(shown.jobs),
            "jobWords": dict(shown.jobs),
            "figures": {
                view: _unless_drawn(_text(chart), (drawn or {}).get(view))
                for view, chart in shown.charts.items()
            },
        }
        words = [packed(shown.words.get(place, [])) for place in places]
        return shown.sentence, shown.verdict, "", False, *words, data

    app.clientside_callback(
        ClientsideFunction("plain", "adopt"),
        Output(f"{name}-adopted", "data"),
        Input(f"{name}-answer", "data"),
    )


def key_list(entries: Sequence[tuple[str, str, str]]) -> html.Ul:
    """Return what the colours of a chart stand for: shape, colour token and words of each."""
    return html.Ul(
        [
            html.Li(
                [html.Span(className=f"sign {shape}", style={"--sign": f"var(--{token})"}), words]
            )
            for shape, token, words in entries
        ],
        className="key",
    )


def _text(chart: Figure | str) -> str:
    """Return a chart as text: it goes through the JSON of the answer unread."""
    return chart if isinstance(chart, str) else str(chart.to_json())


def _unless_drawn(chart: str, drawn: str | None) -> dict[str, str]:
    """Return a chart with its mark, or the mark alone where that one is drawn."""
    mark = hashlib.blake2b(chart.encode(), digest_size=9).hexdigest()
    return {"mark": mark} if mark == drawn else {"mark": mark, "chart": chart}
