"""Which cells a map has, which of them is shown, and that cell and map share their months."""

from dataclasses import replace

import numpy as np
import pytest

from analytics.surface import lag_surface
from app.compute import MIN_PAIRS, Bridge, cell_span, grid
from app.state import ViewState
from tests.app.economies import LAG, planted, workspace

PLANTED = ViewState(driver="Money", response="Prices", window=1, shift=LAG)


def bridge(**options):
    return Bridge(workspace(*planted(**options)))


def pair_of(n, first="2000-01"):
    return bridge(n=n, first=first).pair(PLANTED)


@pytest.mark.parametrize(
    ("n", "first", "windows", "shifts"),
    [
        (802, "1960-01", (1, 60), (-36, 60)),
        (267, "1960Q1", (1, 20), (-12, 20)),
        (66, "1960", (1, 5), (-3, 5)),
        (100, "2000-01", (1, 25), (-36, 52)),  # 100 - 25 + 1 - 52 = 24 pairs in the farthest cell
        (30, "2000-01", (1, 7), (0, 0)),
        (24, "2000-01", (1, 1), (0, 0)),
    ],
)
def test_the_usual_map_is_five_years_and_less_where_the_sample_is_short(n, first, windows, shifts):
    found = grid(pair_of(n, first), PLANTED)
    assert [(r[0], r[-1]) for r in found] == [windows, shifts]


@pytest.mark.parametrize("n", [24, 25, 30, 47, 48, 60, 100, 131, 240, 802])
@pytest.mark.parametrize("first", ["1960-01", "1960Q1", "1960"])
def test_every_cell_of_the_usual_map_has_enough_pairs(n, first):
    here = bridge(n=n, first=first)
    found = here.surface(replace(PLANTED, window=1, shift=0))
    assert found.pairs.min() >= MIN_PAIRS
    assert np.isfinite(found.correlation).all()
    assert 0 in found.shifts
    assert found.windows[0] == 1


def test_a_map_is_the_one_asked_for_within_sliders_and_sample():
    here = bridge()
    found = here.surface(replace(PLANTED, windows="3:60", shifts="-36:60"))
    assert (found.windows[0], found.windows[-1]) == (3, 60)
    assert (found.shifts[0], found.shifts[-1]) == (-36, 60)
    assert found.pairs.max() == 240 - 2
    short = replace(PLANTED, last="2006-06", windows="3:50", shifts="-36:50")
    few = here.surface(short).pairs < MIN_PAIRS
    assert few.any()
    assert np.isnan(here.surface(short).correlation[few]).all()
    assert np.isfinite(here.surface(short).correlation[~few]).all()


@pytest.mark.parametrize(
    ("first", "state", "window", "shift"),
    [
        ("2000-01", {}, 12, 24),
        ("2000-01", {"window": 60}, 12, 24),  # 240 months allow 60
        ("1960Q1", {}, 12, 12),
        ("1960Q1", {"window": 40, "shift": 50}, 4, 8),
        ("1960", {"window": 12, "shift": 24}, 1, 2),
        ("1960", {"window": 3, "shift": -3}, 3, -3),
        ("2000-01", {"windows": "2:6", "shifts": "1:3"}, 6, 3),
        ("2000-01", {"windows": "20:30", "shifts": "30:40"}, 20, 30),
        ("2000-01", {"shifts": "-9:-4"}, 12, -4),
    ],
)
def test_a_cell_outside_the_map_gives_way_to_the_calendars_usual_one(first, state, window, shift):
    usual = ViewState(driver="Money", response="Prices")
    n = 66 if first == "1960" else 240
    here = bridge(n=n, first=first)
    asked = replace(usual, **state)
    fitted = here.fitted(asked)
    if state == {"window": 60}:
        window = 60
    if first == "1960Q1" and not state:
        shift = 8  # 24 quarters lie outside -12..20
    assert (fitted.window, fitted.shift) == (window, shift)
    assert replace(fitted, window=asked.window, shift=asked.shift) == asked
    assert here.fitted(fitted) == fitted
    assert here.surface(fitted).cell(fitted.window, fitted.shift)


def test_what_was_asked_for_by_name_is_kept():
    here = bridge(n=66, first="1960")
    asked = replace(PLANTED, window=12, shift=24)
    assert here.fitted(asked, asked={"window"}) == replace(asked, shift=2)
    assert here.fitted(asked, asked={"window", "shift"}) == asked


# The same months -----------------------------------------------------------------------------


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize(
    ("windows", "shifts"), [("1:5", "-4:6"), ("3:8", "2:9"), ("2:4", "-7:-3"), ("6:6", "0:0")]
)
def test_the_chosen_cell_is_that_cell_of_the_map(months, windows, shifts):
    here = bridge(n=60)
    state = replace(PLANTED, months=months, windows=windows, shifts=shifts)
    pair = here.pair(state)
    surface = lag_surface(
        pair.driver.values,
        pair.response.values,
        windows=grid(pair, state)[0],
        shifts=grid(pair, state)[1],
        same_months=months == "same",
        min_pairs=MIN_PAIRS,
    )
    seen = here.surface(state)
    np.testing.assert_array_equal(seen.correlation, surface.correlation)
    starts = set()
    for i, window in enumerate(surface.windows):
        for j, shift in enumerate(surface.shifts):
            chosen = replace(state, window=int(window), shift=int(shift))
            cell = here.cell(chosen)
            assert cell.n == surface.pairs[i, j]
            assert cell.correlation == pytest.approx(surface.correlation[i, j], abs=1e-12)
            assert cell.slope == pytest.approx(surface.slope[i, j], abs=1e-12)
            starts.add(cell_span(pair, chosen)[0] + cell.start)
    assert (len(starts) == 1) == (months == "same" or surface.pairs.size == 1)


def test_the_same_months_are_the_ones_that_every_cell_has():
    here = bridge(n=60)
    state = replace(PLANTED, months="same", windows="1:5", shifts="-4:6", window=2, shift=3)
    pair = here.pair(state)
    # Months 5-1+4 = 8 to 60-1-6 = 53 of the driver, so 46 pairs, by hand.
    cell = here.cell(state)
    assert cell_span(pair, state)[0] + cell.start == 8
    assert cell.n == 46
    np.testing.assert_allclose(
        cell.driver, [pair.driver.values[t - 1 : t + 1].mean() for t in range(8, 54)], atol=1e-12
    )
    np.testing.assert_allclose(
        cell.response,
        [pair.response.values[t + 2 : t + 4].mean() for t in range(8, 54)],
        atol=1e-12,
    )
