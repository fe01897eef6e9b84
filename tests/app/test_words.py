"""Numbers as people read them."""

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.words import MINUS, counted, p_words, percent, plain, runs_words, shift_words, signed


@pytest.mark.parametrize(
    ("p", "said"),
    [
        (0.03, ".03"),
        (0.31, ".31"),
        (0.5, ".50"),
        (0.0, "below .001"),
        (0.00099, "below .001"),
        (0.001, ".001"),
        (0.0049999, ".005"),
        (0.0094, ".009"),
        (0.00951, ".01"),
        (0.0149, ".01"),
        (0.99, ".99"),
        (0.9901, "above .99"),
        (1.0, "above .99"),
        (float("nan"), "undefined"),
        (None, "undefined"),
    ],
)
def test_p_in_words(p, said):
    assert p_words(p) == said


def test_p_changes_from_three_digits_to_two_at_0095():
    assert p_words(math.nextafter(0.0095, 0.0)) == ".009"
    assert p_words(0.0095) == ".01"


@pytest.mark.parametrize(
    ("p", "said"),
    [(0.05, ".05"), (0.0496, ".05"), (0.0504, ".0504"), (0.052, ".052"), (101 / 2001, ".0505"),
     (0.0551, ".06")],
)  # fmt: skip
def test_a_p_above_the_level_of_5_percent_never_reads_as_05(p, said):
    assert p_words(p) == said


@given(st.floats(0.0, 1.0))
def test_a_p_in_words_is_on_the_same_side_of_05_and_close(p):
    text = p_words(p)
    if text == "below .001":
        assert p < 0.001
    elif text == "above .99":
        assert p > 0.99
    else:
        assert re.fullmatch(r"\.\d{2,}", text)
        assert abs(float(text) - p) <= 0.005 + 1e-12
        assert (float(text) <= 0.05) == (p <= 0.05)


@pytest.mark.parametrize(
    ("share", "said"),
    [(-0.62, f"{MINUS}62 %"), (0.9, "+90 %"), (0.0, "+0 %"), (-0.001, "+0 %"), (1.144, "+114 %")],
)
def test_percent(share, said):
    assert percent(share) == said


@pytest.mark.parametrize(
    ("numbers", "said"),
    [
        ([], ""),
        ([24], "+24"),
        ([0], "0"),
        ([-3], f"{MINUS}3"),
        ([20, 21, 22, 23, 24], "+20 to +24"),
        ([-3, 20, 21], f"{MINUS}3, +20 to +21"),
        ([-2, -1, 0, 1], f"{MINUS}2 to +1"),
        ([-1, 0], f"{MINUS}1 to 0"),
        ([0, 1], "0 to +1"),
        ([1, 3, 5, 6], "+1, +3, +5 to +6"),
    ],
)
def test_runs(numbers, said):
    assert runs_words(numbers) == said


@given(st.sets(st.integers(-60, 60), min_size=1))
def test_runs_say_every_number_and_no_other(numbers):
    said = []
    for run in runs_words(sorted(numbers)).replace(MINUS, "-").split(", "):
        ends = [int(end) for end in run.split(" to ")]
        said += range(ends[0], ends[-1] + 1)
    assert said == sorted(numbers)


@pytest.mark.parametrize(
    ("shift", "noun", "said"),
    [
        (24, "month", "+24 months"),
        (1, "month", "+1 month"),
        (-1, "quarter", f"{MINUS}1 quarter"),
        (-7, "quarter", f"{MINUS}7 quarters"),
        (0, "year", "0 years"),
    ],
)
def test_shift(shift, noun, said):
    assert shift_words(shift, noun) == said


@pytest.mark.parametrize(
    ("n", "said"), [(0, "0 months"), (1, "1 month"), (12, "12 months"), (-1, f"{MINUS}1 months")]
)
def test_counted(n, said):
    assert counted(n, "month") == said


def test_signs_are_true_minus_signs():
    assert (signed(0.8), signed(-0.154)) == ("+0.80", f"{MINUS}0.15")
    assert (plain(0.8, 3), plain(-0.154, 3)) == ("0.800", f"{MINUS}0.154")


@pytest.mark.parametrize(
    ("value", "digits"), [(-0.0004, 3), (-0.004, 2), (-0.0, 2), (0.0004, 3), (0.0, 2), (-0.4, 0)]
)
def test_what_rounds_to_zero_has_no_minus(value, digits):
    zero = f"{0:.{digits}f}"
    assert (signed(value, digits), plain(value, digits)) == (f"+{zero}", zero)
    assert signed(-(10.0**-digits), digits) == f"{MINUS}{10.0**-digits:.{digits}f}"
