"""Distributed lags: closed forms, planted profiles, coverage, errors. Published: tests/outside."""

import numpy as np
import pytest
import statsmodels.api as sm

from analytics.distributed_lag import distributed_lag
from analytics.lag_profile import fixed_b_critical
from analytics.simulate import planted_pair


def pair(seed, n=500, lag=18, spread=13, noise=0.3):
    return planted_pair(
        np.random.default_rng(seed),
        n,
        lag=lag,
        slope=0.4,
        noise=noise,
        noise_ar=0.5,
        driver_mean=0.5,
        spread=spread,
    )


def profile_of(planted, lags):
    true = np.zeros(lags)
    half = planted.spread // 2
    true[planted.lag - half : planted.lag + half + 1] = planted.slope / planted.spread
    return true


def design(driver, lags):
    rows = range(lags - 1, driver.size)
    return np.array([[driver[t - k] for k in range(lags)] for t in rows])


@pytest.mark.parametrize("truncation", [0, 7, 30])
def test_unrestricted_equals_statsmodels(truncation):
    planted = pair(1, n=300)
    fitted = distributed_lag(
        planted.driver, planted.response, max_shift=12, form="unrestricted", truncation=truncation
    )
    reference = sm.OLS(planted.response[12:], sm.add_constant(design(planted.driver, 13))).fit(
        cov_type="HAC", cov_kwds={"maxlags": truncation, "use_correction": True}
    )
    np.testing.assert_allclose(fitted.weights.estimate, reference.params[1:], atol=1e-10)
    np.testing.assert_allclose(fitted.weights.se, reference.bse[1:], rtol=1e-8)
    assert fitted.intercept == pytest.approx(reference.params[0])
    sums = reference.t_test(np.column_stack([np.zeros(13), np.tri(13)]))
    np.testing.assert_allclose(fitted.cumulative.estimate, sums.effect, atol=1e-10)
    np.testing.assert_allclose(fitted.cumulative.se, sums.sd, rtol=1e-8)
    critical = fixed_b_critical(truncation, 288, 0.95)
    width = fitted.weights.high - fitted.weights.estimate
    np.testing.assert_allclose(width, critical * fitted.weights.se)
    assert (fitted.n, fitted.parameters, fitted.penalty) == (288, pytest.approx(13), 0.0)


def test_polynomial_equals_least_squares_on_powers():
    """Almon (1965): weights a + b k + c k^2 + d k^3 are a regression on sums of k^j x_(t-k)."""
    planted = pair(2, n=300)
    fitted = distributed_lag(
        planted.driver, planted.response, max_shift=20, form="polynomial", degree=3
    )
    powers = np.vander(np.arange(21.0), 4, increasing=True)
    regressors = sm.add_constant(design(planted.driver, 21) @ powers)
    reference = sm.OLS(planted.response[20:], regressors).fit(
        cov_type="HAC", cov_kwds={"maxlags": fitted.truncation, "use_correction": True}
    )
    weights = reference.t_test(np.column_stack([np.zeros(21), powers]))
    np.testing.assert_allclose(fitted.weights.estimate, weights.effect, atol=1e-9)
    np.testing.assert_allclose(fitted.weights.se, weights.sd, rtol=1e-6)
    assert fitted.parameters == pytest.approx(4)


def test_smooth_equals_least_squares_with_added_rows():
    """A penalty is the same as observations 0 = sqrt(penalty) times each second difference."""
    planted, penalty = pair(3, n=300), 700.0
    fitted = distributed_lag(planted.driver, planted.response, max_shift=20, penalty=penalty)
    columns = design(planted.driver, 21)
    columns = columns - columns.mean(axis=0)
    late = planted.response[20:] - planted.response[20:].mean()
    bend = np.sqrt(penalty) * np.diff(np.eye(21), n=2, axis=0)
    weights, *_ = np.linalg.lstsq(
        np.vstack([columns, bend]), np.concatenate([late, np.zeros(19)]), rcond=None
    )
    np.testing.assert_allclose(fitted.weights.estimate, weights, atol=1e-10)
    hat = columns @ np.linalg.solve(columns.T @ columns + bend.T @ bend, columns.T)
    assert fitted.parameters == pytest.approx(np.trace(hat))


def test_penalty_ends_are_unrestricted_and_a_straight_line():
    planted = pair(4, n=300)
    arguments = {"driver": planted.driver, "response": planted.response, "max_shift": 15}
    free = distributed_lag(**arguments, form="unrestricted")
    loose = distributed_lag(**arguments, penalty=0.0)
    np.testing.assert_allclose(loose.weights.estimate, free.weights.estimate, atol=1e-9)
    np.testing.assert_allclose(loose.weights.se, free.weights.se, rtol=1e-6)
    straight = distributed_lag(**arguments, form="polynomial", degree=1)
    stiff = distributed_lag(**arguments, penalty=1e12)
    np.testing.assert_allclose(stiff.weights.estimate, straight.weights.estimate, atol=1e-6)


def test_cross_validation_picks_the_least_score():
    """The score by its definition, with the hat matrix, at penalties around the chosen one."""
    planted = pair(5, n=300)
    chosen = distributed_lag(planted.driver, planted.response, max_shift=20).penalty
    columns = design(planted.driver, 21)
    columns = columns - columns.mean(axis=0)
    late = planted.response[20:] - planted.response[20:].mean()
    bend = np.diff(np.eye(21), n=2, axis=0)

    def score(penalty):
        hat = columns @ np.linalg.solve(columns.T @ columns + penalty * bend.T @ bend, columns.T)
        residuals = late - hat @ late
        return late.size * residuals @ residuals / (late.size - 1 - np.trace(hat)) ** 2

    best = score(chosen)
    for factor in (0.01, 0.1, 0.5, 0.8, 1.25, 2.0, 10.0, 100.0):
        assert score(chosen * factor) >= best * (1 - 1e-9)


def test_planted_profile_is_recovered_within_its_bands():
    covered, long_run, error = [], [], []
    for seed in range(40):
        planted = pair(seed, n=760)
        fitted = distributed_lag(planted.driver, planted.response, max_shift=48)
        true = profile_of(planted, 49)
        covered.append(np.mean((fitted.weights.low <= true) & (true <= fitted.weights.high)))
        long_run.append(fitted.cumulative.low[-1] <= 0.4 <= fitted.cumulative.high[-1])
        error.append(np.abs(fitted.weights.estimate - true).max())
    assert np.mean(covered) > 0.88  # edges of a box are not smooth; own measurement .92
    assert np.mean(long_run) > 0.88
    assert np.median(error) < 0.4 / 13


@pytest.mark.parametrize("form", ["smooth", "unrestricted"])
def test_peak_of_the_average_is_the_planted_lag(form):
    misses = []
    for seed in range(12):
        planted = pair(seed, n=760)
        fitted = distributed_lag(
            planted.driver, planted.response, max_shift=48, form=form, window=12
        )
        misses.append(abs(fitted.peak - 18))
        assert fitted.averaged.shifts[-1] == 48
    assert np.median(misses) <= 1


def test_driver_leads_not_the_response():
    outside = []
    for seed in range(10):
        planted = pair(seed, lag=7, spread=1)
        there = distributed_lag(planted.driver, planted.response, max_shift=12)
        assert there.peak == 7
        assert there.weights.low[7] > 0
        assert there.weights.estimate[7] == pytest.approx(0.4, abs=0.1)
        back = distributed_lag(planted.response, planted.driver, max_shift=12).weights
        outside.append(np.mean((back.low > 0) | (back.high < 0)))
    assert np.mean(outside) < 0.2


def test_units_of_the_driver_do_not_change_the_penalised_fit():
    planted = pair(7)
    plain = distributed_lag(planted.driver, planted.response, max_shift=20)
    other = distributed_lag(9.0 + 100.0 * planted.driver, planted.response, max_shift=20)
    np.testing.assert_allclose(100.0 * other.weights.estimate, plain.weights.estimate, atol=1e-8)
    assert other.penalty == pytest.approx(1e4 * plain.penalty)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"max_shift": -1}, "max_shift must be 0 or more, but got -1"),
        ({"max_shift": 70}, "at least 142 months for 71 lags"),
        ({"max_shift": 5, "form": "ridge"}, "form must be one of smooth, polynomial"),
        ({"max_shift": 5, "penalty": -1.0}, "penalty must be 0 or more"),
        ({"max_shift": 5, "penalty": float("nan")}, "penalty must be 0 or more"),
        ({"max_shift": 5, "truncation": 200}, "truncation must be from 0 to 194"),
        ({"max_shift": 5, "form": "polynomial", "degree": 6}, "degree must be from 0 to 5"),
        ({"max_shift": 5, "level": 95}, "level must be between 0 and 1"),
    ],
)
def test_errors(options, message):
    planted = pair(8, n=200)
    with pytest.raises(ValueError, match=message):
        distributed_lag(planted.driver, planted.response, **options)


def test_a_driver_that_repeats_itself_is_refused():
    driver = np.tile([1.0, -1.0, 0.5], 60)
    with pytest.raises(ValueError, match="linearly independent lags"):
        distributed_lag(driver, np.random.default_rng(0).standard_normal(180), max_shift=5)
