"""Growth rates and lags of packaged real series.

Figures said to be printed come from the office or paper named. The others are own measurements
on the packaged data, kept to the digits given, which a change of months, span or sign would move.
"""

from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.rates import growth_rate
from analytics.series import PERIODS_PER_YEAR, Series, align, period_code
from analytics.surface import lag_surface
from tests.outside.datasets import (
    australian_cpi,
    us_core_cpi,
    us_cpi_1947,
    us_cpi_2009,
    us_cpi_mishkin,
    us_macro_1950,
    us_macro_1959,
    us_money_1950,
)


def yearly_rate(series: Series) -> Series:
    """The 12-month or four-quarter rate in percent."""
    return growth_rate(series, span=PERIODS_PER_YEAR[series.frequency], formula="percent")


def periods_where(series: Series, which: np.ndarray) -> list[str]:
    return [period_code(period) for period in series.periods[which]]


def value_at(series: Series, code: str) -> float:
    period = pd.Period(code.replace("-Q", "Q"), series.first.freq)
    return float(series.between(period, period).values[0])


# Prices against the releases of statistical offices


def test_bls_12_month_rates_of_2010_and_2011_to_the_printed_digit():
    # BLS table of 12-month changes, Jan to Nov of both years, against Stat2Data's Inflation.
    printed = {
        2010: [2.6, 2.1, 2.3, 2.2, 2.0, 1.1, 1.2, 1.1, 1.1, 1.2, 1.1],
        2011: [1.6, 2.1, 2.7, 3.2, 3.6, 3.6, 3.6, 3.8, 3.9, 3.5, 3.4],
    }
    rates = yearly_rate(us_cpi_2009())
    for year, row in printed.items():
        months = rates.between(pd.Period(f"{year}-01", "M"), pd.Period(f"{year}-11", "M"))
        assert months.values.round(1).tolist() == row


def test_one_month_rates_are_the_ones_that_stat2data_carries():
    own = growth_rate(us_cpi_2009(), formula="percent")
    packaged = us_cpi_2009("CPIPctDiff").between(own.first)
    np.testing.assert_allclose(own.values, packaged.values, rtol=0, atol=5e-4)


def test_stat2data_extremes_negative_months_and_whole_sample():
    # Own measurement. December rates are printed by the BLS as 1.5, 3.0, 1.7, 1.5, 0.8, 0.7, 2.1.
    prices = us_cpi_2009()
    rates = yearly_rate(prices)
    december = [value_at(rates, f"{year}-12") for year in range(2010, 2017)]
    measured = [1.4957, 2.9624, 1.7410, 1.5017, 0.7565, 0.7295, 2.0746]
    np.testing.assert_allclose(december, measured, rtol=0, atol=1e-4)
    assert np.round(december, 1).tolist() == [1.5, 3.0, 1.7, 1.5, 0.8, 0.7, 2.1]
    assert value_at(rates, "2015-04") == rates.values.min() == pytest.approx(-0.1995, abs=5e-5)
    assert value_at(rates, "2011-09") == rates.values.max() == pytest.approx(3.8684, abs=5e-5)
    below = ["2015-01", "2015-02", "2015-03", "2015-04", "2015-05", "2015-09"]
    assert periods_where(rates, rates.values < 0) == below
    whole = growth_rate(prices, span=95, formula="percent").values
    a_year = growth_rate(prices, span=95, formula="percent", annualised=True).values
    assert whole == pytest.approx([14.3453], abs=5e-5)
    assert a_year == pytest.approx([1.70771], abs=5e-6)


def test_australian_index_is_the_one_in_the_abs_appendix():
    # ABS 6401.0, September quarter 2012, appendix on the new reference period, 2011-12 = 100.
    prices = australian_cpi().between(pd.Period("2011Q1", "Q"), pd.Period("2012Q2", "Q"))
    assert prices.values.tolist() == [98.3, 99.2, 99.8, 99.8, 99.9, 100.4]


@pytest.mark.parametrize(
    ("quarter", "one_quarter", "four_quarters"),
    [("2014-Q3", 0.5, 2.3), ("2014-Q2", 0.5, 3.0), ("2013-Q2", 0.4, 2.4), ("2013-Q1", 0.4, 2.5)],
)
def test_australian_rates_are_the_ones_released(quarter, one_quarter, four_quarters):
    # ABS 6401.0, releases of September 2014 and June 2013. The 0.4 of 2013 Q1 is own arithmetic.
    prices = australian_cpi()
    quarterly = growth_rate(prices, formula="percent")
    assert value_at(quarterly, quarter) == pytest.approx(one_quarter, abs=0.05)
    assert value_at(yearly_rate(prices), quarter) == pytest.approx(four_quarters, abs=0.05)


def test_australian_step_of_july_2000_stays_in_the_four_quarter_rate_for_four_quarters():
    # A sales tax came in on 1 July 2000. Own measurement.
    rates = yearly_rate(australian_cpi())
    around = [value_at(rates, quarter) for quarter in ("2000-Q2", "2000-Q3", "2001-Q2", "2001-Q3")]
    np.testing.assert_allclose(around, [3.0837, 6.1135, 6.1254, 2.4691], rtol=0, atol=5e-5)
    assert max(rates.values) == around[2]


# Extremes, own measurement on the packaged series

EXTREMES = [
    (us_core_cpi, (), ("1980-06", 13.6045), ("2010-10", 0.6027), 1e-4),
    (us_cpi_1947, (), ("1980-03", 14.59227), ("1949-08", -2.98813), 1e-5),
    (us_cpi_mishkin, (), ("1980-03", 14.7564), ("1954-12", -0.7435), 1e-4),
    (us_macro_1959, ("m1",), ("1986-Q4", 17.5089), ("1997-Q1", -5.4232), 1e-4),
    (us_macro_1950, ("cpi",), ("1980-Q1", 14.6820), ("1955-Q2", -0.7435), 1e-4),
    (us_macro_1950, ("m1",), ("1986-Q4", 16.9440), ("1997-Q1", -4.4563), 1e-4),
    (us_money_1950, ("deflator",), ("1975-Q1", 10.9827), ("1953-Q4", 0.2731), 1e-4),
    (us_money_1950, ("m1",), ("1979-Q3", 14.6460), ("1960-Q2", -0.6490), 1e-4),
]


@pytest.mark.parametrize(("load", "columns", "highest", "lowest", "digit"), EXTREMES)
def test_highest_and_lowest_yearly_rate_and_when(load, columns, highest, lowest, digit):
    rates = yearly_rate(load(*columns))
    for place, (period, value) in (
        (rates.values.argmax(), highest),
        (rates.values.argmin(), lowest),
    ):
        assert period_code(rates.periods[place]) == period
        assert rates.values[place] == pytest.approx(value, abs=digit)


def test_core_prices_in_summary():
    prices = us_core_cpi()
    rates, months = yearly_rate(prices), growth_rate(prices, formula="percent").values
    assert value_at(rates, "2018-11") == rates.values[-1] == pytest.approx(2.2420, abs=1e-4)
    assert rates.values.mean() == pytest.approx(3.68172, abs=1e-5)
    assert np.median(rates.values) == pytest.approx(2.70092, abs=1e-5)
    assert (months.size, (months < 0).sum(), (months == 0).sum()) == (742, 9, 72)


def test_us_prices_from_1947_in_summary():
    # The last 12-month rate is printed by the BLS as 3.3 for Dec 2004, not adjusted.
    prices = us_cpi_1947()
    rates = yearly_rate(prices)
    assert (rates.values.size, rates.values[-1].round(4)) == (684, 3.3514)
    assert rates.values.mean() == pytest.approx(3.862329, abs=1e-6)
    assert np.median(rates.values) == pytest.approx(3.131677, abs=1e-6)
    assert rates.values.std(ddof=1) == pytest.approx(3.088232, abs=1e-6)
    for month, value in (("1980-04", 14.5892), ("1980-05", 14.4258)):
        assert value_at(rates, month) == pytest.approx(value, abs=5e-5)
    negative = periods_where(rates, rates.values < 0)
    runs = [("1949-05", "1950-06"), ("1954-09", "1955-08")]
    assert negative == [
        str(month) for run in runs for month in pd.period_range(run[0], run[1], freq="M")
    ]
    assert len(negative) == 26
    assert (rates.values == 0).sum() == 1


def test_us_one_month_prices_from_1947():
    months = growth_rate(us_cpi_1947(), formula="percent")
    values = months.values
    assert (values.size, (values < 0).sum(), (values == 0).sum()) == (695, 68, 39)
    assert value_at(months, "1947-09") == values.max() == pytest.approx(1.9643, abs=5e-5)
    assert value_at(months, "1949-07") == values.min() == pytest.approx(-0.9197, abs=5e-5)


def test_us_prices_from_1947_over_longer_spans():
    prices = us_cpi_1947()
    three_years = growth_rate(prices, span=36, formula="percent")
    assert value_at(three_years, "1981-09") == three_years.values.max()
    assert three_years.values.max() == pytest.approx(40.0, abs=1e-5)
    quarter = growth_rate(prices, span=3, formula="percent", annualised=True)
    assert value_at(quarter, "1951-02") == quarter.values.max() == pytest.approx(21.5506, abs=5e-5)
    (whole,) = growth_rate(prices, span=695, formula="percent").values
    (a_year,) = growth_rate(prices, span=695, formula="percent", annualised=True).values
    assert 1.0 + whole / 100.0 == pytest.approx(8.901304, abs=1e-6)
    assert a_year == pytest.approx(3.846878, abs=1e-6)


def test_money_in_macrodata_in_summary():
    rates = yearly_rate(us_macro_1959("m1"))
    assert (rates.values < 0).sum() == 19
    assert value_at(rates, "2009-Q3") == rates.values[-1] == pytest.approx(13.5078, abs=1e-4)


# Money and prices

MONEY_AND_PRICES = {
    "macrodata": lambda: (us_macro_1959("m1"), us_macro_1959("cpi")),
    "USMacroG": lambda: (us_macro_1950("m1"), us_macro_1950("cpi")),
    "USMoney": lambda: (us_money_1950("m1"), us_money_1950("deflator")),
}


@pytest.mark.parametrize(
    ("data", "shift", "at_peak", "at_zero"),
    [
        ("macrodata", 8, 0.3722, 0.0858),
        ("USMacroG", 7, 0.3942, 0.2411),
        ("USMoney", 8, 0.7061, None),
    ],
)
def test_us_money_leads_prices_by_more_than_a_year(data, shift, at_peak, at_zero):
    # Batini and Nelson (2001) report for the US and the UK, 1953 to 2001, that over a year passes
    # before monetary actions have their peak effect on inflation. The correlations are own
    # measurements. The definition that gives their digits is percent growth over four quarters
    # (a span of 4, not a window of 4), shifts 0 to 16, each on all the pairs that it has.
    money, prices = (yearly_rate(series) for series in MONEY_AND_PRICES[data]())
    pair = align(money, prices)
    surface = lag_surface(pair.driver.values, pair.response.values, windows=[1], shifts=range(17))
    assert surface.peak() == (1, shift)
    assert shift > 4
    assert surface.correlation[surface.cell(1, shift)] == pytest.approx(at_peak, abs=1e-4)
    assert surface.pairs[surface.cell(1, shift)] == pair.n - shift
    if at_zero is not None:
        assert surface.correlation[surface.cell(1, 0)] == pytest.approx(at_zero, abs=1e-4)


@pytest.mark.parametrize(
    ("data", "shift", "at_peak"),
    [("macrodata", 8, 0.3827), ("USMacroG", 7, 0.4035), ("USMoney", 8, 0.7048)],
)
def test_a_window_of_four_log_rates_is_the_log_rate_over_four_quarters(data, shift, at_peak):
    # The page's own definition: means of one-quarter log rates over a window. It is another
    # number than the percent form above, with the same shift. Own measurement, and pandas' own
    # correlation of the shifted series as judge of every cell.
    money, prices = MONEY_AND_PRICES[data]()
    pair = align(growth_rate(money), growth_rate(prices))
    surface = lag_surface(
        pair.driver.values, pair.response.values, windows=[4], shifts=range(-16, 17)
    )
    leads = surface.shifts >= 0
    assert surface.shifts[leads][surface.correlation[0, leads].argmax()] == shift
    assert surface.correlation[surface.cell(4, shift)] == pytest.approx(at_peak, abs=1e-4)
    money_year = np.log(money.to_frame().squeeze()).diff(4)
    prices_year = np.log(prices.to_frame().squeeze()).diff(4)
    judged = [money_year.corr(prices_year.shift(-lag)) for lag in range(-16, 17)]
    np.testing.assert_allclose(surface.correlation[0], judged, rtol=0, atol=1e-11)


@pytest.mark.parametrize(
    ("data", "shift", "correlation"),
    [("macrodata", -13, 0.4214), ("USMacroG", -12, 0.4811), ("USMoney", -10, 0.7126)],
)
def test_with_both_sides_open_prices_lead_money_at_least_as_much(data, shift, correlation):
    # Own measurement, and a reason for caution: the lead of money above is the peak of one side
    # only. Swapping the roles must mirror the shifts and leave every correlation as it was.
    money, prices = (yearly_rate(series).values for series in MONEY_AND_PRICES[data]())
    both_sides = lag_surface(money, prices, windows=[1], shifts=range(-16, 17))
    assert both_sides.peak() == (1, shift)
    assert both_sides.correlation.max() == pytest.approx(correlation, abs=1e-4)
    swapped = lag_surface(prices, money, windows=[1], shifts=range(-16, 17))
    assert swapped.peak() == (1, -shift)
    np.testing.assert_allclose(
        swapped.correlation[0], both_sides.correlation[0, ::-1], rtol=0, atol=1e-12
    )


@pytest.mark.parametrize("lead", [-18, -1, 0, 5, 18, 24])
@pytest.mark.parametrize("factor", [1.0, 0.4, -2.0])
def test_core_prices_moved_in_time_are_found_where_they_were_put(lead, factor):
    # A real series as response; the driver is the same series `lead` months earlier, so that
    # the truth is known: r is 1 or -1, the slope 1/factor, and a positive lead is a positive shift.
    response = growth_rate(us_core_cpi())
    driver = replace(response, first=response.first - lead, values=factor * response.values)
    pair = align(driver, response)
    assert (pair.n, pair.lost_driver) == (742 - abs(lead), abs(lead))
    surface = lag_surface(
        pair.driver.values, pair.response.values, windows=[1, 3, 12], shifts=range(-36, 37)
    )
    found = surface.shifts[np.abs(surface.correlation).argmax(axis=1)]
    assert found.tolist() == [lead] * 3
    for window in (1, 3, 12):
        cell = surface.cell(window, lead)
        assert surface.correlation[cell] == pytest.approx(np.sign(factor), abs=1e-12)
        assert surface.slope[cell] == pytest.approx(1.0 / factor, rel=1e-10)
