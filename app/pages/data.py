"""The Data page: files in, what was understood, what is wrong with them and where."""

from typing import Any

from dash import Dash, Input, Output, dcc, html

from analytics.series import Series, period_label
from app.compute import Bridge
from app.intake.problems import Problem

PATH, TITLE = "/data", "Data"


def layout(_query: str, bridge: Bridge) -> html.Div:
    """Return the page for what is loaded now."""
    return html.Div(
        [
            html.Header(
                [
                    html.H1("Open the files of a release"),
                    html.P(
                        "Comma, semicolon or tab separated text: the first column names the "
                        "periods, every further column is one series. Files stay on this machine.",
                        className="readout",
                    ),
                ],
                className="headline",
            ),
            html.Div(
                [
                    html.Span(
                        className="native",
                        **{"data-native": "files", "data-type": "file", "data-accept": ".csv,.txt"},
                    ),
                    html.P("or drop them here", className="quiet"),
                    html.P(id="data-message", className="message", role="alert"),
                ],
                id="data-drop",
                className="drop",
            ),
            dcc.Store(id="data-tick", data=0),
            html.Div(_loaded(bridge), id="data-loaded"),
        ],
        className="data-page",
    )


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callbacks of this page on an app."""

    @app.callback(
        Output("data-loaded", "children"),
        Input("data-tick", "data"),
        prevent_initial_call=True,
    )
    def _refresh(_tick: int) -> list[Any]:
        return _loaded(bridge)


def _loaded(bridge: Bridge) -> list[Any]:
    releases = bridge.workspace.releases
    if not releases:
        return [html.P("Nothing is loaded yet.", className="empty")]
    problems = bridge.workspace.problems
    parts: list[Any] = []
    if problems:
        parts += [html.H2("Found in the files"), _problem_table(problems)]
    rows = [(series, release.name) for release in releases for series in release.series]
    return [*parts, html.H2("What was understood"), _series_table(rows)]


def _series_table(rows: list[tuple[Series, str]]) -> html.Table:
    head = ("Series", "Kind", "Unit", "Every", "From", "To", "Values", "Missing", "File")
    return _table(
        head,
        [
            (
                series.name,
                series.kind,
                series.unit or "not named",
                {"monthly": "month", "quarterly": "quarter", "annual": "year"}[series.frequency],
                period_label(series.first),
                period_label(series.last),
                f"{series.values.size - series.gaps.size}",
                f"{series.gaps.size}",
                file,
            )
            for series, file in rows
        ],
    )


def _problem_table(problems: tuple[Problem, ...]) -> html.Table:
    return _table(
        ("Weight", "Place", "What was found"),
        [
            (
                problem.severity,
                ", ".join(
                    part
                    for part in (
                        problem.file,
                        f"row {problem.row}" if problem.row else "",
                        f"column {problem.column}" if problem.column else "",
                    )
                    if part
                ),
                problem.message,
            )
            for problem in problems[:200]
        ],
    )


def _table(head: tuple[str, ...], rows: list[tuple[str, ...]]) -> html.Table:
    return html.Table(
        [
            html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
            html.Tbody([html.Tr([html.Td(text) for text in row]) for row in rows]),
        ],
        className="table",
    )
