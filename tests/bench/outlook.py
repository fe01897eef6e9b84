"""Time and record of a backtest: ``python -m tests.bench.outlook``.

First the time of forty years of monthly dates, 36 horizons and three benchmarks, the cell chosen
anew every year over the full grid, and of its longest chunk. Then the record on the invented
economy and on US money and prices 1959-2009 (statsmodels, macrodata): errors over those of each
benchmark, with the Diebold-Mariano p, and coverage at 50, 80 and 95 %.
"""

import os
import sys
import time

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np

from analytics.backtest import backtest, backtest_chunk, backtest_result
from analytics.backtest_plan import backtest_plan
from analytics.backtest_scores import backtest_scores
from analytics.forecasts import DIRECT, OWN_PAST, RELATION
from analytics.outlook import implied_path
from analytics.outlook_target import outlook_target
from analytics.path_intervals import path_fan
from analytics.rates import growth_rate
from analytics.search import lag_search
from analytics.simulate import planted_pair
from analytics.surface import lag_surface
from data_samples.economy import LAG, uldrevay
from data_samples.generate import SEED
from tests.outside.datasets import us_macro_1959

WINDOWS, SHIFTS = range(1, 61), range(1, 61)
YEARS, FIRST = 40, 120


def speed():
    """Rows (what, seconds of the wall, seconds of the processor, limit on the wall)."""
    months = FIRST + 12 * YEARS
    pair = planted_pair(np.random.default_rng(1), months, lag=24, slope=0.4, noise=0.6)
    target = outlook_target("yearly", window=12)
    wall, busy = time.perf_counter(), time.process_time()
    plan = backtest_plan(
        pair.driver,
        pair.response,
        window=12,
        shift=24,
        target=target,
        windows=WINDOWS,
        shifts=SHIFTS,
        first=FIRST,
    )
    chunks, longest = [], 0.0
    for index in range(plan.chunks):
        began = time.perf_counter()
        chunks.append(backtest_chunk(plan, index))
        longest = max(longest, time.perf_counter() - began)
    done = backtest_result(plan, chunks)
    scores = backtest_scores(done, RELATION)
    wall, busy = time.perf_counter() - wall, time.process_time() - busy
    yield (
        f"backtest, {done.origins.size} dates, {plan.chunks} choices of 3,600 cells",
        wall,
        busy,
        20.0,
    )
    yield "its longest chunk, a year of dates", longest, np.nan, 1.0
    assert scores.n[0] == done.origins.size - 1
    began = time.perf_counter()
    path_fan(pair.driver, pair.response, window=12, shift=24, target=target)
    yield "path with intervals, 600 months", time.perf_counter() - began, np.nan, 1.0
    began = time.perf_counter()
    for _ in range(40):
        lag_surface(pair.driver, pair.response, windows=WINDOWS, shifts=SHIFTS)
    floor = time.perf_counter() - began
    yield "the same over 40 bare surfaces, ratio", wall / floor, np.nan, np.inf


def record(name, driver, response, *, window, shift, year, horizons, windows, shifts):
    """Path and record of one pair."""
    target = outlook_target("yearly", window=window, periods_per_year=year)
    path = implied_path(driver, response, window=window, shift=shift, periods_per_year=year)
    fan = path_fan(driver, response, window=window, shift=shift, target=target)
    low, high = fan.band(0.8)
    print(f"\n{name}: window {window}, shift {shift}, r {path.correlation:.3f}, {path.pairs} pairs")
    for h in (h for h in horizons if h <= path.ahead.size):
        print(
            f"  {h:3} ahead: yearly rate {path.yearly[h - 1]:6.2f}, 80 % from {low[h - 1]:6.2f} to"
            f" {high[h - 1]:6.2f}; past coverage {fan.measured[1, h - 1]:.2f} of"
            f" {fan.judged[h - 1]}"
        )
    for rules in ({}, {"windows": windows, "shifts": shifts}):
        for scheme in ("expanding", "rolling"):
            done = backtest(
                driver,
                response,
                window=window,
                shift=shift,
                target=target,
                scheme=scheme,
                periods_per_year=year,
                **rules,
            )
            kind = "cell chosen anew every year" if rules else "cell kept"
            print(f"  {kind}, {scheme}, {done.origins.size} dates")
            for model in (RELATION, DIRECT, OWN_PAST):
                scores = backtest_scores(done, model)
                for h in horizons:
                    against = ", ".join(
                        f"{ratio:.2f} (p {test[h - 1].p:.3f})"
                        for ratio, test in zip(scores.ratio[:, h - 1], scores.dm, strict=True)
                    )
                    share = " ".join(f"{value:.2f}" for value in scores.share[:, h - 1])
                    print(
                        f"    {model:22} {h:3} ahead: rmse {scores.rmse[h - 1]:5.2f}, over no"
                        f" change, autoregression, mean {against}; coverage {share}"
                    )


def main():
    missed = 0
    for what, wall, busy, limit in speed():
        missed += wall > limit
        spent = "" if np.isnan(busy) else f"{busy:8.2f} s of the processor"
        print(f"{what:60}{wall:8.2f}{spent}{'' if wall <= limit else '  NOT HELD'}", flush=True)
    made = uldrevay(np.random.default_rng(np.random.SeedSequence(SEED).spawn(3)[0]))
    driver, response = 100.0 * np.diff(np.log(made.broad)), made.price_growth
    record(
        "invented economy",
        driver,
        response,
        window=12,
        shift=LAG,
        year=12,
        horizons=(6, 12, 22, 36),
        windows=WINDOWS,
        shifts=SHIFTS,
    )
    money, prices = (growth_rate(us_macro_1959(column)).values for column in ("m1", "cpi"))
    found = lag_search(
        money, prices, windows=range(1, 21), shifts=range(-12, 21), periods_per_year=4
    )
    print(f"\nmacrodata, m1 to cpi: search-adjusted p {found.p:.3f}, best shift {found.best_shift}")
    record(
        "macrodata, m1 to cpi",
        money,
        prices,
        window=4,
        shift=8,
        year=4,
        horizons=(2, 4, 8, 12),
        windows=range(1, 21),
        shifts=range(1, 21),
    )
    return 1 if missed else 0


if __name__ == "__main__":
    sys.exit(main())
