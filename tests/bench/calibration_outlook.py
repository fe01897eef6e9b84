"""Coverage of the outlook's intervals: ``python -m tests.bench.calibration_outlook``.

Options, table and resuming are those of ``tests.bench.calibration``. A run is one economy whose
driver leads by 24 months: the yearly rate is forecast at one date, 6, 12 and 24 months ahead, and
counted as inside or outside. The intervals in use must cover 77 to 83 % at 80 % and 92.5 to 97 % at
95 %; other ways stand beside them, from fewer runs, without a bound. In the invented economy the
outcomes must be covered likewise, and the planted path, which has no noise, at least as often.
"""

import sys

import numpy as np
from scipy.signal import lfilter

from analytics.forecast_tests import diebold_mariano
from analytics.forecasts import choice_at
from analytics.intervals import LEVELS
from analytics.outlook_target import outlook_target
from analytics.path_intervals import path_fan, relation_errors
from analytics.simulate import ar_process, garch_noise, lagged_effect
from data_samples.economy import BASELINE, LAG, SLOPE, SPREAD, uldrevay
from tests.bench.calibration import generator, main, row
from tests.bench.interval_candidates import (
    adaptive_conformal,
    block_bootstrap,
    empirical_quantiles,
    newest_errors,
)

HORIZONS = (6, 12, 24)
WINDOW, SHIFT, WIDTH = 12, 24, 13  # the planted lag, spread over 13 months
EFFECT, SHARE = 0.4, 0.3  # slope, and the share of the response's variance that it brings
BOUNDS = {0.5: (None, None), 0.8: (0.77, 0.83), 0.95: (0.925, 0.97)}
COMPARED = 5  # every fifth run goes to the other ways
YEARLY = outlook_target("yearly", window=WINDOW)
SHAPES = ("normal", "Laplace", "GARCH", "slow shift, 1 sd", "slow shift, 2 sd")


def economy(shape, rng, months):
    """Driver with AR .5, response with AR .5 noise; a slow shift moves its level once for good.

    The shift takes a fifth to a half of the sample, at a random date, up or down, by 1 or 2
    standard deviations of the monthly response.
    """
    margin = SHIFT + WIDTH
    law = "laplace" if shape == "Laplace" else "normal"
    driver = 0.5 + ar_process(rng, months + 2 * margin, ar=0.5, sd=1.0, law=law)
    effect = lagged_effect(driver, lag=SHIFT, spread=WIDTH)[margin : margin + months]
    ages = np.arange(1 - WIDTH, WIDTH)
    variance = EFFECT**2 * ((WIDTH - np.abs(ages)) * 0.5 ** np.abs(ages)).sum() / WIDTH**2
    sd = np.sqrt(variance * (1.0 - SHARE) / SHARE)
    if shape == "GARCH":
        noise = lfilter([1.0], [1.0, -0.5], garch_noise(rng, months + 400, sd=sd * 0.75**0.5))[400:]
    else:
        noise = ar_process(rng, months, ar=0.5, sd=sd, law=law)
    response = 0.1 + EFFECT * effect + noise
    if shape.startswith("slow shift"):
        size = float(shape.split()[2]) * np.sqrt(sd**2 + variance)
        length = int(rng.integers(months // 5, months // 2))
        start = int(rng.integers(0, months - length))
        ramp = np.clip((np.arange(months) - start) / length, 0.0, 1.0)
        response = response + rng.choice((-1, 1)) * size * ramp
    return driver[margin : margin + months], response


def coverage(case, months, runs):
    """Outcomes inside the intervals, for the way in use and for three others."""
    hits = {}
    for run in range(runs):
        rng = generator("outlook", case, months, run)
        driver, response = economy(case, rng, months + max(HORIZONS))
        errors = relation_errors(driver, response, window=WINDOW, shift=SHIFT, target=YEARLY)
        today = errors.shape[0] - 1 - max(HORIZONS)
        resampled = None
        for place, h in enumerate(HORIZONS):
            known, outcome = errors[: today - h + 1, h - 1], errors[today, h - 1]
            ways = {"in use": newest_errors}
            if run % COMPARED == 0:
                ways |= {"empirical": empirical_quantiles, "adaptive": adaptive_conformal}
                if resampled is None:
                    resampled = block_bootstrap(
                        driver[:months],
                        response[:months],
                        window=WINDOW,
                        shift=SHIFT,
                        horizons=HORIZONS,
                        draws=199,
                        rng=rng,
                    )
            ends = {way: found(known, h, LEVELS) for way, found in ways.items()}
            if resampled is not None:
                tails = [((1 - level) / 2, (1 + level) / 2) for level in LEVELS]
                ends["bootstrap"] = [np.quantile(resampled[:, place], tail) for tail in tails]
            for way, intervals in ends.items():
                for level, (low, high) in zip(LEVELS, intervals, strict=True):
                    hits.setdefault((way, h, level), []).append(low <= outcome <= high)
    return rows("outlook", case, months, hits)


def bounds(way, level):
    """Least and largest share inside, or none."""
    if way == "planted path":
        return level, None
    return BOUNDS[level] if way in ("in use", "outcome") else (None, None)


def rows(kind, case, months, hits):
    """One row a way, horizon and level."""
    found = []
    for (way, h, level), inside in sorted(hits.items()):
        low, high = bounds(way, level)
        figure = f"{way}, {h} months ahead, {100 * level:g} %"
        found.append(row(kind, case, months, figure, inside, low=low, high=high))
    return found


def chosen_cell(case, months, runs):
    """The same where the cell was picked from the data that the intervals rest on."""
    hits = {}
    for run in range(runs):
        driver, response = economy(case, generator("cell", case, months, run), months + 24)
        x, y = driver[:months], response[:months]
        choice = choice_at(
            x,
            y,
            windows=range(1, 61),
            shifts=range(1, 61),
            cell=(WINDOW, SHIFT),
            max_lags=12,
            periods_per_year=12,
        )
        fan = path_fan(x, y, window=choice.window, shift=choice.shift, target=YEARLY)
        outcomes = YEARLY.observed(response)[months : months + 24]
        for h in (h for h in HORIZONS if h <= choice.shift):
            for level in LEVELS:
                low, high = fan.band(level)
                inside = low[h - 1] <= outcomes[h - 1] <= high[h - 1]
                hits.setdefault(("chosen cell", h, level), []).append(inside)
    return rows("chosen", case, months, hits)


def invented_economy(case, months, runs):
    """Outcome and planted path inside the intervals at the stated rates, a seed an economy."""
    hits = {}
    for seed in range(runs):
        made = uldrevay(np.random.default_rng(seed))
        driver, response = 100.0 * np.diff(np.log(made.broad)), made.price_growth
        fan = path_fan(driver[:months], response[:months], window=12, shift=LAG, target=YEARLY)
        planted = BASELINE + SLOPE * lagged_effect(driver, lag=LAG, spread=SPREAD)
        ahead = slice(months, months + LAG)
        paths = {
            "outcome": YEARLY.observed(response)[ahead],
            "planted path": YEARLY.from_path(response[:months], planted[ahead]),
        }
        for level in LEVELS:
            low, high = fan.band(level)
            for name, path in paths.items():
                inside = (low <= path) & (path <= high)
                for h in (6, 12, LAG):
                    hits.setdefault((name, h, level), []).append(inside[h - 1])
    return rows("seeds", case, months, hits)


def size_of_the_test(case, months, runs):
    """Two forecasts equally good, h months ahead: how often the test says otherwise at 5 %."""
    found = []
    for h in (1, *HORIZONS, 36):
        rejected = []
        for run in range(runs):
            rng = generator("test", f"{case} {h}", months, run)
            a, b = (
                np.convolve(rng.standard_normal(months + h - 1), np.ones(h), "valid") for _ in "ab"
            )
            rejected.append(diebold_mariano((a + b) ** 2, (a - b) ** 2, horizon=h).p <= 0.05)
        found.append(row("test", case, months, f"p at most 5 %, {h} months ahead", rejected))
    return found


KINDS = {
    "outlook": (coverage, [(shape, months) for shape in SHAPES for months in (300, 760)]),
    "chosen": (chosen_cell, [(shape, months) for shape in SHAPES[:1] for months in (300, 760)]),
    "test": (size_of_the_test, [("Diebold-Mariano", months) for months in (120, 300, 600)]),
    "seeds": (invented_economy, [("invented economy", months) for months in (561, 681, 779)]),
}
FULL = {"outlook": 1600, "chosen": 500, "test": 1000, "seeds": 200}
SMALL = {"outlook": 20, "chosen": 5, "test": 20, "seeds": 5}

if __name__ == "__main__":
    sys.exit(main(kinds=KINDS, full=FULL, small=SMALL))
