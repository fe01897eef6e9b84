"""The bridge from states to results: once under threads, its own key, its own calendar."""

import contextlib
import threading
import time
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from flask import Flask
from flask_caching import Cache

from analytics import cell as cell_module
from analytics import surface as surface_module
from analytics.series import Series
from analytics.surface import lag_surface
from app import compute
from app.compute import MIN_PAIRS, Bridge, cell_span, grid, noun, span_words, usual_grid
from app.memory import Memory
from app.state import StateError, ViewState
from app.workspace import UnknownSeriesError
from tests.app.economies import LAG, SLOPE, levels, planted, workspace

PLANTED = ViewState(driver="Money", response="Prices", window=1, shift=LAG)


def cache():
    return Cache(Flask(__name__), config={"CACHE_TYPE": "SimpleCache"})


def bridge(*series, kept=False, **options):
    return Bridge(workspace(*(series or planted(**options))), cache() if kept else None)


def in_threads(work, count=8):
    """Start the same work in several threads at one moment; return what each got."""
    start, got = threading.Barrier(count), [None] * count

    def run(place):
        start.wait()
        try:
            got[place] = work()
        except Exception as error:
            got[place] = error

    threads = [threading.Thread(target=run, args=(place,)) for place in range(count)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    return got


# Once ----------------------------------------------------------------------------------------


def test_a_result_is_made_once_however_many_ask():
    memory, calls = Memory(cache()), []

    def make():
        calls.append(1)
        time.sleep(0.05)
        return {"answer": 42}

    assert in_threads(lambda: memory.once("key", make)) == [{"answer": 42}] * 8
    assert len(calls) == 1
    assert memory.once("other", make) == {"answer": 42}
    assert len(calls) == 2


def test_two_keys_do_not_wait_for_each_other():
    memory, met = Memory(cache()), threading.Barrier(2)

    def make():
        met.wait(timeout=20)  # passes only if both are being made at the same time
        return 1

    keys = iter(["one", "two"])
    assert in_threads(lambda: memory.once(next(keys), make), count=2) == [1, 1]


def test_a_failure_is_raised_to_each_and_kept_by_none():
    memory, calls = Memory(cache()), []

    def make():
        calls.append(1)
        raise ValueError("no such cell")

    got = in_threads(lambda: memory.once("key", make), count=4)
    assert [str(error) for error in got] == ["no such cell"] * 4
    assert len(calls) == 4
    assert memory._locks == {}  # a failure leaves no lock behind
    assert memory.once("key", lambda: 7) == 7
    assert memory._locks == {}


def test_without_a_server_results_are_kept_too():
    made = iter(range(3))
    memory = Memory()
    assert memory.found("key") is None
    assert [memory.once("key", lambda: next(made)) for _ in range(3)] == [0, 0, 0]
    assert memory.found("key") == 0
    assert Memory().found("key") is None  # and by nobody else


@pytest.mark.parametrize("what", ["surface", "cell"])
def test_surface_and_cell_are_computed_once_for_all_tabs(monkeypatch, what):
    calls = []
    real = {"surface": surface_module.lag_surface, "cell": cell_module.lag_cell}[what]

    def counted(*args, **kwargs):
        calls.append(1)
        time.sleep(0.02)
        return real(*args, **kwargs)

    monkeypatch.setattr(compute, f"lag_{what}", counted)
    here = bridge(kept=True)
    got = in_threads(lambda: getattr(here, what)(PLANTED))
    assert len(calls) == 1
    for each in got:
        np.testing.assert_array_equal(each.correlation, got[0].correlation)
    getattr(here, what)(replace(PLANTED, quantity="slope"))  # display only
    assert len(calls) == 1
    getattr(here, what)(replace(PLANTED, shift=LAG + 1))
    assert len(calls) == (1 if what == "surface" else 2)  # all cells share one map
    getattr(here, what)(replace(PLANTED, first="2001-01"))
    assert len(calls) == (2 if what == "surface" else 3)


def test_what_comes_back_from_the_cache_is_what_was_computed():
    kept, fresh = bridge(kept=True), bridge()
    for _ in range(2):
        np.testing.assert_array_equal(
            kept.surface(PLANTED).correlation, fresh.surface(PLANTED).correlation
        )
        np.testing.assert_array_equal(kept.cell(PLANTED).residuals, fresh.cell(PLANTED).residuals)


def test_results_from_the_cache_cannot_be_written_to_or_do_not_reach_others():
    here = bridge(kept=True)
    here.surface(PLANTED)
    found = here.surface(PLANTED)
    before = found.correlation[0, 0]
    with contextlib.suppress(ValueError):
        found.correlation[0, 0] = 99.0
    assert here.surface(PLANTED).correlation[0, 0] == before


# Keys ----------------------------------------------------------------------------------------


def test_the_key_is_the_same_for_the_same_data_and_state():
    assert bridge().key(PLANTED) == bridge().key(PLANTED)


@pytest.mark.parametrize(
    "change",
    [
        {"window": 2},
        {"shift": 5},
        {"growth": "percent"},
        {"first": "2001-01"},
        {"last": "2015-01"},
        {"months": "same"},
        {"windows": "1:12"},
        {"shifts": "-3:12"},
    ],
)
def test_the_key_differs_when_the_numbers_may(change):
    here = bridge()
    assert here.key(replace(PLANTED, **change)) != here.key(PLANTED)


def test_the_key_does_not_differ_for_display_only():
    here = bridge()
    assert here.key(replace(PLANTED, quantity="slope")) == here.key(PLANTED)


def test_the_key_differs_when_the_roles_are_swapped():
    here = bridge()
    assert here.key(replace(PLANTED, driver="Prices", response="Money")) != here.key(PLANTED)


@pytest.mark.parametrize("side", [0, 1])
@pytest.mark.parametrize("what", ["value", "kind", "first"])
def test_the_key_differs_when_the_data_do(side, what):
    pair = list(planted())
    values = pair[side].values.copy()
    values[17] = np.nextafter(values[17], np.inf)
    changes = {
        "value": {"values": values},
        "kind": {"kind": "level"},
        "first": {"first": pair[side].first + 1},
    }
    before = bridge(*pair).key(PLANTED)
    pair[side] = replace(pair[side], **changes[what])
    assert bridge(*pair).key(PLANTED) != before


def test_a_corrected_file_is_answered_anew():
    driver, response = planted()
    here = bridge(driver, response, kept=True)
    before = here.cell(PLANTED).slope
    here.workspace.add(workspace(driver, replace(response, values=2 * response.values)).releases[0])
    assert here.cell(PLANTED).slope == pytest.approx(2 * before, rel=1e-12)


# Pairs ---------------------------------------------------------------------------------------


def test_the_planted_lag_and_its_sign_come_back():
    for lag in (LAG, -4):
        here = bridge(lag=lag)
        assert here.surface(PLANTED).peak()[1] == lag
        assert here.cell(replace(PLANTED, shift=lag)).slope == pytest.approx(SLOPE, abs=0.05)


def test_an_index_is_turned_into_growth_and_a_rate_is_used_as_it_is():
    money, prices = planted()
    here = bridge(levels(money), prices)
    pair = here.pair(PLANTED)
    np.testing.assert_allclose(pair.driver.values, money.values, rtol=0, atol=1e-10)
    np.testing.assert_array_equal(pair.response.values, prices.values)
    percent = here.pair(replace(PLANTED, growth="percent")).driver.values
    np.testing.assert_allclose(percent, 100 * np.expm1(money.values / 100), rtol=0, atol=1e-10)


def test_the_sample_includes_both_of_its_ends():
    pair = bridge().pair(replace(PLANTED, first="2005-03", last="2010-11"))
    assert (str(pair.periods[0]), str(pair.periods[-1])) == ("2005-03", "2010-11")
    years = bridge().pair(replace(PLANTED, first="2005", last="2010"))
    assert (str(years.periods[0]), str(years.periods[-1])) == ("2005-01", "2010-12")
    quarters = bridge().pair(replace(PLANTED, first="2005-Q2", last="2010-Q3"))
    assert (str(quarters.periods[0]), str(quarters.periods[-1])) == ("2005-04", "2010-09")


def gap(series):
    values = series.values.copy()
    values[100] = np.nan
    return replace(series, values=values)


@pytest.mark.parametrize(
    ("change", "state", "said"),
    [
        (None, {"driver": "Prices"}, "driver and response must be two series"),
        (None, {"driver": "Mony"}, "no loaded series is named 'Mony'; there is 'Money'"),
        (None, {"first": "2019-12", "last": "2000-01"}, "has no value in the sample chosen"),
        (None, {"first": "2030-01"}, "has no value in the sample chosen"),
        (None, {"last": "2001-06"}, "must have at least 24 months"),
        (None, {"windows": "1:999"}, "Windows searched must be a range within 1:60"),
        (None, {"windows": "0:5"}, "Windows searched must be a range within 1:60"),
        (None, {"windows": "9:5"}, "Windows searched must be a range within 1:60"),
        (None, {"shifts": "-37:5"}, "Shifts searched must be a range within -36:60"),
        (None, {"shifts": "5:-5"}, "Shifts searched must be a range within -36:60"),
        ("gap", {}, "'Prices' must have a value in every month of the sample, but May 2008"),
        ("quarters", {"last": "2003"}, "must have at least 24 quarters"),
        ("unadjusted", {"season": "stl"}, "must have at least 60 months to be adjusted, but has"),
        ("later", {}, "driver and response must overlap in time"),
        ("constant", {}, "must vary"),
        ("negative", {}, "'Prices' must be positive to have a growth rate"),
    ],
)
def test_what_cannot_be_shown_is_said_in_one_sentence(change, state, said):
    money, prices = planted()
    prices = {
        None: lambda s: s,
        "gap": gap,
        "quarters": lambda s: replace(s, first=pd.Period("2000Q1")),
        "unadjusted": lambda s: replace(s, values=s.values[:50], adjustment="no"),
        "later": lambda s: replace(s, first=pd.Period("2030-01", "M")),
        "constant": lambda s: replace(s, values=np.full(240, 0.25)),
        "negative": lambda s: replace(s, kind="index", values=-np.abs(s.values)),
    }[change](prices)
    here = bridge(money, prices)
    asked = replace(PLANTED, **state)
    with pytest.raises(ValueError, match=said) as caught:
        here.surface(asked)
        here.cell(asked)
    assert "\n" not in str(caught.value)
    assert len(str(caught.value)) < 400


def test_an_unknown_series_has_its_own_error():
    with pytest.raises(UnknownSeriesError):
        bridge().pair(replace(PLANTED, response="Nope"))


# The grid ------------------------------------------------------------------------------------


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


# The overlay ---------------------------------------------------------------------------------


@pytest.mark.parametrize("shift", [-36, -5, -1, 0, 1, LAG, 60])
@pytest.mark.parametrize("window", [1, 2, 12, 60])
def test_where_both_lines_exist_they_are_the_pairs_of_the_cell(window, shift):
    here = bridge()
    state = replace(PLANTED, window=window, shift=shift)
    overlay, cell, pair = here.overlay(state), here.cell(state), here.pair(state)
    both = np.isfinite(overlay.driver) & np.isfinite(overlay.response)
    assert both.sum() == cell.n
    np.testing.assert_allclose(overlay.driver[both], cell.driver, rtol=0, atol=1e-12)
    np.testing.assert_allclose(overlay.response[both], cell.response, rtol=0, atol=1e-12)
    assert overlay.periods[both][0] == pair.periods[cell.start]
    assert overlay.periods.is_monotonic_increasing
    assert (np.diff(overlay.periods.asi8) == 1).all()
    # And each side is there in full: n - w + 1 means.
    assert np.isfinite(overlay.driver).sum() == np.isfinite(overlay.response).sum()
    assert np.isfinite(overlay.driver).sum() == pair.n - window + 1


def test_the_response_is_moved_back_by_the_shift():
    here = bridge()
    overlay = here.overlay(replace(PLANTED, window=1, shift=LAG))
    pair = here.pair(PLANTED)
    line = pd.Series(overlay.response, index=overlay.periods)
    month = pair.periods[50]
    assert line[month - LAG] == pair.response.values[50]


# Other calendars -----------------------------------------------------------------------------


def test_quarters_are_counted_as_quarters():
    here = bridge(n=160, first="1980Q1")
    state = here.fitted(PLANTED)
    pair = here.pair(state)
    assert noun(pair) == "quarter"
    assert span_words(pair) == "1980 Q1 to 2019 Q4"
    assert here.surface(state).peak()[1] == LAG
    assert usual_grid("quarterly") == ((1, 20), (-12, 20))
    assert usual_grid("annual") == ((1, 5), (-3, 5))
    assert usual_grid("monthly") == ((1, 60), (-36, 60))
    overlay = here.overlay(state)
    assert overlay.periods.freqstr == "Q-DEC"


def test_months_left_out_at_the_ends_are_counted():
    money, prices = planted()
    shorter = Series("Prices", prices.first + 3, prices.values[3:-2], kind="rate")
    pair = bridge(money, shorter).pair(PLANTED)
    assert (pair.n, pair.lost_driver, pair.lost_response) == (235, 5, 0)


def test_a_short_sample_names_what_it_has():
    with pytest.raises(StateError, match="at least 24 months, but Jan 2000 to Nov 2001 has 23"):
        bridge(n=23).surface(PLANTED)
