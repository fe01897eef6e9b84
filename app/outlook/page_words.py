"""The words and tables beside the charts of the Outlook page."""

from typing import Any

import numpy as np
from dash import html

from analytics.series import period_label
from app.outlook.backtest_words import backtest_words, coverage_words, through_words
from app.outlook.result import Outlook
from app.outlook.statement_words import statement_parts
from app.outlook.tables import missing, table_of, table_row, waiting
from app.outlook.words import (
    BENCHMARK_WORDS,
    held_words,
    rate_words,
)
from app.words import counted, p_words, plain, signed


def view_words(known: Outlook) -> dict[str, Any]:
    """Return the words of each view; a view that is missing says why."""
    return {
        "notes": [html.P(note, className="message") for note in known.found.notes],
        "fan-words": _fan(known),
        "gap-words": _gap(known),
        "direct-words": _direct(known),
        "backtest-words": backtest_words(known),
        "coverage-words": coverage_words(known),
        "through-words": through_words(known),
        "drivers-words": _drivers(known),
        **statement_parts(known),
    }


def subtitles(known: Outlook) -> dict[str, str]:
    """Return the second line of each saved chart."""
    found, state = known.found, known.state
    rate = rate_words(found, state.target)
    how = {"remade": "window and shift chosen anew each year", "kept": "the chosen cell kept"}
    tested = f"{rate}; {state.scheme}; {how[state.cells]}"
    return {
        "fan": f"{rate}; intervals from the past errors of the same rule",
        "gap": f"{state.window}-{found.noun} mean; the line is that of the whole sample",
        "direct": f"{rate}; direct regressions on the response's own past",
        "backtest": f"{tested}; below 1 the relation was better, dots: one-sided p at most .05",
        "coverage": tested,
        "through": f"{tested}; {counted(found.ahead, found.noun)} ahead, against"
        f" {BENCHMARK_WORDS[state.against]}; it rises where the relation helped",
        "drivers": tested,
        "statements": f"{rate}; dots inside, crosses outside the 80 % interval",
    }


def _fan(known: Outlook) -> list[Any]:
    path, fan, found = known.path, known.fan, known.found
    if path is None or fan is None:
        return missing(known, "path")
    off = [held_words(known, row) for row in range(len(known.levels))]
    held = [words for words in off if "held" in words]
    at = counted(min(found.ahead, known.reach), found.noun)
    said = [
        html.P(
            f"Slope {plain(path.slope)}, intercept {plain(path.intercept)}, over"
            f" {counted(path.pairs, 'pair')}. {known.state.driver} is known to"
            f" {period_label(found.pair.driver.last)}, so the path reaches"
            f" {period_label(known.periods[-1])}."
        )
    ]
    if "intervals" in known.refused or np.isnan(fan.scale).all():
        why = known.refused.get("intervals", "fewer than 12 past errors are known")
        said.append(html.P(f"No intervals: {why}."))
    elif held:
        said.append(
            html.P(
                f"Drawn at each past date, {at} ahead, the intervals did not hold as named:"
                f" {_held_shares(known)}. An interval that is off says so on the chart."
            )
        )
    else:
        said.append(
            html.P(
                f"Drawn at each past date, {at} ahead, the intervals held about as named:"
                f" {_held_shares(known)}."
            )
        )
    said.append(
        html.P(
            "The path takes nothing from where the rate stands now: today's gap is neither carried"
            " on nor made up for. The intervals know only errors of the past, and do not pay for"
            " having picked this window and shift; the backtest that chooses them anew does.",
            className="quiet",
        )
    )
    return said


def _held_shares(known: Outlook) -> str:
    at = min(known.found.ahead, known.reach)
    seen = [each for row in range(len(known.levels)) if (each := known.held(row, at))]
    if not seen:
        return "too few past dates to say"
    shares = ", ".join(f"{100 * each.level:.0f} % held {100 * each.share:.0f} %" for each in seen)
    return f"{shares}; past outcomes that do not overlap: {seen[0].n}"


def _gap(known: Outlook) -> list[Any]:
    gap, found = known.gap, known.found
    if gap is None:
        return missing(known, "gap")
    last = float(gap.gap[-1])
    rank = float(known.gap_rank[-1])
    when = found.pair.response.first + int(gap.place[-1])
    return [
        html.P(
            f"In {period_label(when)} the {known.state.window}-{found.noun} mean was"
            f" {plain(float(gap.observed[-1]))}, by the relation {plain(float(gap.expected[-1]))}:"
            f" {signed(last)}, as high as or higher than {rank:.0f} of 100. The line is that of"
            " the whole sample, so these are residuals and no forecast errors."
        )
    ]


def _direct(known: Outlook) -> list[Any]:
    direct, found = known.direct, known.found
    if direct is None:
        return missing(known, "path", "direct")
    place = min(found.ahead, direct.ahead.size) - 1
    both = float(direct.with_driver[place]), float(direct.without_driver[place])
    at = period_label(found.pair.origin + place + 1)
    said = [
        html.P(
            f"By its own regression on {counted(direct.own_lags, found.noun)} of the response's"
            f" past, the {rate_words(found, known.state.target)} of {at} is"
            f" {plain(both[0])} percent with {known.state.driver} and {plain(both[1])} without."
        )
    ]
    if known.added is not None:
        test = known.added.dm[0][place]
        share = known.added_share
        assert share is not None
        said.append(
            html.P(
                f"In past forecasts {counted(place + 1, found.noun)} ahead the driver"
                f" {_taken(float(share[place]))} the squared errors (p {p_words(test.p)})."
            )
        )
    return said


def _taken(share: float) -> str:
    size = f"{100 * abs(share):.0f} percent"
    return f"took {size} off" if share >= 0 else f"did harm: it added {size} to"


def _drivers(known: Outlook) -> list[Any]:
    offer = _offered(known)
    if not known.state.others:
        return [html.P("Add drivers to see their paths and a combination."), *offer]
    refused = [
        html.P(f"{name.removeprefix('driver ')}: {why}.", className="message")
        for name, why in known.refused.items()
        if name == "drivers" or name.startswith("driver ")
    ]
    if not known.lines:
        return [*offer, *refused, *(waiting(known) if not refused else [])]
    found = known.found
    ahead = min(found.ahead, known.lines[0].scores.ahead.size)
    benchmarks = known.lines[0].scores.benchmarks
    head = ["", "Window", "Shift", f"In {counted(ahead, found.noun)}", "RMSE"]
    head += [f"Over {name}" for name in benchmarks] + ["Weight"]
    rows = []
    for line in known.lines:
        cells = ["" if line.window is None else str(line.window)]
        cells += ["" if line.shift is None else str(line.shift)]
        cells += [plain(float(line.path[ahead - 1]))]
        cells += [plain(float(line.scores.rmse[ahead - 1]))]
        cells += [plain(float(ratio)) for ratio in line.scores.ratio[:, ahead - 1]]
        cells += ["" if line.weight is None else plain(line.weight)]
        rows.append(table_row(line.name, cells, chosen=line.window is None))
    return [
        *offer,
        *refused,
        html.P(
            "Window and shift are those that each driver's backtest uses today. Beyond its shift a"
            " driver says the mean of the past. Weights are the inverse of squared past errors."
        ),
        table_of(head, rows),
    ]


def _offered(known: Outlook) -> list[Any]:
    """Return a button for each of some series that may join or leave the drivers."""
    state = known.state
    named = [name.strip() for name in state.others.split("|") if name.strip()]
    buttons = []
    for name in known.offered:
        there = name in named
        rest = [one for one in named if one != name] if there else [*named, name]
        buttons.append(
            html.Button(
                name,
                type="button",
                className="leave-out",
                **{
                    "data-set": "others",
                    "data-value": "|".join(rest),
                    "aria-pressed": str(there).lower(),
                },
            )
        )
    return [html.Div(buttons, className="offered")] if buttons else []
