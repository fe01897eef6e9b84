"""The Lag page: what it answers, what it sends to the browser, and its sentence when it cannot."""

import json
from dataclasses import asdict, replace

import pytest

from app.compute import MIN_PAIRS, Bridge
from app.demo import demo_releases
from app.lag.answer import answer
from app.lag.evidence import completed
from app.pages.lag import CAUTION, layout, payload, view
from app.state import ViewState, field_kind
from app.workspace import Workspace
from tests.app.components import nodes, words
from tests.app.economies import LAG, planted, workspace

STATE = ViewState(driver="Money", response="Prices", window=3, shift=LAG, surrogates=39)


def bridge(*series, **options):
    return Bridge(workspace(*(series or planted(**options))))


def answered(state, here):
    return answer(view(state, here), completed(state, here))


def by_id(page, name):
    (found,) = [part for part in nodes(page) if getattr(part, "id", None) == name]
    return found


# The answer ----------------------------------------------------------------------------------


def test_the_answer_has_the_keys_of_the_design():
    found = answered(STATE, bridge())
    assert {"driver", "response", "frequency", "first", "last", "cell", "best"} <= set(found)
    assert {
        "window",
        "shift",
        "n",
        "slope",
        "intercept",
        "correlation",
        "se_naive",
        "p_naive",
        "se_robust",
        "p_robust",
        "effective_months",
    } <= set(found["cell"])
    assert {
        "p",
        "p_one_sided",
        "p_with_level_shifts",
        "level_shifts_removed",
        "surrogates",
        "seed",
        "method",
    } <= set(found["search"])
    assert {"level", "identified", "shifts"} <= set(found["shift_set"])
    assert {"episodes", "fragility"} <= set(found)
    assert {"window", "shift", "correlation", "slope"} <= set(found["best"])
    json.dumps(found, allow_nan=False)


@pytest.mark.parametrize("shift", [LAG, 0, -4])
def test_the_answer_is_the_result_unrounded(shift):
    here, state = bridge(), replace(STATE, shift=shift)
    found, cell, surface = answered(state, here), here.cell(state), here.surface(state)
    for key in ("slope", "intercept", "correlation", "n", "se_naive", "p_naive"):
        assert found["cell"][key] == getattr(cell, key)
    assert (found["cell"]["window"], found["cell"]["shift"]) == (3, shift)
    best = found["best"]
    place = surface.cell(best["window"], best["shift"])
    assert best["correlation"] == surface.correlation[place]
    assert best["slope"] == surface.slope[place]
    assert best["shift"] == LAG  # as planted


def test_the_view_starts_at_the_first_driver_month_of_the_cell():
    here = bridge()
    for state in (STATE, replace(STATE, shift=-4), replace(STATE, months="same")):
        shown = view(state, here)
        values = shown.pair.driver.values
        first = values[shown.start - state.window + 1 : shown.start + 1].mean()
        assert shown.cell.driver[0] == pytest.approx(first, abs=1e-12)


def test_the_view_keeps_the_series_as_they_were_read():
    here = bridge()
    shown = view(STATE, here)
    assert [series.name for series in shown.loaded] == ["Money", "Prices"]
    assert shown.loaded[0] is here.workspace.named("Money")


def test_the_planted_economy_of_the_demo_is_found_near_its_lag():
    # data_samples/README.md: lag 22, and the best shift of windows 12 to 24 within three months.
    here = Bridge(Workspace(demo_releases()))
    found = answered(ViewState(windows="12:24", surrogates=39), here)
    assert abs(found["best"]["shift"] - 22) <= 3
    assert abs(found["best"]["slope"] - 0.55) <= 0.08


# The payload ---------------------------------------------------------------------------------


def test_the_payload_has_what_the_browser_computes_from():
    here = bridge()
    sent, pair, surface = payload(STATE, here), here.pair(STATE), here.surface(STATE)
    assert sent["state"] == asdict(STATE)
    assert sent["defaults"] == asdict(ViewState())
    assert sent["driver"]["values"] == pair.driver.values.tolist()
    assert sent["response"]["values"] == pair.response.values.tolist()
    assert (sent["driver"]["name"], sent["response"]["name"]) == ("Money", "Prices")
    assert sent["driver"]["unit"] == "percent"
    assert sent["windows"] == [surface.windows[0], surface.windows[-1]]
    assert sent["shifts"] == [surface.shifts[0], surface.shifts[-1]]
    assert sent["ordinal"] == pair.periods[0].ordinal
    assert sent["minPairs"] == MIN_PAIRS
    assert sent["same"] is False
    assert (sent["noun"], sent["perYear"]) == ("month", 12)
    assert sent["lost"] == [0, 0]
    assert sent["span"] == "Jan 2000 to Dec 2019"
    assert set(sent["figures"]) == {"surface", "scatter", "overlay"}
    assert sent["notes"] == []
    assert "error" not in sent


def test_the_payload_is_json_without_nan():
    json.dumps(payload(replace(STATE, windows="1:40", shifts="-30:30"), bridge()), allow_nan=False)


@pytest.mark.parametrize(
    ("first", "noun", "per_year", "ordinal"),
    [("1990Q1", "quarter", 4, 80), ("1900", "year", 1, -70), ("1970-03", "month", 12, 2)],
)
def test_ordinals_count_from_1970_as_in_the_browser(first, noun, per_year, ordinal):
    sent = payload(replace(STATE, window=1, shift=1), bridge(n=100, first=first))
    assert (sent["noun"], sent["perYear"], sent["ordinal"]) == (noun, per_year, ordinal)


def test_the_same_months_are_told_to_the_browser():
    assert payload(replace(STATE, months="same"), bridge())["same"] is True


def test_sources_and_months_left_out_stand_at_the_foot():
    money, prices = planted()
    sent = payload(STATE, bridge(money, replace(prices, values=prices.values[:-5])))
    assert sent["source"].startswith("Source: a.csv; b.csv. 5 months without a partner left out.")
    assert sent["lost"] == [5, 0]


def test_a_cell_outside_the_map_is_replaced_and_said():
    sent = payload(replace(STATE, window=40, shift=50), bridge(n=120, first="1990Q1"))
    assert (sent["state"]["window"], sent["state"]["shift"]) == (4, 8)
    assert len(sent["notes"]) == 2
    assert "40 quarters is outside this map (1 to 20); 4 is shown" in sent["notes"][0]
    assert "50 quarters is outside this map (-12 to 20); 8 is shown" in sent["notes"][1]


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"driver": "Nope"}, "no loaded series is named 'Nope'; there is 'Money'"),
        ({"driver": "Prices"}, "driver and response must be two series"),
        ({"first": "2050"}, "has no value in the sample chosen"),
        ({"last": "2000-06"}, "the sample must have at least 24 months"),
        ({"windows": "1:999"}, "Windows searched must be a range within"),
    ],
)
def test_what_cannot_be_shown_is_one_sentence_and_the_state_stays(changes, said):
    state = replace(STATE, **changes)
    sent = payload(state, bridge())
    assert said in sent["error"]
    assert "\n" not in sent["error"]
    assert sent["state"] == asdict(state)
    assert sent["defaults"] == asdict(ViewState())
    assert "figures" not in sent
    assert "driver" not in sent


# The layout ----------------------------------------------------------------------------------


def test_the_page_has_a_control_for_each_field_that_it_changes():
    page = layout(STATE.to_query(), bridge())
    shown = {
        getattr(part, "data-control"): getattr(part, "data-help-words")
        for part in nodes(page)
        if hasattr(part, "data-control")
    }
    at_least = {
        "driver", "response", "window", "shift", "growth", "first", "last", "months", "quantity"
    }  # fmt: skip
    assert at_least <= shown.keys()
    ids = [part.id for part in nodes(page) if getattr(part, "id", None)]
    assert len(ids) == len(set(ids))
    for name in at_least:
        assert shown[name] == field_kind(name).help


@pytest.mark.parametrize("name", ["surface", "scatter", "overlay"])
def test_each_view_can_be_saved_as_png_svg_and_csv(name):
    page = layout(STATE.to_query(), bridge())
    (buttons,) = [part for part in nodes(page) if getattr(part, "data-saves", None) == name]
    assert set(getattr(buttons, "data-kinds").split()) == {"table", "png", "svg", "csv", "brief"}
    assert by_id(page, f"lag-{name}").config["plotlyServerURL"] == ""


def test_the_caution_stands_on_the_page_with_or_without_charts():
    for query in (STATE.to_query(), "driver=Nope&response=Prices"):
        assert CAUTION in words(layout(query, bridge()))
    for word in ("not a cause", "advice", "judgement"):
        assert word in CAUTION


def test_the_page_opens_on_the_pair_that_is_loaded():
    page = layout("", bridge())
    assert by_id(page, "lag-data").data["state"]["driver"] == "Money"
    assert by_id(page, "lag-data").data["state"]["response"] == "Prices"
    assert by_id(page, "lag-state").data == by_id(page, "lag-data").data["state"]


def test_the_address_counts_before_the_opening_pair():
    page = layout("?driver=Prices&response=Money", bridge())
    assert by_id(page, "lag-data").data["state"]["driver"] == "Prices"


def test_refused_parts_of_the_address_are_notes_and_the_rest_is_shown():
    sent = by_id(layout("?window=abc&shift=-4", bridge()), "lag-data").data
    assert sent["state"]["shift"] == -4
    (note,) = sent["notes"]
    assert note.startswith("Window must be a whole number from 1 to 60, but got 'abc'; the usual")


def test_an_address_of_a_series_that_is_not_loaded_shows_the_sentence():
    page = layout("?driver=Nope", bridge())
    assert "no loaded series is named 'Nope'" in by_id(page, "lag-data").data["error"]


def test_an_empty_workspace_has_a_page():
    page = layout("", Bridge(Workspace()))
    assert "nothing is loaded yet" in by_id(page, "lag-data").data["error"]
    assert by_id(page, "lag-sentence") is not None
