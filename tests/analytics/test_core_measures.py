"""Weighted median and trimmed mean against plain twins; tracking against what was planted."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analytics.core_measures import (
    centred_mean,
    compounded,
    core_tracking,
    trimmed_mean,
    weighted_median,
)
from tests.references.plain_breadth import plain_median, plain_trimmed

whole = st.integers(-50, 50).map(lambda number: number / 10)
heavy = st.integers(0, 40).map(float)
samples = st.lists(st.tuples(whole, heavy), min_size=1, max_size=25).filter(
    lambda pairs: sum(w for _, w in pairs) > 0
)


@given(samples)
def test_the_median_is_that_of_the_plain_twin(pairs):
    changes, weights = zip(*pairs, strict=True)
    assert weighted_median(changes, weights) == pytest.approx(plain_median(changes, weights))


@given(samples, st.floats(0, 49), st.floats(0, 49))
def test_the_trimmed_mean_is_that_of_the_plain_twin(pairs, lower, upper):
    changes, weights = zip(*pairs, strict=True)
    found = trimmed_mean(changes, weights, lower=lower, upper=upper)
    assert found == pytest.approx(plain_trimmed(changes, weights, lower, upper), abs=1e-9)


@pytest.mark.parametrize("count", [5, 6])
def test_with_equal_weights_the_median_is_the_ordinary_one(count):
    changes = np.random.default_rng(31).normal(size=(20, count))
    np.testing.assert_allclose(
        weighted_median(changes, np.ones(count)), np.median(changes, axis=1), rtol=1e-14
    )


def test_nothing_cut_is_the_weighted_mean_and_nearly_all_cut_the_median():
    rng = np.random.default_rng(32)
    changes, weights = rng.normal(size=(30, 7)), rng.uniform(1, 2, (30, 7))
    mean = (changes * weights).sum(axis=1) / weights.sum(axis=1)
    np.testing.assert_allclose(trimmed_mean(changes, weights, lower=0), mean, rtol=1e-12)
    near = trimmed_mean(changes, weights, lower=49.9999)
    np.testing.assert_allclose(near, weighted_median(changes, weights), atol=1e-6)


def test_a_one_sided_cut_cuts_one_side():
    assert trimmed_mean([1.0, 2.0, 9.0], [1, 1, 1], lower=0, upper=100 / 3) == pytest.approx(1.5)
    assert trimmed_mean([1.0, 2.0, 9.0], [1, 1, 1], lower=100 / 3, upper=0) == pytest.approx(5.5)


@given(samples, st.floats(-3, 3), st.floats(0.1, 10))
def test_measures_move_with_the_changes_and_not_with_the_scale_of_weights(pairs, by, scale):
    changes, weights = (np.array(side) for side in zip(*pairs, strict=True))
    for measure in (weighted_median, lambda c, w: trimmed_mean(c, w, lower=15)):
        before = measure(changes, weights)
        assert measure(changes + by, weights) == pytest.approx(before + by, abs=1e-9)
    assert trimmed_mean(changes, scale * weights, lower=15) == pytest.approx(
        trimmed_mean(changes, weights, lower=15), abs=1e-9
    )


def test_components_that_are_not_there_do_not_count():
    changes, weights = [1.0, np.nan, 3.0, 50.0], [1.0, 9.0, 1.0, np.nan]
    assert weighted_median(changes, weights) == 2.0
    assert trimmed_mean(changes, weights, lower=10) == pytest.approx(2.0)
    assert np.isnan(weighted_median([np.nan], [1.0]))
    assert np.isnan(trimmed_mean([np.nan], [1.0], lower=0))


@pytest.mark.parametrize(
    ("cuts", "said"),
    [
        ({"lower": -1}, "sum to below 100, but got -1 and -1"),
        ({"lower": 50}, "but got 50 and 50"),
        ({"lower": 60, "upper": 40}, "but got 60 and 40"),
    ],
)
def test_cuts_refused(cuts, said):
    with pytest.raises(ValueError, match=said):
        trimmed_mean([1.0], [1.0], **cuts)


def test_negative_weights_are_refused():
    with pytest.raises(ValueError, match="weights must not be negative, but got -1"):
        weighted_median([1.0, 2.0], [1.0, -1.0])


# Through time --------------------------------------------------------------------------------


def test_compounding_twelve_months_of_one_percent():
    rates = compounded(np.ones(14), 12)
    assert np.isnan(rates[:11]).all()
    np.testing.assert_allclose(rates[11:], 100 * (1.01**12 - 1), rtol=1e-13)
    assert np.isnan(compounded(np.ones(5), 12)).all()


def test_the_centred_mean_looks_both_ways():
    means = centred_mean([1.0, 2.0, 6.0, 3.0], 3)
    np.testing.assert_allclose(means, [np.nan, 3.0, 11 / 3, np.nan])
    assert np.isnan(centred_mean([1.0], 3)).all()
    with pytest.raises(ValueError, match="width must be odd"):
        centred_mean([1.0], 2)


def test_a_measure_that_is_the_trend_plus_a_half_is_off_by_a_half():
    rng = np.random.default_rng(33)
    total = 100 * np.cumprod(1 + rng.normal(0.003, 0.004, 200))
    monthly = np.concatenate([[np.nan], 100 * (total[1:] / total[:-1] - 1)])
    trend = 12 * centred_mean(monthly, 25)
    ahead = np.full(200, np.nan)
    ahead[:-12] = 100 * (total[12:] / total[:-12] - 1)
    found = core_tracking(
        {"seer": np.where(np.isnan(ahead), 0.0, ahead), "trend and a half": trend + 0.5},
        total,
        per_year=12,
        width=25,
    )
    assert found.names == ("seer", "trend and a half")
    assert found.trend_n == 175  # 1 to 199 have a change; 12 are lost at either end
    assert found.trend_rmse[1] == pytest.approx(0.5)
    assert found.trend_bias[1] == pytest.approx(0.5)
    assert found.next_rmse[0] == pytest.approx(0, abs=1e-12)
    assert found.next_n == 175  # the trend ends 12 months before the end, as the future does
    np.testing.assert_array_equal(found.trend, trend)


def test_every_measure_is_judged_on_the_same_periods():
    total = 100 * 1.002 ** np.arange(80)
    late = np.full(80, np.nan)
    late[40:] = 1.0
    found = core_tracking({"all": np.ones(80), "late": late}, total, per_year=12, width=25)
    assert found.trend_n == 80 - 40 - 12
    assert found.trend_rmse[0] == found.trend_rmse[1]


def test_too_short_a_record_tracks_nothing():
    found = core_tracking({"all": np.ones(11)}, np.ones(11), per_year=12, width=25)
    assert (found.trend_n, found.next_n) == (0, 0)
    assert np.isnan(found.trend_rmse).all()
    with pytest.raises(ValueError, match="at least one"):
        core_tracking({}, np.ones(11), per_year=12, width=25)
