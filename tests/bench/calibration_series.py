"""Unrelated pairs of many shapes, and related pairs of known strength, for the calibration."""

import numpy as np
from scipy.signal import lfilter

from analytics.simulate import ar_process, garch_noise, hump, level_shift, planted_pair

# Sums to .94: a sixth of the shock is still there after three years.
LONG_MEMORY = (0.5, 0.15, 0.1, 0.08, 0.06, 0.05)


def _filtered(coefficients, noise, run_in=400):
    return lfilter([1.0], [1.0, *(-c for c in coefficients)], noise)[run_in:]


def _date(rng, n):
    return int(rng.integers(n // 5, n - n // 5))


def _seasonal(rng, n, drift):
    """Twelve month effects with standard deviation 1.5, each walking by `drift` a year."""
    years = -(-n // 12)
    steps = rng.standard_normal((years, 12)) * drift
    steps[0] = 1.5 * rng.standard_normal(12)
    return np.cumsum(steps, axis=0).ravel()[:n]


def one_series(shape, rng, n):
    """One series of `n` months; its base has standard deviation 1 unless the shape says more."""
    match shape:
        case "iid":
            return rng.standard_normal(n)
        case "AR .5" | "AR .9" | "AR .98":
            return ar_process(rng, n, ar=float(shape[3:]), sd=1.0)
        case "Laplace AR .5":
            return ar_process(rng, n, ar=0.5, sd=1.0, law="laplace")
        case "GARCH AR .5":
            return _filtered([0.5], garch_noise(rng, n + 400, sd=0.75**0.5))
        case "AR(6) long memory":
            return _filtered(LONG_MEMORY, rng.standard_normal(n + 400))
        case "fixed season":
            return ar_process(rng, n, ar=0.5, sd=1.0) + _seasonal(rng, n, 0.0)
        case "drifting season":
            return ar_process(rng, n, ar=0.5, sd=1.0) + _seasonal(rng, n, 0.15)
        case "level shift":
            step = level_shift(n, at=_date(rng, n), size=2.0 * rng.choice((-1, 1)))
            return ar_process(rng, n, ar=0.5, sd=1.0) + step
        case "hump":
            hold = int(rng.integers(n // 8, n // 3))
            start = int(rng.integers(n // 10, n - hold - n // 10))
            step = level_shift(n, at=start, size=2.0) - level_shift(n, at=start + hold, size=2.0)
            return ar_process(rng, n, ar=0.5, sd=1.0) + step
        case "trend":
            return ar_process(rng, n, ar=0.5, sd=1.0) + np.linspace(0.0, 3.0, n)
        case "slow ramp":
            length = int(rng.integers(n // 5, n // 2))
            start = int(rng.integers(0, n - length))
            ramp = np.clip((np.arange(n) - start) / length, 0.0, 1.0)
            return ar_process(rng, n, ar=0.5, sd=1.0) + 3.0 * ramp
        case "slow hump":
            length = int(rng.integers(n // 6, n // 3))
            start = int(rng.integers(0, n - 2 * length))
            wave = hump(n, start=start, rise=length, hold=0, fall=length, size=3.0)
            return ar_process(rng, n, ar=0.5, sd=1.0) + wave
        case "variance shift":
            calm = np.where(np.arange(n) < _date(rng, n), 1.0, 3.0)
            return ar_process(rng, n, ar=0.5, sd=1.0) * (calm if rng.random() < 0.5 else 4.0 - calm)
        case "two-regime persistence":
            at = _date(rng, n)
            noise = rng.standard_normal(n + 400)
            loose = _filtered([0.3], noise)[:at]
            tight = np.empty(n - at)
            state = loose[-1]
            for place, shock in enumerate(noise[400 + at :]):
                state = 0.95 * state + shock
                tight[place] = state
            return np.concatenate((loose, tight))
    raise ValueError(f"shape must be one of the list, but got {shape!r}")


SHAPES = (
    "iid",
    "AR .5",
    "AR .9",
    "AR .98",
    "Laplace AR .5",
    "GARCH AR .5",
    "spike in driver",
    "AR(6) long memory",
    "fixed season",
    "drifting season",
    "level shift",
    "hump",
    "trend",
    "slow ramp",
    "slow hump",
    "variance shift",
    "two-regime persistence",
)


def unrelated(shape, rng, n):
    """Driver and response of one shape, drawn one after the other: nothing links them."""
    if shape == "spike in driver":
        driver = ar_process(rng, n, ar=0.5, sd=1.0)
        driver[int(rng.integers(n))] += 15.0
        return driver, ar_process(rng, n, ar=0.5, sd=1.0)
    return one_series(shape, rng, n), one_series(shape, rng, n)


def related(rng, n, *, share, lag=18, spread=13, driver_ar=0.5):
    """Driver and a response of which `share` of the variance is a mean of the driver's past."""
    ages = np.arange(-(spread - 1), spread)
    variance = ((spread - np.abs(ages)) * driver_ar ** np.abs(ages)).sum() / spread**2
    slope = 0.4
    noise = slope * np.sqrt(variance * (1.0 - share) / share)
    pair = planted_pair(
        rng, n, lag=lag, slope=slope, spread=spread, driver_ar=driver_ar, noise=noise, noise_ar=0.5
    )
    return pair.driver, pair.response
