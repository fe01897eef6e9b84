"""Season taken out here and frequencies that meet: the numbers, and what says so."""

from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.rates import growth_rate
from analytics.seasonal import HERE, at_frequency, seasonal_adjustment
from analytics.series import Series
from app import exports
from app.compute import Bridge
from app.intake.reading import Release
from app.pages import lag
from app.state import StateError, ViewState
from app.workspace import Workspace

START = pd.Period("1990-01", "M")
PATTERN = np.array([2.0, -1, 0, 1, 0, -2, -1, 0, 1, 0, -1, 1])


def walk(name, seed, n=360, season=0.0, adjustment="no"):
    steps = np.random.default_rng(seed).normal(0.3, 0.5, n)
    log = np.cumsum(steps) + season * np.resize(PATTERN, n)
    return Series(name, START, 100 * np.exp(log / 100), "index", "", adjustment, "a.csv")


MONEY, PRICES = walk("Money", 1, season=1.0), walk("Prices", 2, adjustment="yes")
OUTPUT = replace(at_frequency(walk("Output", 3), "quarterly"), source="b.csv")
STATE = ViewState(driver="Money", response="Prices", window=6, shift=3)


@pytest.fixture
def bridge():
    return Bridge(Workspace((Release("a.csv", (MONEY, PRICES, OUTPUT), ()),)))


def test_only_the_unadjusted_side_is_adjusted(bridge):
    pair = bridge.pair(replace(STATE, season="stl"))
    adjusted = growth_rate(seasonal_adjustment(MONEY).adjusted)
    np.testing.assert_array_equal(pair.driver.values, adjusted.values)
    np.testing.assert_array_equal(pair.response.values, growth_rate(PRICES).values)
    assert bridge.pair(STATE).driver.values.std() > 1.5 * pair.driver.values.std()


def test_a_series_of_unknown_adjustment_is_left_and_that_is_said():
    unknown = replace(MONEY, adjustment="unknown")
    here = Bridge(Workspace((Release("a.csv", (unknown, PRICES), ()),)))
    asked = replace(STATE, season="stl")
    np.testing.assert_array_equal(here.pair(asked).driver.values, growth_rate(MONEY).values)
    assert here.prepared(asked).said[0].startswith("Money: left as read, since its file does not")


def test_keys_follow_season_meeting_and_what_is_said_of_a_series(bridge):
    asked = replace(STATE, season="stl")
    keys = {bridge.key(STATE), bridge.key(asked), bridge.key(replace(STATE, meet="last"))}
    assert len(keys) == 3
    bridge.workspace.correct("Money", "adjustment", "yes")
    assert bridge.key(asked) not in keys
    assert bridge.prepared(asked).said == ()


@pytest.mark.parametrize("meet", ["average", "last"])
@pytest.mark.parametrize("turned", [False, True])
def test_two_frequencies_meet_at_the_lower_one(bridge, meet, turned):
    names = {"driver": "Output", "response": "Prices"}
    if turned:
        names = {"driver": "Prices", "response": "Output"}
    pair = bridge.pair(replace(STATE, **names, meet=meet))
    prices, output = (pair.driver, pair.response) if turned else (pair.response, pair.driver)
    groups = pd.Series(PRICES.values, index=PRICES.periods).groupby(PRICES.periods.asfreq("Q-DEC"))
    levels = groups.mean() if meet == "average" else groups.last()
    np.testing.assert_allclose(prices.values, 100 * np.diff(np.log(levels)), atol=1e-11)
    np.testing.assert_array_equal(output.values, growth_rate(OUTPUT).values)
    assert pair.driver.frequency == pair.response.frequency == "quarterly"
    how = "the average" if meet == "average" else "the last value"
    (said,) = bridge.prepared(replace(STATE, **names, meet=meet)).said
    assert said == (
        f"Prices: monthly values meet quarterly ones by {how} of each quarter;"
        " nothing is interpolated"
    )


def test_page_and_files_say_both(bridge):
    asked = replace(STATE, response="Output", season="stl", meet="last")
    data = lag.payload(asked, bridge)
    assert data["noun"] == "quarter"
    assert f"Money: {HERE}." in data["notes"]
    assert any("meet quarterly ones by the last value" in note for note in data["notes"])
    assert HERE in data["source"] and "quarterly by last of 3 months" in data["source"]
    text = exports.csv_export("overlay", data_query(data), bridge)[1]
    assert f"# made here: Money: {HERE}".replace(",", ";") in text  # no commas in a header
    assert "# made here: Money: monthly values meet quarterly ones by the last value" in text
    plain = exports.csv_export("overlay", STATE.to_query(), bridge)[1]
    assert "made here" not in plain and "STL" not in plain


def data_query(data):
    return ViewState(**data["state"]).to_query()


def test_choices_outside_the_list_are_refused():
    with pytest.raises(StateError, match="Season must be one of read, stl"):
        ViewState(season="x11")
    with pytest.raises(StateError, match="Frequencies meet by must be one of average, last"):
        ViewState(meet="first")
