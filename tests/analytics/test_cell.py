"""lag_cell against its plain twin, scipy's regression, the surface, and planted lines."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from analytics.cell import lag_cell
from analytics.surface import lag_surface
from tests.references.plain_surface import plain_cell, plain_slices

RNG = np.random.default_rng(21)
DRIVER = np.cumsum(RNG.standard_normal(140)) * 0.2
RESPONSE = np.cumsum(RNG.standard_normal(140)) * 0.2 + 0.3 * DRIVER


@pytest.mark.parametrize(("window", "shift"), [(1, 0), (1, 7), (12, 24), (12, -24), (36, -3)])
def test_equals_exact_twin(window, shift):
    cell = lag_cell(DRIVER, RESPONSE, window=window, shift=shift)
    twin = plain_cell(DRIVER, RESPONSE, window, shift)
    assert (cell.n, cell.start) == (twin.pairs, twin.months[0])
    np.testing.assert_allclose(cell.driver, [float(v) for v in twin.driver], atol=1e-13)
    np.testing.assert_allclose(cell.response, [float(v) for v in twin.response], atol=1e-13)
    assert cell.correlation == pytest.approx(twin.correlation, abs=1e-13)
    assert cell.slope == pytest.approx(twin.slope, rel=1e-12)
    assert cell.intercept == pytest.approx(twin.intercept, rel=1e-12)


@pytest.mark.parametrize(("window", "shift"), [(1, 0), (6, 11), (24, -13)])
def test_line_equals_scipy_and_surface(window, shift):
    cell = lag_cell(DRIVER, RESPONSE, window=window, shift=shift)
    judge = stats.linregress(cell.driver, cell.response)
    assert cell.slope == pytest.approx(judge.slope, rel=1e-11)
    assert cell.intercept == pytest.approx(judge.intercept, rel=1e-11)
    assert cell.correlation == pytest.approx(judge.rvalue, abs=1e-12)
    assert cell.se_naive == pytest.approx(judge.stderr, rel=1e-11)
    assert cell.p_naive == pytest.approx(judge.pvalue, rel=1e-8)
    line = cell.intercept + cell.slope * cell.driver
    np.testing.assert_allclose(cell.residuals, cell.response - line, atol=1e-13)
    assert cell.sigma == pytest.approx(math.sqrt((cell.residuals**2).sum() / (cell.n - 2)))
    surface = lag_surface(DRIVER, RESPONSE, windows=[window], shifts=[shift])
    assert surface.correlation[0, 0] == pytest.approx(cell.correlation, abs=1e-13)
    assert surface.slope[0, 0] == pytest.approx(cell.slope, rel=1e-12)
    assert surface.pairs[0, 0] == cell.n


@pytest.mark.parametrize("lead", [6, -6])
def test_planted_line_and_months(lead):
    """With the response 0.4 times the driver `lead` months before, plus 0.1, no noise is left."""
    long = np.random.default_rng(22).standard_normal(300)
    driver, response = long[50:250], 0.1 + 0.4 * long[50 - lead : 250 - lead]
    cell = lag_cell(driver, response, window=5, shift=lead)
    assert cell.slope == pytest.approx(0.4, abs=1e-12)
    assert cell.intercept == pytest.approx(0.1, abs=1e-12)
    assert cell.driver[0] == pytest.approx(driver[cell.start - 4 : cell.start + 1].mean())
    later = cell.start + lead
    assert cell.response[0] == pytest.approx(response[later - 4 : later + 1].mean())
    assert cell.p_naive < 1e-100
    assert abs(lag_cell(driver, response, window=5, shift=-lead).slope) < 0.2


def test_exact_line_has_p_zero():
    steps = np.arange(40.0)
    cell = lag_cell(steps, 2.0 * steps, window=1, shift=0)
    assert (cell.slope, cell.correlation, cell.se_naive, cell.p_naive) == (2.0, 1.0, 0.0, 0.0)


def test_ellipse_lies_at_two_standard_deviations():
    cell = lag_cell(DRIVER, RESPONSE, window=6, shift=4)
    assert cell.ellipse.shape == (73, 2)
    assert cell.ellipse[0].tolist() == cell.ellipse[-1].tolist()
    centre = np.array([cell.driver.mean(), cell.response.mean()])
    covariance = np.cov(cell.driver, cell.response)
    away = cell.ellipse - centre
    distance = np.einsum("ij,jk,ik->i", away, np.linalg.inv(covariance), away)
    np.testing.assert_allclose(np.sqrt(distance), 2.0, rtol=1e-9)
    angle = 2.0 * np.pi * 10 / 72
    r = cell.correlation
    assert cell.ellipse[10] == pytest.approx(
        [
            centre[0] + 2.0 * cell.driver.std(ddof=1) * math.cos(angle),
            centre[1]
            + 2.0
            * cell.response.std(ddof=1)
            * (r * math.cos(angle) + math.sqrt(1.0 - r * r) * math.sin(angle)),
        ]
    )


@settings(max_examples=30, deadline=None)
@given(seed=st.integers(0, 10_000), slices=st.integers(1, 20), window=st.integers(1, 12))
def test_slices_equal_plain_twin(seed, slices, window):
    rng = np.random.default_rng(seed)
    driver, response = rng.standard_normal(60), rng.standard_normal(60)
    cell = lag_cell(driver, response, window=window, shift=2, slices=slices)
    for means, along, across in (
        (cell.driver_slices, cell.driver, cell.response),
        (cell.response_slices, cell.response, cell.driver),
    ):
        mean, count = plain_slices(along, across, slices)
        assert means.count.tolist() == count
        np.testing.assert_allclose(means.mean, mean, atol=1e-13)
        assert means.edges[0] == along.min()
        assert means.edges[-1] == along.max()
        np.testing.assert_allclose(np.diff(means.edges), np.ptp(along) / slices)
        np.testing.assert_allclose(means.centre, (means.edges[1:] + means.edges[:-1]) / 2.0)
        whole = np.nansum(means.mean * means.count) / means.count.sum()
        assert whole == pytest.approx(across.mean(), abs=1e-12)


def test_empty_slice_is_nan():
    driver = np.r_[np.zeros(15), np.full(15, 10.0)]
    cell = lag_cell(driver, np.arange(30.0), window=1, shift=0, slices=5)
    assert cell.driver_slices.count.tolist() == [15, 0, 0, 0, 15]
    np.testing.assert_array_equal(cell.driver_slices.mean, [7.0, np.nan, np.nan, np.nan, 22.0])


def test_result_is_read_only():
    cell = lag_cell(DRIVER, RESPONSE, window=6, shift=4)
    slices = cell.driver_slices
    arrays = [cell.driver, cell.response, cell.residuals, cell.ellipse]
    for array in [*arrays, slices.edges, slices.centre, slices.mean, slices.count]:
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0
    assert repr(cell).startswith("LagCell(window 6, shift 4, 131 pairs, r ")


@pytest.mark.parametrize("value", [0.0, 0.1, 1.0 / 3.0, 1e6 + 0.1])
@pytest.mark.parametrize("window", [1, 7, 12])
def test_constant_side_is_refused(value, window):
    flat = np.full(140, value)
    with pytest.raises(ValueError, match=f"driver must vary .* {window}-month mean is constant"):
        lag_cell(flat, RESPONSE, window=window, shift=3)
    with pytest.raises(ValueError, match="response must vary within the cell"):
        lag_cell(DRIVER, flat, window=window, shift=3)


def test_errors_are_one_sentence():
    months = np.random.default_rng(23).standard_normal(119)
    sentence = (
        "window must leave at least 24 pairs, but window 60 and shift 48 leave 12 of 119 months"
    )
    with pytest.raises(ValueError, match=sentence):
        lag_cell(months, months, window=60, shift=48)
    with pytest.raises(ValueError, match="leave 0 of 119 months"):
        lag_cell(months, months, window=60, shift=-400)
    with pytest.raises(ValueError, match="same length, but got 119 and 118"):
        lag_cell(months, months[1:], window=1, shift=0)
    with pytest.raises(ValueError, match="window and slices must be 1 or more, but got 0 and 8"):
        lag_cell(months, months, window=0, shift=0)
    with pytest.raises(ValueError, match=r"shift must be an integer, but got 1\.5"):
        lag_cell(months, months, window=1, shift=1.5)
    with pytest.raises(ValueError, match="min_pairs must be 3 or more, but got 1"):
        lag_cell(months, months, window=1, shift=0, min_pairs=1)
