"""An outlook in words: headline, verdict, what each rate is called."""

import numpy as np

from analytics.backtest_scores import Scores
from analytics.outlook_target import TargetKind
from analytics.series import period_label
from app.outlook.fields import AHEAD_YEARS
from app.outlook.inputs import Inputs
from app.outlook.result import Outlook
from app.words import counted, p_words, plain

CAUTION = (
    "An association in past data, not a cause, and not investment or policy advice. Official "
    "statistics and your desk's own qualified judgement come first. The path says what one line"
    " says of months to come; it knows no policy, no shock and no other cause."
)
SIGNIFICANT = 0.05
BENCHMARK_WORDS = {
    "no change": "no change",
    "autoregression": "the autoregression",
    "mean so far": "the mean so far",
}


def rate_words(found: Inputs, kind: TargetKind | str) -> str:
    """Return what a rate is called, without its unit."""
    if kind == "window":
        return f"{found.state.window}-{found.noun} mean"
    if kind == "single":
        return f"one-{found.noun} rate"
    if found.compounding == "mean":
        return f"mean over {counted(found.year, found.noun)}"
    return {12: "12-month rate", 4: "four-quarter rate", 1: "yearly rate"}[found.year]


def unit_words(found: Inputs, kind: TargetKind | str) -> str:
    """Return the unit of a rate: percent, and by which formula."""
    if found.compounding == "mean":
        return found.pair.response.unit or "percent"
    a_period = "" if kind == "yearly" else f" a {found.noun}"
    return f"percent{a_period}{' (100 × log)' if found.compounding == 'log' else ''}"


def sentence(known: Outlook) -> str:
    """Say the state, and what it implies a year on or at the end of a shorter path."""
    found = known.found
    pair = found.pair
    span = f"{period_label(pair.response.first)} to {period_label(pair.origin)}"
    said = known.state.sentence(found.noun, span)
    if known.path is None or known.fan is None:
        return f"{said}."
    place = min(found.ahead, known.reach) - 1
    return (
        f"{said}: implied {rate_words(found, known.state.target)}"
        f" {plain(float(known.fan.centre[place]), 1)} percent in"
        f" {period_label(known.periods[place])}."
    )


def verdict(known: Outlook) -> list[str]:
    """Say what the past says of this outlook, failures first, and then the path itself."""
    if known.path is None:
        return [f"No path: {known.refused.get('path', 'it cannot be said')}."]
    said = []
    if known.scores is not None:
        said += against_benchmarks(known)
    elif "backtest" in known.refused:
        said.append(f"Not backtested: {known.refused['backtest']}.")
    else:
        said.append("Not backtested yet: whether the relation beats a benchmark is not known.")
    return [*said, path_words(known)]


def looked_at(found: Inputs, longest: int) -> list[int]:
    """Return the horizons that tables and verdict speak of, in periods."""
    wanted = {max(1, round(years * found.year)) for years in AHEAD_YEARS.values()}
    return sorted(h for h in wanted if h <= longest)


def best_benchmark(scores: Scores, horizon: int) -> str:
    """Return the benchmark with the smallest errors at a horizon; the first if none has any."""
    errors = scores.benchmark_rmse[:, horizon - 1]
    return scores.benchmarks[int(np.nanargmin(errors)) if np.isfinite(errors).any() else 0]


def ratio_words(scores: Scores, benchmark: str, horizon: int) -> str:
    """Say how errors compare with a benchmark's: ``errors 0.83 times as large, p .04``."""
    row = scores.benchmarks.index(benchmark)
    found = scores.dm[row][horizon - 1]
    return (
        f"errors {plain(float(scores.ratio[row, horizon - 1]))} times as large,"
        f" p {p_words(found.p)}"
    )


def against_benchmarks(known: Outlook) -> list[str]:
    """Say where the relation did not beat its best benchmark, then where it did."""
    scores, found = known.scores, known.found
    assert scores is not None
    horizons = [h for h in looked_at(found, scores.ahead.size) if scores.n[h - 1] > 1]
    beaten = [h for h in horizons if scores.beats(best_benchmark(scores, h), h)]
    missed = [h for h in horizons if h not in beaten]
    said = []
    if missed:
        shown = found.ahead if found.ahead in missed else missed[-1]
        benchmark = best_benchmark(scores, shown)
        beat = "clearly beat" if any(_nearer(scores, h) for h in missed) else "beat"
        said.append(
            f"In past forecasts the relation did not {beat} its best benchmark at"
            f" {_listed(missed)} {found.noun}s ahead (at {shown}:"
            f" {BENCHMARK_WORDS[benchmark]}, {ratio_words(scores, benchmark, shown)})."
        )
    if beaten:
        shown = found.ahead if found.ahead in beaten else beaten[-1]
        benchmark = best_benchmark(scores, shown)
        said.append(
            f"{'It did at' if missed else 'In past forecasts the relation beat every benchmark at'}"
            f" {_listed(beaten)} {found.noun}s ahead (at {shown}:"
            f" {BENCHMARK_WORDS[benchmark]}, {ratio_words(scores, benchmark, shown)})."
        )
    if missed and (weaker := _beaten_ones(scores, missed)):
        said.append(f"Of the weaker ones it beat {weaker} {found.noun}s ahead.")
    if known.backtest is not None and not known.backtest.rechosen:
        said.append("Window and shift were chosen knowing what came, so this flatters.")
    if not horizons:
        said.append("No past forecast has an outcome to be judged by yet.")
    return said


def _nearer(scores: Scores, h: int) -> bool:
    """Say whether its errors were smaller than the best benchmark's, surely or not."""
    return bool(scores.ratio[scores.benchmarks.index(best_benchmark(scores, h)), h - 1] < 1)


def _beaten_ones(scores: Scores, horizons: list[int]) -> str:
    """Name benchmarks that were beaten where the best one was not: ``no change at 24``."""
    parts = []
    for name in scores.benchmarks:
        at = [h for h in horizons if scores.beats(name, h)]
        if at:
            parts.append(f"{BENCHMARK_WORDS[name]} at {_listed(at)}")
    return " and ".join(parts)


def path_words(known: Outlook) -> str:
    """Say where the path goes, with its 80 % interval."""
    fan, found = known.fan, known.found
    assert fan is not None
    name = rate_words(found, known.state.target)
    place = min(found.ahead, known.reach) - 1
    now = known.history[~np.isnan(known.history)]
    start = f" from {plain(float(now[-1]), 1)} in {period_label(found.pair.origin)}"
    low, high = (float(end[place]) for end in fan.band(0.8))
    interval = (
        "no interval, for want of past errors"
        if np.isnan(low)
        else f"80 % interval {plain(low, 1)} to {plain(high, 1)}"
    )
    return (
        f"The implied {name} goes{start if now.size else ''} to"
        f" {plain(float(fan.centre[place]), 1)} percent in {period_label(known.periods[place])}"
        f" ({interval})."
    )


def held_words(known: Outlook, row: int) -> str:
    """Name an interval, with its past coverage where that is off at the horizon looked at."""
    level = f"{100 * known.levels[row]:.0f} %"
    seen = known.held(row, min(known.found.ahead, known.reach))
    return f"{level}, held {100 * seen.share:.0f} %" if seen and seen.off else level


def _listed(numbers: list[int]) -> str:
    words = [str(number) for number in numbers]
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"
