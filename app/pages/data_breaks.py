"""The part of the Data page on checks and breaks: what was found, breaks to mark, breaks marked."""

import json
from collections.abc import Mapping, Sequence
from typing import Any

from dash import html

from analytics.series import PERIOD_NOUN, Series, period_label
from app.compute import Bridge
from app.desk.findings import Found, checks_work, found_in
from app.jobs import Work
from app.marks import mark_when, mark_words
from app.pages.tables import FIRST, Page, page_of, table
from app.state import ViewState
from app.workspace import WorkspaceView

AT_ONCE = 60  # series that are checked without saying so
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
        html.Div(id="breaks-message", className="message said", role="alert", tabIndex="-1"),
    ]


def section(in_view: WorkspaceView, found: Sequence[Found] | None, state: ViewState) -> list[Any]:
    """Return findings, marks and the form for another mark; empty where nothing is in view.

    `found` is None while the series are being checked.
    """
    if not in_view.as_read:
        return []
    parts: list[Any] = [html.H2("Checks and breaks")]
    if found is None:
        parts.append(_quiet("The checks of these series are not done yet."))
    else:
        parts.append(
            findings_table(found, in_view, state) if found else _quiet("The checks found nothing.")
        )
    return [*parts, *_marks(in_view), _form(in_view.as_read), *_names(in_view.as_read)]


def checked(
    in_view: WorkspaceView, state: ViewState, bridge: Bridge, *, wait: bool = False
) -> list[Found] | None:
    """Return what the checks find, or None where that is long work that is still to be done.

    With `wait` it is done here.
    """
    work = work_of(in_view, state, bridge)
    known = bridge.jobs.remembered(work)
    if known is None and (wait or len(in_view.as_read) <= AT_ONCE):
        known = bridge.jobs.complete(work)
    if known is None:
        return None
    return found_in(in_view, bridge.workspace, state.window, known)


def work_of(in_view: WorkspaceView, state: ViewState, bridge: Bridge) -> Work:
    """Return the checks as long work."""
    return checks_work(in_view, bridge.workspace, bridge.memory, state.window)


def findings_table(
    found: Sequence[Found], in_view: WorkspaceView, state: ViewState, page: Page = FIRST
) -> html.Table:
    """Return what the checks found, with a way forward for each."""

    def row(each: Found) -> tuple[Any, ...]:
        one = each.finding
        way: Any = f"{one.way[:1].upper()}{one.way[1:]}."
        if each.marked:
            way = "Marked as a break, see below."
        elif one.check in MARKABLE and one.period is not None:
            way = f"{way} Its growth is then taken from:"
            way = [html.Span(way, className="under"), _box(in_view.as_read[one.series], each)]
        return (
            html.Span(
                one.severity, className=f"weight {one.severity}", style={"whiteSpace": "nowrap"}
            ),
            one.series,
            period_label(one.period) if one.period is not None else "",
            one.message,
            way,
        )

    head = ("Weight", "Series", "When", "What was found", "What can be done")
    return page_of(
        found,
        page,
        lambda each: f"{each.finding.severity}\n{each.finding.series}\n{each.finding.message}",
        lambda chosen: table(head, [row(each) for each in chosen], "What the checks found"),
        f"/rows/findings?{state.to_query()}",
        "a finding",
    )


def _box(series: Series, found: Found) -> html.Div:
    code, period = found.code, found.finding.period
    when = period_label(period)
    return html.Div(
        [
            *_treatments(
                PERIOD_NOUN[series.frequency],
                f"Growth of {series.name} in {when} taken from",
                _list_of(series),
                series.name,
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


def _list_of(series: Series) -> str:
    """Return the list of names that could be an overlap: same calendar, same kind."""
    return f"names-{series.kind}-{series.frequency}"


def _names(loaded: Mapping[str, Series]) -> list[html.Span]:
    """Return the names that drop-downs are filled from, once for all of them."""
    lists: dict[str, list[str]] = {}
    for name, one in loaded.items():
        if one.kind != "rate":
            lists.setdefault("names-all", []).append(name)
            lists.setdefault(_list_of(one), []).append(name)
    return [
        html.Span(id=key, hidden=True, **{"data-names": json.dumps(names, ensure_ascii=False)})
        for key, names in lists.items()
    ]


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
    return html.Details(
        [
            html.Summary("Mark a break by hand"),
            html.Div(
                [
                    _names_select("Series with a break", "series", "names-all"),
                    html.Span(
                        className="native",
                        **{
                            "data-entry": "text",
                            "data-name": "break-period",
                            "data-label": "First period of the new definition",
                            "data-placeholder": "such as 1987-07",
                        },
                    ),
                    *_treatments("period", "Growth at the break taken from", "names-all"),
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


def _treatments(noun: str, label: str, names: str, own: str = "") -> list[html.Select]:
    """Return the choice of a treatment, and of the overlapping series for those that need one."""
    options = {key: words.format(noun=noun) for key, words in (CHOICES | OVERLAPS).items()}
    other = _names_select(f"{label}: series", "other", names, **{"data-before": "with "})
    other.hidden = True
    setattr(other, "data-except", own)
    choice = html.Select(
        [html.Option(words, value=value) for value, words in options.items()],
        **{"aria-label": label, "data-part": "treatment"},
    )
    return [choice, other]


def _names_select(label: str, part: str, names: str, **marks: str) -> html.Select:
    """Return a drop-down that assets/tables.js fills from a list of the page once it is shown."""
    marks |= {"aria-label": label, "data-part": part, "data-options": f"#{names}"}
    return html.Select(**marks)


def _quiet(words: str) -> html.P:
    return html.P(words, className="quiet")
