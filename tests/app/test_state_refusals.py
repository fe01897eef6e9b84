"""Values that no view has: one sentence each, and the other parts of an address are kept."""

from dataclasses import fields, replace
from urllib.parse import quote, urlencode

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.state import StateError, ViewState, field_kind

BAD = [
    ("window", "0"),
    ("window", "61"),
    ("window", "12.0"),
    ("window", "1e1"),
    ("window", "abc"),
    ("window", ""),
    ("window", "nan"),
    ("window", "9" * 10_000),
    ("window", "١٢"),  # Arabic digits for 12
    ("window", "1_2"),
    ("shift", "-37"),
    ("shift", "61"),
    ("shift", "--1"),
    ("shift", "a" * 10_000),
    ("growth", "LOG"),
    ("growth", ""),
    ("growth", "x" * 10_000),
    ("months", "<script>"),
    ("quantity", "r\x00"),
    ("driver", ""),
    ("driver", "   "),
    ("driver", "a" * 201),
    ("driver", "a" * 10_000),
    ("driver", "Money\x00"),
    ("driver", "Money\nprices"),
    ("response", "\x1b[31m"),
    ("first", "1965-13"),
    ("first", "1965-00"),
    ("first", "1965-3"),
    ("first", "1965-Q5"),
    ("first", "0000-01"),
    ("first", "65"),
    ("first", "１９６５-０３"),  # full-width digits
    ("first", "1965-03-01"),
    ("last", "yesterday"),
    ("last", "99999"),
    ("newest", "2024-13"),
    ("coming", "1e2"),
    ("coming", "nan"),
    ("coming", "inf"),
    ("coming", "101"),
    ("coming", "0.12345"),
    ("level", "5 %"),
    ("rank_level", "-1"),
    ("windows", "1-60"),
    ("windows", "1:"),
    ("windows", "1:6:9"),
    ("windows", "1:1000"),
    ("shifts", "a:b"),
    ("shifts", "１:２"),
    ("without", "1978-03"),
    ("without", "1978-03:"),
    ("without", "1978-00:1979-13"),
    ("without", "1978-QQ:1979-Q5"),
    ("without", "0000-01:1979-01"),
    ("without", "1978-03:1983-05:1984-01"),
    ("as_of", "2024-02-30"),
    ("as_of", "2023-02-29"),
    ("as_of", "2024-3-12"),
    ("as_of", "20240312"),
    ("as_of", "2024-W10-1"),
    ("as_of", "12.03.2024"),
    ("as_of", "0000-01-01"),
    ("as_of", "２０２４-03-12"),
    ("as_of", "today"),
    ("trim", "-1"),
    ("trim", "100"),
    ("trim", "1:2:3"),
    ("pace", "fast"),
    ("pace", "2,5"),
    ("pace", "-100"),
    ("link", "0"),
    ("link", "13"),
    ("excluded", "a\x00"),
    ("others", "a\x00"),
    ("target", "monthly"),
    ("scheme", "both"),
    ("ahead", "12"),
    ("years", "0"),
    ("surrogates", "0"),
    ("surrogates", "1e9"),
    ("seed", "-1"),
    ("seed", "4294967296"),
]


@pytest.mark.parametrize(("name", "text"), BAD)
def test_a_bad_value_gives_one_sentence(name, text):
    query = urlencode({name: text, "growth" if name != "growth" else "window": "9"})
    with pytest.raises(StateError) as caught:
        ViewState.from_query(urlencode({name: text}))
    sentence = str(caught.value)
    assert sentence.startswith(f"{field_kind(name).label} must be ")
    assert ", but got " in sentence
    assert len(sentence) < 250
    assert sentence.isprintable()
    state, refused = ViewState.from_query_or_default(query)
    assert getattr(state, name) == getattr(ViewState(), name)
    assert any(told.startswith(sentence) for told in refused)
    assert all(told.isprintable() for told in refused)


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("window", 12.0),
        ("window", True),
        ("window", None),
        ("window", "12"),
        ("window", [12]),
        ("window", 10**30),
        ("shift", float("nan")),
        ("growth", None),
        ("growth", ["log"]),
        ("growth", {"log": 1}),
        ("quantity", 1),
        ("driver", None),
        ("driver", 5),
        ("driver", ["Broad money"] * 10_000),
        ("driver", "lone \ud800 surrogate"),
        ("first", 1965),
        ("last", None),
        ("windows", (1, 60)),
    ],
)
def test_a_value_of_another_type_gives_one_sentence(name, value):
    with pytest.raises(StateError, match=f"^{field_kind(name).label} must be ") as caught:
        replace(ViewState(), **{name: value})
    assert len(str(caught.value)) < 250
    assert str(caught.value).isprintable()


@given(st.sampled_from([item.name for item in fields(ViewState)]), st.text())
def test_no_text_of_an_address_does_worse_than_a_sentence(name, text):
    query = f"{name}={quote(text, errors='replace')}&shift=-5"
    state, refused = ViewState.from_query_or_default(query)
    assert state.shift == -5 or (name == "shift" and refused)
    assert len(refused) <= 1
    try:
        assert ViewState.from_query(query) == state
        assert refused == ()
    except StateError as error:
        assert refused[0].startswith(str(error))


def test_each_refused_value_is_named_and_the_others_are_kept():
    state, refused = ViewState.from_query_or_default("window=abc&shift=-5&first=no&driver=M2")
    assert state == ViewState(shift=-5, driver="M2")
    assert len(refused) == 2
    assert "Window must be a whole number from 1 to 60, but got 'abc'" in refused[0]
    assert refused[1].startswith("From must be a period")
    assert all(told.endswith("the usual value is shown instead") for told in refused)


def test_a_name_without_a_value_is_a_bad_value_and_not_an_unknown_part():
    with pytest.raises(StateError, match="Window must be"):
        ViewState.from_query("window")
