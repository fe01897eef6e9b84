"""Months left out of cell and map: nothing of them is read, and all the rest is."""

import numpy as np
import pytest

from analytics.cell import lag_cell
from analytics.surface import lag_surface
from tests.references.plain_surface import months_of_every_cell, plain_cell

WINDOWS, SHIFTS = [1, 2, 5, 12], list(range(-9, 15, 3))


def case(n=150, seed=4):
    rng = np.random.default_rng(seed)
    driver, response = 0.3 + rng.standard_normal((2, n))
    kept = np.ones(n, dtype=bool)
    kept[40:52] = kept[90] = False
    return driver, response, kept


def allowed(kept, window, shift):
    """Months t whose two windows hold kept months only, by the definition."""
    return {
        t
        for t in range(kept.size)
        if all(
            0 <= end - k < kept.size and kept[end - k]
            for end in (t, t + shift)
            for k in range(window)
        )
    }


@pytest.mark.parametrize("same", [False, True])
def test_every_cell_equals_the_plain_one(same):
    driver, response, kept = case()
    surface = lag_surface(
        driver, response, windows=WINDOWS, shifts=SHIFTS, kept=kept, same_months=same
    )
    every = months_of_every_cell(driver.size, WINDOWS, SHIFTS)
    for i, window in enumerate(WINDOWS):
        for j, shift in enumerate(SHIFTS):
            only = allowed(kept, window, shift) & (every if same else set(range(driver.size)))
            plain = plain_cell(driver, response, window, shift, only=only)
            assert surface.pairs[i, j] == plain.pairs
            assert surface.correlation[i, j] == pytest.approx(plain.correlation, abs=1e-12)
            assert surface.slope[i, j] == pytest.approx(plain.slope, abs=1e-12)
            if not same:
                cell = lag_cell(driver, response, window=window, shift=shift, kept=kept)
                np.testing.assert_array_equal(cell.months, plain.months)
                assert cell.slope == pytest.approx(plain.slope, abs=1e-12)
                assert cell.intercept == pytest.approx(plain.intercept, abs=1e-12)
                assert cell.correlation == pytest.approx(plain.correlation, abs=1e-12)


def test_what_is_left_out_may_be_anything():
    """Planted: a slope of 0.5 at shift 6, and wild months that are left out."""
    rng = np.random.default_rng(1)
    driver = rng.standard_normal(240)
    response = 0.5 * np.roll(driver, 6) + 1.0
    kept = np.ones(240, dtype=bool)
    kept[:6] = kept[100:130] = False
    wild = response.copy()
    wild[~kept] = 1e6 * rng.standard_normal((~kept).sum())
    cell = lag_cell(driver, wild, window=3, shift=6, kept=kept)
    assert cell.slope == pytest.approx(0.5, abs=1e-9)
    assert cell.correlation == pytest.approx(1.0, abs=1e-9)
    surface = lag_surface(driver, wild, windows=[1, 3], shifts=range(-12, 13), kept=kept)
    assert surface.correlation[surface.cell(3, 6)] == pytest.approx(1.0, abs=1e-9)


def test_leaving_nothing_out_changes_nothing():
    driver, response, kept = case()
    whole = lag_surface(driver, response, windows=WINDOWS, shifts=SHIFTS)
    same = lag_surface(driver, response, windows=WINDOWS, shifts=SHIFTS, kept=kept | True)
    np.testing.assert_allclose(same.correlation, whole.correlation, atol=1e-12)
    np.testing.assert_array_equal(same.pairs, whole.pairs)
    cell = lag_cell(driver, response, window=5, shift=3)
    np.testing.assert_array_equal(cell.months, np.arange(cell.start, cell.start + cell.n))


def test_refusals():
    driver, response, kept = case()
    with pytest.raises(ValueError, match=r"kept must have shape \(150,\)"):
        lag_cell(driver, response, window=2, shift=0, kept=kept[1:])
    with pytest.raises(ValueError, match="without the months left out window 12 and shift 0 have"):
        lag_cell(driver, response, window=12, shift=0, kept=np.arange(150) < 30)
    with pytest.raises(ValueError, match="a cell must have at least 24 pairs"):
        lag_surface(driver, response, windows=[12], shifts=[0], kept=np.arange(150) < 30)
    with pytest.raises(ValueError, match="some months must be kept"):
        lag_surface(driver, response, windows=[12], shifts=[0], kept=kept & False)
