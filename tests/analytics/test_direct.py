"""Direct regressions: planted slopes, what the driver adds, and short samples."""

import numpy as np
import pytest

from analytics.direct import direct_forecasts
from analytics.outlook_target import outlook_target
from analytics.simulate import planted_pair

SINGLE = outlook_target("single", window=1)
YEARLY = outlook_target("yearly", window=12)


def pair(noise=0.3, n=600, **more):
    return planted_pair(np.random.default_rng(1), n, lag=9, slope=0.4, noise=noise, **more)


def forecasts(driver, response, **more):
    rules = {"window": 1, "shift": 9, "own_lags": 2, "horizon": 12, "target": SINGLE} | more
    return direct_forecasts(driver, response, **rules)


def test_the_planted_slope_is_found_up_to_the_shift():
    planted = pair()
    found = forecasts(planted.driver, planted.response)
    np.testing.assert_allclose(found.driver_slope[:9], 0.4, atol=0.05)
    # Ten ahead the newest driver stands nine before the wrong month: half is left, by its AR .5.
    assert 0.1 < found.driver_slope[9] < 0.3


def test_without_noise_the_months_ahead_are_exact():
    planted = pair(noise=0.0)
    found = forecasts(planted.driver, planted.response, own_lags=0)
    np.testing.assert_allclose(found.with_driver[:9], 0.1 + 0.4 * planted.driver[-9:], atol=1e-9)
    np.testing.assert_allclose(found.driver_gain[:9], 1.0, atol=1e-9)


def test_an_unrelated_driver_adds_next_to_nothing():
    planted = pair()
    found = forecasts(np.random.default_rng(5).standard_normal(600), planted.response)
    assert found.driver_gain.max() < 0.02
    np.testing.assert_allclose(found.with_driver, found.without_driver, atol=0.3)


def test_without_driver_does_not_depend_on_the_driver():
    planted = pair()
    one = forecasts(planted.driver, planted.response)
    other = forecasts(planted.driver[::-1].copy(), planted.response)
    assert np.array_equal(one.without_driver[:9], other.without_driver[:9])


def test_a_constant_series_on_either_side():
    planted = pair()
    flat = forecasts(np.full(600, 0.3), planted.response)
    np.testing.assert_allclose(flat.with_driver, flat.without_driver, atol=1e-12)
    still = forecasts(planted.driver, np.full(600, 0.2))
    np.testing.assert_allclose(still.with_driver, 0.2, atol=1e-12)
    np.testing.assert_allclose(still.driver_gain, 0.0, atol=1e-12)


def test_the_yearly_rate_keeps_what_is_known():
    planted = pair(noise=0.0)
    found = forecasts(planted.driver, planted.response, own_lags=0, target=YEARLY, window=1)
    first = planted.response[-11:].sum() + 0.1 + 0.4 * planted.driver[-9]
    assert found.with_driver[0] == pytest.approx(first)


def test_too_few_rows_are_nan_not_a_guess():
    planted = pair(n=30)
    found = forecasts(planted.driver, planted.response, horizon=24)
    assert np.isfinite(found.with_driver[0])
    assert np.isnan(found.with_driver[-1])
    assert np.isnan(found.driver_slope[-1])
    assert found.rows[-1] < 16


@pytest.mark.parametrize("wrong", [{"window": 0}, {"horizon": 0}, {"own_lags": -1}])
def test_small_arguments_are_refused(wrong):
    planted = pair(n=60)
    with pytest.raises(ValueError, match="window and horizon must be 1 or more and own_lags 0"):
        forecasts(planted.driver, planted.response, **wrong)
