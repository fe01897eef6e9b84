"""Revisions: closed forms, planted revisions, and the bias test against its formula."""

import numpy as np
import pandas as pd
import pytest
import scipy.stats
from hypothesis import given
from hypothesis import strategies as st
from statsmodels.regression.linear_model import OLS
from statsmodels.stats.sandwich_covariance import cov_hac

from analytics.revisions import MIN_PRINTS, bias_test, revisions
from analytics.series import Series


def vintage(values, first="2020-01", freq="M"):
    return Series("Prices", pd.Period(first, freq), np.array(values, float), kind="rate")


def monthly_prints(n, bias=0.0, slope=0.0, noise=0.1, seed=1, history=24):
    """Vintages that add one month each; a first print is revised in the vintage after it."""
    rng = np.random.default_rng(seed)
    prints = rng.normal(0.3, 0.5, history + n)
    final = prints + bias + slope * prints + noise * rng.standard_normal(history + n)
    return [
        vintage([*final[: history + k - 1], prints[history + k - 1]]) for k in range(1, n + 1)
    ], (prints[history:-1], final[history:-1])


# Closed forms --------------------------------------------------------------------------------


def test_a_table_worked_by_hand():
    #            Jan  Feb  Mar  Apr  May
    # March      1.0  2.0  3.0
    # April      1.0  2.5  3.5  4.0
    # May             2.5  3.0  4.0  6.0
    found = revisions(
        [vintage([1, 2, 3]), vintage([1, 2.5, 3.5, 4]), vintage([2.5, 3, 4, 6], "2020-02")]
    )
    assert [str(p) for p in found.periods] == [f"2020-0{k}" for k in range(1, 6)]
    assert found.first.tolist() == [1, 2, 3, 4, 6]
    assert found.latest.tolist() == [1, 2.5, 3, 4, 6]
    assert found.revision.tolist() == [0, 0.5, 0, 0, 0]
    assert found.held.tolist() == [2, 3, 3, 2, 1]
    assert found.first_print.tolist() == [False, False, True, True, True]
    assert found.counted.tolist() == [False, False, True, True, False]
    assert (found.n, found.mean, found.mean_absolute) == (2, 0.0, 0.0)


def test_means_are_of_first_prints_that_could_be_revised():
    found = revisions([vintage([9, 1]), vintage([0, 1.5, 2]), vintage([0, 1.5, 1, 7])])
    # Feb: 1 -> 1.5, Mar: 2 -> 1; Jan came along, Apr is new.
    assert found.revision[found.counted].tolist() == [0.5, -1.0]
    assert (found.mean, found.mean_absolute) == (-0.25, 0.75)


def test_of_months_that_come_together_only_the_newest_is_a_first_print():
    found = revisions([vintage([1, 2]), vintage([1, 2, 3, 4]), vintage([1, 2, 3.5, 4.5, 5])])
    assert found.first_print.tolist() == [False, True, False, True, True]
    assert found.counted.tolist() == [False, True, False, True, False]
    assert found.revision.tolist() == [0, 0, 0.5, 0.5, 0]


def test_gaps_and_periods_that_a_vintage_drops():
    found = revisions([vintage([1, np.nan, 3]), vintage([1, 2, 4, 5, np.nan, 6])])
    assert found.first.tolist()[:4] == [1, 2, 3, 5]
    assert np.isnan([found.first[4], found.latest[4], found.revision[4]]).all()
    assert found.held.tolist() == [2, 1, 2, 1, 0, 1]
    assert found.counted.tolist() == [False, False, True, False, False, False]
    dropped = revisions([vintage([1, 2, 3]), vintage([2.5, 3], "2020-02")])
    assert (dropped.latest[0], dropped.revision[0], dropped.counted[0]) == (1, 0, False)


@pytest.mark.parametrize(("freq", "first"), [("M", "2020-01"), ("Q-DEC", "2020Q1"), ("Y", "2020")])
def test_every_calendar(freq, first):
    found = revisions([vintage([1, 2], first, freq), vintage([1, 3, 4], first, freq)])
    assert found.periods.freqstr.startswith(freq[0])
    assert found.mean == 1.0


def test_planted_revisions_come_back():
    vintages, (prints, final) = monthly_prints(60, bias=0.2)
    found = revisions(vintages)
    assert found.n == 59
    np.testing.assert_allclose(found.first[found.counted], prints)
    np.testing.assert_allclose(found.latest[found.counted], final)
    assert found.mean == pytest.approx(np.mean(final - prints))
    assert found.mean_absolute == pytest.approx(np.mean(np.abs(final - prints)))


@given(
    st.lists(
        st.lists(st.one_of(st.floats(-50, 50), st.just(np.nan)), min_size=1, max_size=8).filter(
            lambda v: not np.isnan(v).all()
        ),
        min_size=2,
        max_size=5,
    ),
    st.floats(-5, 5),
)
def test_adding_a_constant_to_every_vintage_changes_no_revision(tables, shift):
    one = revisions([vintage(v) for v in tables])
    other = revisions([vintage(np.array(v) + shift) for v in tables])
    np.testing.assert_allclose(other.revision, one.revision, atol=1e-12)
    assert other.counted.tolist() == one.counted.tolist()
    assert (one.counted <= one.first_print).all()
    assert (one.held[one.counted] >= 2).all()
    # Plain twin: period by period.
    for place, period in enumerate(one.periods):
        values = [
            v.values[period.ordinal - v.first.ordinal]
            for v in map(vintage, tables)
            if v.first <= period <= v.last
        ]
        known = [value for value in values if not np.isnan(value)]
        if known:
            assert (one.first[place], one.latest[place]) == (known[0], known[-1])
        else:
            assert np.isnan(one.first[place])


def test_results_cannot_be_written_to():
    found = revisions([vintage([1, 2]), vintage([1, 3, 4])])
    for name in ("first", "latest", "revision", "held", "first_print", "counted"):
        with pytest.raises(ValueError, match="read-only"):
            getattr(found, name)[0] = 0


def test_errors():
    with pytest.raises(ValueError, match="vintages must be two or more, but got 1"):
        revisions([vintage([1, 2])])
    with pytest.raises(ValueError, match="must have one calendar, but got monthly and quarterly"):
        revisions([vintage([1]), vintage([1], "2020Q1", "Q-DEC")])


# The bias test -------------------------------------------------------------------------------


def by_formula(first, revision, lags):
    """Newey and West (1987), written out: estimates, covariance and F."""
    n = first.size
    x = np.column_stack([np.ones(n), first])
    bread = np.linalg.inv(x.T @ x)
    estimate = bread @ x.T @ revision
    scores = x * (revision - x @ estimate)[:, None]
    meat = scores.T @ scores
    for lag in range(1, lags + 1):
        cross = scores[lag:].T @ scores[:-lag]
        meat = meat + (1 - lag / (lags + 1)) * (cross + cross.T)
    covariance = bread @ meat @ bread * n / (n - 2)
    return estimate, covariance, estimate @ np.linalg.solve(covariance, estimate) / 2


@pytest.mark.parametrize(("n", "lags"), [(24, 2), (36, 3), (60, 3), (100, 4), (240, 4), (300, 5)])
def test_the_bias_test_is_the_formula_of_newey_and_west(n, lags):
    rng = np.random.default_rng(n)
    first = rng.standard_normal(n).cumsum() / 5
    revision = 0.1 + 0.05 * first + np.convolve(rng.standard_normal(n + 2), [1, 0.6, 0.3], "valid")
    found = bias_test(first, revision)
    estimate, covariance, statistic = by_formula(first, revision, lags)
    assert (found.n, found.lags) == (n, lags)
    np.testing.assert_allclose((found.intercept, found.slope), estimate, rtol=1e-9)
    errors = np.sqrt(np.diag(covariance))
    np.testing.assert_allclose((found.se_intercept, found.se_slope), errors, rtol=1e-9)
    assert found.statistic == pytest.approx(statistic, rel=1e-9)
    assert found.p == pytest.approx(scipy.stats.f.sf(statistic, 2, n - 2), rel=1e-8)


def test_the_bias_test_agrees_with_statsmodels_taken_directly():
    vintages, (prints, final) = monthly_prints(90, slope=-0.3)
    found = bias_test(prints, final - prints)
    fitted = OLS(final - prints, np.column_stack([np.ones(89), prints])).fit()
    covariance = cov_hac(fitted, nlags=found.lags, use_correction=True)
    np.testing.assert_allclose(
        (found.se_intercept, found.se_slope), np.sqrt(np.diag(covariance)), rtol=1e-9
    )
    np.testing.assert_allclose((found.intercept, found.slope), fitted.params, rtol=1e-9)
    table = revisions(vintages)
    same = bias_test(table.first[table.counted], table.revision[table.counted])
    assert same.p == pytest.approx(found.p)


def test_it_is_the_regression_of_mincer_and_zarnowitz():
    _, (prints, final) = monthly_prints(80, bias=0.05, slope=-0.1)
    found = bias_test(prints, final - prints)
    line = np.polynomial.Polynomial.fit(prints, final, 1).convert().coef  # latest on first print
    np.testing.assert_allclose((found.intercept, 1 + found.slope), line, rtol=1e-9)


def test_a_planted_bias_is_found_and_no_bias_is_mostly_not():
    rejected = {}
    for name, bias, slope in (("none", 0.0, 0.0), ("mean", 0.1, 0.0), ("slope", 0.0, -0.3)):
        rejected[name] = 0
        for seed in range(200):
            _, (prints, final) = monthly_prints(61, bias=bias, slope=slope, seed=seed)
            rejected[name] += bias_test(prints, final - prints).p < 0.05
    # 5 % of 200 is 10; Newey-West on 60 first prints rejects a little more often.
    assert 4 <= rejected["none"] <= 26
    assert rejected["mean"] == rejected["slope"] == 200


@pytest.mark.parametrize(
    ("first", "revision", "said"),
    [
        (np.arange(23.0), np.arange(23.0), f"at least {MIN_PRINTS} first prints, but got 23"),
        (np.arange(24.0), np.arange(25.0), "must have the same length"),
        (np.ones(24), np.arange(24.0), "first prints must vary for a test of bias, but all are 1"),
        (np.arange(24.0), np.zeros(24), "revisions must vary for a test of bias, but all are 0"),
        (np.arange(24.0), np.full(24, 0.1), "revisions must vary for a test of bias"),
        (np.arange(24.0), 0.5 * np.arange(24.0), "must vary about their line"),
        (np.arange(24.0), np.full(24, np.nan), "revisions must be finite"),
    ],
)
def test_the_bias_test_refuses_in_a_sentence(first, revision, said):
    with pytest.raises(ValueError, match=said):
        bias_test(first, revision)
