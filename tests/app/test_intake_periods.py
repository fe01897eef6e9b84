"""Periods as files write them."""

import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.intake.periods import PeriodTrouble, ReadPeriod, looks_like_period, read_period
from app.intake.periods import read_periods as column_of

MARCH = pd.Period("2024-03", "M")
QUARTER = pd.Period("2024Q1", "Q")
YEAR = pd.Period("2024", "Y")

READ = {
    **dict.fromkeys(
        [
            "2024-03",
            "2024-3",
            "2024-03-01",
            "2024-03-31",
            "2024/03",
            "2024/03/31",
            "2024.03",
            "2024.03.15",
            "202403",
            "20240331",
            "03/2024",
            "3/2024",
            "03-2024",
            "03.2024",
            "2024M3",
            "2024m3",
            "2024M03",
            "2024-M03",
            "2024 M3",
            "M03 2024",
            "Mar 2024",
            "mar-2024",
            "March 2024",
            "MARCH, 2024",
            "2024 Mar",
            "2024-March",
            "1 March 2024",
            "31-Mar-2024",
            "2024-03-01 00:00:00",
            "2024-03-01T00:00:00Z",
            "  2024-03 ",
            "2024-03-01/P1M",
            "2024-03-01T00:00:00/P1M",
            "2024-03-01T00:00:00Z/P1M",
            "2024-03/P1M",
        ],
        MARCH,
    ),
    **dict.fromkeys(
        [
            "2024-Q1",
            "2024Q1",
            "2024q1",
            "Q1 2024",
            "q1-2024",
            "2024 Q1",
            "2024:Q1",
            "1Q2024",
            "2024-01-01/P3M",
        ],
        QUARTER,
    ),
    **dict.fromkeys(
        ["2024", "2024-A1", "2024A1", " 2024", "2024-01-01/P1Y", "2024-01-01/P12M"], YEAR
    ),
}


@pytest.mark.parametrize("text", READ)
def test_every_form_is_read(text: str) -> None:
    found = read_period(text)
    assert isinstance(found, ReadPeriod)
    assert found.period == READ[text]
    assert found.period.freqstr == READ[text].freqstr


@pytest.mark.parametrize("number", range(1, 13))
def test_month_names_are_those_of_the_calendar(number: int) -> None:
    # outside: the names that the standard library prints for the C locale
    month = pd.Period(year=2023, month=number, freq="M")
    for form in ("%b %Y", "%B %Y"):
        assert read_period(month.strftime(form)).period == month  # type: ignore[union-attr]


# Lexical forms of the SDMX reporting periods: SDMXCommon.xsd of SDMX-ML 2.1 (A, S, T, Q, M, W, D).
REFUSED = {
    "2024-S1": "a half-year",
    "2024-H2": "a half-year",
    "H1 2024": "a half-year",
    "2024-T1": "a term of four months",
    "2024-T3": "a term of four months",
    "2024-W05": "a week",
    "2024W53": "a week",
    "2024-D010": "a day of the year",
    "2024-D366": "a day of the year",
    "2024-A2": "a part of a year",
    "2024-01-15/P1M": "a start with a duration",
    "2024-02-01/P3M": "a start with a duration",
    "2024-04-01/P1Y": "a start with a duration",
    "2024-13-01/P1M": "a start with a duration",
    "2024-01-01/P2M": "a start with a duration",
    "2024-01-01/P7D": "a start with a duration",
    "2024-01-01T00:00:00/P0Y1M": "a start with a duration",
    "2024-03-01T12:30:00": "a time of day",
    "Mar-24": "a year of two digits",
    "01/03/24": "a year of two digits",
    "2023/24": "a year that spans two",
    "2023-24": "a year that spans two",
    "2023/2024": "a year that spans two",
}


@pytest.mark.parametrize("text", REFUSED)
def test_other_calendars_are_refused_by_name(text: str) -> None:
    found = read_period(text)
    assert isinstance(found, PeriodTrouble)
    assert found.calendar and found.message.endswith(f"but got '{text}', {REFUSED[text]}")


def test_text_never_reaches_pandas() -> None:
    # what pandas makes of them without a word: one second, and January
    assert pd.Period("2024-M01").freqstr == "s"
    assert pd.Period("2024-T1") == pd.Period("2024-01", "M")
    assert str(read_period("2024-M01").period) == "2024-01"  # type: ignore[union-attr]
    assert isinstance(read_period("2024-T1"), PeriodTrouble)


@pytest.mark.parametrize(
    ("text", "rule"),
    [
        ("2024-13", "the month must be from 1 to 12, but got '2024-13'"),
        ("2024-M00", "the month must be from 1 to 12, but got '2024-M00'"),
        ("2024-Q5", "the quarter must be from 1 to 4, but got '2024-Q5'"),
        ("2024-02-30", "the day must be one of its month, but got '2024-02-30'"),
    ],
)
def test_numbers_outside_the_calendar(text: str, rule: str) -> None:
    found = read_period(text)
    assert isinstance(found, PeriodTrouble) and found.message == rule


@pytest.mark.parametrize(
    "text",
    ["", "prices", "1", "100.5", "0999", "3024", "２０２４", "2024-0３", "2024.1", "Mrz 2024"],
)
def test_what_is_no_period(text: str) -> None:
    found = read_period(text)
    assert isinstance(found, PeriodTrouble) and not looks_like_period(text)


@pytest.mark.parametrize(
    ("texts", "expected"),
    [
        (["31/01/2024", "29/02/2024"], ["2024-01", "2024-02"]),
        (["01/31/2024", "02/29/2024"], ["2024-01", "2024-02"]),
        (["01/02/2024", "01/03/2024", "01/04/2024"], ["2024-02", "2024-03", "2024-04"]),
        (["02/01/2024", "03/01/2024", "04/01/2024"], ["2024-02", "2024-03", "2024-04"]),
        (["01.02.2024", "01.03.2024"], ["2024-02", "2024-03"]),
    ],
)
def test_day_and_month_are_told_by_the_column(texts: list[str], expected: list[str]) -> None:
    assert [str(found.period) for found in column_of(texts)] == expected  # type: ignore[union-attr]


@pytest.mark.parametrize("texts", [["01/01/2024"], ["02/03/2024", "03/04/2024"]])
def test_day_and_month_that_cannot_be_told_apart(texts: list[str]) -> None:
    for found in column_of(texts):
        assert isinstance(found, PeriodTrouble) and "cannot be told apart" in found.message


@given(st.text(max_size=30))
def test_any_text_is_a_period_or_a_sentence(text: str) -> None:
    found = read_period(text)
    assert isinstance(found, ReadPeriod) or found.message


@given(st.integers(1000, 2999), st.integers(1, 12))
def test_calendar_arithmetic(year: int, month: int) -> None:
    # closed form against pandas' own calendar
    assert read_period(f"{year}-{month:02d}").period == pd.Period(year=year, month=month, freq="M")  # type: ignore[union-attr]
    quarter = (month + 2) // 3
    period = pd.Period(year=year, quarter=quarter, freq="Q")
    assert read_period(f"{year}-Q{quarter}").period == period  # type: ignore[union-attr]
