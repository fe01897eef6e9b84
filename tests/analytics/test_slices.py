"""The sweeping band and the counts of pairs, against brute force, closed forms and numpy's own."""

import numpy as np
import pytest

from analytics.cell import lag_cell
from analytics.slices import pair_counts, slice_path


def cloud(n=300, seed=5):
    x, noise = np.random.default_rng(seed).standard_normal((2, n))
    return x, 0.4 * x + noise


@pytest.mark.parametrize("width", [0.02, 0.1, 0.37, 1.0])
def test_path_is_the_mean_of_the_pairs_in_each_band(width):
    x, y = cloud()
    path = slice_path(x, y, width=width)
    for k in range(path.centre.size):
        inside = (x >= path.low[k]) & (x <= path.high[k])
        assert path.count[k] == inside.sum()
        if inside.any():
            assert path.mean[k] == pytest.approx(y[inside].mean(), abs=1e-12)
        else:
            assert np.isnan(path.mean[k])
    assert path.overall == pytest.approx(y.mean())
    assert (path.centre[0], path.centre[-1]) == (x.min(), x.max())
    np.testing.assert_allclose(path.high - path.low, width * np.ptp(x))


def test_path_of_an_exact_line_on_an_even_grid_is_the_line_inside_and_bends_at_the_ends():
    """Closed form: on 0, 1 .. 1000 a band of 100 around c holds an even stretch around c."""
    x = np.arange(1001.0)
    path = slice_path(x, 2.0 * x + 1.0, width=0.1)
    inner = (path.low >= 0) & (path.high <= 1000)
    np.testing.assert_allclose(path.mean[inner], 2.0 * path.centre[inner] + 1.0)
    assert path.mean[0] == pytest.approx(2.0 * 25 + 1)  # 0 .. 50
    assert (path.count[0], path.count[50], path.count[-1]) == (51, 101, 51)


def test_path_of_a_band_as_wide_as_twice_the_range_would_be_flat():
    x, y = cloud()
    path = slice_path(x, y, width=1.0, steps=3)
    assert path.mean[1] == pytest.approx(y.mean())
    assert path.count[1] == x.size


def test_path_does_not_feel_the_level():
    x, y = cloud()
    np.testing.assert_allclose(
        slice_path(x, y + 1e9, width=0.1).mean - 1e9, slice_path(x, y, width=0.1).mean, atol=1e-6
    )


@pytest.mark.parametrize(("n", "bins"), [(800, 24), (240, 24), (239, 16), (96, 16), (95, 8)])
def test_counts_are_numpys_histograms(n, bins):
    x, y = cloud(n)
    found = pair_counts(x, y)
    both, y_edges, x_edges = np.histogram2d(y, x, bins=bins)
    np.testing.assert_array_equal(found.both, both)
    np.testing.assert_array_equal(found.driver, np.histogram(x, bins=bins)[0])
    np.testing.assert_array_equal(found.response, np.histogram(y, bins=bins)[0])
    np.testing.assert_allclose(found.driver_edges, x_edges)
    np.testing.assert_allclose(found.response_edges, y_edges)
    assert found.both.sum() == n


def test_bins_nest_in_the_slices_of_a_cell():
    x, y = cloud(500)
    cell = lag_cell(x, y, window=3, shift=2)
    found = pair_counts(cell.driver, cell.response)
    np.testing.assert_array_equal(found.driver.reshape(8, 3).sum(axis=1), cell.driver_slices.count)
    np.testing.assert_allclose(found.driver_edges[::3], cell.driver_slices.edges)


def test_results_cannot_be_written_to():
    path, counts = slice_path(*cloud(), width=0.1), pair_counts(*cloud())
    for array in (path.mean, path.count, path.low, counts.both, counts.driver, counts.driver_edges):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: slice_path([0.0, 1.0], [0.0, 1.0], width=0.0), "width must be above 0"),
        (lambda: slice_path([0.0, 1.0], [0.0, 1.0], width=1.1), "width must be above 0"),
        (lambda: slice_path([0.0, 1.0], [0.0, 1.0], width=0.5, steps=1), "steps must be 2"),
        (lambda: slice_path([1.0, 1.0], [0.0, 1.0], width=0.5), "must vary"),
        (lambda: slice_path([1.0, 2.0], [0.0], width=0.5), "same length"),
        (lambda: pair_counts([1.0, 1.0], [0.0, 1.0]), "must vary"),
        (lambda: pair_counts([1.0, np.nan], [0.0, 1.0]), "must be finite"),
    ],
)
def test_refusals(call, words):
    with pytest.raises(ValueError, match=words):
        call()
