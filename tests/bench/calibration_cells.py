"""Size and coverage of per-cell inference: `python -m tests.bench.calibration_cells`.

Driver and response are unrelated, or tied by a known line; every trial is seeded. Rows are
(name, value, lowest, highest): a value outside says that the calibration is lost.
"""

import argparse

import numpy as np
from scipy.signal import lfilter
from scipy.special import stdtr

from analytics.effective import effective_months, smoothed_autocorrelations, student_t
from analytics.hac import hac_surface
from analytics.robust import cell_inference, surface_inference
from analytics.surface import lag_surface

WINDOWS, SHIFTS, MONTHS = (1, 12, 36), (0, 24), 300


def autoregression(rng, months, *coefficients):
    """Gaussian autoregression of variance about 1, after 300 months of running in."""
    noise = rng.standard_normal(months + 300)
    values = lfilter([1.0], [1.0, *(-c for c in coefficients)], noise)[300:]
    if len(coefficients) == 1:
        values = values * np.sqrt(1.0 - coefficients[0] ** 2)
    return values


def sizes(phi, trials, seed=1):
    """Share of unrelated pairs with p < .05: naive, Bartlett kernel with fixed b, effective."""
    rng = np.random.default_rng(seed)
    hits = np.zeros((3, len(WINDOWS), len(SHIFTS)))
    grid = {"windows": WINDOWS, "shifts": SHIFTS}
    for _ in range(trials):
        pair = autoregression(rng, MONTHS, phi), autoregression(rng, MONTHS, phi)
        result = surface_inference(*pair, **grid)
        kernel = hac_surface(*pair, **grid)
        hits += np.stack([result.p_naive, kernel.p, result.p]) < 0.05
    return (hits / trials).max(axis=2)


def seasonal_sizes(phi, spread, trials, seed=2):
    """Sizes for unrelated pairs with fixed seasonal patterns, windows 1 and 6.

    Rows: raw correlation with its own autocorrelations; raw correlation with autocorrelations of
    the series without seasonal means; both without seasonal means, which the project takes.
    """
    rng = np.random.default_rng(seed)
    windows = np.array([1, 6])
    hits = np.zeros((3, windows.size, len(SHIFTS)))
    for _ in range(trials):
        pair = [
            autoregression(rng, MONTHS, phi)
            + spread * np.tile(rng.standard_normal(12), MONTHS // 12)
            for _ in range(2)
        ]
        raw = lag_surface(*pair, windows=windows, shifts=SHIFTS)
        taken = surface_inference(*pair, windows=windows, shifts=SHIFTS)
        rho = [smoothed_autocorrelations(series, windows) for series in pair]
        effective = np.stack(
            [effective_months(*both, raw.pairs[i]) for i, both in enumerate(zip(*rho, strict=True))]
        )
        for row, count in enumerate((effective, taken.effective_months)):
            t = student_t(raw.correlation, count)
            hits[row] += 2.0 * stdtr(count - 2.0, -np.abs(t)) < 0.05
        hits[2] += taken.p < 0.05
    return (hits / trials).max(axis=2)


def coverages(phi, noise, share, trials, seed=3):
    """Share of trials that miss: correlation, slope, intercept, joint region; true line 0.3, 0.5.

    `noise` are the coefficients of the response's own autoregression, `share` the part of its
    monthly variance that the driver explains. The driver has mean 1.
    """
    rng = np.random.default_rng(seed)
    lead, line = 24, np.array([0.3, 0.5])
    missed = np.zeros((4, len(WINDOWS)))
    for _ in range(trials):
        long = autoregression(rng, MONTHS + lead, phi) + 1.0
        own = autoregression(rng, MONTHS, *noise)
        scale = line[1] * np.sqrt((1.0 - share) / share) / _spread(noise)
        driver, response = long[lead:], line[0] + line[1] * long[:MONTHS] + scale * own
        for column, window in enumerate(WINDOWS):
            cell = cell_inference(driver, response, window=window, shift=lead)
            true_r = _smoothed_correlation(phi, noise, share, window)
            away = line - cell.plane.estimate
            form = away @ np.linalg.solve(cell.plane.covariance, away)
            edge = cell.plane.robust[0] - cell.plane.estimate
            bound = edge @ np.linalg.solve(cell.plane.covariance, edge)
            low, high = cell.correlation_interval
            missed[:, column] += (
                not low <= true_r <= high,
                not cell.slope_interval.low <= line[1] <= cell.slope_interval.high,
                not cell.intercept_interval.low <= line[0] <= cell.intercept_interval.high,
                form > bound,
            )
    return missed / trials


def _autocovariance(coefficients, lags=4000):
    response = lfilter([1.0], [1.0, *(-c for c in coefficients)], np.eye(1, lags)[0])
    return np.correlate(response, response, "full")[lags - 1 :]


def _spread(noise):
    """Standard deviation that `autoregression` gives."""
    return 1.0 if len(noise) == 1 else float(np.sqrt(_autocovariance(noise)[0]))


def _smoothed_variance(coefficients, window):
    covariance = _autocovariance(coefficients)
    weights = np.r_[window, 2.0 * np.arange(window - 1, 0, -1)] / window**2
    return float(weights @ covariance[:window]) / covariance[0]


def _smoothed_correlation(phi, noise, share, window):
    signal = share * _smoothed_variance((phi,), window)
    return np.sqrt(signal / (signal + (1.0 - share) * _smoothed_variance(noise, window)))


def measure(trials=500):
    """Rows (name, value, lowest, highest)."""
    slack = 3.0 * np.sqrt(0.05 * 0.95 / trials)
    rows = []
    for phi in (0.5, 0.9):
        naive, kernel, effective = sizes(phi, trials)
        for column, window in enumerate(WINDOWS):
            name = f"size, AR {phi}, window {window}: "
            rows += [
                (name + "naive", naive[column], 0.0, 1.0),
                (name + "HAC fixed-b", kernel[column], 0.0, 1.0),
                (name + "effective months", effective[column], 0.0, 0.065 + slack),
            ]
    for phi in (0.5, 0.9):
        for label, shares in zip(
            ("raw r, raw N", "raw r, N without season", "without season"),
            seasonal_sizes(phi, 2.0, trials),
            strict=True,
        ):
            for window, value in zip((1, 6), shares, strict=True):
                high = 0.065 + slack if label == "without season" else 1.0
                name = f"size, seasonal, AR {phi}, window {window}: {label}"
                rows.append((name, value, 0.0, high))
    for phi, noise, share in (
        (0.5, (0.5,), 0.1),
        (0.5, (0.9,), 0.4),
        (0.9, (0.5,), 0.4),
        (0.9, (0.9,), 0.1),
        (0.5, (0.3, 0.15, 0.1, 0.1, 0.1, 0.1), 0.2),
    ):
        missed = coverages(phi, noise, share, trials)
        highest = (0.08, 0.08, 0.10, 0.12)
        for kind, values, high in zip(
            ("correlation", "slope", "intercept", "joint region"), missed, highest, strict=True
        ):
            for window, value in zip(WINDOWS, values, strict=True):
                own = f"AR({len(noise)}) noise {noise[0]}"
                name = (
                    f"missed at 95 %, driver AR {phi}, {own}, R2 {share}, window {window}: {kind}"
                )
                rows.append((name, value, 0.0, high + slack))
    return rows


def main():
    """Print the rows and end with status 1 when one lies outside its bounds."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--trials", type=int, default=500)
    lost = 0
    for name, value, low, high in measure(parser.parse_args().trials):
        inside = low <= value <= high
        lost += not inside
        print(
            f"{value:6.3f}  {'' if inside else 'OUTSIDE ' + str((low, round(high, 3))):>18}  {name}"
        )
    raise SystemExit(1 if lost else 0)


if __name__ == "__main__":
    main()
