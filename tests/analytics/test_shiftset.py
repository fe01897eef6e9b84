"""The set of shifts against the kernel, closed forms and planted lags."""

import dataclasses
from itertools import pairwise

import numpy as np
import pytest
from scipy.signal import lfilter

from analytics.kernel import response_kernel
from analytics.search import lag_search
from analytics.shift_simulation import (
    correlation_profile,
    driver_cells,
    simulated_responses,
    slope_profile,
)
from analytics.shiftset import (
    shift_set,
    shift_set_chunk,
    shift_set_plan,
    shift_set_preview,
    shift_set_result,
)
from analytics.simulate import planted_pair
from analytics.surface import lag_surface


def noise(seed, n, phi=0.5):
    shocks = np.random.default_rng(seed).standard_normal(n + 100)
    return lfilter([1.0], [1.0, -phi], shocks)[100:]


@pytest.mark.parametrize("shifts", [range(-36, 61), range(4, 20), range(-20, -3), [-30, 0, 7]])
@pytest.mark.parametrize("window", [1, 12, 30])
def test_profiles_equal_the_kernel(window, shifts):
    driver = noise(1, 130) + 5.0
    responses = np.array([noise([2, k], 130, phi=0.9) for k in range(6)])
    kernel = response_kernel(driver, windows=[window], shifts=sorted(-s for s in shifts))
    wanted = kernel.correlations(responses)[:, 0, ::-1]  # the sides swapped, the shifts mirrored
    cells = driver_cells(driver, window, np.array(list(shifts)), np.isfinite(wanted).all(axis=0))
    found = correlation_profile(responses, cells)
    np.testing.assert_array_equal(np.isnan(found), np.isnan(wanted))
    np.testing.assert_allclose(found, wanted, atol=1e-11)


def test_slopes_equal_the_surface():
    driver, response = noise(3, 150), noise(4, 150)
    surface = lag_surface(driver, response, windows=[6], shifts=range(-12, 25))
    found = slope_profile(driver, response, 6, surface.shifts, surface.correlation[0])
    np.testing.assert_allclose(found, surface.slope[0], atol=1e-11)


@pytest.mark.parametrize("shift", [-9, 0, 18])
def test_simulated_responses_have_the_slope_asked_for(shift):
    driver = noise(5, 400)
    response = 0.01 * noise(6, 400)
    simulated = simulated_responses(
        driver, response, window=12, shift=shift, slope=0.7, draws=400,
        rng=np.random.default_rng(7),
    )  # fmt: skip
    assert simulated.shape == (400, 400)
    mean = simulated.mean(axis=0)
    surface = lag_surface(driver, mean, windows=[12], shifts=range(-36, 61))
    place = surface.shifts.tolist().index(shift)
    assert surface.slope[0, place] == pytest.approx(0.7, abs=0.05)
    peak = int(surface.shifts[surface.correlation[0].argmax()])
    assert abs(peak - shift) <= 1
    # The effect is a mean over 24 months: exactly linear in the driver away from the edges.
    steps = np.full(25, 1 / 24)
    steps[[0, -1]] /= 2
    centred = driver - driver.mean()
    inside = slice(80, 320)
    wanted = np.array(
        [centred[t - shift - 12 : t - shift + 13] @ steps for t in range(400)[inside]]
    )
    assert np.corrcoef(wanted, mean[inside])[0, 1] > 0.99


def test_preview_is_its_closed_form():
    driver, response = noise(8, 300), noise(9, 300)
    response[10:] += 1.5 * driver[:-10]
    surface = lag_surface(driver, response, windows=[6], shifts=range(-36, 61))
    squared = surface.correlation[0] ** 2
    ratio = surface.pairs[0] / 24 * (np.log(1 - squared) - np.log(1 - squared.max()))
    wanted = surface.shifts[ratio <= 3.841458820694124]
    found = shift_set_preview(driver, response, window=6)
    np.testing.assert_array_equal(found, wanted)
    wide = shift_set_preview(driver, response, window=36)
    assert wide.size > found.size
    assert not found.flags.writeable


@pytest.mark.parametrize(("lag", "window"), [(22, 12), (-7, 6)])
def test_a_strong_relation_is_identified_where_it_was_planted(lag, window):
    pair = planted_pair(
        np.random.default_rng(10), 480, lag=lag, slope=0.4, noise=0.12, driver_ar=0.5, spread=13
    )
    found = shift_set(pair.driver, pair.response, window=window)
    assert lag in found.shifts
    assert found.identified
    assert found.shifts.size <= 9
    assert lag in found.preview
    best = found.candidates[np.nanargmax(found.correlation)]
    assert best in found.shifts
    assert found.p_by_shift[found.candidates.tolist().index(best)] == 1.0
    assert found.p_by_shift.min() == 1 / 200
    search = lag_search(pair.driver, pair.response, windows=(6, 12), surrogates=199)
    assert search.p == 1 / 200
    assert search.best_shift in found.shifts


def test_an_unrelated_pair_has_no_lag():
    found = shift_set(noise(11, 240), noise(12, 240), window=12)
    assert not found.identified
    assert found.shifts.size > 48


def test_the_set_holds_the_planted_lag_about_as_often_as_it_says():
    held = 0
    for seed in range(30):
        pair = planted_pair(
            np.random.default_rng([13, seed]), 240, lag=8, slope=0.4, noise=0.25, noise_ar=0.3,
            spread=9,
        )  # fmt: skip
        found = shift_set(
            pair.driver, pair.response, window=12, shifts=range(-12, 25), draws=99, seed=seed
        )
        held += 8 in found.shifts
    assert held >= 25  # at a coverage of 95 %, fewer has probability .003


def test_chunks_in_any_order_and_the_seed():
    driver, response = noise(14, 240), noise(15, 240)
    response[6:] += 0.6 * driver[:-6]
    plan = shift_set_plan(driver, response, window=6, seed=2)
    assert plan.chunks == 7
    chunks = [shift_set_chunk(plan, index) for index in (6, 3, 0, 1, 2, 5, 4)]
    found = shift_set_result(plan, chunks)
    again = shift_set(driver, response, window=6, seed=2)
    for field in dataclasses.fields(found):
        np.testing.assert_array_equal(getattr(found, field.name), getattr(again, field.name))
    other = shift_set(driver, response, window=6, seed=3)
    assert 0 < np.abs(other.p_by_shift - found.p_by_shift).max() < 0.25
    with pytest.raises(ValueError, match="chunks must be 0 to 6, each once"):
        shift_set_result(plan, chunks[1:])
    with pytest.raises(ValueError, match="index must be from 0 to 6, but got 7"):
        shift_set_chunk(plan, 7)


def test_a_lower_level_gives_a_smaller_set():
    driver, response = noise(16, 240), noise(17, 240)
    response[6:] += 0.6 * driver[:-6]
    sets = [shift_set(driver, response, window=6, level=level) for level in (0.5, 0.8, 0.95)]
    for inner, outer in pairwise(sets):
        assert set(inner.shifts) < set(outer.shifts)
    for found in sets:
        kept = found.candidates[found.p_by_shift > 1 - found.level]
        np.testing.assert_array_equal(found.shifts, kept)


def test_cells_without_pairs_are_not_in_the_set():
    found = shift_set(noise(18, 70), noise(19, 70), window=12, draws=19)
    undefined = np.abs(found.candidates) > 70 - 12 + 1 - 24
    np.testing.assert_array_equal(np.isnan(found.p_by_shift), undefined)
    assert np.abs(found.shifts).max() <= 35


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"level": 1.0}, "level must be above 0 and below 1, but got 1.0"),
        ({"draws": 0}, "draws must be 1 or more, but got 0"),
        ({"seed": 0.5}, "seed must be an integer, but got 0.5"),
        ({"window": 0}, "windows must be from 1 to 120 months, but got 0"),
        ({"window": 110}, "a candidate shift must have 24 pairs that vary, but none has"),
        ({"response": np.ones(120)}, "a candidate shift must have 24 pairs that vary"),
        ({"response": noise(20, 120)}, "the response must not follow the driver exactly"),
        ({"response": np.full(120, np.nan)}, "response must be finite, but got nan"),
    ],
)
def test_errors(change, sentence):
    given = {"driver": noise(20, 120), "response": noise(21, 120), "window": 6} | change
    with pytest.raises(ValueError, match=sentence):
        shift_set(given.pop("driver"), given.pop("response"), **given)
