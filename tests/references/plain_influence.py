"""Plain, slow twins of the influence, stability and second-opinion modules: loops over months."""

import math
from statistics import fmean, median

from scipy.stats import t as student


def pairs_of(driver, response, window, shift):
    """The pairs of the cell as (month, driver's mean, response's mean)."""
    months = len(driver)
    found = []
    for t in range(months):
        later = t + shift
        if t - window + 1 >= 0 and later - window + 1 >= 0 and later < months:
            found.append(
                (
                    t,
                    fmean(driver[t - window + 1 : t + 1]),
                    fmean(response[later - window + 1 : later + 1]),
                )
            )
    return found


def line(pairs):
    """Slope, intercept and correlation."""
    mean_x, mean_y = fmean(x for _, x, _ in pairs), fmean(y for _, _, y in pairs)
    sxx = math.fsum((x - mean_x) ** 2 for _, x, _ in pairs)
    syy = math.fsum((y - mean_y) ** 2 for _, _, y in pairs)
    sxy = math.fsum((x - mean_x) * (y - mean_y) for _, x, y in pairs)
    return sxy / sxx, mean_y - sxy / sxx * mean_x, sxy / math.sqrt(sxx * syy)


def runs_of(values, shortest):
    """(start, stop) of each run: a machine that turns over at +-0.5, then the short ones go."""
    middle = median(values)
    spread = 1.4826 * median(abs(value - middle) for value in values)
    z = [(value - middle) / spread for value in values]
    state = next((1 if value > 0 else -1 for value in z if abs(value) > 0.5), 0)
    states = []
    for value in z:
        if value > 0.5:
            state = 1
        elif value < -0.5:
            state = -1
        states.append(state)
    while True:
        runs = []
        for place, state in enumerate(states):
            if place and state == states[place - 1]:
                runs[-1][1] = place + 1
            else:
                runs.append([place, place + 1])
        if len(runs) == 1 or min(stop - start for start, stop in runs) >= shortest:
            return [tuple(run) for run in runs]
        start, stop = min(runs, key=lambda run: run[1] - run[0])
        for place in range(start, stop):
            states[place] = -states[place]


def effective_months(driver, response, window, shift, kept_months):
    """Sum over every two kept pairs of the product of the autocorrelations at their distance."""
    kept_months = set(kept_months)
    pairs = [t for t, _, _ in pairs_of(driver, response, window, shift)]
    dropped = set(pairs) - kept_months
    smoothed = range(window - 1, len(driver))
    longest = min(len(smoothed) // 3, len(pairs) - 1)
    rhos = []
    for values, late in ((driver, 0), (response, shift)):
        means = {
            t: fmean(values[t - window + 1 : t + 1]) for t in smoothed if t - late not in dropped
        }
        centre = fmean(means.values())
        scale = math.fsum((value - centre) ** 2 for value in means.values())
        rhos.append(
            [
                math.fsum(
                    (means[t] - centre) * (means[t + k] - centre) for t in means if t + k in means
                )
                / scale
                for k in range(longest + 1)
            ]
        )
    total = 0.0
    for t in kept_months:
        for u in kept_months:
            if abs(t - u) <= longest:
                total += rhos[0][abs(t - u)] * rhos[1][abs(t - u)]
    m = len(kept_months)
    return max(3.1, m / max(1.0, total / m))


def relation_without(driver, response, window, shift, spans):
    """Slope, intercept, correlation, p and effective months without some spans of pairs."""
    pairs = pairs_of(driver, response, window, shift)
    kept = [
        pair
        for place, pair in enumerate(pairs)
        if not any(start <= place < stop for start, stop in spans)
    ]
    slope, intercept, r = line(kept)
    months = effective_months(driver, response, window, shift, [t for t, _, _ in kept])
    t = abs(r) * math.sqrt((months - 2) / (1 - r * r))
    return slope, intercept, r, 2 * float(student.sf(t, months - 2)), months


def long_run_products(scores, truncation):
    """Newey and West's double sum, scores as rows of p columns."""
    n, p = len(scores), len(scores[0])
    total = [[0.0] * p for _ in range(p)]
    for t in range(n):
        for u in range(max(0, t - truncation), min(n, t + truncation + 1)):
            weight = 1 - abs(t - u) / (truncation + 1)
            for i in range(p):
                for j in range(p):
                    total[i][j] += weight * scores[t][i] * scores[u][j]
    return total


def rolling_lines(driver, response, window, shift, span):
    """Growing and rolling (slope, correlation), one sample after another."""
    pairs = pairs_of(driver, response, window, shift)
    ends = range(span, len(pairs) + 1)
    growing = [line(pairs[:end]) for end in ends]
    rolling = [line(pairs[end - span : end]) for end in ends]
    return [(s, r) for s, _, r in growing], [(s, r) for s, _, r in rolling]


def cross_correlation(driver, response, shift):
    """Whole-sample moments, products where both months exist."""
    mean_x, mean_y = fmean(driver), fmean(response)
    scale = math.sqrt(
        math.fsum((x - mean_x) ** 2 for x in driver)
        * math.fsum((y - mean_y) ** 2 for y in response)
    )
    return (
        math.fsum(
            (driver[t] - mean_x) * (response[t + shift] - mean_y)
            for t in range(len(driver))
            if 0 <= t + shift < len(response)
        )
        / scale
    )
