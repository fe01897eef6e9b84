"""Contributions that add up across links, baskets without, diffusion and ranks."""

import numpy as np
import pytest
import scipy.stats
from hypothesis import given
from hypothesis import strategies as st

from analytics.breadth import (
    change,
    contributions,
    diffusion_index,
    own_history_rank,
    share_above,
    total_without,
)
from analytics.weights import chained_basket
from tests.analytics.test_weights import drawn
from tests.references.plain_breadth import plain_contributions, two_link_formula

# Contributions -------------------------------------------------------------------------------


@pytest.mark.parametrize("span", [1, 3, 12, 30])
@pytest.mark.parametrize("links", [(0, 11, 23, 35), (5, 6, 7, 20), (0,)])
def test_contributions_are_those_of_the_plain_twin(span, links):
    prices, shares, places = drawn(21, links=links)
    basket = chained_basket(prices, shares, places)
    found = contributions(basket, span)
    rates, parts = plain_contributions(prices.tolist(), shares.tolist(), places, span)
    start = links[0] + span
    assert np.isnan(found[:start]).all()
    np.testing.assert_allclose(found[start:], parts[start:], rtol=0, atol=1e-10)
    np.testing.assert_allclose(change(basket.total, span)[start:], rates[start:], atol=1e-10)


@given(st.integers(0, 10_000), st.integers(1, 38))
def test_contributions_add_up_to_the_rate_whatever_lies_between(seed, span):
    basket = chained_basket(*drawn(seed))
    gap = contributions(basket, span).sum(axis=1) - change(basket.total, span)
    assert np.nanmax(np.abs(gap)) < 1e-9


def test_over_one_link_it_is_the_formula_of_the_trade():
    prices, shares, _ = drawn(22, links=(0, 11))
    shares /= shares.sum(axis=1, keepdims=True)
    basket = chained_basket(prices, shares, [0, 11])
    month = 17
    expected = two_link_formula(
        shares[0],
        prices[11] / prices[0],
        prices[month - 12] / prices[0],
        shares[1],
        prices[month] / prices[11],
    )
    np.testing.assert_allclose(contributions(basket, 12)[month], expected, atol=1e-11)


def test_weight_times_rate_does_not_add_up_across_a_link():
    prices, shares, _ = drawn(22, links=(0, 11))
    shares /= shares.sum(axis=1, keepdims=True)
    basket = chained_basket(prices, shares, [0, 11])
    naive = shares[1] @ change(prices, 12)[17]
    assert abs(naive - change(basket.total, 12)[17]) > 0.05
    assert contributions(basket, 12)[17].sum() == pytest.approx(change(basket.total, 12)[17])


def test_a_component_that_does_not_move_gives_nothing():
    prices, shares, links = drawn(23)
    prices[:, 2] = 90.0
    basket = chained_basket(prices, shares, links)
    assert np.nanmax(np.abs(contributions(basket, 12)[:, 2])) == 0


def test_a_span_longer_than_the_data_gives_nothing():
    basket = chained_basket(*drawn(24, n=11, links=(0,)))
    assert np.isnan(contributions(basket, 12)).all()
    assert np.isnan(change(basket.total, 12)).all()


@pytest.mark.parametrize("function", [change, lambda levels, span: contributions(levels, span)])
def test_spans_are_positive(function):
    with pytest.raises(ValueError, match="span must be 1 or more, but got 0"):
        function(chained_basket(*drawn(1)) if function is not change else [1.0, 2.0], 0)


# Baskets without -----------------------------------------------------------------------------


def test_without_a_component_it_is_the_index_of_the_others():
    prices, shares, links = drawn(25)
    basket = chained_basket(prices, shares, links)
    others = chained_basket(np.delete(prices, 3, 1), np.delete(shares, 3, 1), links)
    out = np.arange(5) == 3
    np.testing.assert_allclose(total_without(basket, out), others.total, rtol=1e-13)
    whole = total_without(basket, np.zeros(5, bool))
    np.testing.assert_allclose(whole, basket.total, rtol=1e-14)


def test_something_must_be_kept():
    basket = chained_basket(*drawn(26))
    with pytest.raises(ValueError, match="must keep a component with weight"):
        total_without(basket, np.ones(5, bool))
    with pytest.raises(ValueError, match="left_out must have 5 entries"):
        total_without(basket, [True])


# Diffusion -----------------------------------------------------------------------------------


def test_rising_counts_one_unchanged_half_falling_none():
    assert diffusion_index([1.0, 2.0]) == 100
    assert diffusion_index([-1.0, -2.0]) == 0
    assert diffusion_index([0.0, 0.0]) == 50
    assert diffusion_index([1.0, -1.0, np.nan]) == 50
    assert np.isnan(diffusion_index([np.nan]))
    assert diffusion_index([1.0, -1.0], [3.0, 1.0]) == 75


@given(st.lists(st.floats(-5, 5), min_size=1, max_size=30))
def test_turning_all_signs_turns_the_index(changes):
    turned = diffusion_index(-np.array(changes))
    assert turned == pytest.approx(100 - diffusion_index(changes))


def test_share_above_a_pace_is_strict():
    assert share_above([1.0, 2.0, 3.0, np.nan], 2.0) == pytest.approx(100 / 3)
    assert share_above([1.0, 2.0, 3.0], 0.0, [1, 1, 2]) == 100


# Ranks ---------------------------------------------------------------------------------------


def test_ranks_are_scipys_mean_rank_in_the_own_column():
    rng = np.random.default_rng(27)
    rates = np.round(rng.normal(size=(60, 4)), 1)
    rates[:7, 1] = np.nan
    ranks = own_history_rank(rates, first=50)
    assert ranks.shape == (10, 4)
    for t in range(10):
        for k in range(4):
            own = rates[~np.isnan(rates[:, k]), k]
            expected = scipy.stats.percentileofscore(own, rates[50 + t, k], kind="mean")
            assert ranks[t, k] == pytest.approx(expected, abs=1e-12)


def test_equal_months_rank_in_the_middle_and_absent_ones_nowhere():
    assert own_history_rank([[1.0], [1.0], [1.0]]).tolist() == [[50.0]] * 3
    assert np.isnan(own_history_rank([[np.nan], [1.0]])[0, 0])
