"""Combined forecasts: closed forms, and that weights use only errors already known."""

import numpy as np
import pytest

from analytics.backtest import backtest
from analytics.backtest_scores import backtest_scores
from analytics.combination import combination_weights, combined_backtest, combined_path
from analytics.forecasts import PAST_MEAN, RELATION
from analytics.intervals import error_fan
from analytics.outlook_target import outlook_target
from analytics.simulate import planted_pair

YEARLY = outlook_target("yearly", window=12)


@pytest.fixture(scope="module")
def tests():
    """Two drivers of one response: the planted one, and noise."""
    rng = np.random.default_rng(1)
    planted = planted_pair(rng, 216, lag=12, slope=0.6, noise=0.4)
    rules = {"window": 6, "shift": 12, "target": YEARLY, "horizon": 12}
    return {
        "money": backtest(planted.driver, planted.response, **rules),
        "noise": backtest(rng.standard_normal(216), planted.response, **rules),
    }


def test_equal_weights_are_the_mean(tests):
    found = combined_backtest(tests, RELATION)
    row = found.row(RELATION)
    np.testing.assert_allclose(
        found.forecasts[row], (tests["money"].forecasts[row] + tests["noise"].forecasts[row]) / 2
    )
    fan = error_fan(found.forecasts[row, -1], found.errors(RELATION))
    np.testing.assert_allclose(found.scale[row, -1], fan.scale)
    other = found.row(PAST_MEAN)
    np.testing.assert_allclose(found.scale[other, -1], tests["money"].scale[other, -1])
    assert np.array_equal(found.forecasts[other], tests["money"].forecasts[other])


def test_past_errors_lean_on_the_better_driver(tests):
    equal = backtest_scores(combined_backtest(tests, RELATION), RELATION)
    leaning = combined_backtest(tests, RELATION, weighting="past errors")
    scores = backtest_scores(leaning, RELATION)
    alone = backtest_scores(tests["money"], RELATION)
    assert scores.rmse[11] < equal.rmse[11]
    assert alone.rmse[11] <= scores.rmse[11]
    row, date, h = leaning.row(RELATION), 60, 5
    scales = [each.scale[row, date, h - 1] for each in tests.values()]
    share = np.array(scales) ** -2.0 / np.sum(np.array(scales) ** -2.0)
    parts = [each.forecasts[row, date, h - 1] for each in tests.values()]
    assert leaning.forecasts[row, date, h - 1] == pytest.approx(share @ parts)


def test_only_common_dates_are_kept(tests):
    planted = planted_pair(np.random.default_rng(3), 216, lag=12, slope=0.6, noise=0.4)
    late = backtest(
        planted.driver,
        planted.response,
        window=6,
        shift=12,
        target=YEARLY,
        horizon=12,
        first=150,
    )
    found = combined_backtest({"a": tests["money"], "b": late}, RELATION)
    assert np.array_equal(found.origins, late.origins)
    assert found.windows.size == found.outcomes.shape[0] == late.origins.size


def test_weights_are_equal_where_one_is_unknown():
    weights = combination_weights([[1.0, np.nan], [2.0, 1.0]])
    np.testing.assert_allclose(weights, [[0.8, 0.5], [0.2, 0.5]])


def test_paths_are_combined_as_far_as_the_shortest():
    np.testing.assert_allclose(combined_path([[1.0, 2.0, 9.0], [3.0, 4.0]]), [2.0, 3.0])
    np.testing.assert_allclose(combined_path([[1.0, 2.0], [3.0, 4.0]], [3.0, 1.0]), [1.5, 2.5])
    each = combined_path([[1.0, 2.0], [3.0, 4.0]], [[1.0, 0.0], [0.0, 1.0]])
    np.testing.assert_allclose(each, [1.0, 4.0])


def test_what_cannot_be_combined_says_why(tests):
    with pytest.raises(ValueError, match="must have a driver, but got none"):
        combined_backtest({}, RELATION)
    with pytest.raises(ValueError, match="weighting must be equal or past errors"):
        combined_backtest(tests, RELATION, weighting="best")
    with pytest.raises(ValueError, match="must have a path, but got none"):
        combined_path([])
    with pytest.raises(ValueError, match="weights must be 2, one a path, but got 1"):
        combined_path([[1.0], [2.0]], [1.0])
