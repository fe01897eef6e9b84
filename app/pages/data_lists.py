"""The long lists of the Data page: series in view, series and problems of files not kept yet.

Each is drawn a page at a time, the first with the page itself, the others when the browser asks
for them (`rows`).
"""

from collections.abc import Mapping, Sequence
from typing import Any, get_args
from urllib.parse import urlencode

from dash import html

from analytics.series import PERIOD_NOUN, Adjustment, Kind, Series, period_label
from app.compute import Bridge
from app.desk.bridge import against_kept, all_series, corrected
from app.figures.data import sparkline
from app.intake.problems import Problem
from app.intake.reading import Release
from app.pages import data_breaks
from app.pages.tables import FIRST, Page, page_of, table
from app.state import ViewState
from app.workspace import WorkspaceView

ADJUSTED = {"yes": "adjusted", "no": "not adjusted", "unknown": "not said"}


def rows(name: str, state: ViewState, token: str, page: Page, bridge: Bridge) -> html.Table | None:
    """Return one page of a list by its name; None where there is no such list any more."""
    in_view = bridge.in_view(state)
    if name == "series":
        return series_table(in_view, state, page)
    if name == "problems" and not token:
        return problem_table(in_view.problems, "", state, page)
    if name == "findings":
        found = data_breaks.checked(in_view, state, bridge, wait=True) or []
        return data_breaks.findings_table(found, in_view, state, page)
    held = bridge.pending.found(token)
    if held is None:
        return None
    if name == "preview":
        return preview_table(token, corrected(held, bridge.workspace), in_view, page)
    return problem_table(held.problems, token, state, page) if name == "problems" else None


def series_table(in_view: WorkspaceView, state: ViewState, page: Page = FIRST) -> html.Table:
    """Return the series in view, with what can be corrected."""
    fixed = in_view.placeholder

    def row(one: Series, file: str) -> tuple[Any, ...]:
        return (
            spark(one),
            [html.Strong(one.name), html.Span(_origin(one, file), className="quiet under")],
            one.kind if fixed else _choice(one, "kind", {k: k for k in get_args(Kind)}),
            (one.unit or "not named") if fixed else _entry(one),
            ADJUSTED[one.adjustment]
            if fixed
            else _choice(one, "adjustment", {k: ADJUSTED[k] for k in get_args(Adjustment)}),
            PERIOD_NOUN[one.frequency],
            _span(one),
            _values(one),
            f"{in_view.vintages.get(one.name, 1)}",
        )

    head = ("", "Series", "Kind", "Unit", "Season", "Every", "Span", "Values", "Vintages")
    return page_of(
        list(all_series(in_view).values()),
        page,
        lambda each: f"{_words(each[0])}\n{_origin(*each)}",
        lambda chosen: table(head, [row(*each) for each in chosen], "Series in view"),
        _address("series", state),
        "a series",
    )


def preview_table(
    token: str, release: Release, in_view: WorkspaceView, page: Page = FIRST
) -> html.Table:
    """Return the series understood in a file that is not kept yet, against what is kept."""
    kept: Mapping[str, tuple[Series, str]] = {} if in_view.placeholder else all_series(in_view)

    def row(one: Series) -> tuple[Any, ...]:
        return (
            spark(one),
            html.Strong(one.name),
            one.kind,
            one.unit or "not named",
            PERIOD_NOUN[one.frequency],
            _span(one),
            _values(one),
            against_kept(one, kept[one.name][0] if one.name in kept else None),
        )

    head = ("", "Series", "Kind", "Unit", "Every", "Span", "Values", "Against what is kept")
    return page_of(
        release.series,
        page,
        _words,
        lambda chosen: table(
            head, [row(one) for one in chosen], f"Series understood in {release.name}"
        ),
        _address("preview", ViewState(), token),
        "a series",
    )


def problem_table(
    problems: Sequence[Problem], token: str, state: ViewState, page: Page = FIRST
) -> html.Table:
    """Return what intake found, with the place of each thing."""

    def row(one: Problem) -> tuple[Any, ...]:
        return (
            html.Span(one.severity, className=f"weight {one.severity}"),
            one.file,
            f"{one.row}" if one.row else "whole file",
            one.column or "",
            one.message,
        )

    label = f"What was found in {problems[0].file}" if token else "What was found in the files"
    head = ("Weight", "File", "Row", "Column", "What was found")
    return page_of(
        problems,
        page,
        lambda one: f"{one.severity}\n{one.file}\n{one.row}\n{one.column}\n{one.message}",
        lambda chosen: table(head, [row(one) for one in chosen], label),
        _address("problems", state, token),
        "a word",
    )


def _address(name: str, state: ViewState, token: str = "") -> str:
    kept = {"as_of": state.as_of, "token": token}
    query = urlencode({key: value for key, value in kept.items() if value})
    return f"/rows/{name}" + (f"?{query}" if query else "")


def spark(series: Series) -> html.Span:
    """Return the small line of a series, with its ends in words."""
    first, last = (f"{series.values[place]:.4g}" for place in (0, -1))
    words = f"{series.name}: from {first} in {period_label(series.first)} to {last}"
    return html.Span(
        className="spark",
        role="img",
        style={"--line": f'url("{sparkline(series.values)}")'},
        **{"aria-label": f"{words} in {period_label(series.last)}"},
    )


def _words(series: Series) -> str:
    every = PERIOD_NOUN[series.frequency]
    return f"{series.name}\n{series.unit}\n{series.kind}\n{every}"


def _origin(series: Series, file: str) -> str:
    return file if series.source in ("", file) else f"{series.source}; {file}"


def _span(series: Series) -> str:
    return f"{period_label(series.first)} to {period_label(series.last)}"


def _values(series: Series) -> str:
    missing = series.gaps.size
    return f"{series.values.size - missing}" + (f", {missing} missing" if missing else "")


def _choice(series: Series, field: str, options: dict[str, str]) -> html.Select:
    current = getattr(series, field)
    words = {"kind": "Kind", "adjustment": "Seasonal adjustment"}[field]
    return html.Select(
        [
            html.Option(text, value=value, selected=value == current)
            for value, text in options.items()
        ],
        **{
            "aria-label": f"{words} of {series.name}",
            "data-correct": field,
            "data-series": series.name,
            "data-value": current,
        },
    )


def _entry(series: Series) -> html.Span:
    return html.Span(
        className="native",
        **{
            "data-entry": "text",
            "data-correct": "unit",
            "data-series": series.name,
            "data-value": series.unit,
            "data-label": f"Unit of {series.name}",
            "data-placeholder": "not named",
        },
    )
