"""The words and tables beside the charts of the Outlook page."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from dash import html

from analytics.series import period_label
from app.outlook.result import Outlook
from app.outlook.statement_words import statement_parts
from app.outlook.words import (
    BENCHMARK_WORDS,
    best_benchmark,
    held_words,
    looked_at,
    rate_words,
    ratio_words,
)
from app.words import counted, p_words, plain, signed

FEW_DATES = 300  # below, the test of equal accuracy was measured to call too many different


def view_words(known: Outlook) -> dict[str, Any]:
    """Return the words of each view; a view that is missing says why."""
    return {
        "notes": [html.P(note, className="message") for note in known.found.notes],
        "fan-words": _fan(known),
        "gap-words": _gap(known),
        "direct-words": _direct(known),
        "backtest-words": _backtest(known),
        "coverage-words": _coverage(known),
        "through-words": _through(known),
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


def _missing(known: Outlook, *names: str) -> list[Any]:
    said = [known.refused[name] for name in names if name in known.refused]
    return [html.P(f"Not shown: {text}.") for text in dict.fromkeys(said)]


def _waiting(known: Outlook) -> list[Any]:
    refused = _missing(known, "path", "backtest")
    return refused or [html.P("Shown when the past has been gone through.", className="quiet")]


def _fan(known: Outlook) -> list[Any]:
    path, fan, found = known.path, known.fan, known.found
    if path is None or fan is None:
        return _missing(known, "path")
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
        return _missing(known, "gap")
    last = float(gap.gap[-1])
    rank = 100.0 * float((gap.gap <= last).mean())
    when = found.pair.response.first + int(gap.place[-1])
    return [
        html.P(
            f"In {period_label(when)} the {known.state.window}-{found.noun} mean was"
            f" {plain(float(gap.observed[-1]))}, by the relation {plain(float(gap.expected[-1]))}:"
            f" {signed(last)}, higher than in {rank:.0f} of 100 {found.noun}s. The line is that of"
            " the whole sample, so these are residuals and no forecast errors."
        )
    ]


def _direct(known: Outlook) -> list[Any]:
    direct, found = known.direct, known.found
    if direct is None:
        return _missing(known, "path", "direct")
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
                f"In past forecasts {counted(place + 1, found.noun)} ahead the driver took"
                f" {100 * float(share[place]):.0f} percent off the squared errors"
                f" (p {p_words(test.p)}); below 0 it did harm."
            )
        )
    return said


def _backtest(known: Outlook) -> list[Any]:
    scores, done, found = known.scores, known.backtest, known.found
    if scores is None or done is None:
        return _waiting(known)
    noun = found.noun
    head = ["Ahead", "Dates", "RMSE", "MAE", "Bias", "U2"]
    head += [f"Over {name}" for name in scores.benchmarks] + ["p"]
    rows = []
    for h in looked_at(found, scores.ahead.size):
        best = best_benchmark(scores, h)
        test = scores.dm[scores.benchmarks.index(best)][h - 1]
        cells: list[Any] = [f"{scores.n[h - 1]}"]
        cells += [plain(float(part[h - 1])) for part in (scores.rmse, scores.mae)]
        cells += [signed(float(scores.bias[h - 1])), plain(float(scores.u2[h - 1]))]
        for name, ratio in zip(scores.benchmarks, scores.ratio[:, h - 1].tolist(), strict=True):
            cells.append(html.Strong(plain(ratio)) if name == best else plain(ratio))
        cells.append(p_words(test.p))
        rows.append(_row(counted(h, noun), cells, chosen=h == found.ahead))
    first = period_label(found.pair.response.first + int(done.origins[0]))
    notes = ["Beyond its shift the relation says the mean of the past."]
    if int(scores.n[0]) < FEW_DATES:
        notes.append(
            f"Over fewer than {FEW_DATES} dates this p comes out too small at long horizons: of"
            " forecasts that are equally good, 8 to 15 of 100 are called different at 5 %."
        )
    return [
        html.P(
            f"{counted(done.origins.size, 'past date')} from {first} on, each with"
            f" {_known_then(known)}. Ratios below 1: the relation was nearer; the best benchmark"
            " stands out, and p is against it (Diebold-Mariano with the small-sample factor,"
            " two-sided)."
        ),
        _table(head, rows),
        html.P(" ".join(notes), className="quiet"),
    ]


def _known_then(known: Outlook) -> str:
    done, found = known.backtest, known.found
    assert done is not None
    span = (
        "all that was known then"
        if done.scheme == "expanding"
        else f"the latest {counted(int(done.origins[0]) + 1, found.noun)}"
    )
    cell = (
        "window and shift chosen anew each year"
        if done.rechosen
        else f"window {known.state.window} and shift {known.state.shift} kept, which were chosen"
        " knowing what came, so the scores flatter"
    )
    dated = (
        f"; {counted(known.dated, 'date')} from the vintages of that date"
        if known.dated
        else "; the workspace has no vintages of those dates, so today's values are cut there"
    )
    return f"{span}, {cell}{dated}"


def _coverage(known: Outlook) -> list[Any]:
    scores, found = known.scores, known.found
    if scores is None:
        return _waiting(known)
    head = ["Ahead", "Interval", "Held", "95 % range", "Outcomes", "p, rate", "p, runs"]
    rows = []
    for h in looked_at(found, scores.ahead.size):
        for level, row in zip(scores.levels, scores.coverage, strict=True):
            seen = row[h - 1]
            cells = [f"{100 * level:.0f} %"]
            if seen.n:
                cells += [
                    f"{100 * seen.share:.0f} %",
                    f"{100 * seen.low:.0f} to {100 * seen.high:.0f} %",
                ]
                cells += [f"{seen.n}", p_words(seen.p_kupiec), p_words(seen.p_christoffersen)]
            else:
                cells += ["", "", "none", "", ""]
            rows.append(_row(counted(h, found.noun), cells, chosen=h == found.ahead))
    return [
        html.P(
            "How often the relation's intervals held, had they been drawn at each past date. The"
            " table counts outcomes that do not overlap; the chart all of them."
        ),
        html.Details(
            [
                html.Summary("Coverage by horizon"),
                _table(head, rows),
                html.P(
                    "p, rate: that misses come as often as named (Kupiec). p, runs: that a miss"
                    " says nothing about the next (Christoffersen).",
                    className="quiet",
                ),
            ],
            **{"data-stays": "outlook-coverage"},
        ),
    ]


def _through(known: Outlook) -> list[Any]:
    if known.gain is None or known.scores is None:
        return _waiting(known)
    periods, gain = known.gain
    if not periods.size:
        return [html.P("No past date has a forecast of both and an outcome.")]
    found, against = known.found, known.state.against
    half = gain.size // 2
    said = (
        f"{counted(found.ahead, found.noun)} ahead against {BENCHMARK_WORDS[against]}:"
        f" {ratio_words(known.scores, against, found.ahead)}. Where the line rises the relation"
        f" helped. Of the {signed(float(gain[-1]), 1)} in all, {signed(float(gain[half]), 1)} came"
        f" by {period_label(periods[half])}, the middle date."
    )
    return [html.P(said)]


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
        return [*offer, *refused, *(_waiting(known) if not refused else [])]
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
        rows.append(_row(line.name, cells, chosen=line.window is None))
    return [
        *offer,
        *refused,
        html.P(
            "Window and shift are those that each driver's backtest uses today. Beyond its shift a"
            " driver says the mean of the past. Weights are the inverse of squared past errors."
        ),
        _table(head, rows),
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


def _row(name: str, cells: Sequence[Any], *, chosen: bool = False) -> html.Tr:
    return html.Tr(
        [html.Th(name, scope="row"), *(html.Td(cell) for cell in cells)],
        className="chosen" if chosen else "",
    )


def _table(head: Sequence[str], rows: Sequence[html.Tr]) -> html.Div:
    table = html.Table(
        [
            html.Thead(html.Tr([html.Th(words, scope="col") for words in head])),
            html.Tbody(list(rows)),
        ],
        className="table figures",
    )
    return html.Div(table, className="table-place", tabIndex="0", role="group")
