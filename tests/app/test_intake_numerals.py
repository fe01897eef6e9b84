"""Numbers as files write them."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.intake.numerals import decimal_mark, read_column, undecided

NUMBERS = [
    ("101.5", ".", 101.5),
    ("101,5", ",", 101.5),
    ("1 234,5", ",", 1234.5),
    ("1\u00a0234,5", ",", 1234.5),
    ("1\u202f234\u202f567", ".", 1234567.0),
    ("1'234.5", ".", 1234.5),
    ("1.234,5", ",", 1234.5),
    ("1,234.5", ".", 1234.5),
    ("1,234,567", ".", 1234567.0),
    ("1.234.567", ",", 1234567.0),
    ("-0.25", ".", -0.25),
    ("\u22120,25", ",", -0.25),
    ("\u20132", ".", -2.0),
    ("+3", ".", 3.0),
    (".5", ".", 0.5),
    ("5.", ".", 5.0),
    ("1.5e3", ".", 1500.0),
    ("1,5E-3", ",", 0.0015),
    (" 7 ", ".", 7.0),
    ("0.1", ".", 0.1),
    ("9007199254740993", ".", 9007199254740992.0),
]


@pytest.mark.parametrize(("text", "mark", "value"), NUMBERS)
def test_numbers(text: str, mark: str, value: float) -> None:
    column = read_column([text, ".."], mark)  # type: ignore[arg-type]
    assert column.wrong == () and column.values[0] == value and math.isnan(column.values[1])


@pytest.mark.parametrize(
    "text", ["", " ", "NaN", "nan", "n/a", "N/A", "#N/A", "NA", "null", "..", ":", "-", "–", "…"]
)
def test_missing(text: str) -> None:
    column = read_column([text, "1"], ".")
    assert column.wrong == () and math.isnan(column.values[0]) and column.values[1] == 1


@pytest.mark.parametrize(
    "text",
    [
        "n.a. ",
        "1_000",
        "inf",
        "-Infinity",
        "１００",
        "٣",
        "0x10",
        "1,23",
        "1,2345",
        "0,123",
        "1 23",
        "12 34",
        "1.2.3",
        "--1",
        "e5",
        "1e",
        "101.5 p",
        "$5",
        "(1.5)",
        "1,234 567",
        "1e999",
        "=1+1",
    ],
)
def test_what_is_no_number(text: str) -> None:
    column = read_column(["1.5", text, "2"], ".")
    assert column.wrong == (1,) and column.message.startswith("must be a number")
    assert repr(column.values.tolist()) == "[1.5, nan, 2.0]"


def test_percent_signs_are_all_or_none() -> None:
    assert read_column(["2.5%", "..", "3 %"], ".").percent
    mixed = read_column(["2.5%", "3", "4%"], ".")
    assert mixed.wrong == (1,)
    assert mixed.message == "must carry a percent sign as others do, but got '3'"


@pytest.mark.parametrize(
    ("cells", "mark"),
    [
        (["101.5"], "."),
        (["101,5"], ","),
        (["1.234,5"], ","),
        (["1,234.5"], "."),
        (["1234,567"], ","),
        (["0,123"], ","),
        (["0.123"], "."),
        (["1 234,567"], ","),
        (["1,234"], None),
        (["1.234", "999"], None),
        (["100", ""], None),
        (["101.5", "101,5"], None),
    ],
)
def test_decimal_mark_is_proved_or_not(cells: list[str], mark: str | None) -> None:
    assert decimal_mark(cells) == mark


def test_doubtful_numbers_are_named() -> None:
    assert undecided(["100", " 1,234", "2,345"]) == "1,234"
    assert undecided(["100", "12.34"]) is None


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1, max_size=20))
def test_every_double_comes_back_exactly(numbers: list[float]) -> None:
    assert read_column([repr(value) for value in numbers], ".").values.tolist() == numbers
    commas = [repr(value).replace(".", ",") for value in numbers]
    assert read_column(commas, ",").values.tolist() == numbers
    spaced = [f" {text}" for text in commas]  # the slow way
    assert read_column(spaced, ",").values.tolist() == numbers


@given(st.lists(st.integers(-(10**9), 10**9), min_size=1, max_size=9), st.sampled_from(",\u00a0 "))
def test_grouped_thousands_come_back(numbers: list[int], sign: str) -> None:
    cells = [f"{value:,}".replace(",", sign) for value in numbers]
    assert read_column(cells, ".").values.tolist() == numbers


@given(st.lists(st.text(max_size=12), max_size=8), st.sampled_from([".", ","]))
def test_any_text_is_a_number_missing_or_wrong(cells: list[str], mark: str) -> None:
    column = read_column(cells, mark)  # type: ignore[arg-type]
    assert column.values.shape == (len(cells),) and not np.isinf(column.values).any()
    assert all(math.isnan(column.values[place]) for place in column.wrong)
    decimal_mark(cells)
