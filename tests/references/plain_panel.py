"""Adjusted p-values and lines without one point, written as they are defined."""

import numpy as np


def plain_benjamini_hochberg(p):
    """Smallest q at which each would be rejected by the step-up rule p_(k) <= k q / m."""
    m, ordered = len(p), sorted(p)
    return [
        min(min(1.0, ordered[k - 1] * m / k) for k in range(ordered.index(each) + 1, m + 1))
        for each in p
    ]


def plain_holm(p):
    """Smallest a at which each would be rejected by the step-down rule p_(k) <= a / (m - k + 1)."""
    m, ordered = len(p), sorted(p)
    last = {value: place for place, value in enumerate(ordered)}
    return [
        max(min(1.0, ordered[k] * (m - k)) for k in range(ordered.index(each) + 1))
        if last[each] == ordered.index(each)
        else max(min(1.0, ordered[k] * (m - k)) for k in range(last[each] + 1))
        for each in p
    ]


def plain_lines_without(x, y):
    """Slope and intercept of each least-squares line that leaves one point out: n refits."""
    lines = []
    for gone in range(len(x)):
        kept = np.arange(len(x)) != gone
        lines.append(np.polyfit(np.asarray(x)[kept], np.asarray(y)[kept], 1))
    return np.array(lines)
