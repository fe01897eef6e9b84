"""The fast kernel against the plain loop that defines it, and its edges."""

import numpy as np
import pytest
from scipy.signal import lfilter

from analytics.kernel import response_kernel
from analytics.surface import lag_surface
from tests.references.plain_search import plain_correlations


def autoregression(rng, phi, size):
    return lfilter([1.0], [1.0, -phi], rng.standard_normal(size), axis=-1)


@pytest.mark.parametrize(
    ("n_months", "phi", "level"),
    [(240, 0.0, 0.0), (240, 0.98, 50.0), (300, 1.0, -3.0), (121, 0.5, 1e3)],
)
def test_every_cell_equals_the_plain_loop(n_months, phi, level):
    rng = np.random.default_rng([n_months, int(100 * phi)])
    drivers = level + autoregression(rng, phi, (3, n_months))
    response = autoregression(rng, phi, n_months) - level
    windows, shifts = range(1, 61), range(-36, 61)
    fast = response_kernel(response, windows=windows, shifts=shifts).correlations(drivers)
    for driver, surface in zip(drivers, fast, strict=True):
        plain = plain_correlations(driver, response, windows, shifts)
        np.testing.assert_array_equal(np.isnan(surface), np.isnan(plain))
        np.testing.assert_allclose(surface, plain, rtol=0, atol=1e-10)


def test_agrees_with_the_surface_of_one_pair():
    rng = np.random.default_rng(2)
    driver, response = autoregression(rng, 0.9, (2, 400))
    windows, shifts = range(1, 61), range(-36, 61)
    fast = response_kernel(response, windows=windows, shifts=shifts).correlations(driver)[0]
    surface = lag_surface(driver, response, windows=windows, shifts=shifts)
    np.testing.assert_allclose(fast, surface.correlation, rtol=0, atol=1e-10)


@pytest.mark.parametrize("shape", ["trend", "season", "spike", "steps", "money"])
def test_hard_shapes_equal_the_plain_loop(shape):
    rng = np.random.default_rng(5)
    n_months = 240
    month = np.arange(n_months)
    driver = rng.standard_normal(n_months)
    match shape:
        case "trend":
            driver += 0.3 * month
        case "season":
            driver += 8.0 * np.sin(2 * np.pi * month / 12)
        case "spike":
            driver[-20] += 100.0
        case "steps":
            driver += 30.0 * (month > 110)
        case "money":
            driver = 1e6 * np.exp(0.01 * month + 0.01 * driver.cumsum())
    response = rng.standard_normal(n_months).cumsum()
    windows, shifts = [1, 2, 7, 12, 36, 60], range(-36, 61)
    fast = response_kernel(response, windows=windows, shifts=shifts).correlations(driver)[0]
    plain = plain_correlations(driver, response, windows, shifts)
    np.testing.assert_allclose(fast, plain, rtol=0, atol=1e-9)


@pytest.mark.parametrize("shifts", [[-7, -2, 5], range(3, 9), range(-9, -4), [0], [-89, 0, 77]])
def test_scattered_ranges(shifts):
    rng = np.random.default_rng(3)
    driver, response = rng.standard_normal((2, 90))
    windows = [1, 5, 13, 66, 67, 68, 90]
    fast = response_kernel(response, windows=windows, shifts=shifts).correlations(driver)[0]
    plain = plain_correlations(driver, response, windows, shifts)
    np.testing.assert_array_equal(np.isnan(fast), np.isnan(plain))
    np.testing.assert_allclose(fast, plain, rtol=0, atol=1e-12)


def test_batches_and_threads_leave_the_numbers_alone():
    rng = np.random.default_rng(4)
    drivers, response = rng.standard_normal((300, 120)), rng.standard_normal(120)
    kernel = response_kernel(response, windows=[1, 6, 12], shifts=range(-12, 25))
    both = kernel.correlations(drivers)
    assert both.shape == (300, 3, 37)
    np.testing.assert_array_equal(both, kernel.correlations(drivers, threads=1))
    for index in (0, 149, 150, 299):
        alone = kernel.correlations(drivers[index])[0]
        np.testing.assert_allclose(both[index], alone, rtol=0, atol=1e-13)


def test_sign_of_the_shift():
    driver = np.random.default_rng(6).standard_normal(200)
    later = np.concatenate((np.zeros(9), driver[:-9]))  # the response repeats it 9 months later
    kernel = response_kernel(later, windows=[1], shifts=range(-12, 13))
    assert kernel.shifts[kernel.correlations(driver)[0, 0].argmax()] == 9
    kernel = response_kernel(driver, windows=[1], shifts=range(-12, 13))
    assert kernel.shifts[kernel.correlations(later)[0, 0].argmax()] == -9


def test_a_side_that_does_not_vary_has_no_correlation():
    rng = np.random.default_rng(7)
    response = rng.standard_normal(120)
    kernel = response_kernel(response, windows=[1, 12], shifts=[-5, 0, 5])
    drivers = np.vstack([np.full(120, 0.1), rng.standard_normal(120), np.full(120, 1e9 / 3)])
    surfaces = kernel.correlations(drivers)
    assert np.isnan(surfaces[[0, 2]]).all()
    assert np.isfinite(surfaces[1]).all()
    still = response_kernel(np.full(120, 0.3), windows=[1, 12], shifts=[0])
    assert np.isnan(still.correlations(response)).all()


def test_a_cell_that_does_not_vary_has_no_correlation():
    rng = np.random.default_rng(8)
    driver, response = rng.standard_normal((2, 80))
    driver[:50] = 2.0  # with shift 40 only the first 40 months of the driver are used
    kernel = response_kernel(response, windows=[1, 3], shifts=[0, 40])
    assert np.isnan(kernel.correlations(driver)[0]).tolist() == [[False, True], [False, True]]


def test_pairs_are_counted():
    kernel = response_kernel(np.arange(100.0), windows=[1, 60], shifts=[-36, 0, 60])
    np.testing.assert_array_equal(kernel.pairs, [[64, 100, 40], [5, 41, 0]])


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"windows": []}, "windows must be increasing integers"),
        ({"windows": [0, 1]}, "windows must be from 1 to 60 months, but got 0"),
        ({"shifts": [3, 2]}, "shifts must be increasing integers"),
        ({"shifts": [60]}, "shifts must be from -59 to 59 months, but got 60"),
        ({"response": [1.0, np.nan, 2.0]}, "response must be a finite series"),
    ],
)
def test_errors(change, sentence):
    given = {"response": np.arange(60.0), "windows": [1], "shifts": [0]} | change
    with pytest.raises(ValueError, match=sentence):
        response_kernel(given.pop("response"), **given)


def test_drivers_must_fit_the_response():
    kernel = response_kernel(np.arange(60.0), windows=[1], shifts=[0])
    with pytest.raises(ValueError, match=r"drivers must have shape \(B, 60\), but got \(1, 59\)"):
        kernel.correlations(np.ones(59))
    with pytest.raises(ValueError, match="drivers must be finite"):
        kernel.correlations(np.full(60, np.nan))
