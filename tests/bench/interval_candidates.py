"""Other published ways to put intervals around a path, which the one in use is compared with.

Each takes the past errors at one horizon that are known at the date, oldest first, and gives the
ends of the interval of each level as additions to the path.
"""

from bisect import insort
from math import ceil

import numpy as np

from analytics.intervals import half_width
from analytics.outlook_target import outlook_target
from analytics.rates import trailing_mean
from tests.references.plain_intervals import plain_error_scale


def newest_errors(errors, horizon, levels):
    """The one in use: Student's t on what the newest 60 % of the errors are worth."""
    scale, freedom = plain_error_scale(errors, horizon)  # the twin: only today is wanted
    halves = [float(half_width(scale, freedom, level)) for level in levels]
    return [(-half, half) for half in halves]


def empirical_quantiles(errors, horizon, levels):
    """Signed quantiles of all past errors, with the (n + 1) rule of conformal prediction."""
    ordered, n = np.sort(errors), errors.size
    places = [max(0, int(np.floor((n + 1) * (1.0 - level) / 2.0)) - 1) for level in levels]
    return [(ordered[place], ordered[n - 1 - place]) for place in places]


def adaptive_conformal(errors, horizon, levels):
    """Gibbs and Candes (2021): the level moves with hits and misses, h periods late.

    Scores are absolute errors, the calibration set all that are known.
    """
    halves = [_adapted(errors, horizon, level) for level in levels]
    return [(-half, half) for half in halves]


def _adapted(errors, horizon, level, rate=0.005, start=24):
    scores = np.abs(errors).tolist()
    ordered = sorted(scores[:start])
    missing, asked = 1.0 - level, {}
    for known in range(start, len(scores) + 1):
        if known > start:
            insort(ordered, scores[known - 1])
        made = known - 1  # the forecast whose outcome has just arrived
        if made in asked:
            missing += rate * ((1.0 - level) - (scores[made] > asked[made]))
        place = ceil((known + 1) * (1.0 - min(max(missing, 0.0), 1.0))) - 1
        asked[known + horizon - 1] = ordered[min(max(place, 0), known - 1)]
    return asked[len(scores) + horizon - 1]


def block_bootstrap(driver, response, *, window, shift, horizons, draws, rng, block=24):
    """Moving blocks of the monthly residuals (Kunsch 1989), the line fitted anew in each draw.

    Returns draws of the yearly rate less the path, shape (draws, len(horizons)).
    """
    yearly = outlook_target("yearly", window=window)
    n = response.size
    xs = trailing_mean(driver, window)[: n - window + 1 - shift]
    away = xs - xs.mean()

    def line(ys):
        slope = (ys - ys.mean(axis=-1, keepdims=True)) @ away / (away @ away)
        return ys.mean(axis=-1) - slope * xs.mean(), slope

    intercept, slope = line(trailing_mean(response, window)[shift:])
    fitted = intercept + slope * driver[: n - shift]
    residuals = response[shift:] - fitted
    residuals = residuals - residuals.mean()
    longest, pool = max(horizons), residuals.size
    blocks = -(-(pool + longest) // block)
    starts = rng.integers(0, pool - block + 1, (draws, blocks))
    noise = residuals[(starts[..., None] + np.arange(block)).reshape(draws, -1)]
    world = fitted + noise[:, :pool]
    means = np.lib.stride_tricks.sliding_window_view(world, window, axis=1).mean(axis=2)
    a, b = line(means)
    ahead = driver[n - shift : n - shift + longest]
    truth = intercept + slope * ahead + noise[:, pool : pool + longest]
    missed = np.cumsum(truth - (a[:, None] + b[:, None] * ahead), axis=1)
    missed = np.concatenate((np.zeros((draws, 1)), missed), axis=1)
    return np.stack([missed[:, h] - missed[:, max(0, h - yearly.span)] for h in horizons], axis=1)
