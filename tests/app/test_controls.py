"""Controls: each one is drawn from the same table as the state, with a label of its own."""

import json
from dataclasses import fields, replace

import pytest

from app import controls
from app.state import Choice, Day, Text, ViewState, Whole, field_kind

NAMES = [item.name for item in fields(ViewState)]
CHOICES = [name for name in NAMES if isinstance(field_kind(name), Choice)]
TEXTS = [name for name in NAMES if isinstance(field_kind(name), Text)]
NUMBERS = [name for name in NAMES if isinstance(field_kind(name), Whole)]
DRAWN = [name for name in NAMES if isinstance(field_kind(name), (Choice, Text, Whole, Day))]


def described(component):
    """What assets/controls.js builds the control from; it is one element, with nothing inside."""
    plain = component.to_plotly_json()["props"]
    assert "children" not in plain or not plain["children"]
    return {name.removeprefix("data-"): value for name, value in plain.items()}


def options(component):
    return json.loads(described(component)["options"])


def draw(name, state=None):
    state = state or ViewState()
    if name in CHOICES:
        return controls.select(state, name)
    if name in NUMBERS:
        return controls.slider(state, name, field_kind(name).low, field_kind(name).high)
    if isinstance(field_kind(name), Day):
        return controls.day(state, name)
    return controls.text(state, name)


@pytest.mark.parametrize("name", DRAWN)
def test_every_field_of_a_drawn_kind_can_be_drawn_with_label_and_help_from_the_table(name):
    found = described(draw(name))
    assert found["control"] == name
    assert found["label"] == field_kind(name).label
    assert found["help-words"] == field_kind(name).help


@pytest.mark.parametrize("name", CHOICES)
def test_a_choice_offers_every_option_and_selects_the_current_one(name):
    kind = field_kind(name)
    for value in kind.options:
        drawn = draw(name, replace(ViewState(), **{name: value}))
        assert options(drawn) == [list(option) for option in kind.options.items()]
        assert described(drawn).get("value", "") == value
        assert described(drawn)["type"] == "select"


def test_a_series_is_chosen_among_those_loaded():
    drawn = controls.select(ViewState(), "driver", ["Consumer prices", "Broad money"])
    assert options(drawn) == [[name, name] for name in ("Consumer prices", "Broad money")]
    assert described(drawn)["value"] == "Broad money"


def test_a_series_that_is_not_loaded_stays_on_offer_so_that_the_choice_is_seen():
    drawn = controls.select(ViewState(driver="Base money"), "driver", ["Prices", "Prices", "M2"])
    assert [value for value, _ in options(drawn)] == ["Prices", "M2", "Base money"]
    assert described(drawn)["value"] == "Base money"


@pytest.mark.parametrize("name", NUMBERS)
@pytest.mark.parametrize("vertical", [True, False])
def test_a_slider_has_the_bounds_given_and_the_value_of_the_state(name, vertical):
    drawn = controls.slider(ViewState(), name, -3, 30, vertical=vertical)
    found = described(drawn)
    assert found["type"] == "range"
    assert (found["min"], found["max"], found["step"]) == ("-3", "30", "1")
    assert found["value"] == str(getattr(ViewState(), name))
    assert found["orient"] == ("vertical" if vertical else "horizontal")


def test_a_slider_at_zero_says_zero():
    drawn = controls.slider(ViewState(shift=0), "shift", -3, 30)
    assert described(drawn)["value"] == "0"


def test_a_text_field_shows_its_value_or_what_an_empty_one_means():
    empty = described(controls.text(ViewState(), "first", "earliest"))
    assert "value" not in empty
    assert empty["placeholder"] == "earliest"
    filled = described(controls.text(ViewState(first="1965-03"), "first", "earliest"))
    assert filled["value"] == "1965-03"


def test_a_date_is_chosen_in_a_calendar_and_may_be_empty():
    assert "value" not in described(controls.day(ViewState(), "as_of"))
    filled = described(controls.day(ViewState(as_of="2024-03-12"), "as_of"))
    assert (filled["type"], filled["value"]) == ("date", "2024-03-12")


def test_hostile_names_are_text_and_never_markup():
    name = '"><script>alert(1)</script>'
    drawn = controls.select(ViewState(driver=name), "driver", [name])
    assert options(drawn) == [[name, name]]  # set as text by the browser
