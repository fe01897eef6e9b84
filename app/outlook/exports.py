"""The numbers of each view of the Outlook page as CSV, every digit kept."""

from collections.abc import Callable, Iterable, Sequence
from typing import Any

import numpy as np

from analytics.series import period_code
from app.compute import Bridge
from app.exports import csv_text
from app.outlook.bridge import completed_outlook, outlook
from app.outlook.result import Outlook
from app.outlook.words import sentence
from app.places import software_version
from app.state import ViewState
from app.words import slug

Rows = Iterable[Sequence[Any]]
DM = ("rmse", "ratio", "dm", "dm_p", "dm_p_better")  # columns of each benchmark
TESTED = ("direct", "backtest", "coverage", "through", "drivers")  # views that need the backtest


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Outlook page.

    Raises
    ------
    ValueError
        No such view, a refused value, or no pair of series; one sentence.
    """
    state = ViewState.from_query(query)
    known = completed_outlook(state, bridge) if name in TESTED else outlook(state, bridge)
    return f"{file_stem(name, known)}.csv", view_text(name, known)


def view_text(name: str, known: Outlook) -> str:
    """Return one view as CSV text under a header that names what it holds.

    Raises
    ------
    ValueError
        No such view.
    """
    if name not in VIEWS:
        raise ValueError(f"view must be one of {', '.join(VIEWS)}, but got {name!r}")
    return csv_text(header(known), VIEWS[name](known))


def header(known: Outlook) -> list[tuple[str, str]]:
    """Name what a file holds: sentence, series with fingerprints, state, backtest, version."""
    found = known.found
    sides = [
        (
            role,
            f"{loaded.name}; {rate.unit or 'percent'}; source {loaded.source or 'not named'};"
            f" {loaded.kind} as read: fingerprint {loaded.fingerprint}; growth as used: fingerprint"
            f" {rate.fingerprint}",
        )
        for role, loaded, rate in zip(
            ("driver", "response"),
            found.loaded,
            (found.pair.driver, found.pair.response),
            strict=True,
        )
    ]
    lines = [
        ("Pricewake", software_version()),
        ("view", sentence(known)),
        *sides,
        ("state", f"/outlook?{known.state.to_query()}"),
        ("rates", f"{known.state.target}; one-period rates made into it by {found.compounding}"),
        *[("note", note) for note in found.notes],
    ]
    if known.path is not None:
        lines.append(("line", f"intercept {known.path.intercept!r}; slope {known.path.slope!r}"))
    if known.backtest is not None:
        done = known.backtest
        lines.append(
            (
                "backtest",
                f"{done.origins.size} dates; {done.scheme}; window and shift"
                f" {'chosen anew each year' if done.rechosen else 'kept'}; {known.dated} dates from"
                " vintages",
            )
        )
    for response, count in known.running.items():
        held = (
            f"{level:g}: {count.hits[row]} of {count.n[row]} inside; {float(count.low[row])!r} to"
            f" {float(count.high[row])!r}"
            for row, level in enumerate(count.levels)
        )
        lines.append(("statements that stand", f"{response}; {'; '.join(held)}"))
    lines += [(f"missing ({part})", why) for part, why in known.refused.items()]
    return [*lines, ("note", "an association in past data; not a cause and not advice")]


def file_stem(name: str, known: Outlook) -> str:
    """Return a file name without ending, in plain letters."""
    state = known.state
    sides = f"{slug(state.driver, 40)}-{slug(state.response, 40)}"
    return f"outlook-{name}-{sides}-{period_code(known.found.pair.origin).lower()}"


def _level_columns(known: Outlook) -> list[str]:
    return [f"{side}_{100 * level:.0f}" for level in known.levels for side in ("low", "high")]


def _fan_rows(known: Outlook) -> Rows:
    yield "part", "period", "ahead", "rate", *_level_columns(known), "past_errors", "benchmark"
    width = 2 * len(known.levels)
    for period, value in zip(known.found.pair.response.periods, known.history, strict=True):
        if not np.isnan(value):
            yield "observed", period_code(period), None, float(value), *([None] * (width + 2))
    if known.fan is None:
        return
    bands = [end for level in known.levels for end in known.fan.band(level)]
    benchmark = None
    if known.backtest is not None:
        benchmark = known.backtest.forecasts[known.backtest.row(known.state.against), -1]
    for i, period in enumerate(known.periods):
        other = None
        if benchmark is not None and i < benchmark.size:
            other = float(benchmark[i])
        yield (
            "implied",
            period_code(period),
            i + 1,
            float(known.fan.centre[i]),
            *(float(end[i]) for end in bands),
            int(known.fan.errors[i]),
            other,
        )


def _gap_rows(known: Outlook) -> Rows:
    yield "period", "observed", "expected", "gap", "rank_of_gap"
    if known.gap is None:
        return
    first = known.found.pair.response.first
    columns = (known.gap.observed, known.gap.expected, known.gap.gap, known.gap_rank)
    for i, place in enumerate(known.gap.place.tolist()):
        yield period_code(first + place), *(float(column[i]) for column in columns)


def _direct_rows(known: Outlook) -> Rows:
    yield (
        "ahead",
        "period",
        "with_driver",
        "without_driver",
        "driver_slope",
        "share_within_sample",
        "share_in_past_forecasts",
        "dm_p",
        "rows",
        "own_lags",
    )
    if known.direct is None:
        return
    direct, share = known.direct, known.added_share
    for i, h in enumerate(direct.ahead.tolist()):
        yield (
            h,
            period_code(known.found.pair.origin + h),
            float(direct.with_driver[i]),
            float(direct.without_driver[i]),
            float(direct.driver_slope[i]),
            float(direct.driver_gain[i]),
            None if share is None else float(share[i]),
            None if known.added is None else float(known.added.dm[0][i].p),
            int(direct.rows[i]),
            direct.own_lags,
        )


def _backtest_rows(known: Outlook) -> Rows:
    scores = known.scores
    names = scores.benchmarks if scores is not None else ()
    yield (
        "ahead",
        "dates",
        "rmse",
        "mae",
        "bias",
        "theil_u2",
        *(f"{part} {name}" for name in names for part in DM),
    )
    if scores is None:
        return
    for i, h in enumerate(scores.ahead.tolist()):
        against: list[float] = []
        for row in range(len(names)):
            test = scores.dm[row][i]
            against += [
                float(scores.benchmark_rmse[row, i]),
                float(scores.ratio[row, i]),
                test.statistic,
                test.p,
                test.p_better,
            ]
        own = (scores.rmse, scores.mae, scores.bias, scores.u2)
        yield h, int(scores.n[i]), *(float(part[i]) for part in own), *against


def _coverage_rows(known: Outlook) -> Rows:
    yield (
        "rule",
        "ahead",
        "level",
        "share_overlapping",
        "outcomes_overlapping",
        "share",
        "low",
        "high",
        "outcomes",
        "kupiec",
        "kupiec_p",
        "christoffersen",
        "christoffersen_p",
        "both_p",
    )
    nothing = [None] * 5
    for row, level in enumerate(known.levels):
        for h in range(1, known.reach + 1):
            if seen := known.held(row, h):
                share = (seen.share, seen.low, seen.high, seen.n)
                yield "intervals drawn", h, level, None, None, *share, *nothing
    scores = known.scores
    if scores is None:
        return
    for row, level in enumerate(scores.levels):
        for i, found in enumerate(scores.coverage[row]):
            yield (
                "backtest",
                i + 1,
                level,
                float(scores.share[row, i]),
                int(scores.intervals[i]),
                found.share,
                found.low,
                found.high,
                found.n,
                found.kupiec,
                found.p_kupiec,
                found.christoffersen,
                found.p_christoffersen,
                found.p_both,
            )


def _through_rows(known: Outlook) -> Rows:
    yield "period", "ahead", "against", "cumulative_difference"
    if known.gain is None:
        return
    periods, gain = known.gain
    for i, period in enumerate(periods):
        yield period_code(period), known.found.ahead, known.state.against, float(gain[i])


def _driver_rows(known: Outlook) -> Rows:
    names = known.lines[0].scores.benchmarks if known.lines else ()
    ratios = (f"ratio {name}" for name in names)
    head = ("driver", "window", "shift", "weight", "ahead", "period", "path", "rmse", "mae")
    yield *head, "dates", *ratios
    for line in known.lines:
        for i, value in enumerate(line.path.tolist()):
            yield (
                line.name,
                line.window,
                line.shift,
                line.weight,
                i + 1,
                period_code(known.found.pair.origin + i + 1),
                value,
                float(line.scores.rmse[i]),
                float(line.scores.mae[i]),
                int(line.scores.n[i]),
                *line.scores.ratio[:, i].tolist(),
            )


def _statement_rows(known: Outlook) -> Rows:
    yield (
        "statement",
        "day",
        "words",
        "driver",
        "response",
        "window",
        "shift",
        "supersedes",
        "superseded_by",
        "origin",
        "rate",
        "ahead",
        "period",
        "stated",
        *_level_columns(known),
        "outcome",
        "rank",
        *(f"inside_{100 * level:.0f}" for level in known.levels),
    )
    for one in known.judged:
        said, score = one.said, one.score
        for target, fan in said.paths.items():
            judged = score if target == known.state.target else None
            bands = [end for level in known.levels for end in fan.band(level)]
            for i, h in enumerate(fan.ahead.tolist()):
                hits: list[float | None] = [None] * len(known.levels)
                if judged is not None and judged.levels == known.levels:
                    hits = [float(row[i]) for row in judged.inside]
                yield (
                    said.id,
                    said.day,
                    said.words,
                    " + ".join(said.driver),
                    said.response,
                    said.window,
                    said.shift,
                    said.supersedes,
                    known.kept.successor.get(said.id),
                    said.origin,
                    target,
                    h,
                    period_code(said.start + h),
                    float(fan.centre[i]),
                    *(float(end[i]) for end in bands),
                    None if judged is None else float(judged.outcome[i]),
                    None if judged is None else float(judged.rank[i]),
                    *hits,
                )


VIEWS: dict[str, Callable[[Outlook], Rows]] = {
    "fan": _fan_rows,
    "gap": _gap_rows,
    "direct": _direct_rows,
    "backtest": _backtest_rows,
    "coverage": _coverage_rows,
    "through": _through_rows,
    "drivers": _driver_rows,
    "statements": _statement_rows,
}
