"""What stands where on the Lag page: headline, controls, three charts, folds."""

from typing import Any

from dash import dcc, html

from app import controls
from app.figures.theme import CONFIG
from app.pages import lag_evidence, lag_tools
from app.pages.as_of import as_of_line
from app.state import ViewState


def body(
    shown: ViewState,
    data: dict[str, Any],
    names: list[str],
    ranges: tuple[list[int], list[int]],
    caution: str,
) -> html.Div:
    """Return the page for a state; `ranges` are those of window and shift."""
    windows, shifts = ranges
    return html.Div(
        [
            dcc.Store(id="lag-state", data=data["state"]),
            dcc.Store(id="lag-question"),
            dcc.Store(id="lag-data", data=data),
            _headline(shown),
            _controls(shown, names),
            html.Div(
                [
                    html.Section(
                        [
                            controls.view_head(
                                "surface", "Every window and shift", lag_tools.player()
                            ),
                            html.Div(
                                [
                                    _graph("surface"),
                                    html.Div(id="lag-cross", **{"aria-hidden": "true"}),
                                    controls.slider(shown, "window", *windows, vertical=True),
                                    controls.slider(shown, "shift", *shifts),
                                ],
                                id="lag-map",
                                className="map",
                                tabIndex="0",
                                role="group",
                                **{"aria-label": "Map; arrow keys move the chosen cell"},
                            ),
                        ],
                        className="view",
                    ),
                    html.Section(
                        [
                            controls.view_head(
                                "scatter", "The chosen cell", lag_tools.scatter_tools(shown)
                            ),
                            html.P(
                                [
                                    html.Span(id="lag-equation"),
                                    _copy("slope", "Copy the slope with all digits"),
                                ],
                                className="equation",
                            ),
                            html.P(id="lag-slice-words", className="slice-words", hidden=True),
                            _graph("scatter", html.Div(id="lag-band", hidden=True)),
                            _key(
                                ("line", "fit", "least squares"),
                                ("dash", "mark", "2-sigma ellipse"),
                                ("diamond", "response", "mean response in slices"),
                                ("square", "driver", "mean driver"),
                            ),
                        ],
                        className="view",
                    ),
                    html.Section(
                        [
                            controls.view_head(
                                "overlay", "Through time", lag_tools.overlay_tools(shown)
                            ),
                            html.Ul(
                                [
                                    html.Li(
                                        [
                                            html.Span(className=f"sign {sign} {side}"),
                                            html.Span(id=f"lag-{side}-words"),
                                        ]
                                    )
                                    for sign, side in (("line", "driver"), ("dash", "response"))
                                ],
                                className="key",
                            ),
                            lag_tools.range_choice(),
                            _graph("overlay"),
                        ],
                        className="view wide",
                    ),
                ],
                className="board",
            ),
            html.Div(
                [controls.select(shown, "season"), controls.select(shown, "meet")],
                className="controls",
                role="group",
                **{"aria-label": "How the two are made comparable"},
            ),
            lag_evidence.folds(shown),
            html.P(caution, className="caution"),
        ],
        className="lag-page",
    )


def _headline(shown: ViewState) -> html.Header:
    return html.Header(
        [
            html.H1(id="lag-sentence"),
            _acts(),
            lag_evidence.strip(_copy("correlation", "Copy the correlation with all digits")),
            lag_evidence.verdict_place(),
            html.P(id="lag-message", className="message", role="alert"),
            as_of_line(shown),
        ],
        className="headline",
    )


def _controls(shown: ViewState, names: list[str]) -> html.Div:
    return html.Div(
        [
            controls.select(shown, "driver", names),
            controls.select(shown, "response", names),
            controls.select(shown, "growth"),
            controls.text(shown, "first", placeholder="earliest"),
            controls.text(shown, "last", placeholder="newest"),
            controls.select(shown, "months"),
            controls.select(shown, "quantity"),
        ],
        className="controls",
        role="group",
        **{"aria-label": "What is compared"},
    )


def _acts() -> html.Div:
    return html.Div(
        [
            html.Button("Undo", id="undo", type="button", disabled=True),
            html.Button("Redo", id="redo", type="button", disabled=True),
            html.Button("Pin", type="button", **{"data-pin": "chosen"}),
            html.Button("Copy link", id="copy-link", type="button"),
        ],
        className="acts",
        role="group",
        **{"aria-label": "This view"},
    )


def _copy(number: str, title: str) -> html.Button:
    return html.Button(
        type="button",
        className="copy",
        title=title,
        **{"data-copy-number": number, "aria-label": title},
    )


def _graph(name: str, *over: Any) -> html.Div:
    graph = dcc.Graph(id=f"lag-{name}", config=CONFIG, responsive=True)
    return html.Div([graph, *over], className=f"plot {name}")


def _key(*entries: tuple[str, str, str]) -> html.Ul:
    return html.Ul(
        [
            html.Li([html.Span(className=f"sign {sign} {token}"), words])
            for sign, token, words in entries
        ],
        className="key",
    )
