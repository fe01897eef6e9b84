"""Bands of a lag profile: long-run variance and critical values against their sources."""

import numpy as np
import pytest
from statsmodels.stats.sandwich_covariance import S_hac_simple

from analytics.lag_profile import (
    fixed_b_critical,
    lag_profile,
    lagged,
    long_run_products,
    neighbour_matrix,
    neighbour_weights,
    usual_truncation,
)
from tests.references import plain_influence

# Kiefer and Vogelsang (2005), Bartlett kernel, one-sided 90, 95, 97.5 and 99 percent points as
# a0 + a1 b + a2 b^2 + a3 b^3 (from memory; the 97.5 percent row agrees with an own simulation).
KIEFER_VOGELSANG = {
    0.80: (1.2816, 1.3040, 0.5135, -0.3386),
    0.90: (1.6449, 2.1859, 0.3142, -0.3427),
    0.95: (1.9600, 2.9694, 0.4160, -0.5324),
    0.98: (2.3263, 4.1618, 0.5368, -0.9060),
}


@pytest.mark.parametrize("level", KIEFER_VOGELSANG)
@pytest.mark.parametrize("share", [0.01, 0.05, 0.1, 0.2, 0.5, 1.0])
def test_critical_values_of_kiefer_and_vogelsang(level, share):
    published = np.polynomial.Polynomial(KIEFER_VOGELSANG[level])(share)
    n = 10_000
    assert fixed_b_critical(int(share * n) - 1, n, level) == pytest.approx(published, rel=0.05)


@pytest.mark.parametrize("truncation", [0, 1, 4, 20])
def test_long_run_products(truncation):
    scores = np.random.default_rng(truncation).standard_normal((60, 3)).cumsum(axis=0)
    found = long_run_products(scores, truncation)
    np.testing.assert_allclose(found, S_hac_simple(scores, nlags=truncation), rtol=1e-10)
    plain = plain_influence.long_run_products(scores.tolist(), truncation)
    np.testing.assert_allclose(found, plain, rtol=1e-10)


def test_truncation_rule():
    """1.3 root of T, rounded up (Lazarus et al. 2018; the direction of rounding from memory)."""
    assert [usual_truncation(n) for n in (100, 200, 203, 400, 695)] == [13, 19, 19, 26, 35]


def test_centred_means():
    np.testing.assert_allclose(neighbour_weights(1), [1.0])
    np.testing.assert_allclose(neighbour_weights(3), [1 / 3] * 3)
    np.testing.assert_allclose(neighbour_weights(4), [1 / 8, 1 / 4, 1 / 4, 1 / 4, 1 / 8])
    by_hand = [[2 / 3, 1 / 3, 0, 0], [1 / 4, 1 / 2, 1 / 4, 0], [0, 1 / 4, 1 / 2, 1 / 4]]
    np.testing.assert_allclose(neighbour_matrix(2, 2), by_hand)
    for window in (1, 2, 7, 12):
        matrix = neighbour_matrix(20, window)
        assert matrix.shape == (21, 21 + window // 2)
        np.testing.assert_allclose(matrix.sum(axis=1), 1.0)
        inside = np.arange(window // 2, 21)
        np.testing.assert_allclose((matrix @ np.arange(matrix.shape[1]))[inside], inside)


def test_lagged_columns():
    found = lagged(np.arange(6.0), np.array([0, 2]), 2)
    np.testing.assert_array_equal(found, [[2, 0], [3, 1], [4, 2], [5, 3]])


def test_profile():
    profile = lag_profile(
        np.array([0.1, -0.5, 0.5]), np.array([0.04, 0.01, 0.01]), critical=2.0, level=0.95
    )
    assert profile.peak == 1  # of equal sizes the shortest lag
    assert profile.at(0) == pytest.approx((0.1, -0.3, 0.5))
    with pytest.raises(ValueError, match="read-only"):
        profile.estimate[0] = 0.0


def test_errors():
    with pytest.raises(ValueError, match="window must be 1 or more, but got 0"):
        neighbour_weights(0)
    with pytest.raises(ValueError, match="level must be between 0 and 1, but got 95"):
        fixed_b_critical(3, 100, 95)
