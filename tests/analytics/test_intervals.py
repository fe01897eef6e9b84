"""Intervals from past errors: closed forms, what is used, and coverage where it is known."""

import numpy as np
import pytest
from scipy.stats import t as student

from analytics.intervals import error_fan, error_scale
from tests.references.plain_intervals import plain_error_scale


def test_independent_errors_are_worth_about_as_many_as_they_are():
    errors = np.random.default_rng(1).normal(0.0, 2.0, 1000)
    scale, freedom, used = error_scale(errors, 1)
    assert used[-1] == 600
    assert scale[-1] == pytest.approx(np.sqrt(np.mean(errors[400:] ** 2)))
    assert 500 < freedom[-1] <= 600


def test_overlapping_errors_are_worth_fewer():
    """Sums over h months: squares worth n / (1 + 2 sum (1 - k/h)^2), about 1.5 n / h."""
    draws = np.random.default_rng(2).standard_normal(4011)
    errors = np.convolve(draws, np.ones(12), "valid")
    freedom = error_scale(errors, 12)[1][-1]
    weights = 1.0 - np.arange(1, 12) / 12
    assert freedom == pytest.approx(2400 / (1 + 2 * np.sum(weights**2)), rel=0.12)


@pytest.mark.parametrize(("n", "horizon"), [(30, 1), (90, 12), (241, 24), (700, 6)])
def test_scale_and_freedom_equal_their_plain_twin(n, horizon):
    errors = np.convolve(np.random.default_rng(n).standard_normal(n + 5), np.ones(6), "valid")
    scale, freedom, _ = error_scale(errors, horizon)
    for known in (n // 2 + 10, n):
        plain = plain_error_scale(errors[:known], horizon)
        assert (scale[known], freedom[known]) == pytest.approx(plain, rel=1e-10)


def test_every_moment_uses_its_own_past_only():
    errors = np.random.default_rng(3).standard_normal(90)
    scale, freedom, used = error_scale(errors, 4)
    for known in (20, 47, 90):
        parts = error_scale(errors[:known], 4)
        assert scale[known] == pytest.approx(parts[0][-1], rel=1e-12)
        assert freedom[known] == pytest.approx(parts[1][-1], rel=1e-12)
        assert used[known] == parts[2][-1]
    assert np.isnan(scale[18])
    assert np.isfinite(scale[19])  # twelve of nineteen


def test_the_band_is_students_t_around_the_centre():
    errors = np.random.default_rng(4).standard_normal((60, 3))
    fan = error_fan([1.0, 2.0, 3.0], errors)
    low, high = fan.band(0.8)
    np.testing.assert_allclose(high - fan.centre, fan.scale * student.ppf(0.9, fan.freedom))
    np.testing.assert_allclose(fan.centre - low, high - fan.centre)
    np.testing.assert_allclose(fan.rank(low), 0.1)
    np.testing.assert_allclose(fan.rank([1.0, np.nan, 3.0]), [0.5, np.nan, 0.5])


def test_bands_widen_with_the_level():
    fan = error_fan([0.0], np.random.default_rng(5).standard_normal((40, 1)))
    widths = [np.diff(fan.band(level), axis=0)[0, 0] for level in (0.5, 0.8, 0.95)]
    assert widths == sorted(widths)
    with pytest.raises(ValueError, match="level must be above 0 and below 1, but got 1"):
        fan.band(1.0)


def test_too_few_errors_give_no_interval():
    fan = error_fan([0.0, 0.0], np.ones((13, 2)))
    assert np.isnan(fan.scale).all()
    assert np.isnan(fan.band(0.8)).all()
    assert (fan.judged == 0).all()
    nothing = error_fan([0.0], np.full((30, 1), np.nan))
    assert nothing.errors[0] == 0


def test_errors_without_spread_give_no_interval():
    assert np.isnan(error_fan([0.0], np.zeros((50, 1))).scale[0])


def test_past_coverage_counts_what_was_known_at_each_date():
    errors = np.random.default_rng(6).standard_normal((400, 2))
    fan = error_fan([0.0, 0.0], errors)
    inside = []
    for date in range(400):
        known = max(0, date - 1)  # two ahead: the error made two dates ago is the newest known
        scale, freedom, _ = error_scale(errors[:known, 1], 2)
        if np.isfinite(scale[-1]):
            inside.append(abs(errors[date, 1]) <= scale[-1] * student.ppf(0.9, freedom[-1]))
    assert fan.judged[1] == len(inside)
    assert fan.measured[1, 1] == pytest.approx(np.mean(inside))
    np.testing.assert_allclose(fan.measured[:, 0], [0.5, 0.8, 0.95], atol=0.07)


def test_fewer_columns_than_horizons_are_refused():
    with pytest.raises(ValueError, match="a column for each of 3 horizons, but got"):
        error_fan([0.0, 0.0, 0.0], np.ones((20, 2)))
