"""Episodes of high inflation, falling prices and the marks of hyperinflation, in words."""

import math
from typing import Any

from dash import html

from analytics.high_inflation import HYPERINFLATION_MARK, Run
from analytics.series import period_label
from app.reading.result import Reading
from app.reading.words import quantities, year_words
from app.words import counted, plain, signed

NEAR_MARK = 0.8  # share of the three-year mark from which it is called near
_MOST_RUNS = 12


def episode_words(known: Reading) -> list[Any]:
    """Return the words and the table of episodes; nothing where there is no yearly rate."""
    if known.mark is None:
        return []
    noun = known.noun
    by = f", rank {known.state.rank_level:g}" if known.state.beyond == "rank" else ""
    parts: list[Any] = [
        html.P(
            f"{counted(len(known.runs), 'run')} of at least {counted(known.state.shortest, noun)}"
            f" above {plain(known.mark, 1)} percent{by}. {_three_years(known)} {_falling(known)}"
            f" {_cagan(known)}"
        )
    ]
    if known.runs:
        shown = known.runs[-_MOST_RUNS:]
        head = ("From", "To", f"{noun.capitalize()}s", "Peak", "In", "Mean")
        table = html.Table(
            [
                html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
                html.Tbody([_run_row(run) for run in shown]),
            ],
            className="table figures",
        )
        parts.append(html.Div(table, className="run-table"))
        if len(shown) < len(known.runs):
            parts.append(html.P(f"The {_MOST_RUNS} newest; the CSV has all.", className="quiet"))
    return parts


def _run_row(run: Run) -> html.Tr:
    cells = (
        period_label(run.first),
        "still going" if run.open else period_label(run.last),
        str(run.length),
        plain(run.peak, 1),
        period_label(run.peak_period),
        plain(run.mean, 1),
    )
    return html.Tr([html.Td(text) for text in cells])


def _three_years(known: Reading) -> str:
    if known.three_years is None:
        why = known.refused.get("36-month change")
        return f"No change over three years: {why}." if why else ""
    values = known.three_years
    now = quantities(known)["change_36m"]
    place = int(max(range(values.values.size), key=lambda i: _or_low(values.values[i])))
    top = float(values.values[place])
    near = "at or above" if now >= HYPERINFLATION_MARK else "near"
    state = near if now >= NEAR_MARK * HYPERINFLATION_MARK else "far below"
    return (
        f"Over three years prices changed by {signed(now, 1)} percent, {state} the 100 percent that"
        f" IAS 29 names; the most was {signed(top, 1)} in {period_label(values.periods[place])}."
    )


def _or_low(value: float) -> float:
    return -math.inf if math.isnan(value) else float(value)


def _falling(known: Reading) -> str:
    if known.series.kind == "rate":
        return ""
    total = sum(run.length for run in known.falling)
    if not total:
        return f"The {year_words(known)} rate was never below zero."
    return (
        f"It was below zero in {counted(total, known.noun)}, last in"
        f" {period_label(known.falling[-1].last)}."
    )


def _cagan(known: Reading) -> str:
    if known.series.kind == "rate" or known.noun != "month":
        return ""
    if not known.cagan:
        return "No month rose by more than 50 percent (Cagan)."
    return (
        f"Hyperinflation by Cagan's 50 percent a month:"
        f" {'; '.join(f'{period_label(r.first)} to {period_label(r.last)}' for r in known.cagan)}."
    )
