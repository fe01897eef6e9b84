"""Ranks, Laplace fits and goodness of fit against published examples and packaged data.

Tolerances are half a unit of the last digit printed, or of the digits of an own measurement.
"""

import numpy as np
import pytest
import scipy.stats

from analytics.distribution import distribution_fit
from analytics.goodness import (
    LAPLACE_POINTS,
    edf_distances,
    goodness_chunk,
    goodness_of_fit,
    goodness_plan,
    laplace_bracket,
)
from analytics.rates import growth_rate
from analytics.standing import standing
from tests.outside.datasets import us_core_cpi, us_cpi_1947, us_macro_1959

# Flood data of Puig and Stephens (2000), Technometrics 42, as in the example of laplace.test of
# the R package lawstat.
FLOOD = np.fromstring(
    "1.96 1.97 3.60 3.80 4.79 5.66 5.76 5.78 6.27 6.30 6.76 7.65 7.84 7.99 8.51 9.18 10.13 10.24"
    " 10.25 10.43 11.45 11.48 11.75 11.81 12.33 12.78 13.06 13.29 13.98 14.18 14.40 16.22 17.06",
    sep=" ",
)


def one_month(series):
    return growth_rate(series, formula="percent").values


def twelve_months(series):
    return growth_rate(series, span=12, formula="percent").values


@pytest.mark.parametrize(
    ("values", "value", "kind", "rank"),
    [
        ([1, 2, 3, 4], 3, "weak", 75.0),
        ([1, 2, 3, 3, 4], 3, "strict", 40.0),
        ([1, 2, 3, 3, 4], 3, "weak", 80.0),
        ([1, 2, 3, 3, 4], 3, "mean", 60.0),
    ],
)
def test_percentile_ranks_of_the_scipy_manual(values, value, kind, rank):
    # Examples of scipy.stats.percentileofscore.
    assert standing(values, value, kind=kind).rank == pytest.approx(rank, abs=1e-12)


def test_laplace_estimates_are_median_and_mean_absolute_deviation():
    # Iliopoulos and Balakrishnan, exact likelihood inference for Laplace; digits own arithmetic.
    found = distribution_fit(np.tile([-1.2, 0.1, 0.3, 0.3, 0.5, 0.9, 2.6], 3), "laplace")
    assert found.parameters["location"] == pytest.approx(0.3, abs=1e-12)
    assert found.parameters["scale"] == pytest.approx(0.6857142857142857, abs=1e-12)


def test_flood_data_fit_and_kolmogorov_statistic():
    # Manual of lawstat prints sqrt(n) D = 0.9177726.
    fit = distribution_fit(FLOOD, "laplace")
    assert fit.parameters["location"] == 10.13
    assert fit.parameters["scale"] == pytest.approx(3.3603030, abs=5e-8)
    found = edf_distances(fit.cdf(FLOOD))
    assert found.kolmogorov[0] == pytest.approx(0.9177726, abs=1e-7)


def test_flood_data_other_statistics():
    # Own measurement; W2 also by scipy.
    fit = distribution_fit(FLOOD, "laplace")
    found = edf_distances(fit.cdf(FLOOD))
    assert found.anderson_darling[0] == pytest.approx(0.9654487, abs=1e-6)
    assert found.cramer_von_mises[0] == pytest.approx(0.1550578, abs=1e-6)
    assert found.watson[0] == pytest.approx(0.0862909, abs=1e-6)
    assert found.kuiper[0] == pytest.approx(1.2415640, abs=1e-6)
    judge = scipy.stats.cramervonmises(FLOOD, fit.cdf)
    assert found.cramer_von_mises[0] == pytest.approx(judge.statistic, abs=1e-12)


def test_flood_data_p_knows_that_the_parameters_were_fitted():
    # By simulation of 200,000 draws: p .043 for D and .053 for A2. Plugging the fitted values into
    # a Kolmogorov test of known parameters says .3326: eight times too much.
    found = goodness_of_fit(FLOOD, family="laplace", draws=12000, dependent=False)
    assert found.p_kolmogorov == pytest.approx(0.043, abs=0.006)  # 3 standard errors: .0055
    assert found.p_anderson_darling == pytest.approx(0.053, abs=0.006)
    plugged = scipy.stats.kstest(FLOOD, found.fit.cdf).pvalue
    assert plugged == pytest.approx(0.3326, abs=1e-4)


@pytest.mark.parametrize(
    ("n", "name", "columns"),
    [
        (20, "anderson_darling", (0.05, 0.1, 0.25)),
        (35, "anderson_darling", (0.05, 0.1, 0.25)),
        (35, "cramer_von_mises", (0.05, 0.1, 0.25)),
        (100, "anderson_darling", (0.05, 0.1, 0.25)),
        (100, "cramer_von_mises", (0.05, 0.1, 0.25)),
    ],
)
def test_critical_values_of_puig_and_stephens_come_out_of_the_draws(n, name, columns):
    # Table of Puig and Stephens (2000) as the R package diagL1 ships it; draws of the program.
    # 10,000 draws and the rounding of the published simulation: .03 for A2, .006 for W2.
    values = scipy.stats.laplace.ppf((np.arange(n) + 0.5) / n)
    plan = goodness_plan(values, family="laplace", draws=10_000, seed=3, dependent=False)
    drawn = np.concatenate(
        [getattr(goodness_chunk(plan, i).distances, name) for i in range(plan.chunks)]
    )
    row = dict(zip((0.5, 0.25, 0.1, 0.05, 0.025, 0.01), LAPLACE_POINTS[name][n], strict=True))
    for level in columns:
        tolerance = 0.03 if name == "anderson_darling" else 0.006
        assert np.quantile(drawn, 1 - level) == pytest.approx(row[level], abs=tolerance)


@pytest.mark.parametrize(
    ("n", "points"),
    [
        (33, (0.604, 0.714, 0.829, 0.903)),
        (35, (0.605, 0.715, 0.832, 0.907)),
        (100, (0.614, 0.726, 0.842, 0.920)),
    ],
)
def test_kolmogorov_points_with_both_parameters_fitted(n, points):
    # Own simulation of 200,000 draws; the 5 % point .906 for n = 33 is in Puig and Stephens. The
    # table of D in the file of diagL1 is a copy of that of A2 and is no judge.
    values = scipy.stats.laplace.ppf((np.arange(n) + 0.5) / n)
    plan = goodness_plan(values, family="laplace", draws=10_000, seed=4, dependent=False)
    drawn = np.concatenate(
        [goodness_chunk(plan, i).distances.kolmogorov for i in range(plan.chunks)]
    )
    for level, point in zip((0.5, 0.25, 0.1, 0.05), points, strict=True):
        assert np.quantile(drawn, 1 - level) == pytest.approx(point, abs=0.015)


def test_odd_and_even_samples_have_other_critical_values():
    # The median of an odd sample is one of its values: A2 at 5 %, n = 99 .986 and n = 100 .976,
    # n = 21 and 22 farther apart. So the table is never read between its rows.
    points = []
    for n in (21, 22):
        values = scipy.stats.laplace.ppf((np.arange(n) + 0.5) / n)
        plan = goodness_plan(values, family="laplace", draws=20_000, seed=6, dependent=False)
        drawn = np.concatenate(
            [goodness_chunk(plan, i).distances.anderson_darling for i in range(plan.chunks)]
        )
        points.append(np.quantile(drawn, 0.95))
    assert points[0] > points[1] + 0.015
    assert laplace_bracket(0.95, 50, name="anderson_darling") is None


@pytest.mark.parametrize(
    ("rates", "family", "loglik"),
    [
        (one_month, "laplace", -193.7598),
        (one_month, "student_t", -197.7228),
        (one_month, "normal", -246.0402),
        (twelve_months, "laplace", -1697.8754),
        (twelve_months, "student_t", -1702.3731),
        (twelve_months, "normal", -1741.3310),
    ],
)
def test_log_likelihoods_of_us_prices(rates, family, loglik):
    # Own measurement by scipy's fits on USMacroSWM (R package AER).
    assert distribution_fit(rates(us_cpi_1947()), family).loglik == pytest.approx(loglik, abs=1e-3)


@pytest.mark.parametrize(("rates", "df"), [(one_month, 3.103), (twelve_months, 2.592)])
def test_degrees_of_freedom_of_us_prices(rates, df):
    found = distribution_fit(rates(us_cpi_1947()), "student_t")
    assert found.parameters["df"] == pytest.approx(df, abs=0.005)


@pytest.mark.parametrize(("family", "distance"), [("laplace", 0.07284), ("normal", 0.11188)])
def test_kolmogorov_distances_of_us_prices(family, distance):
    values = np.sort(one_month(us_cpi_1947()))
    found = edf_distances(distribution_fit(values, family).cdf(values))
    assert found.kolmogorov[0] / np.sqrt(values.size) == pytest.approx(distance, abs=1e-5)


@pytest.mark.parametrize(
    ("values", "location", "scale"),
    [
        (lambda: twelve_months(us_cpi_1947()), 3.1316769, 2.2014733),
        (lambda: one_month(us_cpi_1947()), 0.2612671, 0.2430821),
        (lambda: growth_rate(us_cpi_1947(), annualised=True).values, 3.1311172, 2.9060367),
        (lambda: np.diff(twelve_months(us_cpi_1947())), -0.0079008, 0.2902548),
        (lambda: one_month(us_core_cpi()), 0.2540502, 0.1746874),
        (lambda: us_macro_1959("infl").values[1:], 3.245, 2.2220297),
    ],
)
def test_laplace_parameters_of_packaged_series(values, location, scale):
    # Own measurement: medians and mean absolute deviations on AER, arch and statsmodels data.
    found = distribution_fit(values(), "laplace").parameters
    assert found["location"] == pytest.approx(location, abs=1e-6)
    assert found["scale"] == pytest.approx(scale, abs=1e-6)


@pytest.mark.parametrize("load", [us_cpi_1947, us_core_cpi])
def test_monthly_inflation_is_closer_to_laplace_than_to_normal(load):
    # Common practice, no source; true of both packaged monthly series.
    values = one_month(load())
    assert distribution_fit(values, "laplace").loglik > distribution_fit(values, "normal").loglik
