"""Alert rules: read, refused, set off, and put in words."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.reading.alerts import (
    DEFAULT_RULES,
    QUANTITIES,
    AlertError,
    Rule,
    alerts,
    read_rule,
    read_rules,
)

PRINT = {"rate_12m": 6.0, "rate_3m_annualised": 9.0, "rank_percent": 40.0, "change_36m": math.nan}


@pytest.mark.parametrize("text", DEFAULT_RULES)
def test_usual_rules_are_read_and_written_back(text):
    assert read_rule(text).text == text


rules = st.builds(
    Rule,
    quantity=st.sampled_from(list(QUANTITIES)),
    side=st.sampled_from(["above", "below"]),
    limit=st.integers(-9999, 9999).map(lambda n: n / 4),
    other=st.sampled_from(["", *QUANTITIES]),
)


@given(rules)
def test_any_rule_comes_back_from_its_text(rule):
    assert read_rule(rule.text) == rule


@pytest.mark.parametrize(
    ("text", "off"),
    [
        ("rate_12m above 5", True),
        ("rate_12m above 6", False),  # above, not at
        ("rate_12m below 6.5", True),
        ("rate_12m above -1", True),
        ("rate_3m_annualised above rate_12m", True),
        ("rate_3m_annualised above rate_12m + 2", True),
        ("rate_3m_annualised above rate_12m+3", False),
        ("rate_12m below rate_3m_annualised - 2", True),
        ("rate_12m below rate_3m_annualised - 4", False),
        ("change_36m above 80", False),  # not known
        ("rate_12m above change_36m", False),
        ("annual_average below 99", False),  # not there at all
    ],
)
def test_rules_are_set_off_by_the_print(text, off):
    assert bool(alerts([read_rule(text)], PRINT)) == off


def test_an_alert_says_what_was_found_and_what_it_was_held_against():
    (found,) = alerts([read_rule("rate_3m_annualised above rate_12m + 2")], PRINT)
    assert (found.value, found.limit) == (9.0, 8.0)
    assert found.sentence == (
        "The 3-month rate, annualised, is 9.00 percent, above 8.00 percent"
        " (the 12-month rate plus 2)."
    )


STATED = {"rate_12m_outlook_80_low": 1.5, "rate_12m_outlook_80_high": 5.5, "rate_1m": 0.2}


def test_a_print_outside_a_stated_interval_raises_an_alert():
    rule = read_rule("rate_12m  outside outlook_80")
    assert rule.text == "rate_12m outside outlook_80"
    (found,) = alerts([rule], {**STATED, "rate_12m": 6.0})
    assert (found.value, found.limit) == (6.0, 5.5)
    assert found.sentence == (
        "The 12-month rate is 6.00 percent, outside 1.50 to 5.50 percent, the 80 % interval"
        " stated for it."
    )
    assert alerts([rule], {**STATED, "rate_12m": 1.0})[0].limit == 1.5
    assert not alerts([rule], {**STATED, "rate_12m": 5.5})
    assert not alerts([rule], {"rate_12m": 6.0})  # nothing was stated
    assert not alerts([read_rule("rate_1m outside outlook_95")], {**STATED, "rate_12m": 6.0})


def test_a_list_of_rules_has_comments_and_empty_lines():
    found = read_rules(["# the desk's own", "", " rate_12m above 3 "])
    assert [rule.text for rule in found] == ["rate_12m above 3"]


@pytest.mark.parametrize(
    ("text", "match"),
    [
        ("rate_12m > 5", "must read like"),
        ("rate_12m above", "must read like"),
        ("rate_12m above 5 percent", "must read like"),
        ("rate_12m above rate_3m_annualised * 2", "must read like"),
        ("rate_99m above 5", "must be of one of"),
        ("rate_12m above rate_99m", "must be of one of"),
        ("rate_3m_annualised outside outlook_80", "rate_1m or rate_12m outside"),
        ("rate_12m outside outlook_90", "rate_1m or rate_12m outside"),
        ("x" * 500, "must read like"),
    ],
)
def test_what_is_no_rule_is_refused_in_one_sentence(text, match):
    with pytest.raises(AlertError, match=match) as refused:
        read_rule(text)
    assert len(str(refused.value)) < 250
