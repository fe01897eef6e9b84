"""Weights: price-updating, chaining at links, shares in time, components that come and go."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analytics.weights import (
    WeightTable,
    basket_shares,
    chained_basket,
    effective_weights,
    price_updated,
)
from tests.references.plain_breadth import plain_index


def drawn(seed, n=40, components=5, links=(0, 11, 23, 35)):
    rng = np.random.default_rng(seed)
    prices = 100 * np.exp(np.cumsum(rng.normal(0.003, 0.02, (n, components)), axis=0))
    return prices, rng.uniform(0.1, 5, (len(links), components)), list(links)


# The chained index ---------------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(5))
def test_the_chain_is_the_cost_of_the_baskets_bought_at_the_links(seed):
    prices, shares, links = drawn(seed, links=(3, 11, 12, 30))
    basket = chained_basket(prices, shares, links)
    index, _ = plain_index(prices.tolist(), shares.tolist(), links)
    assert np.isnan(basket.total[:3]).all()
    np.testing.assert_allclose(basket.total[3:], index[3:], rtol=1e-13)


def test_equal_prices_give_their_own_index_whatever_the_weights():
    prices, shares, links = drawn(1)
    basket = chained_basket(np.repeat(prices[:, :1], 5, axis=1), shares, links)
    np.testing.assert_allclose(basket.total, 100 * prices[:, 0] / prices[0, 0], rtol=1e-13)


@given(st.floats(0.01, 1000), st.floats(0.01, 1000))
def test_scaling_weights_or_re_referencing_a_component_changes_nothing(of_weights, of_prices):
    prices, shares, links = drawn(2)
    before = chained_basket(prices, shares, links)
    moved = prices.copy()
    moved[:, 2] *= of_prices
    after = chained_basket(moved, of_weights * shares, links)
    np.testing.assert_allclose(after.total, before.total, rtol=1e-12)
    np.testing.assert_allclose(after.points, before.points, rtol=0, atol=1e-11)


def test_points_sum_to_the_change_of_the_total():
    basket = chained_basket(*drawn(3))
    np.testing.assert_allclose(
        basket.points[1:].sum(axis=1), np.diff(basket.total), rtol=0, atol=1e-11
    )


def test_rows_are_in_force_from_after_their_link_to_the_next_one():
    basket = chained_basket(*drawn(4))
    assert basket.row[:12].tolist() == [0] * 12
    assert basket.row[12] == 1
    assert basket.row[23] == 1
    assert basket.row[24] == 2
    assert basket.row[-1] == 3


def test_a_link_in_the_last_period_has_nothing_to_do_yet():
    prices, shares, _ = drawn(5)
    longer = chained_basket(prices, shares[:2], [0, 39])
    np.testing.assert_array_equal(longer.total, chained_basket(prices, shares[:1], [0]).total)


def test_results_cannot_be_written_to():
    basket = chained_basket(*drawn(6))
    for array in (basket.prices, basket.shares, basket.row, basket.total, basket.points):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0


# Components that come and go -----------------------------------------------------------------


def test_a_late_component_enters_at_the_first_link_where_it_has_a_price():
    prices, shares, links = drawn(7)
    prices[:15, 4] = np.nan
    basket = chained_basket(prices, shares, links)
    assert basket.shares[:, 4].tolist()[:2] == [0, 0]
    assert (basket.shares[2:, 4] > 0).all()
    np.testing.assert_allclose(basket.shares.sum(axis=1), 1, rtol=1e-14)
    early = chained_basket(prices[:, :4], shares[:, :4], links)
    np.testing.assert_allclose(basket.total[:24], early.total[:24], rtol=1e-13)
    assert not basket.imputed.any()


def test_a_gap_is_moved_with_the_rest_and_made_good_afterwards():
    prices, shares, links = drawn(8)
    whole = chained_basket(prices, shares, links)
    holed = prices.copy()
    holed[14:16, 1] = np.nan
    basket = chained_basket(holed, shares, links)
    assert np.argwhere(basket.imputed).tolist() == [[14, 1], [15, 1]]
    rest = chained_basket(np.delete(prices, 1, 1), np.delete(shares, 1, 1), links)
    growth = basket.total[14:16] / basket.total[13]
    np.testing.assert_allclose(growth, rest.total[14:16] / rest.total[13], rtol=1e-12)
    np.testing.assert_allclose(basket.total[16:], whole.total[16:], rtol=1e-12)
    np.testing.assert_allclose(basket.points[1:].sum(axis=1), np.diff(basket.total), atol=1e-11)


def test_a_gap_across_a_link_keeps_the_component_in():
    prices, shares, links = drawn(9)
    prices[22:25, 1] = np.nan
    basket = chained_basket(prices, shares, links)
    assert (basket.shares[:, 1] > 0).all()
    np.testing.assert_allclose(basket.points[1:].sum(axis=1), np.diff(basket.total), atol=1e-11)


def test_a_component_that_ends_leaves_at_the_next_link():
    prices, shares, links = drawn(10)
    prices[18:, 0] = np.nan
    basket = chained_basket(prices, shares, links)
    assert basket.shares[:2, 0].min() > 0
    assert basket.shares[2:, 0].tolist() == [0, 0]
    assert basket.imputed[18:24, 0].all()
    assert not basket.imputed[24:].any()


def test_a_component_with_no_weight_in_a_year_takes_no_part():
    prices, shares, links = drawn(11)
    shares[1, 3] = np.nan
    basket = chained_basket(prices, shares, links)
    assert basket.shares[1, 3] == 0
    assert basket.points[12:24, 3].tolist() == [0] * 12


# Shares in time ------------------------------------------------------------------------------


def test_effective_weights_are_the_weights_at_the_link_and_move_with_relative_prices():
    prices, shares, links = drawn(12, links=(0,))
    basket = chained_basket(prices, shares, links)
    moving = effective_weights(basket)
    np.testing.assert_allclose(moving[0], shares[0] / shares[0].sum(), rtol=1e-14)
    np.testing.assert_allclose(moving.sum(axis=1), 1, rtol=1e-14)
    np.testing.assert_allclose(moving[20], price_updated(shares[0], prices[20] / prices[0]))


@pytest.mark.parametrize("span", [1, 12])
def test_basket_shares_weigh_changes_into_the_cost_of_the_present_basket(span):
    prices, shares, links = drawn(13)
    basket = chained_basket(prices, shares, links)
    t = 37  # row 3 is in force, its link is 35
    cost = shares[3] * prices / prices[35]
    expected = cost[t].sum() / cost[t - span].sum()
    weights = basket_shares(basket, span)
    assert weights[t] @ (prices[t] / prices[t - span]) == pytest.approx(expected, rel=1e-13)
    assert np.isnan(weights[:span]).all()


def test_one_period_shares_reproduce_the_total_at_every_link():
    prices, shares, links = drawn(14)
    basket = chained_basket(prices, shares, links)
    growth = (basket_shares(basket, 1)[1:] * prices[1:] / prices[:-1]).sum(axis=1)
    np.testing.assert_allclose(growth, basket.total[1:] / basket.total[:-1], rtol=1e-13)


# The table -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("row", "total"), [([0.5, 0.5], 1), ([51, 49], 100), ([400, 583], 1000), ([22, 15.6], 100)]
)
def test_the_total_is_the_nearest_of_one_hundred_and_thousand(row, total):
    assert WeightTable((2020,), ("a", "b"), [row]).total == total


def test_uneven_rows_are_those_off_by_more_than_rounding():
    table = WeightTable((2019, 2020, 2021), ("a", "b"), [[500, 500], [400, 583], [500, 500.9]])
    assert table.uneven().tolist() == [1]
    assert table.sums.tolist() == [1000, 983, 1000.9]


def test_the_fingerprint_follows_years_names_and_values():
    one = WeightTable((2019,), ("a", "b"), [[500, 500]])
    assert one.fingerprint == WeightTable((2019,), ("a", "b"), [[500, 500]], "x").fingerprint
    for other in (
        WeightTable((2020,), ("a", "b"), [[500, 500]]),
        WeightTable((2019,), ("a", "c"), [[500, 500]]),
        WeightTable((2019,), ("a", "b"), [[500, 501]]),
    ):
        assert other.fingerprint != one.fingerprint


# Refusals ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("table", "said"),
    [
        (((2020,), ("a", "b"), [[1.0]]), "a row a year and a column a component"),
        (((2020, 2020), ("a",), [[1.0], [1.0]]), "years must increase"),
        (((2020,), ("a",), [[-1.0]]), "finite and not negative"),
        (((2020,), ("a",), [[0.0]]), "weights of 2020 must sum to more than 0"),
    ],
)
def test_tables_refused(table, said):
    with pytest.raises(ValueError, match=said):
        WeightTable(*table)


@pytest.mark.parametrize(
    ("prices", "shares", "links", "said"),
    [
        ([[1, 1]], [[1]], [0], "a row a link and a column a component"),
        ([[1, 1]], np.empty((0, 2)), [], "a row a link"),
        ([[1, 0]], [[1, 1]], [0], "prices must be positive"),
        ([[1, 1]], [[1, -1]], [0], "shares must not be negative"),
        ([[1, 1]], [[1, 1]], [1], r"links must increase within 0\.\.0"),
        ([[1, 1], [1, 1]], [[1, 1], [1, 1]], [1, 0], "links must increase"),
        ([[1, np.nan]], [[0, 1]], [0], "row 0 of shares must have a component with prices"),
    ],
)
def test_baskets_refused(prices, shares, links, said):
    with pytest.raises(ValueError, match=said):
        chained_basket(prices, shares, links)


def test_price_updating_needs_weight():
    with pytest.raises(ValueError, match="sum to more than 0"):
        price_updated([0.0, np.nan], [1.0, 1.0])
    np.testing.assert_allclose(
        price_updated([1.0, np.nan, 1.0], [3.0, 9.0, np.nan]), [0.75, 0, 0.25]
    )


def test_a_span_is_not_negative():
    with pytest.raises(ValueError, match="span must be 0 or more"):
        basket_shares(chained_basket(*drawn(1)), -1)
