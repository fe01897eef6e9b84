"""Index formulas: what all of them share, order of the means, refusals."""

import numpy as np
import pytest

from analytics.index_formulas import elementary_index, price_index
from analytics.weights import chained_basket

FORMULAS = ("laspeyres", "paasche", "fisher", "tornqvist", "walsh")
RNG = np.random.default_rng(41)
PRICES = np.exp(np.cumsum(RNG.normal(0.01, 0.05, (6, 4)), axis=0))
QUANTITIES = RNG.uniform(1, 3, (6, 4))


@pytest.mark.parametrize("chained", [False, True])
@pytest.mark.parametrize("formula", FORMULAS)
def test_if_all_prices_double_the_index_doubles(formula, chained):
    prices = np.outer([1.0, 2.0, 3.0, 1.5, 4.0, 0.5], PRICES[0])
    index = price_index(prices, QUANTITIES, formula=formula, chained=chained)
    np.testing.assert_allclose(index, [1.0, 2.0, 3.0, 1.5, 4.0, 0.5], rtol=1e-13)


@pytest.mark.parametrize("formula", ["fisher", "tornqvist", "walsh"])
def test_symmetric_formulas_turn_round_with_time(formula):
    forth = price_index(PRICES[:2], QUANTITIES[:2], formula=formula)[1]
    back = price_index(PRICES[1::-1], QUANTITIES[1::-1], formula=formula)[1]
    assert forth * back == pytest.approx(1, abs=1e-13)


def test_the_chained_basket_is_the_chained_laspeyres_index():
    # Weights of a link are the spending at its own prices.
    shares = (PRICES * QUANTITIES)[:-1]
    total = chained_basket(PRICES, shares, range(5)).total
    expected = price_index(PRICES, QUANTITIES, formula="laspeyres", chained=True)
    np.testing.assert_allclose(total / 100, expected, rtol=1e-13)


def test_means_of_relatives_are_in_order():
    carli, jevons, harmonic = (
        elementary_index(PRICES, formula=name) for name in ("carli", "jevons", "harmonic")
    )
    assert (carli >= jevons).all()
    assert (jevons >= harmonic).all()
    assert carli[0] == jevons[0] == harmonic[0] == 1


@pytest.mark.parametrize(
    ("prices", "quantities", "formula", "said"),
    [
        ([[1.0]], [[1.0, 2.0]], "fisher", "tables of one shape"),
        ([[0.0]], [[1.0]], "fisher", "prices must be positive"),
        ([[1.0]], [[0.0]], "fisher", "quantities not negative"),
        ([[1.0]], [[1.0]], "best", "formula must be one of laspeyres"),
    ],
)
def test_refusals(prices, quantities, formula, said):
    with pytest.raises(ValueError, match=said):
        price_index(prices, quantities, formula=formula)


def test_elementary_refusals():
    with pytest.raises(ValueError, match="table of positive numbers"):
        elementary_index([[0.0]], formula="carli")
    with pytest.raises(ValueError, match="formula must be one of carli"):
        elementary_index([[1.0]], formula="best")
