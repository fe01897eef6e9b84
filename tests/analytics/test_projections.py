"""Local projections: statsmodels horizon by horizon, planted responses, coverage, errors."""

import numpy as np
import pytest
import statsmodels.api as sm

from analytics.lag_profile import fixed_b_critical, neighbour_weights
from analytics.projections import local_projections
from analytics.simulate import planted_pair


def pair(seed, n=500, lag=18, spread=13, driver_ar=0.5):
    return planted_pair(
        np.random.default_rng(seed),
        n,
        lag=lag,
        slope=0.4,
        noise=0.3,
        noise_ar=0.5,
        driver_ar=driver_ar,
        spread=spread,
    )


def regression(planted, weights, own_lags):
    """Weighted response ahead on today's driver and both pasts, by statsmodels with HAC."""
    x, y = planted.driver, planted.response
    ahead = len(weights) - 1
    rows = range(own_lags, x.size - ahead)
    target = [sum(weight * y[t + j] for j, weight in enumerate(weights)) for t in rows]
    regressors = [[x[t], *x[t - own_lags : t], *y[t - own_lags : t]] for t in rows]
    n = len(rows)
    truncation = max(int(np.ceil(1.3 * np.sqrt(n))), len(weights))
    fitted = sm.OLS(target, sm.add_constant(np.array(regressors))).fit(
        cov_type="HAC", cov_kwds={"maxlags": truncation, "use_correction": True}
    )
    return fitted.params[1], fitted.bse[1], fixed_b_critical(truncation, n, 0.95)


@pytest.mark.parametrize(("own_lags", "window"), [(0, 1), (3, 4), (12, 5)])
def test_equals_statsmodels(own_lags, window):
    planted = pair(1, n=220)
    found = local_projections(
        planted.driver, planted.response, max_shift=30, own_lags=own_lags, window=window
    )
    half = window // 2
    for h in (0, 1, 8, 30):
        centred = np.zeros(h + half + 1)
        for offset, weight in zip(range(-half, half + 1), neighbour_weights(window), strict=True):
            if h + offset >= 0:
                centred[h + offset] = weight
        for profile, weights in (
            (found.monthly, np.eye(h + 1)[h]),
            (found.cumulative, np.ones(h + 1)),
            (found.averaged, centred / centred.sum()),
        ):
            estimate, se, critical = regression(planted, weights, own_lags)
            assert profile.estimate[h] == pytest.approx(estimate, abs=1e-10)
            assert profile.se[h] == pytest.approx(se, rel=1e-8)
            assert profile.high[h] - estimate == pytest.approx(critical * se, rel=1e-8)
    assert found.n == 220 - own_lags


def test_planted_response_within_the_bands():
    """Response to a surprise in a driver with memory .5: the planted effect, smeared by it."""
    effect = np.zeros(37)
    effect[12:25] = 0.4 / 13
    true = np.array([sum(effect[j] * 0.5 ** (h - j) for j in range(h + 1)) for h in range(37)])
    monthly, level = [], []
    for seed in range(40):
        planted = pair(seed)
        found = local_projections(planted.driver, planted.response, max_shift=36)
        for profile, truth, covered in (
            (found.monthly, true, monthly),
            (found.cumulative, true.cumsum(), level),
        ):
            covered.append(np.mean((profile.low <= truth) & (truth <= profile.high)))
    assert 0.91 < np.mean(monthly) < 0.98
    assert 0.87 < np.mean(level) < 0.98


def test_sure_positive_response_at_the_planted_lag():
    planted = pair(2, lag=9, spread=1, driver_ar=0.0)
    found = local_projections(planted.driver, planted.response, max_shift=24)
    estimate, low, high = found.monthly.at(9)
    assert found.peak == 9
    assert 0.0 < low < 0.4 < high
    assert estimate == pytest.approx(0.4, abs=0.1)
    level, low, high = found.cumulative.at(24)
    assert low < 0.4 < high
    assert level == pytest.approx(found.cumulative.estimate[-1])
    back = local_projections(planted.response, planted.driver, max_shift=24)
    outside = (back.monthly.low > 0) | (back.monthly.high < 0)
    assert np.mean(outside) < 0.2


def test_average_finds_the_middle_of_a_spread_response():
    misses = [
        abs(local_projections(planted.driver, planted.response, max_shift=48, window=12).peak - 18)
        for planted in (pair(seed, n=760) for seed in range(8))
    ]
    assert np.median(misses) <= 2


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"max_shift": -1}, "must be 0 or more, but got -1 and 12"),
        ({"max_shift": 5, "own_lags": -2}, "but got 5 and -2"),
        ({"max_shift": 100}, "must leave at least 50 months, but 140 months leave 28"),
        ({"max_shift": 5, "window": 0}, "window must be 1 or more"),
    ],
)
def test_errors(options, message):
    planted = pair(3, n=140)
    with pytest.raises(ValueError, match=message):
        local_projections(planted.driver, planted.response, **options)


def test_a_driver_without_news_is_refused():
    driver = np.tile([1.0, -1.0], 70)
    with pytest.raises(ValueError, match="must bring news"):
        local_projections(driver, np.random.default_rng(0).standard_normal(140), max_shift=3)
