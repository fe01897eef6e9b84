"""The Brief page: choose views and their order, write words between them, see it, save it.

The draft is the browser's: assets/brief.js keeps it there and draws the list of parts. The server
makes the brief from it, step by step (app/brief/routes.py).
"""

from typing import Any

from dash import ClientsideFunction, Dash, Input, Output, dcc, html

from app import controls
from app.brief.assembled import CAUTION, opening, prefilled
from app.brief.parts import FORMS, LONGEST_TITLE, MOST_LETTERS, PAPERS, sent_draft
from app.brief.sources import sources
from app.compute import Bridge
from app.state import ViewState

PATH, TITLE = "/brief", "Brief"


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page; what it offers and the usual draft go along for the browser."""
    state, _ = ViewState.from_query_or_default(query)
    return html.Div(
        [
            dcc.Store(id="brief-offer", data=offer(bridge, state.as_of)),
            dcc.Store(id="brief-adopted"),
            html.Header(
                [
                    html.H1("What leaves the desk"),
                    html.P(
                        "Choose views and their order, write words between them. You save one file"
                        " that opens anywhere, its PDF and pictures, every number, and the recipe"
                        " that makes it again next month.",
                        className="verdict",
                    ),
                    html.P(id="brief-message", className="message", role="alert"),
                ],
                className="headline",
            ),
            html.Div(
                [
                    html.Div(id="brief-title", className="control"),
                    _select(
                        "form",
                        "Form",
                        FORMS,
                        "Every view with its words, or what fits one printed page.",
                    ),
                    _select(
                        "paper",
                        "Paper of the PDF",
                        {"a4": "A4", "letter": "Letter"},
                        "Size of the sheet of the PDF; the page itself prints on either.",
                    ),
                    html.Div(
                        [
                            _button("brief-save", "Save all files"),
                            _button("brief-save-page", "Save the page alone"),
                            _button("brief-usual", "Start anew"),
                            html.Span(id="brief-recipe"),
                        ],
                        className="brief-acts",
                    ),
                ],
                className="controls brief-tools",
                role="group",
                **{"aria-label": "The whole brief"},
            ),
            html.Div(
                [
                    html.Progress(id="brief-progress", value="0", max="1"),
                    html.Span(id="brief-progress-words", role="status"),
                    _button("brief-stop", "Stop"),
                ],
                id="brief-work",
                className="work",
                hidden=True,
            ),
            html.Div(
                [
                    html.Section(
                        [
                            html.H2("Parts, in order"),
                            html.Ol(id="brief-parts", className="brief-parts"),
                            html.Div(id="brief-add", className="brief-add"),
                        ],
                        className="brief-list",
                    ),
                    html.Section(
                        [
                            html.H2("As it will look"),
                            html.P(
                                "The brief stands here when it has been worked out.",
                                className="quiet awaited",
                            ),
                            html.Iframe(id="brief-preview", title="The brief as it will look"),
                        ],
                        className="brief-look",
                    ),
                ],
                className="brief-desk",
            ),
            html.P(CAUTION, className="caution"),
        ],
        className="brief-page",
        **{"data-day": state.as_of},
    )


def register(app: Dash, _bridge: Bridge) -> None:
    """Register the one callback: the browser takes over with what is offered."""
    app.clientside_callback(
        ClientsideFunction("brief", "adopt"),
        Output("brief-adopted", "data"),
        Input("brief-offer", "data"),
    )


def offer(bridge: Bridge, day: str = "") -> dict[str, Any]:
    """Return pages with their views and opening states, the usual draft of each form, bounds."""
    usual: dict[str, Any] = {}
    message = ""
    for form in FORMS:
        try:
            usual[form] = sent_draft(prefilled(bridge, form, day=day))
        except ValueError as error:
            usual[form], message = {"title": "", "form": form, "parts": []}, str(error)
    return {
        "pages": {
            name: {
                "title": page.title,
                "path": page.path,
                "views": dict(page.views),
                "state": opening(name, bridge, day).to_query(),
            }
            for name, page in sources().items()
        },
        "usual": usual,
        "message": message,
        "longest": {"title": LONGEST_TITLE, "words": MOST_LETTERS},
        "papers": list(PAPERS),
    }


def _select(name: str, label: str, options: dict[str, str], says: str) -> html.Div:
    return html.Div(
        [
            *controls.label(label, f"brief-{name}", says),
            html.Select(
                [html.Option(words, value=value) for value, words in options.items()],
                id=f"brief-{name}",
                **{"aria-describedby": f"help-brief-{name}"},
            ),
        ],
        className="control",
    )


def _button(name: str, words: str) -> html.Button:
    return html.Button(words, id=name, type="button")
