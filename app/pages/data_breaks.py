"""The part of the Data page on checks and breaks: what was found, breaks to mark, breaks marked."""

from collections.abc import Mapping, Sequence
from typing import Any

from dash import html

from analytics.series import PERIOD_NOUN, Series, period_label
from app.compute import Bridge
from app.desk.findings import Found, found_in
from app.marks import mark_when, mark_words
from app.pages.data_parts import table
from app.state import ViewState
from app.words import counted
from app.workspace import WorkspaceView

MOST_FINDINGS = 200
MOST_CHECKED = 300  # series, at about 6 ms each; the command checks all
MOST_OTHERS = 30  # series offered for a splice by overlap
CHOICES = {
    "exclude": "mean of both",
    "before": "{noun} before",
    "after": "{noun} after",
}  # whose growth is taken, in the width of a drop-down
OVERLAPS = {
    "overlap": "overlap, one {noun}",
    "overlap-mean": "overlap, means of a year",
}  # then a second drop-down names the overlapping series; assets/breaks.js shows it
MARKABLE = ("level shift", "unit jump")


def places() -> list[html.Div]:
    """Return the places of this part in the page: what was done last, and all the rest."""
    return [
        html.Div(id="data-breaks"),
        html.Div(id="breaks-message", className="message said", role="alert"),
    ]


def section(in_view: WorkspaceView, state: ViewState, bridge: Bridge) -> list[Any]:
    """Return findings, marks and the form for another mark; empty where nothing is in view."""
    loaded = in_view.as_read
    if not loaded:
        return []
    found = found_in(in_view, bridge.workspace, bridge.memory, state.window, MOST_CHECKED)
    parts: list[Any] = [html.H2("Checks and breaks")]
    parts += _findings(found, loaded) if found else [_quiet("The checks found nothing.")]
    if len(loaded) > MOST_CHECKED:
        more = f"The first {MOST_CHECKED} of {len(loaded)} series were checked;"
        parts.append(_quiet(f"{more} pricewake inspect checks all."))
    parts += _marks(in_view)
    parts.append(_form(loaded))
    return parts


def _findings(found: Sequence[Found], loaded: Mapping[str, Series]) -> list[Any]:
    rows = []
    for each in found[:MOST_FINDINGS]:
        one = each.finding
        way: Any = f"{one.way[:1].upper()}{one.way[1:]}."
        if each.marked:
            way = "Marked as a break, see below."
        elif one.check in MARKABLE and one.period is not None:
            way = f"{way} Its growth is then taken from:"
            way = [html.Span(way, className="under"), _box(loaded[one.series], loaded, each)]
        rows.append(
            (
                html.Span(
                    one.severity,
                    className=f"weight {one.severity}",
                    style={"whiteSpace": "nowrap"},
                ),
                one.series,
                period_label(one.period) if one.period is not None else "",
                one.message,
                way,
            )
        )
    more = len(found) - len(rows)
    note = [_quiet(f"{counted(more, 'more finding')} not shown here.")] if more > 0 else []
    head = ("Weight", "Series", "When", "What was found", "What can be done")
    return [table(head, rows, "What the checks found"), *note]


def _box(series: Series, loaded: Mapping[str, Series], found: Found) -> html.Div:
    code, period = found.code, found.finding.period
    when = period_label(period)
    return html.Div(
        [
            *_treatments(
                PERIOD_NOUN[series.frequency],
                f"Growth of {series.name} in {when} taken from",
                _others(series, period, loaded),
            ),
            html.Button(
                f"Mark break at {when}",
                type="button",
                id=f"mark-{series.name}-{code}".replace(".", "-"),
                **{"data-break": "mark", "data-series": series.name, "data-period": code},
            ),
        ],
        className="controls",
        **{"data-break-box": "found"},
    )


def _others(series: Series, period: Any, loaded: Mapping[str, Series]) -> list[str]:
    """Return series that could be an overlap: same calendar, not a rate, there on both sides."""
    names = [
        name
        for name, one in loaded.items()
        if name != series.name
        and one.kind == series.kind
        and one.frequency == series.frequency
        and one.first < period <= one.last
    ]
    return names[:MOST_OTHERS]


def _marks(in_view: WorkspaceView) -> list[Any]:
    rows = []
    for mark in in_view.marks:
        when = mark_when(mark, in_view)[0]
        words = mark_words(mark, in_view)
        rows.append(
            (
                mark.series,
                when,
                f"{words[:1].upper()}{words[1:]}.",
                mark.note or "",
                html.Button(
                    "Remove",
                    type="button",
                    **{
                        "data-break": "unmark",
                        "data-series": mark.series,
                        "data-period": mark.period,
                        "aria-label": f"Remove the break of {mark.series} at {when}",
                    },
                ),
            )
        )
    if not rows:
        return []
    forgotten = " In the invented economy a mark lasts until the program ends."
    note = (
        "Values before a break are multiplied by one factor; the newest stay as published. Every"
        " page uses the series so, and every chart and file that does says it. Revisions and the"
        " table of series show what was read."
    )
    return [
        html.H3("Breaks marked"),
        table(("Series", "Break at", "Treatment", "Note", "Change"), rows, "Breaks marked"),
        _quiet(note + (forgotten if in_view.placeholder else "")),
    ]


def _form(loaded: Mapping[str, Series]) -> html.Details:
    names = {name: name for name, one in loaded.items() if one.kind != "rate"}
    return html.Details(
        [
            html.Summary("Mark a break by hand"),
            html.Div(
                [
                    _select(names, "Series with a break", "series"),
                    html.Span(
                        className="native",
                        **{
                            "data-entry": "text",
                            "data-name": "break-period",
                            "data-label": "First period of the new definition",
                            "data-placeholder": "such as 1987-07",
                        },
                    ),
                    *_treatments("period", "Growth at the break taken from", list(names)),
                    html.Span(
                        className="native",
                        **{
                            "data-entry": "text",
                            "data-name": "break-note",
                            "data-label": "Note on the break",
                            "data-placeholder": "note, may stay empty",
                        },
                    ),
                    html.Button("Mark break", type="button", **{"data-break": "mark"}),
                ],
                className="controls",
                **{"data-break-box": "form"},
            ),
        ],
        id="data-break-form",
    )


def _treatments(noun: str, label: str, others: Sequence[str]) -> list[html.Select]:
    """Return the choice of a treatment, and of the overlapping series for those that need one."""
    ways = CHOICES | (OVERLAPS if others else {})
    options = {key: words.format(noun=noun) for key, words in ways.items()}
    named = _select({name: f"with {name}" for name in others}, f"{label}: series", "other")
    named.hidden = True
    return [_select(options, label, "treatment"), *([named] if others else [])]


def _select(options: Mapping[str, str], label: str, part: str) -> html.Select:
    return html.Select(
        [html.Option(words, value=value) for value, words in options.items()],
        **{"aria-label": label, "data-part": part},
    )


def _quiet(words: str) -> html.P:
    return html.P(words, className="quiet")
