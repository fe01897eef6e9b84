"""Past coverage against a loop that draws each interval by itself, and against nominal levels."""

import numpy as np
import pytest

from analytics.intervals import error_fan
from analytics.past_coverage import past_coverage


def plain(errors, level, horizon):
    """Draw each date's interval from the errors that it knew, one date at a time."""
    inside = []
    for date in range(errors.shape[0]):
        error = errors[date, horizon - 1]
        known = errors[: max(0, date - horizon + 1), :horizon]
        fan = error_fan(np.zeros(horizon), known)
        low, high = fan.band(level)
        if not (np.isnan(error) or np.isnan(low[-1])):
            inside.append(low[-1] <= error <= high[-1])
    return inside[::-horizon][::-1]


@pytest.mark.parametrize("horizon", [1, 3, 7])
def test_it_is_what_a_plain_loop_over_dates_finds(horizon):
    errors = np.random.default_rng(5).standard_normal((90, 7)).cumsum(axis=1)
    for date in range(7):  # the newest outcomes are still to come
        errors[errors.shape[0] - 1 - date, date + 1 :] = np.nan
    found = past_coverage(errors, levels=(0.5, 0.9))
    for row, level in zip(found, (0.5, 0.9), strict=True):
        wanted = plain(errors, level, horizon)
        assert (row[horizon - 1].n, row[horizon - 1].hits) == (len(wanted), sum(wanted))


def test_independent_normal_errors_are_covered_at_the_nominal_rate():
    # 3,000 dates: Monte Carlo error at most 0.9 points.
    errors = np.random.default_rng(8).standard_normal((3000, 1))
    for row, level in zip(past_coverage(errors), (0.5, 0.8, 0.95), strict=True):
        assert abs(row[0].share - level) < 0.03


def test_errors_must_be_a_table():
    with pytest.raises(ValueError, match="table of dates by horizons"):
        past_coverage([1.0, 2.0])
