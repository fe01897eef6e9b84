"""Burg's autoregression, against statsmodels and against processes whose coefficients are known."""

import numpy as np
import pytest
from statsmodels.regression.linear_model import burg
from statsmodels.tsa.stattools import pacf_burg

from analytics.autoregression import autoregression
from analytics.simulate import ar_process


def variances(values, highest):
    """Variance of the surprises for order 0 .. highest, from statsmodels' reflections.

    Levinson's recursion: each reflection takes its square off (statsmodels' own Burg variance
    divides by the months left instead).
    """
    reflections, _ = pacf_burg(values, nlags=highest)
    return values.var() * np.cumprod(np.append(1.0, 1.0 - reflections[1:] ** 2))


@pytest.mark.parametrize("order", [1, 2, 5, 12])
def test_coefficients_equal_those_of_statsmodels(order):
    values = np.random.default_rng(order).standard_normal(240).cumsum()
    coefficients, _ = burg(values, order=order)
    fitted = autoregression(values, order=order)
    np.testing.assert_allclose(fitted.coefficients, coefficients, atol=1e-10)
    assert fitted.variance == pytest.approx(variances(values, order)[-1], rel=1e-10)


def test_order_by_akaike_equals_a_plain_loop_over_statsmodels():
    values = ar_process(np.random.default_rng(5), 300, ar=0.7, sd=2.0)
    scores = values.size * np.log(variances(values, 24)) + 2 * np.arange(25)
    fitted = autoregression(values)
    assert fitted.order == int(np.argmin(scores))


def test_planted_coefficients_are_recovered():
    rng = np.random.default_rng(11)
    shocks = rng.standard_normal(20_000)
    values = np.zeros(20_000)
    for t in range(2, 20_000):
        values[t] = 1.2 * values[t - 1] - 0.5 * values[t - 2] + shocks[t]
    fitted = autoregression(values, max_order=10)
    assert fitted.order >= 2
    expected = np.zeros(fitted.order)
    expected[:2] = 1.2, -0.5
    np.testing.assert_allclose(fitted.coefficients, expected, atol=0.05)
    assert fitted.variance == pytest.approx(1.0, abs=0.03)


def test_every_fit_is_stationary():
    for seed in range(20):
        walk = np.random.default_rng(seed).standard_normal(60).cumsum()
        roots = np.roots(np.append(1.0, -autoregression(walk, order=6).coefficients))
        assert np.abs(roots).max() < 1.0


def test_mean_and_unit_do_not_matter():
    values = ar_process(np.random.default_rng(2), 200, ar=0.5, sd=1.0)
    plain, other = autoregression(values), autoregression(50.0 - 3.0 * values)
    np.testing.assert_allclose(other.coefficients, plain.coefficients, atol=1e-10)
    assert other.variance == pytest.approx(9.0 * plain.variance)


def test_coefficients_are_read_only():
    fitted = autoregression(np.random.default_rng(1).standard_normal(50), order=2)
    with pytest.raises(ValueError, match="read-only"):
        fitted.coefficients[0] = 1.0


@pytest.mark.parametrize(
    ("values", "options", "message"),
    [
        ([1.0, np.nan, 2.0], {}, "values must be one finite series"),
        (np.ones(40), {}, "values must vary"),
        (np.arange(10.0), {"order": 5}, "order must be from 0 to below 5, but got 5"),
        (np.arange(10.0), {"order": -1}, "but got -1"),
    ],
)
def test_errors(values, options, message):
    with pytest.raises(ValueError, match=message):
        autoregression(values, **options)
