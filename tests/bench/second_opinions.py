"""Calibration and time of the second opinions, the episodes and the stability bands.

Run from the checkout: ``python -m tests.bench.second_opinions [--runs N] [PART ...]``. Parts are
time, chance, lag, bands, stability, episodes, gap. Every run has its own seed; a share p over N
runs has a standard error of sqrt(p (1 - p) / N).
"""

import argparse
import time

import numpy as np
from scipy.special import stdtr

from analytics.cell import lag_cell
from analytics.distributed_lag import distributed_lag
from analytics.effective import effective_months, smoothed_autocorrelations, student_t
from analytics.influence import cell_without, episodes
from analytics.opinions import second_opinions
from analytics.prewhitening import prewhitened_correlation
from analytics.projections import local_projections
from analytics.simulate import ar_process, hump, planted_pair
from analytics.stability import rolling_stability

LAG, SLOPE = 18, 0.4


def related(seed, n, share, *, spread=13, noise_ar=0.5):
    """Planted pair whose driver explains `share` of the response's monthly variance."""
    rng = np.random.default_rng(seed)
    unit = planted_pair(rng, 20_000, lag=LAG, slope=SLOPE, noise=1e-9, spread=spread).response
    noise = float(unit.std() * np.sqrt((1.0 - share) / share))
    return planted_pair(rng, n, lag=LAG, slope=SLOPE, noise=noise, noise_ar=noise_ar, spread=spread)


def unrelated(seed, n, ar):
    rng = np.random.default_rng(seed)
    return ar_process(rng, n, ar=ar, sd=1.0), ar_process(rng, n, ar=ar, sd=1.0)


def measured_time(runs):
    pair = related(1, 760, 0.1)
    x, y = pair.driver, pair.response
    programs = {
        "second_opinions": lambda: second_opinions(x, y, window=12, shift=18, max_shift=60),
        "prewhitened": lambda: prewhitened_correlation(x, y, shifts=range(61), window=12),
        "distributed lag": lambda: distributed_lag(x, y, max_shift=60, window=12),
        "local projection": lambda: local_projections(x, y, max_shift=60, window=12),
        "episodes": lambda: episodes(x, y, window=12, shift=18),
        "stability, 499 draws": lambda: rolling_stability(
            x, y, window=12, shift=18, span=120, rng=np.random.default_rng(1)
        ),
    }
    for name, program in programs.items():
        program()
        spent = []
        for _ in range(max(5, runs // 40)):
            start = time.perf_counter()
            program()
            spent.append(time.perf_counter() - start)
        print(f"{name:22} T=760  best {min(spent):.3f} s, median {np.median(spent):.3f} s")


def by_chance(runs):
    print("unrelated pairs called clear (nominal at most .05)")
    for n in (240, 760):
        for ar in (0.0, 0.5, 0.9):
            clear = np.zeros(3)
            for seed in range(runs):
                found = second_opinions(
                    *unrelated([seed, n], n, ar), window=12, shift=12, max_shift=48
                )
                clear += [opinion.clear for opinion in found.opinions]
            print(f"T={n} AR {ar}: prewhitened, distributed, projected {(clear / runs).round(3)}")


def planted_lag(runs):
    print(f"planted lag {LAG}, 13 months wide: median miss, share within 6 months, share clear")
    for n, share in ((240, 0.2), (240, 0.4), (760, 0.05), (760, 0.1), (760, 0.2)):
        misses, clear = [], []
        for seed in range(runs):
            pair = related([seed, n], n, share)
            found = second_opinions(pair.driver, pair.response, window=12, shift=LAG, max_shift=48)
            halves = (found.halves.first.best_shift, found.halves.second.best_shift)
            shifts = [*(opinion.shift for opinion in found.opinions), *halves]
            misses.append(np.abs(np.array(shifts) - LAG))
            clear.append([opinion.clear for opinion in found.opinions])
        misses = np.array(misses)
        print(
            f"T={n} R2={share}: prewhitened, distributed, projected, halves"
            f" {np.median(misses, axis=0)} {(misses <= 6).mean(axis=0).round(2)}"
            f" {np.mean(clear, axis=0).round(2)}"
        )


def bands(runs):
    print("coverage of 95 % bands over lags 0-36: weights, sums")
    for n, spread in ((240, 13), (760, 13), (760, 1)):
        true = np.zeros(37)
        true[LAG - spread // 2 : LAG + spread // 2 + 1] = SLOPE / spread
        surprise = np.array([true[: h + 1] @ 0.5 ** np.arange(h, -1, -1) for h in range(37)])
        covered = {}
        for seed in range(runs):
            pair = related([seed, n], n, 0.2, spread=spread)
            x, y = pair.driver, pair.response
            fits = {
                form: distributed_lag(x, y, max_shift=36, form=form)
                for form in ("smooth", "unrestricted", "polynomial")
            }
            profiles = {name: (fit.weights, fit.cumulative, true) for name, fit in fits.items()}
            projected = local_projections(x, y, max_shift=36)
            profiles["projection"] = (projected.monthly, projected.cumulative, surprise)
            for name, (single, total, truth) in profiles.items():
                covered.setdefault(name, []).append(
                    [
                        np.mean((profile.low <= aim) & (aim <= profile.high))
                        for profile, aim in ((single, truth), (total, truth.cumsum()))
                    ]
                )
        for name, shares in covered.items():
            print(f"T={n} spread {spread} {name:13} {np.mean(shares, axis=0).round(3)}")


def stability(runs):
    print("constant relation: coverage of 95 % bands, share with p_constant <= .05")
    print("  (rolling slope, growing slope, rolling r, growing r)")
    for n, share, noise_ar, loud in (
        (300, 0.2, 0.5, False),
        (300, 0.2, 0.9, False),
        (760, 0.1, 0.5, False),
        (760, 0.1, 0.9, False),
        (760, 0.1, 0.5, True),
    ):
        covered, alarms = [], []
        for seed in range(runs):
            pair = related([seed, n], n, share, noise_ar=noise_ar)
            weight = np.where(np.arange(n) < n // 2, 1.5, 0.5) if loud else np.ones(n)
            response = pair.response - pair.noise + weight * pair.noise
            rng = np.random.default_rng([seed, 1])
            found = rolling_stability(
                pair.driver, response, window=12, shift=LAG, span=120, rng=rng
            )
            courses = (
                found.rolling_slope,
                found.growing_slope,
                found.rolling_correlation,
                found.growing_correlation,
            )
            covered.append(
                [np.mean((c.low <= c.estimate) & (c.estimate <= c.high)) for c in courses]
            )
            alarms.append([c.p_constant <= 0.05 for c in courses])
        print(
            f"T={n} R2={share} noise AR {noise_ar}{' louder first half' if loud else ''}:"
            f" {np.mean(covered, axis=0).round(3)} {np.mean(alarms, axis=0).round(3)}"
        )


def with_hump(pair, n, size):
    """The same event in both series, LAG months apart, in their own standard deviations."""
    event = hump(n + LAG, start=n // 2, rise=18, hold=12, fall=18, size=size)
    driver, response = pair
    return driver + event[LAG:] * driver.std(), response + event[:n] * response.std()


def fragility(runs):
    print("cell fixed at (12, 18): fragility >= 1/3, >= 1/2, p lost by removing one")
    for n in (240, 300, 760):
        for name, size, share in (
            ("genuine R2 .2", 0.0, 0.2),
            ("genuine R2 .4", 0.0, 0.4),
            ("one hump 2.5 sd", 2.5, 0.0),
            ("one hump 4 sd", 4.0, 0.0),
        ):
            found = []
            for seed in range(runs):
                if share:
                    planted = related([seed, n], n, share)
                    pair = planted.driver, planted.response
                else:
                    pair = with_hump(unrelated([seed, n], n, 0.5), n, size)
                result = episodes(*pair, window=12, shift=LAG)
                lost = result.p <= 0.05 and result.removals == 1
                found.append([result.fragility >= 1 / 3, result.fragility >= 1 / 2, lost])
            print(f"T={n} {name:15} {np.mean(found, axis=0).round(2)}")


def gap(runs):
    print("p <= .05 without the episode of most weight: own autocorrelations, whole sample's")
    for name, share, size in (("event only", 0.0, 4.0), ("event and relation", 0.2, 4.0)):
        n, found = 300, []
        for seed in range(runs):
            if share:
                planted = related([seed, n], n, share)
                pair = planted.driver, planted.response
            else:
                pair = unrelated([seed, n], n, 0.5)
            pair = with_hump(pair, n, size)
            result = episodes(*pair, window=12, shift=LAG, periods_per_year=1)
            run = max(result.episodes, key=lambda episode: episode.share)
            if run.too_few_left:
                continue
            rest = cell_without(*pair, window=12, shift=LAG, episode=run, periods_per_year=1)
            cell = lag_cell(*pair, window=12, shift=LAG)
            whole = [smoothed_autocorrelations(values, np.array([12]))[0] for values in pair]
            months = float(effective_months(*whole, cell.n)) * rest.kept.sum() / cell.n
            t = float(student_t(rest.correlation, months))
            found.append([rest.p <= 0.05, 2.0 * stdtr(max(1.1, months - 2.0), -abs(t)) <= 0.05])
        print(f"T={n} {name:20} {np.mean(found, axis=0).round(3)}")
    print("unrelated pairs, p <= .05 without the middle episode (nominal .05)")
    for n in (300, 760):
        for ar in (0.5, 0.9):
            for window in (3, 12, 36):
                found = []
                for seed in range(runs):
                    pair = unrelated([seed, n], n, ar)
                    result = episodes(*pair, window=window, shift=12)
                    run = result.episodes[len(result.episodes) // 2]
                    if not run.too_few_left:
                        found.append(run.p_without <= 0.05)
                print(f"T={n} AR {ar} window {window}: {np.mean(found):.3f} of {len(found)}")


PARTS = {
    "time": measured_time,
    "chance": by_chance,
    "lag": planted_lag,
    "bands": bands,
    "stability": stability,
    "episodes": fragility,
    "gap": gap,
}

if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=200)
    parser.add_argument("parts", nargs="*", metavar="PART")
    arguments = parser.parse_args()
    unknown = set(arguments.parts) - set(PARTS)
    if unknown:
        parser.error(f"PART must be one of {', '.join(PARTS)}, but got {', '.join(unknown)}")
    for part in arguments.parts or PARTS:
        PARTS[part](arguments.runs)
