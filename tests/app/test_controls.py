"""Controls: each one is drawn from the same table as the state, with a label of its own."""

from dataclasses import fields, replace

import pytest

from app import controls
from app.state import Choice, Day, Text, ViewState, Whole, field_kind

NAMES = [item.name for item in fields(ViewState)]
CHOICES = [name for name in NAMES if isinstance(field_kind(name), Choice)]
TEXTS = [name for name in NAMES if isinstance(field_kind(name), Text)]
NUMBERS = [name for name in NAMES if isinstance(field_kind(name), Whole)]
DRAWN = [name for name in NAMES if isinstance(field_kind(name), (Choice, Text, Whole, Day))]


def properties(component):
    """Every component inside one, itself first, as (type, its properties)."""
    plain = component.to_plotly_json()
    found = [(plain["type"], plain["props"])]
    children = plain["props"].get("children") or []
    for child in children if isinstance(children, list) else [children]:
        if hasattr(child, "to_plotly_json"):
            found += properties(child)
    return found


def only(component, kind):
    (found,) = [props for name, props in properties(component) if name == kind]
    return found


def native(component):
    """What assets/controls.js makes an input of."""
    (found,) = [props for _, props in properties(component) if "data-native" in props]
    return found


def options(component):
    return [props for name, props in properties(component) if name == "Option"]


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
    drawn = draw(name)
    label = only(drawn, "Label")
    assert label["children"] == field_kind(name).label
    assert label["htmlFor"] == f"field-{name}"
    (help_line,) = [p for _, p in properties(drawn) if p.get("id") == f"help-{name}"]
    assert help_line["children"] == field_kind(name).help


@pytest.mark.parametrize("name", CHOICES)
def test_a_choice_offers_every_option_and_selects_the_current_one(name):
    kind = field_kind(name)
    for value in kind.options:
        drawn = draw(name, replace(ViewState(), **{name: value}))
        assert [o["value"] for o in options(drawn)] == list(kind.options)
        assert [o["children"] for o in options(drawn)] == list(kind.options.values())
        assert [o["value"] for o in options(drawn) if o["selected"]] == [value]
        assert only(drawn, "Select")["data-field"] == name


def test_a_series_is_chosen_among_those_loaded():
    drawn = controls.select(ViewState(), "driver", ["Consumer prices", "Broad money"])
    assert [o["value"] for o in options(drawn)] == ["Consumer prices", "Broad money"]
    assert [o["value"] for o in options(drawn) if o["selected"]] == ["Broad money"]


def test_a_series_that_is_not_loaded_stays_on_offer_so_that_the_choice_is_seen():
    drawn = controls.select(ViewState(driver="Base money"), "driver", ["Prices", "Prices", "M2"])
    assert [o["value"] for o in options(drawn)] == ["Prices", "M2", "Base money"]
    assert [o["value"] for o in options(drawn) if o["selected"]] == ["Base money"]


@pytest.mark.parametrize("name", NUMBERS)
@pytest.mark.parametrize("vertical", [True, False])
def test_a_slider_has_the_bounds_given_and_the_value_of_the_state(name, vertical):
    drawn = controls.slider(ViewState(), name, -3, 30, vertical=vertical)
    found = native(drawn)
    assert found["data-type"] == "range"
    assert (found["data-min"], found["data-max"], found["data-step"]) == ("-3", "30", "1")
    assert found["data-value"] == str(getattr(ViewState(), name))
    assert found["data-orient"] == ("vertical" if vertical else "horizontal")


def test_a_slider_at_zero_says_zero():
    drawn = controls.slider(ViewState(shift=0), "shift", -3, 30)
    assert native(drawn)["data-value"] == "0"


def test_a_text_field_shows_its_value_or_what_an_empty_one_means():
    empty = native(controls.text(ViewState(), "first", "earliest"))
    assert "data-value" not in empty
    assert empty["data-placeholder"] == "earliest"
    filled = native(controls.text(ViewState(first="1965-03"), "first", "earliest"))
    assert filled["data-value"] == "1965-03"


def test_a_date_is_chosen_in_a_calendar_and_may_be_empty():
    assert "data-value" not in native(controls.day(ViewState(), "as_of"))
    filled = native(controls.day(ViewState(as_of="2024-03-12"), "as_of"))
    assert (filled["data-type"], filled["data-value"]) == ("date", "2024-03-12")


def test_hostile_names_are_text_and_never_markup():
    name = '"><script>alert(1)</script>'
    drawn = controls.select(ViewState(driver=name), "driver", [name])
    assert [o["children"] for o in options(drawn)] == [name]
    assert {kind for kind, _ in properties(drawn)} == {
        "Button",
        "Div",
        "Label",
        "Select",
        "Option",
        "Span",
    }
