"""Slow twins of the reading of a print: loops and definitions, nothing shared."""

import math


def plain_runs(values, level, shortest=1, gap=0):
    """Runs above a level as (first place, last place), by walking through the values."""
    runs, start, last = [], None, None
    for place, value in enumerate(values):
        if math.isnan(value) or value <= level:
            continue
        if start is None:
            start = place
        elif place - last - 1 > gap:
            runs.append((start, last))
            start = place
        last = place
    if start is not None:
        runs.append((start, last))
    return [(a, b) for a, b in runs if b - a + 1 >= shortest]


def plain_edf(probabilities):
    """A2, W2, U2, sqrt(n) D and sqrt(n) V of one sample, term by term."""
    u = sorted(probabilities)
    n = len(u)
    a2 = -n - sum((2 * i + 1) / n * (math.log(u[i]) + math.log(1 - u[n - 1 - i])) for i in range(n))
    w2 = 1 / (12 * n) + sum((u[i] - (2 * i + 1) / (2 * n)) ** 2 for i in range(n))
    u2 = w2 - n * (sum(u) / n - 0.5) ** 2
    up = max((i + 1) / n - u[i] for i in range(n))
    down = max(u[i] - i / n for i in range(n))
    root = math.sqrt(n)
    return a2, w2, u2, root * max(up, down), root * (up + down)


def plain_path(values, rate, periods, year):
    """Yearly percent rates of coming periods, one multiplication a period."""
    levels = list(values)
    for _ in range(periods):
        levels.append(levels[-1] * (1 + rate / 100))
    ends = range(len(values), len(values) + periods)
    return [100 * (levels[t] / levels[t - year] - 1) for t in ends]
