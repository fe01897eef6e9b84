"""Statements on the Outlook page: the list, what came of each, and how often intervals held."""

from typing import Any

import numpy as np
from dash import html

from analytics.series import period_label
from app import controls
from app.outlook.result import Judged, Outlook
from app.outlook.words import looked_at
from app.pages.as_of import day_words
from app.words import counted, plain

SHOWN = 6  # the newest statements; earlier ones fold out


def statement_parts(known: Outlook) -> dict[str, Any]:
    """Return the places that follow the statements of the workspace."""
    return {
        "statements-words": _list(known),
        "supersedes": _supersedes(known),
    }


def _supersedes(known: Outlook) -> list[Any]:
    standing = [
        one.said
        for one in known.judged
        if one.said.id not in known.kept.successor and one.said.response == known.state.response
    ]
    options = [html.Option("none: it stands beside them", value="")]
    options += [
        html.Option(f"{said.id}, of {day_words(said.day)}", value=str(said.id)) for said in standing
    ]
    return [
        html.Div(
            [
                *controls.label(
                    "Supersedes",
                    "statement-supersedes",
                    "The statement that no longer stands once this one is kept; both stay listed.",
                ),
                html.Select(
                    options,
                    id="statement-supersedes",
                    **{"aria-describedby": "help-statement-supersedes"},
                ),
            ],
            className="control",
        )
    ]


def _list(known: Outlook) -> list[Any]:
    refused = [html.P(text, className="message") for text in known.kept.refused]
    if not known.judged:
        return [
            *refused,
            html.P(
                "No statement has been kept yet. Write below what this outlook says and keep it:"
                " later prints are held against it, and it can never be altered."
            ),
        ]
    shown = [_statement(one, known) for one in known.judged[::-1]]
    earlier = shown[SHOWN:]
    fold = html.Details(
        [html.Summary(counted(len(earlier), "earlier statement")), *earlier],
        **{"data-stays": "statements-earlier"},
    )
    return [*refused, *_running(known), *shown[:SHOWN], *([fold] if earlier else [])]


def _running(known: Outlook) -> list[Any]:
    said = []
    for response, count in known.running.items():
        parts = [
            f"{100 * level:.0f} %: {count.hits[row]} of {count.n[row]} held"
            f" ({100 * count.low[row]:.0f} to {100 * count.high[row]:.0f} %)"
            for row, level in enumerate(count.levels)
            if count.n[row]
        ]
        if parts:
            said.append(
                html.P(
                    f"{response}, all outcomes of the statements that stand: {'; '.join(parts)}."
                    " Outcomes overlap, so the ranges are too narrow."
                )
            )
    return said


def _statement(one: Judged, known: Outlook) -> html.Article:
    said, score = one.said, one.score
    later = known.kept.successor.get(said.id)
    marks = f" Superseded by statement {later}." if later else ""
    marks += f" Supersedes statement {said.supersedes}." if said.supersedes else ""
    head = (
        f"{', '.join(said.driver)}, window {said.window}, shift {said.shift}, on"
        f" {said.response}, from {period_label(said.start)}.{marks}"
    )
    parts: list[Any] = [
        html.H3(f"Statement {said.id}, {day_words(said.day)}"),
        html.P(said.words, className="said-words"),
        html.P(head, className="quiet"),
    ]
    if score is None:
        parts.append(html.P(f"Not scored: {one.refusal}.", className="quiet"))
    elif not score.known:
        parts.append(html.P("No outcome yet."))
    else:
        parts.append(html.P(_verdict(one)))
        parts.append(_table(one, known))
    return html.Article(parts, className="statement superseded" if later else "statement")


def _verdict(one: Judged) -> str:
    score = one.score
    assert score is not None
    noun = {"monthly": "month", "quarterly": "quarter", "annual": "year"}[one.said.frequency]
    last = int(np.flatnonzero(~np.isnan(score.outcome))[-1])
    judged = [row for row in range(len(score.levels)) if not np.isnan(score.inside[row]).all()]
    hits = ", ".join(
        f"{100 * score.levels[row]:.0f} % {int(np.nansum(score.inside[row]))} of"
        f" {int((~np.isnan(score.inside[row])).sum())}"
        for row in judged
    )
    place = period_label(one.said.start + last + 1)
    said = (
        f"{counted(score.known, 'outcome')} so far; inside: {hits or 'no interval was stated'}."
        f" Newest, {place}, {counted(last + 1, noun)} ahead: {plain(float(score.outcome[last]))}"
        f" percent, {plain(abs(float(score.error[last])))}"
        f" {'above' if score.error[last] > 0 else 'below'} the path"
    )
    if not np.isnan(score.rank[last]):
        said += f", rank {score.rank[last]:.0f} of 100 in what was predicted"
    return f"{said}."


def _table(one: Judged, known: Outlook) -> html.Details:
    said, score = one.said, one.score
    assert score is not None
    fan = said.paths[known.state.target]
    last = int(np.flatnonzero(~np.isnan(score.outcome))[-1]) + 1
    shown = sorted({*looked_at(known.found, score.ahead.size), last})
    noun = known.found.noun
    head = ["Ahead", "Period", "Stated", "80 % interval", "Came", "Rank"]
    head += [f"{100 * level:.0f} %" for level in score.levels]
    low, high = fan.band(0.8)
    rows = []
    for h in shown:
        cells = [period_label(said.start + h), plain(float(fan.centre[h - 1]))]
        cells.append("" if np.isnan(low[h - 1]) else f"{plain(low[h - 1])} to {plain(high[h - 1])}")
        open_yet = np.isnan(score.outcome[h - 1])
        cells.append("to come" if open_yet else plain(float(score.outcome[h - 1])))
        cells.append("" if np.isnan(score.rank[h - 1]) else f"{score.rank[h - 1]:.0f}")
        for row in range(len(score.levels)):
            hit = score.inside[row, h - 1]
            cells.append("" if np.isnan(hit) else "hit" if hit else "miss")
        rows.append(
            html.Tr([html.Th(counted(h, noun), scope="row"), *(html.Td(cell) for cell in cells)])
        )
    table = html.Table(
        [html.Thead(html.Tr([html.Th(words, scope="col") for words in head])), html.Tbody(rows)],
        className="table figures",
    )
    return html.Details(
        [
            html.Summary("By horizon"),
            html.Div(table, className="table-place", tabIndex="0", role="group"),
        ],
        **{"data-stays": f"statement-{said.id}"},
    )
