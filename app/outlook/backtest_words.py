"""Words and tables on how past outlooks turned out: errors, coverage, through time."""

from typing import Any

from dash import html

from analytics.series import period_label
from app.outlook.result import Outlook
from app.outlook.tables import table_of, table_row, waiting
from app.outlook.words import BENCHMARK_WORDS, best_benchmark, looked_at, ratio_words
from app.words import counted, p_words, plain, signed

FEW_DATES = 300  # below, the test of equal accuracy was measured to call too many different


def backtest_words(known: Outlook) -> list[Any]:
    """Say how far past forecasts were off, beside each benchmark."""
    scores, done, found = known.scores, known.backtest, known.found
    if scores is None or done is None:
        return waiting(known)
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
        rows.append(table_row(counted(h, noun), cells, chosen=h == found.ahead))
    first = period_label(found.pair.response.first + int(done.origins[0]))
    notes = [
        "Beyond its shift the relation says the mean of the past. A benchmark counts as beaten"
        " where the relation was nearer with a one-sided p of at most .05, half the p of the table."
    ]
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
        table_of(head, rows),
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


def coverage_words(known: Outlook) -> list[Any]:
    """Say how often past intervals held."""
    scores, found = known.scores, known.found
    if scores is None:
        return waiting(known)
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
            rows.append(table_row(counted(h, found.noun), cells, chosen=h == found.ahead))
    return [
        html.P(
            "How often the relation's intervals held, had they been drawn at each past date. The"
            " table counts outcomes that do not overlap; the chart all of them."
        ),
        html.Details(
            [
                html.Summary("Coverage by horizon"),
                table_of(head, rows),
                html.P(
                    "p, rate: that misses come as often as named (Kupiec). p, runs: that a miss"
                    " says nothing about the next (Christoffersen).",
                    className="quiet",
                ),
            ],
            **{"data-stays": "outlook-coverage"},
        ),
    ]


def through_words(known: Outlook) -> list[Any]:
    """Say when the relation helped against one benchmark."""
    if known.gain is None or known.scores is None:
        return waiting(known)
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
