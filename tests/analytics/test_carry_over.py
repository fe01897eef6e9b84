import numpy as np
import pandas as pd
import pytest

from analytics.carry_over import annual_growth_weights, carry_over, path_if
from analytics.series import Series
from tests.references.plain_reading import plain_path


def prices(values, first="2023-01", freq="M", **fields):
    return Series("Prices", pd.Period(first, freq), values, **fields)


def test_carry_over_in_the_middle_of_a_year_holds_the_level_flat():
    values = np.concatenate([np.full(12, 100.0), [102.0, 104.0, 106.0]])  # to March 2024
    found = carry_over(prices(values))
    this = (102 + 104 + 106 * 10) / 12
    assert found.year == 2024
    assert found.this_year == pytest.approx(100 * (this / 100 - 1), abs=1e-12)
    assert found.next_year == pytest.approx(100 * (106 / this - 1), abs=1e-12)


def test_at_the_end_of_a_year_this_year_is_the_annual_growth():
    values = np.concatenate([np.full(4, 100.0), [101.0, 102.0, 103.0, 104.0]])
    found = carry_over(prices(values, "2023Q1", "Q"))
    assert found.this_year == pytest.approx(2.5, abs=1e-12)
    assert found.next_year == pytest.approx(100 * (104 / 102.5 - 1), abs=1e-12)


def test_a_year_that_the_series_does_not_reach_is_left_open():
    found = carry_over(prices(np.full(10, 100.0), "2024-03"))  # to Dec 2024; no 2023
    assert np.isnan(found.this_year)
    assert np.isnan(found.next_year)  # Jan and Feb 2024 are missing
    whole = carry_over(prices(np.full(12, 100.0), "2024-01"))
    assert np.isnan(whole.this_year)
    assert whole.next_year == 0.0


def test_growth_weights_make_up_the_growth_of_annual_averages():
    rng = np.random.default_rng(5)
    for year in (4, 12):
        rates = rng.normal(0, 0.001, 2 * year - 1)  # log rates, small
        level = np.exp(np.concatenate([[0.0], np.cumsum(rates)]))
        exact = np.log(level[year:].mean() / level[:year].mean())
        assert annual_growth_weights(year) @ rates == pytest.approx(exact, abs=2e-6)
    assert annual_growth_weights(1).tolist() == [1.0]


@pytest.mark.parametrize("rate", [-2.0, 0.0, 0.2, 7.0])
def test_path_is_the_one_that_a_loop_gives(rate):
    values = 100 * np.exp(np.random.default_rng(2).normal(0, 0.01, 30).cumsum())
    found = path_if(prices(values), rate)
    np.testing.assert_allclose(found.yearly, plain_path(values, rate, 24, 12), rtol=0, atol=1e-9)
    assert found.periods[0] == prices(values).last + 1
    assert found.yearly[-1] == pytest.approx(100 * ((1 + rate / 100) ** 12 - 1), abs=1e-9)


def test_path_in_logs_ends_at_twelve_times_the_rate():
    found = path_if(prices(np.full(20, 100.0)), 0.3, formula="log")
    assert found.yearly[-1] == pytest.approx(3.6, abs=1e-9)


def test_path_of_a_short_series_begins_where_a_year_is_there():
    found = path_if(prices(np.full(5, 100.0)), 1.0)
    assert np.isnan(found.yearly[:7]).all()
    assert found.yearly[7] == pytest.approx(100 * (1.01**8 - 1))


@pytest.mark.parametrize(
    ("call", "match"),
    [
        (lambda: path_if(prices([1.0, 2.0]), -100.0), "above -100"),
        (lambda: path_if(prices([1.0, 2.0]), 1.0, periods=0), "periods must be 1"),
        (lambda: annual_growth_weights(0), "1 or more"),
        (lambda: carry_over(prices([1.0, -2.0])), "positive"),
        (lambda: path_if(prices([1.0, 2.0], kind="rate"), 1.0), "rate already"),
    ],
)
def test_refusals(call, match):
    with pytest.raises(ValueError, match=match):
        call()
