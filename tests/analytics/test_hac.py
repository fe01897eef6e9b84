"""hac_surface against statsmodels and a plain loop; fixed-b against a simulation of the limit."""

import numpy as np
import pytest

from analytics.cell import lag_cell
from analytics.hac import fixed_b_critical_value, fixed_b_p, hac_surface
from analytics.surface import lag_surface
from tests.references.plain_surface import plain_hac_se


def autoregression(n, phi, seed):
    values = np.random.default_rng(seed).standard_normal(n)
    for t in range(1, n):
        values[t] += phi * values[t - 1]
    return values


PAIRS = {
    "stationary": (autoregression(300, 0.9, 1), autoregression(300, 0.5, 2)),
    "integrated": (autoregression(300, 1.0, 3), autoregression(300, 1.0, 4)),
    "level of a million": (1e6 + autoregression(300, 0.5, 5), autoregression(300, 0.5, 6) - 1e6),
    "close relation": (
        autoregression(300, 0.9, 7),
        autoregression(300, 0.9, 7) + 1e-3 * autoregression(300, 0.3, 8),
    ),
}


def statsmodels_slope(driver, response, window, shift, bandwidth):
    from statsmodels.api import OLS, add_constant

    cell = lag_cell(driver - driver.mean(), response - response.mean(), window=window, shift=shift)
    options = {"maxlags": bandwidth - 1, "use_correction": False}
    fit = OLS(cell.response, add_constant(cell.driver)).fit(cov_type="HAC", cov_kwds=options)
    return fit.params[1], fit.bse[1]


@pytest.mark.parametrize("pair", PAIRS)
@pytest.mark.parametrize("bandwidth", [None, 1, 5, 16, 17, 64, 500])
def test_equals_statsmodels(pair, bandwidth):
    driver, response = PAIRS[pair]
    windows, shifts = [1, 12, 37, 60], [-36, -20, -3, 0, 8, 15, 60]
    surface = hac_surface(driver, response, windows=windows, shifts=shifts, bandwidth=bandwidth)
    for i, window in enumerate(windows):
        for j, shift in enumerate(shifts):
            used = int(surface.bandwidth[i, j])
            slope, se = statsmodels_slope(driver, response, window, shift, used)
            assert surface.slope[i, j] == pytest.approx(slope, rel=1e-9)
            assert surface.se[i, j] == pytest.approx(se, rel=1e-9)
            assert surface.t[i, j] == surface.slope[i, j] / surface.se[i, j]
            share = used / surface.pairs[i, j]
            assert surface.p[i, j] == pytest.approx(float(fixed_b_p(surface.t[i, j], share)))


@pytest.mark.parametrize("bandwidth", [1, 7, 40])
def test_equals_plain_twin(bandwidth):
    driver, response = PAIRS["stationary"]
    surface = hac_surface(driver, response, windows=[6], shifts=range(-4, 10), bandwidth=bandwidth)
    for j, shift in enumerate(range(-4, 10)):
        cell = lag_cell(driver, response, window=6, shift=shift)
        se = plain_hac_se(cell.driver.tolist(), cell.response.tolist(), bandwidth)
        assert surface.se[0, j] == pytest.approx(se, rel=1e-10)


@pytest.mark.parametrize("shifts", [range(3, 20), range(-20, -3), [-30, 1, 45], [0]])
def test_any_grid_gives_the_same_cells(shifts):
    driver, response = PAIRS["stationary"]
    whole = hac_surface(driver, response, windows=range(1, 30), shifts=range(-40, 61))
    part = hac_surface(driver, response, windows=[1, 12, 29], shifts=shifts)
    rows, columns = part.windows - 1, part.shifts + 40
    for name in ("slope", "se", "t", "p", "bandwidth", "pairs"):
        found, judge = getattr(part, name), getattr(whole, name)[np.ix_(rows, columns)]
        np.testing.assert_allclose(found, judge, rtol=1e-12, err_msg=name)
    surface = lag_surface(driver, response, windows=[1, 12, 29], shifts=shifts)
    np.testing.assert_allclose(part.slope, surface.slope, rtol=1e-12)
    np.testing.assert_array_equal(part.pairs, surface.pairs)


def test_usual_bandwidth():
    """S = 1.3 T^(1/2), rounded up: T = 100 gives 13, 200 gives 19, 400 gives 26, 695 gives 35."""
    for months, bandwidth in ((100, 13), (200, 19), (400, 26), (695, 35)):
        noise = autoregression(months, 0.0, 9), autoregression(months, 0.0, 10)
        assert hac_surface(*noise, windows=[1], shifts=[0]).bandwidth.tolist() == [[bandwidth]]


def test_undefined_cells_are_nan():
    driver, response = PAIRS["stationary"]
    flat = hac_surface(np.full(300, 0.1), response, windows=[1, 12], shifts=[-2, 0, 2])
    short = hac_surface(driver[:50], response[:50], windows=[1, 30, 50], shifts=[0, 26, 27, 49])
    for surface in (flat, short):
        for array in (surface.slope, surface.se, surface.t, surface.p):
            if surface is flat:
                assert np.isnan(array).all()
            else:
                assert (
                    np.isfinite(array).tolist() == [[True, True, False, False]] + [[False] * 4] * 2
                )


def test_exact_line_has_no_error():
    steps = np.arange(60.0)
    surface = hac_surface(steps, 3.0 * steps, windows=[1], shifts=[0])
    assert surface.slope[0, 0] == pytest.approx(3.0)
    assert surface.se[0, 0] < 1e-12
    assert surface.p[0, 0] < 1e-12


def fixed_b_draws(shares, draws=20_000, months=500, seed=12):
    """Draws of |t| in the limit: a mean of white noise over its Bartlett standard error."""
    rng = np.random.default_rng(seed)
    found = {share: [] for share in shares}
    for _ in range(draws // 1000):
        noise = rng.standard_normal((1000, months))
        mean = noise.mean(axis=1)
        sums = np.cumsum(noise - mean[:, None], axis=1)
        for share in shares:
            span = round(share * months)
            variance = 2.0 * np.einsum("ij,ij->i", sums, sums)
            variance -= 2.0 * np.einsum("ij,ij->i", sums[:, :-span], sums[:, span:])
            found[share].append(np.abs(mean) * months / np.sqrt(variance / span))
    return {share: np.concatenate(parts) for share, parts in found.items()}


@pytest.fixture(scope="module")
def draws():
    return fixed_b_draws((0.05, 0.1, 0.2, 0.5, 1.0))


def test_critical_values_hold_in_the_limit(draws):
    """Kiefer and Vogelsang (2005), table 1, coefficients from memory: tails within 3 errors."""
    for share, values in draws.items():
        for probability in (0.90, 0.95, 0.975, 0.99):
            nominal = 2.0 * (1.0 - probability)
            tail = (values > fixed_b_critical_value(share, probability)).mean()
            error = np.sqrt(nominal * (1.0 - nominal) / values.size)
            assert tail == pytest.approx(nominal, abs=3.0 * error + 0.03 * nominal)


def test_critical_values_against_a_long_simulation():
    """Own simulation of 50,000 draws and 1,000 steps; the cubic lies within 2 % of it."""
    simulated = {0.1: (1.837, 2.240), 0.2: (2.066, 2.542), 0.5: (2.750, 3.503), 1: (3.774, 4.735)}
    for share, values in simulated.items():
        found = [float(fixed_b_critical_value(share, q)) for q in (0.95, 0.975)]
        np.testing.assert_allclose(found, values, rtol=0.02)
    assert fixed_b_critical_value(1e-9) == pytest.approx(1.96, abs=1e-4)


def test_p_holds_in_the_limit(draws):
    """Nominal 5 %: true tail 4.6 to 5.7 % for any b, plus three errors of the simulation."""
    for share, values in draws.items():
        tail = (fixed_b_p(values, share) < 0.05).mean()
        error = 3.0 * np.sqrt(0.05 * 0.95 / values.size)
        assert 0.046 - error < tail < 0.057 + error
        at_critical = float(fixed_b_p(fixed_b_critical_value(share), share))
        assert at_critical == pytest.approx(0.05, abs=0.008)


def test_small_share_is_normal():
    assert fixed_b_p(1.959964, 1e-7) == pytest.approx(0.05, abs=1e-5)
    assert fixed_b_p(0.0, 0.3) == 1.0


def test_errors_are_one_sentence():
    driver, response = PAIRS["stationary"]
    with pytest.raises(ValueError, match="bandwidth must be 1 or more, but got 0"):
        hac_surface(driver, response, windows=[1], shifts=[0], bandwidth=0)
    with pytest.raises(ValueError, match="at least 24 pairs, but no cell of the grid has"):
        hac_surface(driver[:30], response[:30], windows=[10], shifts=[-29, 0])
    with pytest.raises(ValueError, match="same length"):
        hac_surface(driver, response[1:], windows=[1], shifts=[0])
    with pytest.raises(ValueError, match="min_pairs must be 3 or more"):
        hac_surface(driver, response, windows=[1], shifts=[0], min_pairs=2)
    with pytest.raises(ValueError, match=r"probability must be one of 0\.9, 0\.95, 0\.975, 0\.99"):
        fixed_b_critical_value(0.1, 0.5)
    with pytest.raises(ValueError, match="share must be above 0 and at most 1"):
        fixed_b_p(1.0, 0.0)
