"""The answer of `pricewake outlook`: one object, every number unrounded."""

from typing import Any

from analytics.backtest_scores import Scores
from analytics.intervals import Fan
from analytics.series import period_code
from app.outlook.result import Judged, Outlook
from app.outlook.words import best_benchmark, looked_at, sentence, verdict

LEVEL = 0.8
NAMES = {"window": "mean", "single": "rate_1m", "yearly": "rate_12m"}


def outlook_answer(known: Outlook, fans: dict[str, Fan]) -> dict[str, Any]:
    """Return what is known; a part that is missing is null or empty and named in `refused`.

    `fans` are those of every rate, from `app.outlook.bridge.fans`.
    """
    found, state, path = known.found, known.state, known.path
    gap = known.gap
    return {
        "driver": state.driver,
        "response": state.response,
        "window": state.window,
        "shift": state.shift,
        "frequency": found.pair.response.frequency,
        "formula": found.compounding,
        "origin": period_code(found.pair.origin),
        "driver_last": period_code(found.pair.driver.last),
        "level": LEVEL,
        "path": _path(known, fans),
        "line": (
            {"intercept": path.intercept, "slope": path.slope, "pairs": path.pairs}
            if path
            else None
        ),
        "gap": (
            {
                "period": period_code(found.pair.response.first + int(gap.place[-1])),
                "observed": float(gap.observed[-1]),
                "expected": float(gap.expected[-1]),
                "gap": float(gap.gap[-1]),
            }
            if gap
            else None
        ),
        "direct": _direct(known),
        "target": state.target,
        "backtest": _backtest(known),
        "drivers": [
            {
                "name": line.name,
                "window": line.window,
                "shift": line.shift,
                "weight": line.weight,
                "path": line.path.tolist(),
                "rmse": line.scores.rmse.tolist(),
            }
            for line in known.lines
        ],
        "statements": [_statement(one, known) for one in known.judged],
        "running_coverage": {
            name: [
                {
                    "level": level,
                    "outcomes": int(count.n[row]),
                    "inside": int(count.hits[row]),
                    "low": float(count.low[row]),
                    "high": float(count.high[row]),
                }
                for row, level in enumerate(count.levels)
            ]
            for name, count in known.running.items()
        },
        "verdict": verdict(known),
        "sentence": sentence(known),
        "notes": list(found.notes),
        "refused": dict(known.refused),
    }


def _path(known: Outlook, fans: dict[str, Fan]) -> list[dict[str, Any]]:
    path = known.path
    if path is None:
        return []
    centre = {"window": path.window_mean, "single": path.single, "yearly": path.yearly}
    rows = []
    for i, period in enumerate(known.periods):
        row: dict[str, Any] = {"period": period_code(period)}
        for kind, name in NAMES.items():
            row[name] = float(centre[kind][i])
            ends = _ends(fans.get(kind), LEVEL, i)
            low, high = ("low", "high") if name == "mean" else (f"{name}_low", f"{name}_high")
            row |= {low: ends[0], high: ends[1]}
        row["intervals"] = {
            NAMES[kind]: {f"{level:g}": _ends(fan, level, i) for level in known.levels}
            for kind, fan in fans.items()
        }
        rows.append(row)
    return rows


def _ends(fan: Fan | None, level: float, place: int) -> list[float | None]:
    if fan is None:
        return [None, None]
    low, high = fan.band(level)
    return [float(low[place]), float(high[place])]


def _direct(known: Outlook) -> list[dict[str, Any]]:
    direct, share = known.direct, known.added_share
    if direct is None:
        return []
    return [
        {
            "ahead": h,
            "with_driver": float(direct.with_driver[i]),
            "without_driver": float(direct.without_driver[i]),
            "share_within_sample": float(direct.driver_gain[i]),
            "share_in_past_forecasts": None if share is None else float(share[i]),
        }
        for i, h in enumerate(direct.ahead.tolist())
    ]


def _backtest(known: Outlook) -> dict[str, Any] | None:
    """Return the scores at the horizon looked at, and those of every horizon below them."""
    scores, done = known.scores, known.backtest
    if scores is None or done is None:
        return None
    ahead = min(known.found.ahead, scores.ahead.size)
    benchmark = best_benchmark(scores, ahead)
    return {
        **_at(scores, ahead, benchmark),
        "benchmark": benchmark,
        "level": LEVEL,
        "scheme": done.scheme,
        "window_and_shift": "chosen anew each year" if done.rechosen else "kept",
        "dates": int(done.origins.size),
        "dates_from_vintages": known.dated,
        "beats_best_benchmark_at": [
            h
            for h in looked_at(known.found, scores.ahead.size)
            if scores.beats(best_benchmark(scores, h), h)
        ],
        "horizons": [
            {
                **_at(scores, h, best_benchmark(scores, h)),
                "best_benchmark": best_benchmark(scores, h),
                "mae": float(scores.mae[h - 1]),
                "bias": float(scores.bias[h - 1]),
                "theil_u2": float(scores.u2[h - 1]),
                "benchmarks": {
                    name: {
                        "rmse": float(scores.benchmark_rmse[row, h - 1]),
                        "ratio": float(scores.ratio[row, h - 1]),
                        "dm": scores.dm[row][h - 1].statistic,
                        "dm_p": scores.dm[row][h - 1].p,
                        "dm_p_better": scores.dm[row][h - 1].p_better,
                    }
                    for row, name in enumerate(scores.benchmarks)
                },
                "coverages": {
                    f"{level:g}": {
                        "share": scores.coverage[row][h - 1].share,
                        "outcomes": scores.coverage[row][h - 1].n,
                        "kupiec_p": scores.coverage[row][h - 1].p_kupiec,
                        "christoffersen_p": scores.coverage[row][h - 1].p_christoffersen,
                    }
                    for row, level in enumerate(scores.levels)
                },
            }
            for h in scores.ahead.tolist()
        ],
    }


def _at(scores: Scores, ahead: int, benchmark: str) -> dict[str, Any]:
    row, level = scores.benchmarks.index(benchmark), scores.levels.index(LEVEL)
    return {
        "ahead": ahead,
        "n": int(scores.n[ahead - 1]),
        "rmse": float(scores.rmse[ahead - 1]),
        "rmse_benchmark": float(scores.benchmark_rmse[row, ahead - 1]),
        "coverage": scores.coverage[level][ahead - 1].share,
        "dm_p": scores.dm[row][ahead - 1].p,
    }


def _statement(one: Judged, known: Outlook) -> dict[str, Any]:
    said, score = one.said, one.score
    return {
        "id": said.id,
        "day": said.day,
        "words": said.words,
        "driver": list(said.driver),
        "response": said.response,
        "window": said.window,
        "shift": said.shift,
        "origin": said.origin,
        "supersedes": said.supersedes,
        "superseded_by": known.kept.successor.get(said.id),
        "outcomes": 0 if score is None else score.known,
        "not_scored": one.refusal or None,
        "horizons": []
        if score is None
        else [
            {
                "period": period_code(said.start + h),
                "stated": float(said.paths[known.state.target].centre[h - 1]),
                "outcome": float(score.outcome[h - 1]),
                "rank": float(score.rank[h - 1]),
                "inside": {
                    f"{level:g}": None if hit != hit else bool(hit)
                    for level, hit in zip(
                        score.levels, score.inside[:, h - 1].tolist(), strict=True
                    )
                },
            }
            for h in score.ahead.tolist()
        ],
    }
