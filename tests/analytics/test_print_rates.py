import numpy as np
import pandas as pd
import pytest

from analytics.print_rates import (
    average_rate,
    doubling_time,
    equivalent_rate,
    factor_since,
    growing,
    print_rates,
)
from analytics.series import Series


def prices(values, first="2020-01", freq="M", **fields):
    return Series("Prices", pd.Period(first, freq), values, **fields)


def steady(rate, n=40, freq="M"):
    return prices(
        100 * (1 + rate / 100) ** np.arange(n), "2020" if freq == "Y" else "2020-01", freq
    )


@pytest.mark.parametrize(("freq", "year"), [("M", 12), ("Q", 4)])
def test_steady_growth_has_one_yearly_rate_however_it_is_measured(freq, year):
    rates = print_rates(steady(0.5, freq=freq))
    yearly = 100 * (1.005**year - 1)
    assert rates.one == pytest.approx(0.5, abs=1e-11)
    for name in ("quarter_annualised", "half_annualised", "year", "annual_average"):
        assert getattr(rates, name) == pytest.approx(yearly, abs=1e-9)


def test_log_rates_of_steady_growth():
    rates = print_rates(steady(0.5), formula="log")
    assert rates.one == pytest.approx(100 * np.log(1.005), abs=1e-11)
    for rate in (rates.half_annualised, rates.year):
        assert rate == pytest.approx(1200 * np.log(1.005), abs=1e-9)


def test_spans_reach_back_as_many_months_as_they_say():
    # A step of 10 percent h months ago is in the rates over more than h months and in no other.
    for ago, seen in ((0, "one quarter half year"), (2, "quarter half year"), (5, "half year")):
        values = np.full(30, 100.0)
        values[30 - 1 - ago :] = 110.0
        rates = print_rates(prices(values))
        found = {
            "one": rates.one,
            "quarter": rates.quarter_annualised,
            "half": rates.half_annualised,
            "year": rates.year,
        }
        assert [name for name, value in found.items() if value] == seen.split()
    assert rates.half_annualised == pytest.approx(21.0, abs=1e-9)  # 1.1^2 - 1
    assert rates.year == pytest.approx(10.0, abs=1e-9)


def test_a_short_series_has_the_rates_that_it_reaches():
    rates = print_rates(prices(np.arange(100.0, 111.0)))  # 11 months
    assert rates.one == pytest.approx(100 * (110 / 109 - 1))
    assert rates.half_annualised == pytest.approx(100 * ((110 / 104) ** 2 - 1))
    assert np.isnan(rates.year)
    assert np.isnan(rates.annual_average)


def test_a_gap_takes_out_the_rates_that_need_it_and_no_other():
    values = np.full(30, 100.0)
    values[-4] = np.nan
    rates = print_rates(prices(values))
    assert np.isnan(rates.quarter_annualised)
    assert rates.one == rates.half_annualised == rates.year == 0.0
    assert np.isnan(rates.annual_average)


def test_annual_series_have_a_yearly_rate_only():
    rates = print_rates(steady(3.0, 6, "Y"))
    assert rates.one == rates.year == pytest.approx(3.0, abs=1e-9)
    assert np.isnan(rates.quarter_annualised)
    assert np.isnan(rates.half_annualised)


def test_annual_average_is_a_change_of_means_and_not_a_mean_of_rates():
    values = np.concatenate([np.full(12, 100.0), np.full(6, 100.0), np.full(6, 112.0)])
    found = average_rate(prices(values))
    assert found.last == pd.Period("2021-12", "M")
    assert found.values[-1] == pytest.approx(6.0, abs=1e-12)
    calendar = pd.Series(values).groupby(np.arange(24) // 12).mean()
    assert found.values[-1] == pytest.approx(100 * (calendar[1] / calendar[0] - 1), abs=1e-12)


def test_factor_counts_from_the_period_chosen():
    found = factor_since(prices([50.0, 100.0, 300.0]), 1)
    assert found.values.tolist() == [1.0, 3.0]
    assert found.first == pd.Period("2020-02", "M")
    assert found.unit == "Feb 2020 = 1"


def test_doubling_and_equivalent_rates_agree():
    rate = np.array([0.1, 1.0, 50.0])
    periods = doubling_time(rate)
    np.testing.assert_allclose((1 + rate / 100) ** periods, 2.0, rtol=1e-12)
    np.testing.assert_allclose(equivalent_rate(equivalent_rate(rate, 12), 1 / 12), rate, rtol=1e-12)
    assert doubling_time([0.0, -3.0]).tolist() == [np.inf, np.inf]
    assert np.isnan(doubling_time(np.nan))


@pytest.mark.parametrize(
    ("call", "match"),
    [
        (lambda: print_rates(prices([1.0, 2.0], kind="rate")), "must be an index or a level"),
        (lambda: print_rates(prices([1.0, 0.0, 2.0])), "Feb 2020 is 0"),
        (lambda: average_rate(prices(np.ones(20))), "24 months"),
        (lambda: factor_since(prices([1.0, 2.0]), 2), "from 0 to 1"),
        (lambda: factor_since(prices([1.0, np.nan, 2.0]), 1), "positive in Feb 2020"),
        (lambda: equivalent_rate(-100.0, 12), "above -100"),
        (lambda: growing(prices([-1.0, 2.0]), "a rate"), "positive to have a rate"),
    ],
)
def test_refusals(call, match):
    with pytest.raises(ValueError, match=match):
        call()
