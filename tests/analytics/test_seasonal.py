"""Seasonal adjustment against a planted season, and series brought to a lower frequency."""

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from statsmodels.tsa.seasonal import STL

from analytics.seasonal import at_frequency, seasonal_adjustment
from analytics.series import Series
from analytics.stable_season import season_test

START = pd.Period("1990-01", "M")
PATTERN = np.array([2.0, -1, 0, 1, 0, -2, -1, 0, 1, 0, -1, 1])


def planted(n=240, season=1.0, noise=0.3, seed=1):
    rng = np.random.default_rng(seed)
    plain = 100 * np.exp(np.cumsum(rng.normal(0.3, noise, n)) / 100)
    return plain, Series(
        "Prices", START, plain * np.exp(season * np.resize(PATTERN, n) / 100), "index", "", "no"
    )


def test_a_planted_season_is_taken_out():
    plain, series = planted()
    done = seasonal_adjustment(series)
    off = 100 * np.log(done.adjusted.values / plain)
    assert np.abs(off).max() < 1.0 and off.std() < 0.25  # the season itself has 1.08
    assert np.corrcoef(done.season.values, np.resize(PATTERN, 240))[0, 1] > 0.97
    assert season_test(series).pvalue < 1e-20
    assert season_test(done.adjusted).pvalue > 0.05


def test_season_and_adjusted_make_up_the_series():
    _, series = planted()
    done = seasonal_adjustment(series)
    product = done.adjusted.values * np.exp(done.season.values / 100)
    np.testing.assert_allclose(product, series.values, rtol=1e-13)


def test_it_is_the_robust_decomposition_of_statsmodels_on_logs():
    # statsmodels.tsa.seasonal.STL, itself held to the original Fortran program by its own tests.
    _, series = planted()
    theirs = STL(np.log(series.values), period=12, robust=True).fit().seasonal
    np.testing.assert_allclose(seasonal_adjustment(series).season.values, 100 * theirs, atol=1e-6)


def test_one_wild_month_leaves_the_season_alone():
    _, series = planted()
    wild = np.array(series.values)
    wild[101] *= 1.2
    with_it = seasonal_adjustment(Series("Prices", START, wild)).season.values
    gap = with_it - seasonal_adjustment(series).season.values
    assert np.abs(gap).max() < 0.5  # the wild month is 18 percent


def test_what_was_done_is_said():
    _, series = planted()
    done = seasonal_adjustment(series).adjusted
    assert (done.adjustment, done.kind) == ("yes", "index")
    assert done.source == "Prices; adjusted here by STL, not official"


def test_a_rate_is_adjusted_as_it_is():
    rate = Series("Rate", START, np.resize(PATTERN, 120), "rate", "percent")
    done = seasonal_adjustment(rate)
    np.testing.assert_allclose(done.adjusted.values, 0.0, atol=1e-6)
    assert done.season.unit == "percent"


@pytest.mark.parametrize(
    ("series", "match"),
    [
        (Series("Y", pd.Period("2000", "Y"), np.ones(30)), "'Y' is annual"),
        (Series("S", START, np.ones(59)), "at least 60 months to be adjusted, but has 59"),
        (Series("G", START, np.r_[1.0, np.nan, np.ones(70)]), "but Feb 1990 is missing"),
        (Series("Z", START, np.r_[1.0, 0.0, np.ones(70)]), "but Feb 1990 is 0"),
    ],
)
def test_what_cannot_be_adjusted(series, match):
    with pytest.raises(ValueError, match=match):
        seasonal_adjustment(series)


# Lower frequency -----------------------------------------------------------------------------


@given(st.integers(0, 30), st.integers(30, 80), st.sampled_from(["quarterly", "annual"]))
def test_it_equals_resampling_of_whole_periods(lead, n, frequency):
    values = np.random.default_rng(n).normal(size=n)
    series = Series("Prices", START + lead, values)
    letter = {"quarterly": "Q-DEC", "annual": "Y-DEC"}[frequency]
    groups = pd.Series(values, index=series.periods).groupby(series.periods.asfreq(letter))
    whole = groups.size() == {"quarterly": 3, "annual": 12}[frequency]
    for by, theirs in (("average", groups.mean()), ("last", groups.last())):
        done = at_frequency(series, frequency, by)
        expected = theirs[whole]
        assert list(done.periods) == list(expected.index)
        np.testing.assert_allclose(done.values, expected.to_numpy())


def test_quarters_to_years_and_a_gap():
    quarters = Series("Output", pd.Period("2000Q1", "Q"), [1, 2, 3, 4, 5, np.nan, 7, 8, 9, 9, 9, 9])
    done = at_frequency(quarters, "annual")
    assert done.values == pytest.approx([2.5, np.nan, 9], nan_ok=True)
    assert done.source == "Output; annual by average of 4 quarters"
    assert at_frequency(quarters, "quarterly") is quarters


@pytest.mark.parametrize(
    ("ask", "match"),
    [
        (("monthly", "average"), "not be higher than that of 'Output', quarterly, but got monthly"),
        (("annual", "first"), "by must be average or last, but got 'first'"),
        (("annual", "last"), "must have a whole year, but has none"),
    ],
)
def test_what_cannot_be_brought_down(ask, match):
    quarters = Series("Output", pd.Period("2000Q2", "Q"), [1.0, 2.0, 3.0])
    with pytest.raises(ValueError, match=match):
        at_frequency(quarters, *ask)
