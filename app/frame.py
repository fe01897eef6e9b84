"""What stays while pages change, and the two pages that show nothing."""

from dash import dcc, html

from app.keys import key_list
from app.page_table import PAGES


def frame(invented: bool) -> html.Div:
    """Return what stays while pages change: name, navigation, notices, keys, theme switch."""
    return html.Div(
        [
            dcc.Location(id="address", refresh="callback-nav"),
            html.A("Skip to the page", href="#page", className="skip"),
            html.Header(
                [
                    html.Span("Pricewake", className="name"),
                    html.Span(id="page-title", className="hidden-label"),
                    html.Nav(
                        [
                            dcc.Link(page.TITLE, href=page.PATH, id=f"nav-{page.TITLE.lower()}")
                            for page in PAGES
                        ],
                        **{"aria-label": "Pages"},
                    ),
                    html.P(
                        [
                            "These data are invented. ",
                            dcc.Link("Open your files", href="/data"),
                        ],
                        id="invented",
                        className="invented",
                        hidden=not invented,
                    ),
                    html.Button("Keys", id="show-keys", type="button"),
                    html.Button("Dark", id="theme", type="button", **{"aria-pressed": "false"}),
                ],
                className="bar",
            ),
            html.Div(id="connection", role="status", className="connection", hidden=True),
            html.Main(html.P("Opening …", className="opening"), id="page", tabIndex="-1"),
            html.Div(id="toast", role="status", className="toast"),
            key_list(),
        ],
        id="frame",
    )


def unreadable(sentence: str) -> html.Div:
    """Return the page for a workspace that cannot be read."""
    return html.Div(
        [
            html.H1("This page cannot be shown"),
            html.P(sentence, className="message", role="alert"),
        ],
        className="headline",
    )


def missing() -> html.Div:
    """Return the page for an address that shows nothing."""
    return html.Div(
        [
            html.H1("No such page"),
            html.P(
                ["This address shows nothing. Try ", dcc.Link("the Lag page", href="/lag"), "."]
            ),
        ],
        className="headline",
    )
