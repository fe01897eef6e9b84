"""The bridge from states to results: once under threads, its own key, its own calendar."""

import time
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from flask import Flask

from analytics import cell as cell_module
from analytics import surface as surface_module
from analytics.series import Series
from app import compute
from app.compute import Bridge, noun, span_words, usual_grid
from app.memory import server_cache
from app.state import StateError, ViewState
from app.workspace import UnknownSeriesError
from tests.app.economies import LAG, SLOPE, levels, planted, workspace
from tests.app.threads import at_once

PLANTED = ViewState(driver="Money", response="Prices", window=1, shift=LAG)


def bridge(*series, kept=False, **options):
    return Bridge(
        workspace(*(series or planted(**options))), server_cache(Flask(__name__)) if kept else None
    )


# Once ----------------------------------------------------------------------------------------


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
    got = at_once(*[lambda: getattr(here, what)(PLANTED)] * 8)
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


def test_results_from_the_cache_cannot_be_written_to():
    here = bridge(kept=True)
    here.surface(PLANTED)
    found = here.surface(PLANTED)
    with pytest.raises(ValueError, match="read-only"):
        found.correlation[0, 0] = 99.0


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
