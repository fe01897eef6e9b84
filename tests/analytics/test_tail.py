import numpy as np
import pytest
import scipy.stats
from statsmodels.stats.proportion import proportion_confint

from analytics.goodness import goodness_of_fit
from analytics.tail import fitted_tail, observed_tail


def test_fitted_tail_is_the_distributions():
    values = np.random.default_rng(1).laplace(0.2, 0.3, 400)
    test = goodness_of_fit(values, family="laplace", draws=199)
    found = fitted_tail(test, 1.0)
    judge = scipy.stats.laplace.sf(1.0, *scipy.stats.laplace.fit(values))
    assert found.probability == pytest.approx(judge, rel=1e-9)
    assert found.return_period == pytest.approx(1 / judge, rel=1e-9)
    assert found.low < found.probability < found.high
    assert found.return_low < found.return_period < found.return_high


def test_fitted_interval_covers_the_truth_about_as_often_as_it_says():
    truth, inside = float(scipy.stats.laplace.sf(2.0)), 0
    for seed in range(60):
        values = np.random.default_rng(seed).laplace(size=150)
        test = goodness_of_fit(values, family="laplace", draws=99, seed=seed, dependent=False)
        found = fitted_tail(test, 2.0, level=0.9)
        inside += found.low <= truth <= found.high
    assert 44 <= inside <= 60  # 54 expected; 44 lies 4 standard errors below


def test_observed_tail_of_independent_readings_is_wilsons():
    values = np.random.default_rng(3).permutation(200).astype(float)
    found = observed_tail(values, 180.0)
    assert found.probability == 0.1
    # The autocorrelation of this permutation takes at most a few of the 200 away.
    low, high = proportion_confint(20, 200, 0.1, method="wilson")
    assert found.low == pytest.approx(low, abs=0.01)
    assert found.high == pytest.approx(high, abs=0.02)


def test_runs_widen_the_interval():
    alone = np.zeros(240)
    alone[::12] = 1.0
    together = np.zeros(240)
    together[100:120] = 1.0
    one, other = observed_tail(alone, 1.0), observed_tail(together, 1.0)
    assert one.probability == other.probability
    assert other.high - other.low > 1.5 * (one.high - one.low)


def test_a_reading_above_all_others_has_an_upper_bound_only():
    found = observed_tail(np.random.default_rng(1).normal(size=100), 9.0)
    assert (found.probability, found.low) == (0.0, 0.0)
    assert 0.0 < found.high < 0.2
    assert found.return_period == np.inf
    assert 5 < found.return_low < 100


def test_refusals():
    with pytest.raises(ValueError, match="between 0 and 1"):
        observed_tail([1.0, 2.0], 1.0, level=1.0)
    with pytest.raises(ValueError, match="at least one number"):
        observed_tail([np.nan], 1.0)
