"""Forecast tests against other libraries, published tables and closed forms."""

import numpy as np
import pytest
from scipy.stats import chi2, chi2_contingency, norm
from statsmodels.stats.proportion import proportion_confint
from statsmodels.tsa.ar_model import ar_select_order
from statsmodels.tsa.arima_process import ArmaProcess
from statsmodels.tsa.stattools import diebold_mariano_test

from analytics.autoregression import Autoregression, autoregression
from analytics.benchmarks import autoregressive, no_change
from analytics.forecast_tests import (
    christoffersen,
    diebold_mariano,
    interval_coverage,
    kupiec,
    small_sample_factor,
    theil_u2,
    wilson,
)
from analytics.intervals import Fan
from analytics.outlook_target import outlook_target
from analytics.rates import growth_rate
from tests.outside.datasets import us_cpi_1947


def numbers(text):
    return np.array(text.split(), dtype=float)


# Outcome and two forecasts of statsmodels 0.15's own test of its Diebold-Mariano test
# (tsa/tests/test_stattools.py, test_diebold_mariano_test), rounded to nine decimals.
OUTCOME = numbers(
    """0.790529197 1.316542321 2.629194824 2.274163381 2.335089790 4.309556161 3.200861660
    3.027962089 2.567645423 0.834252775 2.098567146 3.408247062 2.969988297 3.673258271
    3.460929204"""
)
FIRST = numbers(
    """0.982438713 3.347555831 1.813244095 4.501884323 0.993073451 0.988116817 3.783488357
    2.498189379 4.856641325 1.741249739 3.463732388 3.101483833 3.041138479 3.250057551
    3.199491151"""
)
SECOND = numbers(
    """0.800255178 2.355542839 2.501710757 2.970984026 2.031947528 2.044069318 1.869027148
    2.541558191 3.076287970 3.420942734 3.952907046 3.036772850 3.898343203 4.397338511
    4.699775885"""
)


@pytest.mark.parametrize(
    ("n", "horizon", "factor"),
    [
        (16, 1, 0.968246),
        (50, 1, 0.989949),
        (50, 4, 0.929946),
        (96, 2, 0.984361),
        (100, 12, 0.884986),
    ],
)
def test_small_sample_factor(n, horizon, factor):
    """sqrt((T + 1 - 2h + h(h - 1)/T) / T): formula as in the statsmodels documentation."""
    assert small_sample_factor(n, horizon) == pytest.approx(factor, abs=1e-6)


def squared():
    return (OUTCOME - FIRST) ** 2, (OUTCOME - SECOND) ** 2


def test_diebold_mariano_on_the_data_of_statsmodels():
    """Recomputed with statsmodels 0.15; its Bartlett weights, and lags given, not its default."""
    first, second = squared()
    assert (first - second).mean() == pytest.approx(0.616842, abs=1e-6)
    assert first.mean() == pytest.approx(2.101059, abs=1e-6)
    assert second.mean() == pytest.approx(1.484217, abs=1e-6)
    plain = diebold_mariano(first, second)
    assert plain.factor == pytest.approx(0.966092, abs=1e-6)
    assert plain.statistic == pytest.approx(0.788395, abs=1e-6)
    assert plain.p == pytest.approx(0.443611, abs=1e-6)
    assert plain.statistic / plain.factor == pytest.approx(0.816067, abs=1e-6)
    three = diebold_mariano(first, second, horizon=3, kernel="bartlett")
    assert three.factor == pytest.approx(0.832666, abs=1e-6)
    assert three.statistic == pytest.approx(0.683606, abs=1e-6)
    assert three.p == pytest.approx(0.505382, abs=1e-6)
    assert three.statistic / three.factor == pytest.approx(0.820984, abs=1e-6)
    # Its default, max(h - 1, ceil(n^(1/3))) = 3 lags, is another test.
    default = diebold_mariano(first, second, lags=3, kernel="bartlett")
    assert default.statistic / default.factor == pytest.approx(0.750574, abs=1e-6)
    absolute = diebold_mariano(
        np.abs(OUTCOME - FIRST), np.abs(OUTCOME - SECOND), lags=3, kernel="bartlett"
    )
    assert absolute.statistic / absolute.factor == pytest.approx(0.471541, abs=1e-6)


@pytest.mark.parametrize("horizon", [1, 3, 12])
def test_diebold_mariano_equals_statsmodels_on_other_errors(horizon):
    outcome, first, second = np.random.default_rng(horizon).standard_normal((3, 120))
    theirs = diebold_mariano_test(
        outcome, first, second, lags=horizon - 1, harvey_adj=True, horizon=horizon
    )
    mine = diebold_mariano(
        (outcome - first) ** 2, (outcome - second) ** 2, horizon=horizon, kernel="bartlett"
    )
    assert mine.statistic == pytest.approx(theirs.statistic, abs=1e-10)
    assert mine.p == pytest.approx(theirs.pvalue, abs=1e-10)


def test_rectangular_weights_are_the_textbook_sum():
    """Diebold and Mariano (1995): g_0 + 2 (g_1 + .. + g_(h-1)), written out for h = 3."""
    first, second = squared()
    d = first - second
    n, away = d.size, d - d.mean()
    variance = sum((1 if k == 0 else 2) * float(away[k:] @ away[: n - k]) / n for k in range(3))
    found = diebold_mariano(first, second, horizon=3)
    assert found.kernel == "rectangular"
    assert found.statistic / found.factor == pytest.approx(d.mean() / np.sqrt(variance / n))


def test_a_negative_variance_gives_way_to_bartlett():
    """Alternating differences: g_0 + 2 g_1 is below zero (fact from memory; computed here)."""
    first = np.where(np.arange(30) % 2, 1.0, -0.9)
    found = diebold_mariano(first, np.zeros(30), horizon=2)
    assert found.kernel == "bartlett"
    assert np.isfinite(found.statistic)


def test_the_naive_forecast_of_atkeson_and_ohanian():
    """Inflation over the next year = over the last one (Minneapolis Fed QR 25(1), 2001).

    On US prices 1947-2004 (R package AER): the forecast made in Dec 1980 is the Dec/Dec rate,
    12.3537 %, and it missed the next year by what prices did.
    """
    prices = us_cpi_1947()
    growth = growth_rate(prices, formula="percent")
    at = (1980 - 1947) * 12 + 11
    target = outlook_target("yearly", window=12, compounding="percent")
    known = growth.values[:at]  # the first rate belongs to the second month
    forecast = no_change(known, horizon=12, target=target)
    assert forecast[11] == pytest.approx(12.3537, abs=1e-4)
    came = target.observed(growth.values)[at + 11]
    assert came == pytest.approx(100 * (prices.values[at + 12] / prices.values[at] - 1))


def test_theil_u2_of_naive_and_perfect_forecasts():
    """Exactly 1 and exactly 0 (Theil 1966; formula from memory)."""
    rates = growth_rate(us_cpi_1947(), span=12).values
    rates = rates[np.abs(rates) > 0.05]
    assert theil_u2(rates[:-1], rates[1:], rates[:-1]) == pytest.approx(1.0, abs=1e-12)
    assert theil_u2(rates[1:], rates[1:], rates[:-1]) == 0.0
    assert np.isnan(theil_u2([1.0], [1.0], [0.0]))


# Kupiec (1995), table of accepted numbers of failures at 5 %; from memory, all recomputed. Its
# first cell prints N < 7, but no failure in 255 has a ratio of 5.13.
ACCEPTED = {
    255: {0.01: (1, 6), 0.025: (3, 11), 0.05: (7, 20), 0.075: (12, 27), 0.1: (17, 35)},
    510: {0.01: (2, 10), 0.025: (7, 20), 0.05: (17, 35), 0.075: (28, 50), 0.1: (39, 64)},
    1000: {0.01: (5, 16), 0.025: (16, 35), 0.05: (38, 64), 0.075: (60, 91), 0.1: (82, 119)},
}


@pytest.mark.parametrize("n", ACCEPTED)
def test_kupiec_accepts_what_his_table_accepts(n):
    for rate, (least, most) in ACCEPTED[n].items():
        kept = [misses for misses in range(n) if kupiec(misses, n, rate)[0] < chi2.ppf(0.95, 1)]
        assert (kept[0], kept[-1]) == (least, most)
        assert len(kept) == most - least + 1


@pytest.mark.parametrize(
    ("misses", "n", "rate", "ratio", "p"),
    [
        (5, 255, 0.01, 1.857300, 0.172937),
        (7, 255, 0.01, 5.316341, 0.021126),
        (12, 255, 0.01, 18.629761, None),
        (15, 255, 0.05, 0.396531, 0.528886),
        (0, 252, 0.01, 5.065369, None),
    ],
)
def test_kupiec_ratios(misses, n, rate, ratio, p):
    """Recomputed from the formula."""
    found = kupiec(misses, n, rate)
    assert found[0] == pytest.approx(ratio, abs=1e-5)
    assert p is None or found[1] == pytest.approx(p, abs=1e-5)


@pytest.mark.parametrize(
    ("counts", "ratio", "p"),
    [
        ((80, 10, 8, 2), 0.587173, 0.443515),
        ((228, 12, 12, 3), 3.796829, 0.051350),
        ((200, 25, 25, 5), 0.719268, 0.396384),
    ],
)
def test_christoffersen_equals_the_g_test_of_the_transitions(counts, ratio, p):
    """scipy's chi2_contingency by log-likelihood without correction gives the same ratio."""
    table = np.reshape(counts, (2, 2))
    found = christoffersen(table)
    assert found == pytest.approx((ratio, p), abs=1e-6)
    theirs = chi2_contingency(table, correction=False, lambda_="log-likelihood")
    assert found == pytest.approx((theirs.statistic, theirs.pvalue), abs=1e-10)


def test_the_two_ratios_add_up():
    """Conditional coverage = both together on chi-square(2); 5 % points 3.841 and 5.991."""
    inside = np.random.default_rng(2).random(200) > 0.12
    found = interval_coverage(inside, 0.9)
    both = found.kupiec + found.christoffersen
    assert found.p_both == pytest.approx(chi2.sf(both, 2))
    assert chi2.ppf(0.95, [1, 2]) == pytest.approx([3.841, 5.991], abs=5e-4)
    misses = ~inside
    table = [
        [np.sum(~misses[:-1] & ~misses[1:]), np.sum(~misses[:-1] & misses[1:])],
        [np.sum(misses[:-1] & ~misses[1:]), np.sum(misses[:-1] & misses[1:])],
    ]
    assert found.christoffersen == pytest.approx(christoffersen(table)[0])


@pytest.mark.parametrize(("hits", "n"), [(0, 10), (3, 10), (50, 60), (12, 12)])
def test_wilson_equals_statsmodels(hits, n):
    theirs = proportion_confint(hits, n, alpha=0.05, method="wilson")
    assert wilson(hits, n) == pytest.approx(theirs, abs=1e-12)


def test_a_normal_interval_on_laplace_errors_covers_too_little():
    """1 - exp(-sqrt(2) 1.959964) = 93.7451 % (closed form), by a fan of endless freedom."""
    one = np.array([1.0])
    fan = Fan(
        ahead=np.array([1]),
        centre=np.zeros(1),
        scale=one,
        freedom=np.array([np.inf]),
        errors=np.array([999]),
        levels=(),
        measured=np.empty((0, 1)),
        judged=np.array([0]),
    )
    low, high = fan.band(0.95)
    assert high[0] == pytest.approx(norm.ppf(0.975), abs=1e-9)
    inside = 1.0 - np.exp(-np.sqrt(2.0) * high[0])
    assert 100 * inside == pytest.approx(93.7451, abs=1e-4)
    assert fan.rank(low)[0] == pytest.approx(0.025)


def test_iterated_autoregression_equals_statsmodels():
    """Forecasts of given coefficients by statsmodels' impulse responses of the same process."""
    coefficients = np.array([0.5, -0.2, 0.1])
    history = np.random.default_rng(4).standard_normal(60)
    model = Autoregression(coefficients, 1.0)
    found = autoregressive(history, model, horizon=8, target=outlook_target("single", window=1))
    process = ArmaProcess(np.r_[1.0, -coefficients], [1.0])
    # Each forecast is the mean plus what the last three deviations still do.
    mean = history.mean()
    shocks = np.convolve(history - mean, process.ar)[:60]
    response = process.arma2ma(lags=60 + 8)
    expected = [mean + shocks @ response[h : h + 60][::-1] for h in range(1, 9)]
    np.testing.assert_allclose(found, expected, atol=1e-10)


def test_the_order_is_close_to_the_one_statsmodels_selects():
    """AIC on a planted AR(2): both choose 2 at this seed (statsmodels by least squares)."""
    rng = np.random.default_rng(9)
    values = np.zeros(500)
    for t in range(2, 500):
        values[t] = 0.6 * values[t - 1] + 0.25 * values[t - 2] + rng.standard_normal()
    theirs = ar_select_order(values, maxlag=12, ic="aic")
    assert autoregression(values, max_order=12).order == max(theirs.ar_lags)
