"""effective_months and without_season against closed forms and plain loops."""

import numpy as np
import pytest

from analytics.effective import (
    effective_months,
    smoothed_autocorrelations,
    student_t,
    without_season,
)
from tests.references.plain_surface import plain_without_season


@pytest.mark.parametrize(("a", "b"), [(0.9, 0.9), (0.5, 0.9), (0.8, -0.5), (0.98, 0.7)])
@pytest.mark.parametrize("n", [60, 300, 760])
def test_autoregressions_of_order_one_exactly(a, b, n):
    """With r_x r_y = c^k, c = ab, the sum is geometric and has a closed form for every n."""
    c, lags = a * b, np.arange(n)
    inflation = (1.0 + c) / (1.0 - c) - 2.0 * c * (1.0 - c**n) / (n * (1.0 - c) ** 2)
    expected = max(3.1, n / max(1.0, inflation))
    assert effective_months(a**lags, b**lags, n) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(("a", "b"), [(0.9, 0.9), (0.5, 0.9), (0.3, 0.7)])
def test_limit_of_bretherton_et_al_1999(a, b):
    """N (1 - ab) / (1 + ab): Bartlett 1946; Bretherton et al. 1999, eq. 30 (from memory)."""
    lags = np.arange(2000)
    found = effective_months(a**lags, b**lags, 1_000_000)
    assert found == pytest.approx(1_000_000 * (1.0 - a * b) / (1.0 + a * b), rel=1e-4)


def test_white_noise_is_worth_all_its_months_and_never_more():
    none = np.eye(1, 50)[0]
    assert effective_months(none, none, [30, 100]).tolist() == [30.0, 100.0]
    alternating = (-0.9) ** np.arange(50)
    assert effective_months(alternating, 0.9 ** np.arange(50), 100) == 100.0


def test_floor_and_cap_at_the_last_pair():
    lasting = np.ones(80)
    assert effective_months(lasting, lasting, 5).tolist() == 3.1
    # For n = 3 only lags 1 and 2 count: 3 / (1 + 2 (2/3 + 1/3) q) with q = r_x r_y.
    assert effective_months([1.0, 0.1, 0.1, 9.0], [1.0, 0.1, 0.1, 9.0], 40) == 3.1
    two = effective_months([1.0, -0.5, -0.5], [1.0, 0.5, 0.5], 3)
    assert two == 3.1


def test_vector_of_pairs_equals_one_by_one():
    rho = 0.8 ** np.arange(40)
    pairs = np.array([[24, 39, 40], [41, 100, 300]])
    found = effective_months(rho, rho, pairs)
    one = [[float(effective_months(rho, rho, n)) for n in row] for row in pairs]
    np.testing.assert_allclose(found, one, rtol=1e-14)


def test_autocorrelations_equal_statsmodels():
    from statsmodels.tsa.stattools import acf

    values = np.cumsum(np.random.default_rng(1).standard_normal(131)) + 1000.0
    windows = np.array([1, 5, 12, 60])
    found = smoothed_autocorrelations(values, windows)
    for window, rho in zip(windows.tolist(), found, strict=True):
        means = np.convolve(values, np.ones(window) / window, mode="valid")
        assert rho.size == (131 - window + 1) // 3 + 1
        np.testing.assert_allclose(rho, acf(means, nlags=rho.size - 1, fft=False), atol=1e-11)


@pytest.mark.parametrize("periods_per_year", [1, 4, 12])
def test_season_equals_plain_twin(periods_per_year):
    values = np.random.default_rng(2).standard_normal(103) + 7.0
    twin = plain_without_season(values.tolist(), periods_per_year)
    if periods_per_year == 1:
        np.testing.assert_array_equal(without_season(values, 1), values)
    else:
        np.testing.assert_allclose(without_season(values, periods_per_year), twin, atol=1e-13)


def test_season_alone_leaves_a_constant():
    season = np.tile(np.random.default_rng(3).standard_normal(12), 20)
    for shifted in (season, season - season.mean(), season + 1e6):
        left = without_season(shifted)
        assert np.ptp(left) == 0.0
        assert left[0] == pytest.approx(shifted.mean(), abs=1e-9)


def test_whole_years_of_smoothing_do_not_feel_the_season():
    values = np.random.default_rng(4).standard_normal(240)
    means = [np.convolve(v, np.ones(12) / 12, "valid") for v in (values, without_season(values))]
    np.testing.assert_allclose(means[0], means[1], atol=1e-13)


def test_student_t_equals_its_definition():
    assert student_t(0.5, 50) == pytest.approx(0.5 * np.sqrt(48 / 0.75))
    assert student_t(1.0, 50) == np.inf
    assert student_t(-1.0, 50) == -np.inf


def test_errors_are_one_sentence():
    with pytest.raises(ValueError, match="the autocorrelations must have one length"):
        effective_months([1.0, 0.5], [1.0], 30)
    with pytest.raises(ValueError, match="periods_per_year must be 1 or more, but got 0"):
        without_season([1.0, 2.0], 0)
