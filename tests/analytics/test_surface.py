"""lag_surface against its plain twin, known lags, numpy's own r, and degenerate series."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from analytics.surface import lag_surface
from tests.references.plain_surface import months_of_every_cell, plain_cell


def autoregression(n, phi, seed):
    values = np.random.default_rng(seed).standard_normal(n)
    for t in range(1, n):
        values[t] += phi * values[t - 1]
    return values


KINDS = {
    "white": lambda seed, n: autoregression(n, 0.0, seed),
    "AR .98": lambda seed, n: autoregression(n, 0.98, seed),
    "integrated": lambda seed, n: autoregression(n, 1.0, seed),
    "twice integrated": lambda seed, n: np.cumsum(autoregression(n, 1.0, seed)),
    "level of a million": lambda seed, n: 1e6 + autoregression(n, 0.5, seed),
    "trend": lambda seed, n: np.arange(n) + autoregression(n, 0.0, seed),
    "spike": lambda seed, n: (
        autoregression(n, 0.5, seed) + 40.0 * (np.arange(n) == n // 3 + seed % 7)
    ),
}


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("same_months", [False, True])
def test_equals_exact_twin(kind, same_months):
    driver, response = KINDS[kind](1, 160), KINDS[kind](2, 160)
    windows, shifts = [1, 2, 12, 37, 60], [-36, -35, -7, -1, 0, 1, 6, 24, 29]
    surface = lag_surface(driver, response, windows=windows, shifts=shifts, same_months=same_months)
    only = months_of_every_cell(160, windows, shifts) if same_months else None
    for i, window in enumerate(windows):
        for j, shift in enumerate(shifts):
            cell = plain_cell(driver, response, window, shift, only=only)
            assert surface.pairs[i, j] == cell.pairs
            if same_months:
                assert cell.pairs == len(only)
            assert surface.correlation[i, j] == pytest.approx(cell.correlation, abs=1e-12)
            assert surface.slope[i, j] == pytest.approx(cell.slope, rel=1e-10, abs=1e-12)


@pytest.mark.parametrize("kind", KINDS)
def test_equals_exact_twin_on_a_long_sample(kind):
    driver, response = KINDS[kind](3, 760), KINDS[kind](4, 760)
    surface = lag_surface(driver, response, windows=range(1, 61), shifts=range(-36, 61))
    for window, shift in [(1, 0), (1, 60), (12, 24), (60, -36), (60, 60)]:
        cell = plain_cell(driver, response, window, shift)
        place = surface.cell(window, shift)
        assert surface.correlation[place] == pytest.approx(cell.correlation, abs=1e-12)
        assert surface.slope[place] == pytest.approx(cell.slope, rel=1e-10)


def test_equals_numpy_at_window_one():
    driver, response = autoregression(200, 0.5, 5), autoregression(200, 0.5, 6)
    surface = lag_surface(driver, response, windows=[1], shifts=[-9, 0, 9])
    judge = [
        np.corrcoef(driver[9:], response[:-9])[0, 1],
        np.corrcoef(driver, response)[0, 1],
        np.corrcoef(driver[:-9], response[9:])[0, 1],
    ]
    np.testing.assert_allclose(surface.correlation[0], judge, atol=1e-13)


@pytest.mark.parametrize("lead", [6, -6, 17])
@pytest.mark.parametrize("same_months", [False, True])
def test_planted_lag_is_found(lead, same_months):
    """The response repeats the driver `lead` months later: the peak stands at that shift."""
    rng = np.random.default_rng(7)
    long = rng.standard_normal(400)
    driver = long[100:340]
    response = 0.4 * long[100 - lead : 340 - lead] + 0.1 * rng.standard_normal(240)
    surface = lag_surface(
        driver, response, windows=range(1, 13), shifts=range(-24, 25), same_months=same_months
    )
    assert surface.peak()[1] == lead
    assert surface.slope[surface.cell(1, lead)] == pytest.approx(0.4, abs=0.03)


def test_equal_cells_give_the_first():
    driver = autoregression(240, 0.3, 8)
    surface = lag_surface(driver, 3.0 * driver + 1.0, windows=range(1, 30), shifts=range(-3, 4))
    assert surface.peak() == surface.peak("correlation") == (1, 0)


def test_planted_negative_relation():
    driver = autoregression(240, 0.3, 8)
    surface = lag_surface(driver, -np.roll(driver, 5), windows=[1, 3], shifts=range(-9, 10))
    assert surface.peak()[1] == 5
    assert surface.correlation[surface.cell(*surface.peak())] < -0.99
    window, shift = surface.peak("correlation")
    assert surface.correlation[surface.cell(window, shift)] == surface.correlation.max() < 0.9


def test_series_with_itself_has_correlation_one():
    for kind, series in KINDS.items():
        values = series(9, 150)
        surface = lag_surface(values, values, windows=range(1, 25), shifts=[0])
        np.testing.assert_allclose(surface.correlation, 1.0, atol=1e-12, err_msg=kind)
        np.testing.assert_allclose(surface.slope, 1.0, atol=1e-12, err_msg=kind)


@settings(max_examples=30, deadline=None)
@given(
    seed=st.integers(0, 10_000),
    scale=st.floats(1e-3, 1e3),
    level=st.floats(-1e3, 1e3),
    window=st.integers(1, 24),
)
def test_level_and_scale_leave_the_correlation(seed, scale, level, window):
    driver, response = autoregression(90, 0.7, seed), autoregression(90, 0.7, seed + 1)
    plain = lag_surface(driver, response, windows=[window], shifts=range(-12, 13))
    moved = lag_surface(
        scale * driver + level, response - level, windows=[window], shifts=range(-12, 13)
    )
    np.testing.assert_allclose(moved.correlation, plain.correlation, atol=1e-8)
    np.testing.assert_allclose(moved.slope * scale, plain.slope, atol=1e-8)


@settings(max_examples=30, deadline=None)
@given(seed=st.integers(0, 10_000), window=st.integers(1, 24), same_months=st.booleans())
def test_swapping_the_sides_mirrors_the_shifts(seed, window, same_months):
    driver, response = autoregression(90, 0.7, seed), autoregression(90, 0.2, seed + 1)
    shifts = range(-20, 21)
    options = {"windows": [window], "shifts": shifts}
    there = lag_surface(driver, response, **options)
    back = lag_surface(response, driver, **options)
    np.testing.assert_allclose(back.correlation[:, ::-1], there.correlation, atol=1e-13)
    product = there.slope * back.slope[:, ::-1]
    np.testing.assert_allclose(product, there.correlation**2, atol=1e-12)


@pytest.mark.parametrize("value", [0.0, 1.0, 0.1, 1.0 / 3.0, -7.7e-9, 1e6 + 0.1, 3e100])
@pytest.mark.parametrize("same_months", [False, True])
def test_constant_series_has_no_correlation(value, same_months):
    constant, response = np.full(200, value), autoregression(200, 0.5, 10)
    for pair in ((constant, response), (response, constant), (constant, constant)):
        surface = lag_surface(
            *pair, windows=range(1, 41), shifts=range(-36, 61), same_months=same_months
        )
        assert np.isnan(surface.correlation).all()
        assert np.isnan(surface.slope).all()
        assert surface.pairs.max() > 24
        with pytest.raises(ValueError, match="no cell has one"):
            surface.peak()


def test_constant_growth_from_an_index_has_no_correlation():
    """Rates of an index that grows by the same percent differ by rounding only."""
    rates = 100.0 * np.diff(np.log(1.007 ** np.arange(301)))
    assert rates.std() > 0
    surface = lag_surface(
        rates, autoregression(300, 0.5, 11), windows=range(1, 61), shifts=range(-12, 13)
    )
    assert np.isnan(surface.correlation).all()


def test_stretch_without_variation_is_nan_and_no_other():
    """The driver moves only in its last 30 months; cells that end before see a constant."""
    driver = np.r_[np.full(100, 0.3), autoregression(30, 0.0, 12)]
    surface = lag_surface(
        driver, autoregression(130, 0.0, 13), windows=[1, 12], shifts=[-20, 0, 29, 30, 45]
    )
    assert np.isnan(surface.correlation).tolist() == [[False, False, False, True, True]] * 2


def test_seasonal_pattern_vanishes_in_a_year():
    season = np.tile(np.random.default_rng(14).standard_normal(12), 15)
    surface = lag_surface(
        season, autoregression(180, 0.5, 15), windows=[11, 12, 13, 24], shifts=[0, 3]
    )
    assert np.isnan(surface.correlation).all(axis=1).tolist() == [False, True, False, True]
    assert np.isnan(surface.correlation).any(axis=1).tolist() == [False, True, False, True]


def test_too_few_pairs_are_nan_but_counted():
    driver, response = autoregression(60, 0.5, 16), autoregression(60, 0.5, 17)
    surface = lag_surface(driver, response, windows=[1, 30, 60], shifts=[0, 36, 37, 59])
    assert surface.pairs.tolist() == [[60, 24, 23, 1], [31, 0, 0, 0], [1, 0, 0, 0]]
    assert np.isfinite(surface.correlation).tolist() == [
        [True, True, False, False],
        [True, False, False, False],
        [False] * 4,
    ]


def test_result_is_read_only_and_long_form_agrees():
    surface = lag_surface(
        autoregression(99, 0.5, 18), autoregression(99, 0.5, 19), windows=[1, 6], shifts=[-2, 0, 5]
    )
    for array in (surface.windows, surface.correlation, surface.slope, surface.pairs):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0
    frame = surface.to_frame()
    assert list(frame.columns) == ["window", "shift", "correlation", "slope", "pairs"]
    line = frame[(frame["window"] == 6) & (frame["shift"] == 5)].iloc[0]
    place = surface.cell(6, 5)
    assert place == (1, 2)
    assert line["correlation"] == surface.correlation[place]
    assert line["pairs"] == surface.pairs[place] == 99 - 5 - 5
    assert "6 of 6 cells defined" in repr(surface)


NOISE = np.random.default_rng(20).standard_normal(50)


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"response": NOISE[:49]}, "same length, but got 50 and 49"),
        ({"driver": np.r_[NOISE[:49], np.nan]}, "driver must be finite, but got nan at position"),
        ({"driver": NOISE.reshape(5, 10)}, "driver must be one-dimensional"),
        ({"windows": [3, 1]}, r"windows must be increasing integers, but got \[3, 1\]"),
        ({"windows": []}, "windows must be increasing integers"),
        ({"windows": [0, 1]}, "windows must be from 1 to 50 months, but got 0"),
        ({"windows": [51]}, "windows must be from 1 to 50 months, but got 51"),
        ({"shifts": [1.5]}, r"shifts must be integers, but got \[1.5\]"),
        ({"shifts": [2, 2]}, "shifts must be increasing integers"),
        ({"shifts": [-50, 0]}, "shifts must be from -49 to 49 months, but got -50"),
        ({"windows": [40]}, "at least 24 pairs, but no cell of the grid has more than 11 of 50"),
        ({"same_months": True, "shifts": [-20, 20]}, "no cell of the grid has more than 10"),
        ({"min_pairs": 2}, "min_pairs must be 3 or more, but got 2"),
    ],
)
def test_errors_are_one_sentence(change, sentence):
    arguments = {"driver": NOISE, "response": NOISE, "windows": [1], "shifts": [0]} | change
    with pytest.raises(ValueError, match=sentence):
        lag_surface(arguments.pop("driver"), arguments.pop("response"), **arguments)


def test_unknown_cell_and_peak():
    surface = lag_surface(NOISE, NOISE, windows=[1], shifts=[0])
    with pytest.raises(ValueError, match="window must be one of the grid, but got 2"):
        surface.cell(2, 0)
    with pytest.raises(ValueError, match="shift must be one of the grid, but got 5"):
        surface.cell(1, 5)
    with pytest.raises(ValueError, match="by must be absolute or correlation, but got 'slope'"):
        surface.peak("slope")
