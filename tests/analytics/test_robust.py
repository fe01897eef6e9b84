"""Per-cell inference against plain loops, ordinary least squares and planted lines."""

import numpy as np
import pytest
from scipy import stats

from analytics.cell import lag_cell
from analytics.effective import without_season
from analytics.robust import cell_inference, surface_inference
from analytics.surface import lag_surface
from tests.references.plain_surface import plain_effective_months, plain_without_season


def autoregression(n, phi, seed):
    values = np.random.default_rng(seed).standard_normal(n + 100)
    for t in range(1, values.size):
        values[t] += phi * values[t - 1]
    return values[100:]


DRIVER, RESPONSE = autoregression(180, 0.8, 1) + 3.0, autoregression(180, 0.6, 2) - 1.0


@pytest.mark.parametrize(("window", "shift"), [(1, 0), (1, 24), (6, -11), (24, 12), (36, -36)])
@pytest.mark.parametrize("periods_per_year", [1, 12])
def test_cell_equals_plain_twin(window, shift, periods_per_year):
    cell = cell_inference(
        DRIVER, RESPONSE, window=window, shift=shift, periods_per_year=periods_per_year
    )
    series = [DRIVER.tolist(), RESPONSE.tolist()]
    if periods_per_year > 1:
        series = [plain_without_season(values, periods_per_year) for values in series]
    effective = plain_effective_months(*series, window, shift)
    assert cell.effective_months == pytest.approx(effective, rel=1e-10)
    judge = lag_cell(*series, window=window, shift=shift)
    assert cell.correlation == pytest.approx(judge.correlation, abs=1e-12)
    t = judge.correlation * np.sqrt((effective - 2.0) / (1.0 - judge.correlation**2))
    assert cell.t == pytest.approx(t, rel=1e-9)
    assert cell.p == pytest.approx(2.0 * stats.t.sf(abs(t), effective - 2.0), rel=1e-9)
    sxx = ((judge.driver - judge.driver.mean()) ** 2).sum()
    se = np.sqrt((judge.residuals**2).sum() / (sxx * (effective - 2.0)))
    assert cell.se_robust == pytest.approx(se, rel=1e-9)
    assert cell.slope / cell.se_robust == pytest.approx(cell.t, rel=1e-9)


@pytest.mark.parametrize("same_months", [False, True])
@pytest.mark.parametrize("periods_per_year", [1, 4, 12])
def test_surface_equals_cells(same_months, periods_per_year):
    windows, shifts = [1, 5, 12, 40], [-30, -1, 0, 7, 36]
    options = {"windows": windows, "shifts": shifts, "same_months": same_months}
    grid = surface_inference(DRIVER, RESPONSE, periods_per_year=periods_per_year, **options)
    shown = lag_surface(DRIVER, RESPONSE, **options)
    for i, window in enumerate(windows):
        for j, shift in enumerate(shifts):
            if same_months:
                # The cell's own months, cut so that they are those of the whole grid.
                first = 40 - window + 30 - max(0, -shift)
                last = 180 - 36 + max(0, shift)
                part = slice(first, last)
            else:
                part = slice(0, 180)
            naive = lag_cell(DRIVER[part], RESPONSE[part], window=window, shift=shift)
            assert grid.p_naive[i, j] == pytest.approx(naive.p_naive, rel=1e-9)
            assert shown.pairs[i, j] == naive.n
            if not same_months:
                cell = cell_inference(
                    DRIVER, RESPONSE, window=window, shift=shift, periods_per_year=periods_per_year
                )
                assert grid.effective_months[i, j] == pytest.approx(
                    cell.effective_months, rel=1e-10
                )
                assert grid.correlation[i, j] == pytest.approx(cell.correlation, abs=1e-12)
                assert grid.t[i, j] == pytest.approx(cell.t, rel=1e-10)
                assert grid.p[i, j] == pytest.approx(cell.p, rel=1e-10)


def test_long_sample_surface_equals_cells():
    driver, response = autoregression(760, 0.95, 3), autoregression(760, 0.9, 4)
    grid = surface_inference(driver, response, windows=range(1, 61), shifts=range(-36, 61))
    for window, shift in [(1, 0), (12, 24), (60, 60), (60, -36), (37, -5)]:
        cell = cell_inference(driver, response, window=window, shift=shift)
        place = window - 1, shift + 36
        assert grid.effective_months[place] == pytest.approx(cell.effective_months, rel=1e-10)
        assert grid.p[place] == pytest.approx(cell.p, rel=1e-10)
    assert (grid.effective_months >= 3.1).all()
    assert (grid.effective_months <= 760).all()


def test_smoothing_costs_months():
    """Twelve-month means of white noise: the triangle of their autocorrelations gives n / 8."""
    driver, response = autoregression(6000, 0.0, 5), autoregression(6000, 0.0, 6)
    rho = 1.0 - np.arange(12) / 12.0
    expected = 1.0 / (1.0 + 2.0 * (rho[1:] ** 2).sum())
    cell = cell_inference(driver, response, window=12, shift=0, periods_per_year=1)
    # Beyond lag 11 the true terms are zero and the estimated ones average out.
    assert cell.effective_months / cell.n == pytest.approx(expected, rel=0.15)


@pytest.mark.parametrize("lead", [8, -8])
def test_planted_line_lies_in_the_intervals(lead):
    """Slope 0.4 and a baseline of 0.1 a month (of the usual order: common practice, no source).

    Of 60 trials at 95 % all but 3 are expected to cover, and 10 misses have a chance below .001.
    """
    missed = {"slope": 0, "intercept": 0}
    for seed in range(60):
        long = autoregression(700, 0.7, seed) * 0.3 + 0.6
        driver = long[50:650]
        noise = autoregression(600, 0.5, 1000 + seed) * 0.2
        response = 0.1 + 0.4 * long[50 - lead : 650 - lead] + noise
        cell = cell_inference(driver, response, window=6, shift=lead)
        assert cell.p < 1e-3
        assert cell.slope_interval.high - cell.slope_interval.low < 0.3
        missed["slope"] += not cell.slope_interval.low < 0.4 < cell.slope_interval.high
        missed["intercept"] += not cell.intercept_interval.low < 0.1 < cell.intercept_interval.high
    assert max(missed.values()) < 10
    assert cell_inference(driver, response, window=6, shift=-lead).p > 1e-3


def test_intervals_and_p_tell_the_same():
    for seed in range(30):
        driver, response = autoregression(120, 0.8, seed), autoregression(120, 0.8, seed + 99)
        for level in (0.5, 0.9):
            cell = cell_inference(driver, response, window=4, shift=3, level=level)
            out = cell.p < 1.0 - level
            for low, high in (cell.correlation_interval, cell.slope_interval):
                assert (low > 0.0 or high < 0.0) == out
            assert -1.0 < cell.correlation_interval.low < cell.correlation < 1.0
            assert cell.correlation < cell.correlation_interval.high < 1.0
            middle = sum(cell.slope_interval) / 2.0
            assert middle == pytest.approx(cell.slope)


def test_correlation_interval_of_independent_months_is_near_fishers():
    """White noise with r = .6: atanh r -+ 1.96 / sqrt(n - 3) (Fisher 1921), and a little wider.

    The squared sampling errors of n / 3 autocorrelations add 2 (1 - (2/3)^3) / 3 = .469 to each
    sum of squares, and r^2 times that to the sum of products.
    """
    rng = np.random.default_rng(12)
    driver = rng.standard_normal(20_000)
    response = 0.6 * driver + 0.8 * rng.standard_normal(20_000)
    cell = cell_inference(driver, response, window=1, shift=0)
    found = (np.arctanh(cell.correlation_interval) - np.arctanh(cell.correlation)) * np.sqrt(19_997)
    variance = 0.64 * (1.0 + 0.469 * 0.36) + 0.36 * 1.469
    expected = 1.96 * np.sqrt(variance)
    np.testing.assert_allclose(found, [-expected, expected], rtol=0.03)
    assert 1.96 < expected < 1.15 * 1.96


def test_correlation_interval_keeps_what_its_own_variance_keeps():
    """Each end lies at its distance, on Fisher's scale, by the variance that holds there."""
    from statsmodels.tsa.stattools import acf

    driver = autoregression(300, 0.6, 13)
    response = driver + 2.0 * autoregression(300, 0.9, 14)
    cell = cell_inference(driver, response, window=1, shift=0, periods_per_year=1)
    shown = lag_cell(driver, response, window=1, shift=0)
    k = np.arange(1, 101)
    worth = [
        300.0 / (1.0 + 2.0 * ((1.0 - k / 300.0) * acf(series, nlags=100)[1:] ** 2).sum())
        for series in (driver, shown.residuals)
    ]
    freedom = cell.effective_months - 2.0
    quantile = stats.t.ppf(0.975, freedom)
    half = np.arctanh(quantile / np.sqrt(freedom + quantile**2))
    for end in cell.correlation_interval:
        ratio = 1.0 - end**2 + cell.effective_months * end**2 * sum(0.5 / n for n in worth)
        distance = abs(np.arctanh(end) - np.arctanh(cell.correlation))
        assert distance == pytest.approx(half * np.sqrt(ratio), rel=1e-8)


def test_regions_of_intercept_and_slope():
    cell = cell_inference(DRIVER, RESPONSE, window=5, shift=9, level=0.9)
    plane = cell.plane
    assert plane.robust.shape == plane.naive.shape == (73, 2)
    assert plane.robust[0].tolist() == plane.robust[-1].tolist()
    assert plane.estimate.tolist() == [cell.intercept, cell.slope]
    away = plane.robust - plane.estimate
    form = np.einsum("ij,jk,ik->i", away, np.linalg.inv(plane.covariance), away)
    freedom = cell.effective_months - 2.0
    np.testing.assert_allclose(form, 2.0 * stats.f.ppf(0.9, 2.0, freedom), rtol=1e-9)
    assert np.sqrt(plane.covariance[0, 0]) == pytest.approx(cell.se_intercept)
    half = stats.t.ppf(0.95, freedom) * cell.se_intercept
    assert cell.intercept_interval.high - cell.intercept == pytest.approx(half)
    # The level of the line at the driver's mean is uncorrelated with the slope.
    adjusted = [without_season(v) for v in (DRIVER, RESPONSE)]
    mean = lag_cell(*adjusted, window=5, shift=9).driver.mean()
    assert (np.array([1.0, mean]) @ plane.covariance)[1] == pytest.approx(0.0, abs=1e-12)


def test_naive_region_equals_statsmodels():
    from statsmodels.api import OLS, add_constant

    cell = cell_inference(DRIVER, RESPONSE, window=5, shift=9, periods_per_year=1)
    judge_cell = lag_cell(DRIVER, RESPONSE, window=5, shift=9)
    judge = OLS(judge_cell.response, add_constant(judge_cell.driver)).fit()
    np.testing.assert_allclose(cell.plane.estimate, judge.params, rtol=1e-9)
    away = cell.plane.naive - judge.params
    form = np.einsum("ij,jk,ik->i", away, np.linalg.inv(judge.cov_params()), away)
    np.testing.assert_allclose(form, 2.0 * stats.f.ppf(0.95, 2, judge.df_resid), rtol=1e-8)


def test_season_moves_neither_whole_years_nor_the_unseasonal():
    """A window of whole years gives the very line of `lag_cell`; the season is not in p."""
    season = np.tile(np.random.default_rng(9).standard_normal(12), 15)
    seasonal = DRIVER + 5.0 * season, RESPONSE + 5.0 * np.roll(season, 3)
    for window in (12, 24):
        cell = cell_inference(*seasonal, window=window, shift=3)
        shown = lag_cell(*seasonal, window=window, shift=3)
        assert cell.correlation == pytest.approx(shown.correlation, abs=1e-12)
        assert cell.intercept == pytest.approx(shown.intercept, rel=1e-10)
    for window in (1, 5, 12):
        with_season = cell_inference(*seasonal, window=window, shift=3)
        without = cell_inference(DRIVER, RESPONSE, window=window, shift=3)
        assert with_season.p == pytest.approx(without.p, rel=1e-9)
    assert lag_cell(*seasonal, window=1, shift=3).correlation > 0.5
    assert cell_inference(*seasonal, window=1, shift=3, periods_per_year=1).correlation > 0.5


def test_exact_line():
    cell = cell_inference(DRIVER, 2.0 * DRIVER + 1.0, window=3, shift=0)
    assert cell.p < 1e-12
    assert cell.slope_interval.low == pytest.approx(2.0)
    assert cell.intercept_interval.high == pytest.approx(1.0)
    assert cell.correlation_interval.low == pytest.approx(1.0)
    assert np.isfinite(cell.plane.robust).all()


def test_undefined_cells_are_nan():
    flat = np.full(180, 0.3)
    grid = surface_inference(flat, RESPONSE, windows=[1, 6], shifts=[0, 5])
    for array in (grid.correlation, grid.effective_months, grid.t, grid.p, grid.p_naive):
        assert np.isnan(array).all()
    short = surface_inference(DRIVER[:40], RESPONSE[:40], windows=[1, 30], shifts=[0, 20])
    assert np.isfinite(short.p).tolist() == [[True, False], [False, False]]
    season = np.tile(np.random.default_rng(10).standard_normal(12), 15)
    seasonal = surface_inference(season, RESPONSE, windows=[1, 5], shifts=[0])
    assert np.isnan(seasonal.p).all()
    assert np.isfinite(seasonal.p_naive).all()


def test_results_are_read_only():
    cell = cell_inference(DRIVER, RESPONSE, window=2, shift=1)
    grid = surface_inference(DRIVER, RESPONSE, windows=[2], shifts=[1])
    plane = cell.plane
    arrays = [plane.estimate, plane.covariance, plane.robust, plane.naive]
    arrays += [grid.correlation, grid.effective_months, grid.t, grid.p, grid.p_naive]
    for array in arrays:
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0
    assert "pairs worth" in repr(cell)
    assert "1 cells" in repr(grid)


def test_errors_are_one_sentence():
    with pytest.raises(ValueError, match=r"level must be above 0 and below 1, but got 1\.0"):
        cell_inference(DRIVER, RESPONSE, window=1, shift=0, level=1.0)
    with pytest.raises(ValueError, match="same length, but got 180 and 179"):
        cell_inference(DRIVER, RESPONSE[1:], window=1, shift=0)
    with pytest.raises(ValueError, match="must leave at least 24 pairs, but window 100"):
        cell_inference(DRIVER, RESPONSE, window=100, shift=70)
    with pytest.raises(ValueError, match="driver must vary"):
        cell_inference(np.tile(np.arange(12.0), 15), RESPONSE, window=1, shift=0)
    with pytest.raises(ValueError, match="windows must be increasing"):
        surface_inference(DRIVER, RESPONSE, windows=[3, 2], shifts=[0])
