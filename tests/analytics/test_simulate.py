"""Judges of `analytics.simulate`: closed forms, library twins and planted truths.

Bounds on simulated moments are five standard errors of the moment in the size of sample drawn.
"""

import numpy as np
import pandas as pd
import pytest
import scipy.signal
import scipy.stats
from statsmodels.regression.linear_model import OLS
from statsmodels.tsa.arima_process import arma_acovf

from analytics.rates import growth_rate
from analytics.series import Series
from analytics.simulate import (
    ar_process,
    garch_noise,
    hump,
    lagged_effect,
    level_shift,
    levels_from_growth,
    planted_pair,
    white_noise,
)


def rng(seed: int = 7) -> np.random.Generator:
    return np.random.default_rng(seed)


@pytest.mark.parametrize(
    ("law", "outside"),
    [
        ("normal", scipy.stats.norm(scale=2.0)),
        ("laplace", scipy.stats.laplace(scale=np.sqrt(2.0))),
    ],
)
def test_white_noise_follows_its_law(law, outside):
    # Outside: scipy.stats distributions of standard deviation 2.
    assert outside.std() == pytest.approx(2.0)
    draws = white_noise(rng(), 20_000, sd=2.0, law=law)
    assert scipy.stats.kstest(draws, outside.cdf).pvalue > 0.01
    assert draws.std() == pytest.approx(2.0, abs=5 * 2.0 * np.sqrt(5 / 4 / 20_000))


def test_the_two_laws_differ():
    draws = white_noise(rng(), 20_000, sd=2.0, law="laplace")
    assert scipy.stats.kstest(draws, scipy.stats.norm(scale=2.0).cdf).pvalue < 1e-9
    assert scipy.stats.kurtosis(draws) == pytest.approx(3.0, abs=0.8)


@pytest.mark.parametrize("ar", [-0.6, 0.0, 0.5, 0.9])
def test_ar_process_autocovariance_is_that_of_statsmodels(ar):
    # Outside: statsmodels arma_acovf for innovations of variance sd^2 (1 - ar^2).
    sd, n = 1.5, 200_000
    theory = arma_acovf([1.0, -ar], [1.0], nobs=4, sigma2=sd**2 * (1.0 - ar**2))
    assert theory == pytest.approx(sd**2 * ar ** np.arange(4), abs=1e-12)
    values = ar_process(rng(), n, ar=ar, sd=sd)
    measured = [values[k:] @ values[: n - k] / n for k in range(4)]
    effective = n * (1.0 - ar**2) / (1.0 + ar**2)
    assert measured == pytest.approx(theory, abs=5 * sd**2 * np.sqrt(2.0 / effective))


def test_ar_process_is_the_recursion():
    # Outside: scipy.signal.lfilter runs the same recursion on the same shocks.
    values = ar_process(rng(3), 50, ar=0.8, sd=2.0, law="laplace")
    start_up = int(np.ceil(np.log(1e-9) / np.log(0.8)))
    shocks = white_noise(rng(3), start_up + 50, sd=2.0 * np.sqrt(1.0 - 0.8**2), law="laplace")
    assert values == pytest.approx(scipy.signal.lfilter([1.0], [1.0, -0.8], shocks)[start_up:])


def test_ar_process_begins_in_its_stationary_state():
    generator = rng()
    first = np.array([ar_process(generator, 1, ar=0.9, sd=1.0)[0] for _ in range(4_000)])
    assert first.std() == pytest.approx(1.0, abs=5 / np.sqrt(2 * 4_000))


def test_garch_noise_has_the_moments_of_bollerslev_1986():
    # Bollerslev (1986), section 3: variance a0/(1-a-b), kurtosis
    # 3 (1 - (a+b)^2) / (1 - (a+b)^2 - 2 a^2); formula from memory.
    a, b, sd, n = 0.1, 0.6, 1.5, 400_000
    draws = garch_noise(rng(), n, sd=sd, arch=a, garch=b)
    assert draws.std() == pytest.approx(sd, rel=0.01)
    kurtosis = 3 * (1 - (a + b) ** 2) / (1 - (a + b) ** 2 - 2 * a**2)
    assert scipy.stats.kurtosis(draws, fisher=False) == pytest.approx(kurtosis, abs=0.08)
    square = draws**2 - np.mean(draws**2)
    echo = (square[1:] @ square[:-1]) / (square @ square)
    assert echo == pytest.approx(a * (1 - a * b - b**2) / (1 - 2 * a * b - b**2), abs=0.02)
    assert np.corrcoef(draws[1:], draws[:-1])[0, 1] == pytest.approx(0.0, abs=0.01)


def test_garch_noise_without_its_weights_is_white_noise():
    plain = white_noise(rng(5), 550, sd=1.0)[500:] * 2.0
    assert garch_noise(rng(5), 50, sd=2.0, arch=0.0, garch=0.0) == pytest.approx(plain, abs=1e-12)


def test_hump_has_the_stated_area_top_and_ends():
    episode = hump(60, start=10, rise=8, hold=5, fall=12, size=3.0)
    assert episode.sum() == pytest.approx(3.0 * ((8 + 12) / 2 + 5), abs=1e-12)
    assert episode[:11] == pytest.approx(np.zeros(11), abs=1e-15)
    assert episode[14] == pytest.approx(1.5)  # halfway up
    assert episode[18:24] == pytest.approx(np.full(6, 3.0))
    assert episode[35:] == pytest.approx(np.zeros(25), abs=1e-15)


def test_hump_may_begin_before_the_sample():
    whole = hump(40, start=2, rise=8, hold=5, fall=12, size=3.0)
    assert hump(30, start=-8, rise=8, hold=5, fall=12, size=3.0) == pytest.approx(whole[10:])


def test_level_shift_steps_at_its_place():
    assert level_shift(5, at=3, size=-2.0).tolist() == [0.0, 0.0, 0.0, -2.0, -2.0]


@pytest.mark.parametrize("lag", [-9, -3, 0, 2, 7, 40])
@pytest.mark.parametrize("spread", [1, 3, 5])
def test_lagged_effect_equals_a_plain_loop(lag, spread):
    driver = rng().normal(size=25)
    half = spread // 2
    plain = np.full(25, np.nan)
    for t in range(25):
        months = range(t - lag - half, t - lag + half + 1)
        if all(0 <= month < 25 for month in months):
            plain[t] = sum(driver[month] for month in months) / spread
    assert lagged_effect(driver, lag=lag, spread=spread) == pytest.approx(plain, nan_ok=True)


@pytest.mark.parametrize("lag", [-24, 0, 18])
def test_planted_pair_without_noise_is_exact(lag):
    pair = planted_pair(rng(), 120, lag=lag, slope=0.7, baseline=0.2, noise=0.0, spread=5)
    expected = 0.2 + 0.7 * lagged_effect(pair.driver, lag=lag, spread=5)
    known = ~np.isnan(expected)
    assert known.sum() == 120 - abs(lag) - 2 - (2 if lag == 0 else 0)
    assert pair.response[known] == pytest.approx(expected[known], abs=1e-12)
    assert np.isfinite(pair.response).all()


@pytest.mark.parametrize("lag", [-3, 3])
def test_positive_lag_means_that_the_driver_leads(lag):
    pair = planted_pair(rng(), 400, lag=lag, slope=1.0, noise=0.5)
    correlation = {
        shift: np.corrcoef(pair.driver[10 : 390 - shift], pair.response[10 + shift : 390])[0, 1]
        if shift >= 0
        else np.corrcoef(pair.driver[10 - shift : 390], pair.response[10 : 390 + shift])[0, 1]
        for shift in range(-8, 9)
    }
    assert max(correlation, key=correlation.__getitem__) == lag


def test_planted_slope_and_baseline_come_back_within_their_intervals():
    # Common practice, no source: slope near 0.4, baseline near 0.1 percent a month, response
    # after one and a half to two and a half years. Outside: statsmodels OLS intervals, which are
    # right here because the noise is white. 300 pairs: 95 percent is 285, five errors are 19.
    inside, planted = np.zeros(2), np.array([0.1, 0.4])
    for seed in range(300):
        pair = planted_pair(rng(seed), 300, lag=24, slope=0.4, baseline=0.1, noise=0.4)
        design = np.column_stack((np.ones(276), pair.driver[:-24]))
        low, high = OLS(pair.response[24:], design).fit().conf_int(0.05).T
        inside += (low <= planted) & (high >= planted)
    assert inside == pytest.approx([285, 285], abs=19)


def test_planted_variance_share_is_the_closed_form():
    pair = planted_pair(rng(), 100_000, lag=5, slope=0.4, driver_sd=1.5, noise=0.8)
    share = 0.6**2 / (0.6**2 + 0.8**2)
    assert np.corrcoef(pair.driver[:-5], pair.response[5:])[0, 1] ** 2 == pytest.approx(
        share, abs=0.01
    )


def test_a_slope_of_zero_leaves_baseline_and_noise():
    pair = planted_pair(rng(), 60, lag=12, slope=0.0, baseline=0.3, noise_ar=0.5)
    assert pair.response == pytest.approx(0.3 + pair.noise, abs=1e-15)


def test_seed_decides_and_results_are_read_only():
    first, again, other = (planted_pair(rng(seed), 40, lag=6, slope=1.0) for seed in (1, 1, 2))
    assert np.array_equal(first.driver, again.driver)
    assert np.array_equal(first.response, again.response)
    assert not np.array_equal(first.response, other.response)
    for array in (first.driver, first.response, first.noise):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1.0


def test_levels_undo_growth_rates():
    growth = rng().normal(size=50)
    levels = levels_from_growth(growth, start=80.0)
    assert levels[0] == 80.0
    back = growth_rate(Series("Level", pd.Period("2000-01", "M"), levels))
    assert back.values == pytest.approx(growth, abs=1e-11)


@pytest.mark.parametrize(
    ("call", "sentence"),
    [
        (lambda: white_noise(rng(), -1, sd=1.0), "n must be 0 or more, but got -1"),
        (lambda: white_noise(rng(), 5, sd=-1.0), "sd must be 0 or more, but got -1"),
        (lambda: white_noise(rng(), 5, sd=1.0, law="cauchy"), "law must be one of normal, laplace"),
        (lambda: ar_process(rng(), 5, ar=1.0, sd=1.0), "ar must be above -1 and below 1"),
        (lambda: garch_noise(rng(), 5, sd=1.0, arch=0.5, garch=0.5), "sum to less than 1"),
        (lambda: garch_noise(rng(), 5, sd=1.0, arch=-0.1), "must be 0 or more"),
        (lambda: hump(9, start=0, rise=0, hold=1, fall=1, size=1.0), "rise and fall must be 1"),
        (lambda: lagged_effect([[1.0]], lag=1), "driver must be one-dimensional"),
        (lambda: lagged_effect([1.0], lag=1, spread=4), "spread must be a positive odd number"),
        (lambda: levels_from_growth([1.0], start=0.0), "start must be positive, but got 0"),
    ],
)
def test_errors_name_the_argument(call, sentence):
    with pytest.raises(ValueError, match=sentence):
        call()
