"""Prewhitened cross-correlation: plain twin, planted lags, size of its bounds, errors."""

import numpy as np
import pytest

from analytics.prewhitening import cross_correlation, prewhitened_correlation
from analytics.simulate import ar_process, planted_pair
from tests.references import plain_influence


def test_equals_the_plain_twin():
    rng = np.random.default_rng(1)
    driver, response = rng.standard_normal((2, 60)).cumsum(axis=1)
    shifts = range(-20, 31)
    plain = [plain_influence.cross_correlation(driver, response, shift) for shift in shifts]
    np.testing.assert_allclose(cross_correlation(driver, response, shifts=shifts), plain)


@pytest.mark.parametrize("lag", [-18, -1, 0, 7, 24])
@pytest.mark.parametrize("driver_ar", [0.0, 0.9])
def test_planted_lag_and_sign(lag, driver_ar):
    pair = planted_pair(
        np.random.default_rng(2), 300, lag=lag, slope=0.5, noise=0.4, driver_ar=driver_ar
    )
    found = prewhitened_correlation(pair.driver, pair.response, shifts=range(-30, 31))
    assert found.peak == lag
    assert found.p_peak < 1e-4
    quiet = np.abs(found.shifts - lag) > 2
    assert np.mean(np.abs(found.correlation[quiet]) > found.bound) < 0.15


def test_memory_of_the_driver_no_longer_smears_the_correlation():
    pair = planted_pair(np.random.default_rng(3), 600, lag=12, slope=0.5, noise=0.1, driver_ar=0.95)
    shifts = range(0, 25)
    raw = cross_correlation(pair.driver, pair.response, shifts=shifts)
    found = prewhitened_correlation(pair.driver, pair.response, shifts=shifts)
    assert (np.abs(raw) > 2 / np.sqrt(600)).all()
    assert np.sum(np.abs(found.correlation) > found.bound) <= 4


def test_average_over_neighbours_finds_the_middle_of_a_spread_effect():
    """Response spread over 13 months: single correlations peak anywhere among them."""
    misses = {1: [], 12: []}
    for seed in range(30):
        pair = planted_pair(
            np.random.default_rng(seed), 760, lag=18, slope=0.4, noise=0.35, noise_ar=0.5, spread=13
        )
        for window, found in misses.items():
            peak = prewhitened_correlation(
                pair.driver, pair.response, shifts=range(61), window=window
            ).peak
            found.append(abs(peak - 18))
    assert np.median(misses[12]) <= 1
    assert np.mean(misses[12]) < 0.5 * np.mean(misses[1])


@pytest.mark.parametrize(("response_ar", "window"), [(0.0, 1), (0.8, 1), (0.8, 12)])
def test_bounds_hold_without_a_relation(response_ar, window):
    """About 19 of 20 correlations within the bound; the peak's p is no smaller than it says."""
    outside, smallest = [], []
    for seed in range(150):
        rng = np.random.default_rng(seed)
        driver = ar_process(rng, 300, ar=0.7, sd=1.0)
        response = ar_process(rng, 300, ar=response_ar, sd=1.0)
        found = prewhitened_correlation(driver, response, shifts=range(-12, 13), window=window)
        outside.append(np.mean(np.abs(found.averaged) > found.averaged_bound))
        smallest.append(found.p_peak <= 0.05)
        if window == 1:
            np.testing.assert_array_equal(found.averaged, found.correlation)
    assert 0.02 < np.mean(outside) < 0.07
    assert np.mean(smallest) < 0.09  # 5 percent and two standard errors


def test_average_is_the_centred_mean_of_the_correlations():
    driver, response = np.random.default_rng(4).standard_normal((2, 120))
    found = prewhitened_correlation(driver, response, shifts=range(-5, 6), window=4, ar=[0.3])
    wide = prewhitened_correlation(driver, response, shifts=range(-7, 8), ar=[0.3])
    weights = [1 / 8, 1 / 4, 1 / 4, 1 / 4, 1 / 8]
    expected = [wide.correlation[i : i + 5] @ weights for i in range(11)]
    np.testing.assert_allclose(found.averaged, expected, atol=1e-14)
    assert found.n == 119
    assert found.bound == pytest.approx(2 / np.sqrt(119))


def test_given_model_is_undone():
    """A driver made from known surprises gives them back: the filter is the model's inverse."""
    rng = np.random.default_rng(5)
    surprises = rng.standard_normal(400)
    driver = np.zeros(400)
    for t in range(1, 400):
        driver[t] = 0.6 * driver[t - 1] + surprises[t] + 0.3 * surprises[t - 1]
    found = prewhitened_correlation(driver, driver, shifts=range(-3, 4), ar=[0.6], ma=[0.3])
    np.testing.assert_allclose(found.correlation[[0, 1, 2, 4, 5, 6]], 0.0, atol=0.12)
    assert found.correlation[3] == pytest.approx(1.0)


def test_errors():
    driver, response = np.random.default_rng(6).standard_normal((2, 60))
    with pytest.raises(ValueError, match="ma must be invertible"):
        prewhitened_correlation(driver, response, shifts=[0, 1], ma=[1.2])
    with pytest.raises(ValueError, match="response must vary"):
        cross_correlation(driver, np.full(60, 0.1), shifts=[0])
    with pytest.raises(ValueError, match="same length"):
        prewhitened_correlation(driver, response[1:], shifts=[0])
    with pytest.raises(ValueError, match="shifts must be from"):
        prewhitened_correlation(driver, response, shifts=[58], window=12)
    with pytest.raises(ValueError, match="window must be 1 or more"):
        prewhitened_correlation(driver, response, shifts=[0], window=0)
