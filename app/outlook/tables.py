"""What several views of the Outlook page are worded with: tables, and why something is missing."""

from collections.abc import Sequence
from typing import Any

from dash import html

from app.outlook.result import Outlook


def missing(known: Outlook, *names: str) -> list[Any]:
    """Say why each of these parts that is missing cannot be shown."""
    said = [known.refused[name] for name in names if name in known.refused]
    return [html.P(f"Not shown: {text}.") for text in dict.fromkeys(said)]


def waiting(known: Outlook) -> list[Any]:
    """Say what a view waits for that needs the past gone through."""
    refused = missing(known, "path", "backtest")
    return refused or [
        html.P("Shown when the past has been gone through.", className="quiet awaited")
    ]


def table_row(name: str, cells: Sequence[Any], *, chosen: bool = False) -> html.Tr:
    """Return a row of figures under its name."""
    return html.Tr(
        [html.Th(name, scope="row"), *(html.Td(cell) for cell in cells)],
        className="chosen" if chosen else "",
    )


def table_of(head: Sequence[str], rows: Sequence[html.Tr]) -> html.Div:
    """Return a table of figures that can be scrolled sideways."""
    table = html.Table(
        [
            html.Thead(html.Tr([html.Th(words, scope="col") for words in head])),
            html.Tbody(list(rows)),
        ],
        className="table figures",
    )
    return html.Div(table, className="table-place", tabIndex="0", role="group")
