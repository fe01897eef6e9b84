"""Matched peaks: planted waves, the published maxima of the solar cycle, and what chance does."""

import numpy as np
import pytest

from analytics.peaks import matched_peaks


def humps(places, size=400, height=1.0, wide=6.0):
    t = np.arange(size)
    return sum(height * np.exp(-0.5 * ((t - place) / wide) ** 2) for place in places)


def test_planted_humps_are_joined_across_the_shift_with_their_own_distances():
    found = matched_peaks(
        humps([50, 150, 250, 330]), humps([70, 175, 262, 390]), shift=20, reach=12
    )
    np.testing.assert_array_equal(found.driver, [50, 150, 250, 330])
    np.testing.assert_array_equal(found.response, [70, 175, 262, 390])
    np.testing.assert_array_equal(found.pairs, [[50, 70], [150, 175], [250, 262]])
    np.testing.assert_array_equal(found.distance, [20, 25, 12])  # 330 to 390 is 40 off: no match
    np.testing.assert_allclose(found.height, 1.0, atol=1e-6)
    assert found.in_span == 4


def test_shift_below_zero_looks_backwards():
    found = matched_peaks(humps([100, 200]), humps([85, 190]), shift=-12, reach=5)
    np.testing.assert_array_equal(found.distance, [-15, -10])


def test_each_peak_is_matched_once_with_the_nearest():
    found = matched_peaks(humps([100, 130], wide=4), humps([133], wide=4), shift=0, reach=40)
    np.testing.assert_array_equal(found.pairs, [[130, 133]])


def test_swapping_the_sides_turns_the_distances_round():
    rng = np.random.default_rng(3)
    x, y = (np.convolve(rng.standard_normal(500), np.ones(12) / 12, "valid") for _ in "ab")
    there = matched_peaks(x, y, shift=7, reach=9)
    back = matched_peaks(y, x, shift=-7, reach=9)
    assert there.distance.size > 3
    assert sorted(map(tuple, there.pairs)) == sorted((b, a) for a, b in back.pairs)


def test_by_chance_counts_the_places_near_a_peak():
    found = matched_peaks(humps([50]), humps([100, 300]), shift=0, reach=10)
    assert found.by_chance == pytest.approx(42 / 400)
    assert matched_peaks(humps([50]), np.arange(400.0), shift=0, reach=10).by_chance == 0.0


def test_maxima_of_the_solar_cycle_are_the_published_years():
    """Yearly mean sunspot numbers (SIDC, in statsmodels); maxima of cycles 19 to 23 by NOAA.

    1957.9, 1968.9, 1979.9, 1989.6 and 2000.3; years from memory. The second series is the first
    moved by three years, so every peak but the last has its match three years on.
    """
    from statsmodels.datasets import sunspots

    table = sunspots.load_pandas().data
    years, spots = table["YEAR"].to_numpy().astype(int), table["SUNACTIVITY"].to_numpy()
    found = matched_peaks(spots[3:], spots[:-3], shift=3, reach=1, prominence=1.0)
    at = years[3:][found.driver]
    assert [int(y) for y in at[at > 1950]] == [1957, 1968, 1979, 1989, 2000]
    assert set(found.distance.tolist()) == {3}
    assert found.pairs.shape[0] == found.driver.size


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"driver": [[1.0]]}, "driver must be one-dimensional"),
        ({"response": [np.nan] * 400}, "response must be one-dimensional and finite"),
        ({"response": [1.0]}, "one length"),
        ({"reach": -1}, "reach and prominence"),
        ({"prominence": -0.1}, "reach and prominence"),
    ],
)
def test_refusals(change, words):
    usual = {"driver": humps([50]), "response": humps([60]), "shift": 5, "reach": 3}
    given = usual | change
    with pytest.raises(ValueError, match=words):
        matched_peaks(given.pop("driver"), given.pop("response"), **given)
