"""A season taken out here: one result for every page, said wherever it is used."""

from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.print_rates import print_rates
from analytics.rates import growth_rate
from analytics.seasonal import HERE, SeasonalAdjustment, seasonal_adjustment
from analytics.series import Series
from app import exports
from app.compute import Bridge
from app.desk.exports import csv_export as data_csv
from app.desk.seasons import chosen
from app.intake.reading import Release
from app.pages import data, lag_season, reading
from app.pages.lag_evidence import answer as lag_answer
from app.reading.answer import reading_answer
from app.reading.bridge import reading as reading_of
from app.reading.exports import csv_export as reading_csv
from app.seasons import season_words
from app.state import ViewState
from app.workspace import Workspace
from tests.exported import records

START = pd.Period("1990-01", "M")
PATTERN = np.array([2.0, -1, 0, 1, 0, -2, -1, 0, 1, 0, -1, 1])


def series(name, seed, n=240, adjustment="no", season=1.0):
    steps = np.random.default_rng(seed).normal(0.3, 0.1, n)
    log = np.cumsum(steps) + season * np.resize(PATTERN, n)
    return Series(name, START, 100 * np.exp(log / 100), "index", "", adjustment, "an office")


PRICES, MONEY = series("Prices", 1), series("Money", 2)
OTHERS = (
    series("Short", 3, n=40),
    series("Unknown", 4, adjustment="unknown"),
    series("Clean", 5, adjustment="yes"),
)
STATE = ViewState(driver="Money", response="Prices", window=6, shift=3, season="stl")


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace((Release("a.csv", (PRICES, MONEY, *OTHERS), ()),)))


def words_of(parts):
    return " ".join(str(part.to_plotly_json()) for part in parts)


def test_data_lag_and_reading_share_one_result(bridge):
    on_data = chosen(ViewState(unadjusted="Prices"), bridge).result
    assert bridge.prepared(STATE).seasons[1][1] is on_data
    known = reading_of(ViewState(series="Prices", season="stl"), bridge)
    assert known.short is on_data.adjusted


def test_the_words_name_the_ends_of_the_newest_year():
    flat = replace(PRICES, values=np.full(24, 100.0))
    season = replace(flat, values=np.tile(PATTERN, 2), kind="rate", unit="percent")
    said = season_words(SeasonalAdjustment(flat, season))
    assert said == (
        "In the newest year the season moves Prices from −2.00 (Jun 1991) to +2.00 (Jan 1991),"
        f" percent. A{HERE[1:]}."
    )
    grown = replace(season, values=np.r_[PATTERN, 2 * PATTERN])
    assert "range was 4.00 in the first year and is 8.00 now" in season_words(
        SeasonalAdjustment(flat, grown)
    )


def test_the_data_page_shows_the_season_of_the_series_chosen(bridge):
    shown = data.answer(ViewState(unadjusted="Money"), bridge)
    drawn = shown.charts["season"].data[0]
    np.testing.assert_array_equal(drawn.y, seasonal_adjustment(MONEY).season.values)
    assert HERE[1:] in shown.subtitles["season"]
    said = words_of(shown.words["season-words"])
    assert "field-unadjusted" in said
    assert "'Clean'" not in said  # said to be adjusted: nothing to take out
    name, text = data_csv("season", "unadjusted=Money", bridge)
    assert name == "season-money.csv"
    assert "not official" in text
    rows = records(text)
    assert [float(row["season"]) for row in rows] == drawn.y.tolist()
    assert float(rows[7]["as_used"]) == MONEY.values[7]


def test_a_season_that_cannot_be_taken_out_says_why(bridge):
    shown = data.answer(ViewState(unadjusted="Short"), bridge)
    assert "season" not in shown.charts
    assert "must have at least 60 months" in words_of(shown.words["season-words"])
    with pytest.raises(ValueError, match="no season of 'Short' to show: 'Short' must have at"):
        data_csv("season", "unadjusted=Short", bridge)


def test_without_an_unadjusted_series_the_page_says_so():
    bare = Bridge(Workspace((Release("a.csv", OTHERS[1:], ()),)))
    shown = data.answer(ViewState(), bare)
    assert "No series in view is said to be unadjusted" in words_of(shown.words["season-words"])
    with pytest.raises(ValueError, match="no series in view is said to be unadjusted"):
        data_csv("season", "", bare)


def test_the_lag_page_shows_and_exports_what_it_took_out(bridge):
    *_, charts = lag_answer(STATE, bridge, ("season",))
    drawn = charts["figures"]["season"]["data"]
    assert [trace["name"] for trace in drawn] == ["Money", "Prices"]
    _, text = exports.csv_export("season", STATE.to_query(), bridge)
    rows = records(text)
    money = [float(row["season"]) for row in rows if row["series"] == "Money"]
    assert money == seasonal_adjustment(MONEY).season.values.tolist()
    assert "# made here: Money: adjusted here by STL; not official" in text


def test_the_fold_says_when_nothing_was_taken_out(bridge):
    read = replace(STATE, season="read")
    assert "used as read" in words_of(lag_season.words(bridge.prepared(read), "read"))
    clean = Bridge(Workspace((Release("a.csv", (*OTHERS[1:],), ()),)))
    used = clean.prepared(replace(STATE, driver="Clean", response="Unknown"))
    assert "nothing was taken out" in words_of(lag_season.words(used, "stl"))
    assert lag_season.chart(used) == {}


# The Reading page ------------------------------------------------------------------------------


def test_short_rates_are_of_the_adjusted_series_and_yearly_ones_as_read(bridge):
    known = reading_of(ViewState(series="Prices", season="stl"), bridge)
    adjusted = print_rates(seasonal_adjustment(PRICES).adjusted)
    read, found = print_rates(PRICES), known.rates["percent"]
    assert (found.one, found.quarter_annualised, found.half_annualised) == (
        adjusted.one,
        adjusted.quarter_annualised,
        adjusted.half_annualised,
    )
    assert (found.year, found.annual_average) == (read.year, read.annual_average)
    assert found.one != read.one
    assert known.print_value == adjusted.one
    assert known.sample.std() < 0.4 * growth_rate(PRICES).values.std()
    plain = reading_of(ViewState(series="Prices"), bridge)
    np.testing.assert_array_equal(known.yearly.values, plain.yearly.values)
    np.testing.assert_array_equal(known.base.new, plain.base.new)


def test_the_label_stands_on_screen_and_in_files(bridge):
    state = ViewState(series="Prices", season="stl")
    shown = reading.answer(state, bridge)
    for text in (shown.sentence, shown.source, shown.subtitles["rank"], shown.subtitles["rates"]):
        assert HERE in text
    assert HERE in words_of(shown.words["summary"])
    assert HERE not in words_of(shown.words["alerts"])  # no reason for alarm
    text = reading_csv("rates", state.to_query(), bridge)[1]
    assert "adjusted here by STL; not official" in text
    column = [float(row["value_adjusted_here"]) for row in records(text)]
    assert column == seasonal_adjustment(PRICES).adjusted.values.tolist()
    assert HERE in reading_answer(reading_of(state, bridge), ())["adjusted_here"]


def test_a_yearly_measure_needs_no_label(bridge):
    shown = reading.answer(ViewState(series="Prices", season="stl", measure="12m"), bridge)
    assert HERE not in shown.sentence


@pytest.mark.parametrize(
    ("name", "said"),
    [
        ("Short", "The season of Short is left in: 'Short' must have at least 60 months"),
        ("Unknown", "The season of Unknown is left in, since its file does not say"),
        ("Clean", ""),
    ],
)
def test_what_is_not_adjusted_is_read_as_it_is_and_said(bridge, name, said):
    known = reading_of(ViewState(series=name, season="stl"), bridge)
    plain = reading_of(ViewState(series=name), bridge)
    assert known.short is None
    assert known.rates["percent"] == plain.rates["percent"]
    assert any(note.startswith(said) for note in known.notes) if said else not known.notes


def test_a_season_that_is_left_in_is_pointed_out(bridge):
    unadjusted = reading.answer(ViewState(series="Prices"), bridge).words["summary"]
    assert "rates over less than a year hold its season" in words_of(unadjusted)
    clean = reading.answer(ViewState(series="Clean"), bridge).words["summary"]
    assert "hold its season" not in words_of(clean)


def test_the_page_says_which_day_it_stood_on(bridge):
    hidden = reading.answer(ViewState(series="Prices"), bridge).words["as-of"]
    assert hidden.hidden
    day = "2999-01-01"
    shown = reading.answer(ViewState(series="Prices", as_of=day), bridge).words["as-of"]
    assert not shown.hidden
    assert "as it stood on 1 Jan 2999" in str(shown.to_plotly_json())
