"""ViewState: each field there and back through an address, its keys, table and sentence."""

import re
from dataclasses import FrozenInstanceError, asdict, fields, replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.reading.fields import Number
from app.state import CELL_FIELDS, Choice, Text, ViewState, Whole, field_kind, kind_of

NAMES = [item.name for item in fields(ViewState)]
# Free text has no table to take another allowed value from.
OTHER_TEXT = {
    "driver": "Narrow money",
    "result": "0123456789abcdef",
    "response": "Consumer prices, adjusted",
    "first": "1965-03",
    "last": "2024-Q4",
    "windows": "1:60",
    "shifts": "-36:60",
    "without": "1978-03:1983-Q1",
    "left_out": "1978-03:1983-05,1990:1991",
    "pinned": "7:-12",
    "other_responses": "Consumer prices|Narrow money",
    "as_of": "2024-03-12",
    "aggregate": "Consumer prices",
    "trim": "24:31.5",
    "excluded": "01 Food|04 Energy",
    "others": "Narrow money|Policy rate",
    "pace": "-2.5",
    "series": "Narrow money",
    "unadjusted": "Narrow money",
    "newest": "2024-Q3",
    "since": "1995-01",
    "split": "1995",
    "drivers": "Broad money|Narrow money",
    "responses": "Consumer prices",
}


def other_values(name):
    """Every allowed value of a choice, both bounds of a number, one other text; no default."""
    kind = field_kind(name)
    if isinstance(kind, Choice):
        allowed = list(kind.options)
    elif isinstance(kind, Whole | Number):
        allowed = [kind.low, kind.high]
    else:
        allowed = [OTHER_TEXT[name]]
    return [value for value in allowed if value != getattr(ViewState(), name)]


CHANGES = [(name, value) for name in NAMES for value in other_values(name)]

# A name as intake lets it through: no control or lone surrogate, no space at either end.
names = st.text(st.characters(exclude_categories=("Cc", "Cs")), min_size=1, max_size=200).filter(
    lambda text: text == text.strip()
)
one_period = st.one_of(
    st.integers(1, 9999).map(lambda y: f"{y:04d}"),
    st.tuples(st.integers(1, 9999), st.integers(1, 12)).map(lambda p: f"{p[0]:04d}-{p[1]:02d}"),
    st.tuples(st.integers(1, 9999), st.integers(1, 4)).map(lambda p: f"{p[0]:04d}-Q{p[1]}"),
)
periods = st.one_of(st.just(""), one_period)
spans = st.one_of(st.just(""), st.tuples(one_period, one_period).map(":".join))
ranges = st.one_of(
    st.just(""),
    st.tuples(st.integers(-999, 999), st.integers(-999, 999)).map(lambda r: f"{r[0]}:{r[1]}"),
)
BY_NAME = {
    "result": st.from_regex(r"[0-9a-f]{16}|", fullmatch=True),
    "driver": names,
    "response": names,
    "first": periods,
    "last": periods,
    "windows": ranges,
    "shifts": ranges,
    "without": spans,
    "left_out": st.one_of(
        st.just(""), st.lists(spans.filter(bool), min_size=1, max_size=5).map(",".join)
    ),
    "pinned": st.one_of(
        st.just(""),
        st.tuples(st.integers(1, 99), st.integers(-99, 99)).map(lambda c: f"{c[0]}:{c[1]}"),
    ),
    "other_responses": st.one_of(
        st.just(""), st.lists(names, min_size=1, max_size=3).map("|".join)
    ),
    "as_of": st.one_of(st.just(""), st.dates().map(str)),
    "aggregate": st.one_of(st.just(""), names),
    "series": st.one_of(st.just(""), names),
    "unadjusted": st.one_of(st.just(""), names),
    "newest": periods,
    "since": periods,
    "split": periods,
    "trim": st.integers(0, 99).map(str),
    "excluded": st.one_of(st.just(""), st.lists(names, min_size=1, max_size=3).map("|".join)),
    "others": st.one_of(st.just(""), st.lists(names, min_size=1, max_size=3).map("|".join)),
    "pace": st.integers(-99, 999).map(str),
    "drivers": st.one_of(st.just(""), st.lists(names, min_size=1, max_size=3).map("|".join)),
    "responses": st.one_of(st.just(""), names),
}


def drawn(name):
    kind = field_kind(name)
    if isinstance(kind, Whole):
        return st.integers(kind.low, kind.high)
    if isinstance(kind, Number):
        steps = st.integers(int(kind.low * 1e4), int(kind.high * 1e4))
        return steps.map(lambda step: step / 1e4)
    return st.sampled_from(list(kind.options)) if isinstance(kind, Choice) else BY_NAME[name]


states = st.builds(ViewState, **{name: drawn(name) for name in NAMES})


# Addresses -----------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "value"), CHANGES)
def test_a_changed_field_comes_back_from_the_address(name, value):
    changed = replace(ViewState(), **{name: value})
    back = ViewState.from_query("?" + changed.to_query())
    assert back == changed
    assert hash(back) == hash(changed)
    assert back != ViewState()
    assert changed.to_query().split("=")[0] == name  # and nothing but the change is written
    assert "&" not in changed.to_query()


@pytest.mark.parametrize("name", NAMES)
def test_every_field_has_another_value_to_try(name):
    assert other_values(name)


@given(states)
def test_any_state_comes_back_with_the_same_hash_and_address(state):
    back = ViewState.from_query(state.to_query())
    assert (back, hash(back), back.to_query()) == (state, hash(state), state.to_query())
    assert ViewState.from_query_or_default(state.to_query()) == (state, ())


@given(states, states)
def test_states_are_equal_exactly_when_their_addresses_are(one, other):
    assert (one == other) == (one.to_query() == other.to_query())
    again = ViewState(**asdict(one))
    assert again == one
    assert hash(again) == hash(one)
    assert again.to_query() == one.to_query()


@given(states)
def test_an_address_has_ascii_signs_only_and_no_default(state):
    query = state.to_query()
    assert re.fullmatch(r"[A-Za-z0-9_.~&=%+-]*", query)
    written = {part.split("=")[0] for part in query.split("&") if part}
    assert written == {n for n in NAMES if getattr(state, n) != getattr(ViewState(), n)}


def test_the_order_and_repetition_of_an_address_do_not_matter():
    state = ViewState.from_query("shift=-3&window=7")
    assert state == ViewState.from_query("window=7&shift=-3")
    assert state.to_query() == "window=7&shift=-3"
    assert ViewState.from_query("window=9&window=7&shift=-3") == state  # the last one counts
    assert ViewState.from_query("window=%2B7&shift=-03") == state  # numbers, not their digits


def test_defaults_spelled_out_give_the_bare_address():
    spelled = "&".join(f"{n}={getattr(ViewState(), n)}" for n in ("window", "shift", "growth"))
    assert ViewState.from_query(spelled).to_query() == ""


@pytest.mark.parametrize("query", ["", "?", "a=1", "__class__=x&WINDOW=3", "&&=&;"])
def test_unknown_parts_of_an_address_are_ignored(query):
    assert ViewState.from_query(query) == ViewState()


def test_an_address_with_very_many_parts_is_read():
    query = "&".join(["noise=1"] * 5_000) + "&window=7"
    assert ViewState.from_query(query).window == 7
    assert ViewState.from_query_or_default(query)[0].window == 7


def test_a_state_cannot_be_changed_in_place():
    with pytest.raises(FrozenInstanceError):
        ViewState().window = 3


# Keys ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "value"), CHANGES)
def test_the_key_changes_unless_the_field_is_for_display_only(name, value):
    changed = replace(ViewState(), **{name: value})
    assert (changed.numbers() != ViewState().numbers()) == (not field_kind(name).display)


@pytest.mark.parametrize(("name", "value"), CHANGES)
def test_cells_of_one_map_share_the_question(name, value):
    changed = replace(ViewState(), **{name: value})
    shared = field_kind(name).display or name in CELL_FIELDS
    assert (changed.question() == ViewState().question()) == shared


@given(states)
def test_keys_are_reached_in_one_step(state):
    assert state.numbers().numbers() == state.numbers()
    assert state.question().numbers() == state.question()
    assert state.numbers().question() == state.question()


def test_some_field_is_for_display_only():
    assert any(kind_of(item).display for item in fields(ViewState))


# The table -----------------------------------------------------------------------------------


@pytest.mark.parametrize("item", fields(ViewState), ids=lambda item: item.name)
def test_every_field_has_label_help_and_a_default_that_is_allowed(item):
    kind = kind_of(item)
    kind.check(item.default)
    assert kind.read(str(item.default)) == item.default
    assert kind.label[0].isupper()
    assert kind.help.endswith(".")
    assert len(kind.help) > 20
    if isinstance(kind, Whole):
        assert kind.low <= item.default <= kind.high
    if isinstance(kind, Text):
        assert kind.shape[0].islower()


def test_labels_are_told_apart():
    labels = [kind_of(item).label for item in fields(ViewState)]
    assert len(set(labels)) == len(labels)


# The sentence --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({}, "Broad money, 12-month window, leading Consumer prices by 24 months"),
        ({"shift": 1}, "Broad money, 12-month window, leading Consumer prices by 1 month"),
        ({"shift": -1}, "Broad money, 12-month window, following Consumer prices by 1 month"),
        ({"shift": -6}, "Broad money, 12-month window, following Consumer prices by 6 months"),
        ({"shift": 0}, "Broad money, 12-month window, beside Consumer prices of the same month"),
        (
            {"window": 1, "shift": 3},
            "Broad money, one month at a time, leading Consumer prices by 3 months",
        ),
    ],
)
def test_the_sentence_says_who_leads(changes, said):
    assert ViewState(**changes).sentence() == said


def test_the_sentence_counts_in_the_noun_given_and_ends_with_the_sample():
    state = ViewState(window=4, shift=8)
    assert state.sentence("quarter", "1965 Q1 to 2026 Q3") == (
        "Broad money, 4-quarter window, leading Consumer prices by 8 quarters, 1965 Q1 to 2026 Q3"
    )
    assert "one year at a time" in replace(state, window=1).sentence("year")
    assert replace(state, as_of="2024-03-12").sentence().endswith(", as it stood on 2024-03-12")


@given(states)
def test_the_sentence_names_both_series(state):
    assert state.driver in state.sentence()
    assert state.response in state.sentence()
