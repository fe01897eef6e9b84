"""Months, quarters and years as files write them. Text never reaches pandas.

``pandas.Period("2024-M01")`` is one second of the year 2024 and ``pandas.Period("2024-T1")`` is
January, both without a word, so every form that is read stands below as a pattern of our own.
"""

import datetime
import re
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal, NamedTuple

import pandas as pd

from app.intake.problems import quoted

Calendar = Literal["M", "Q", "Y"]

_MONTHS = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_MONTH_NAME = (
    r"(?P<name>jan(?:uary)?|feb(?:ruary)?|mar(?:ch)?|apr(?:il)?|may|june?|july?|aug(?:ust)?"
    r"|sept?(?:ember)?|oct(?:ober)?|nov(?:ember)?|dec(?:ember)?)"
)
_YEAR = r"(?P<year>[12]\d{3})"
_MIDNIGHT = r"(?:[T ]00:00(?::00(?:\.0+)?)?Z?)?"
_READ = tuple(
    re.compile(pattern, re.ASCII | re.IGNORECASE)
    for pattern in (
        rf"{_YEAR}([-/])(?P<month>\d{{1,2}})(?:\2(?P<day>\d{{1,2}}){_MIDNIGHT})?",
        rf"{_YEAR}\.(?P<month>\d{{2}})(?:\.(?P<day>\d{{2}}))?",
        rf"{_YEAR}(?P<month>\d{{2}})(?P<day>\d{{2}})?",
        rf"(?P<month>\d{{1,2}})[-/.]{_YEAR}",
        rf"{_YEAR}[-: ]?M(?P<month>\d{{1,2}})",
        rf"M(?P<month>\d{{1,2}})[-/ ]?{_YEAR}",
        rf"(?:(?P<day>\d{{1,2}})[-/ ])?{_MONTH_NAME}[-/., ]{{0,2}}{_YEAR}",
        rf"{_YEAR}[-/., ]?{_MONTH_NAME}",
        rf"{_YEAR}[-:/. ]?Q(?P<quarter>\d)",
        rf"Q(?P<quarter>\d)[-:/. ]?{_YEAR}",
        rf"(?P<quarter>\d)Q[-/ ]?{_YEAR}",
        rf"{_YEAR}(?:-?A1?)?",
    )
)
_DATE_OF_THREE = re.compile(rf"(\d{{1,2}})([-/.])(\d{{1,2}})\2([12]\d{{3}}){_MIDNIGHT}", re.ASCII)
_REFUSED = tuple(
    (re.compile(pattern, re.ASCII | re.IGNORECASE), what)
    for pattern, what in (
        (r"[12]\d{3}[-: ]?[SH]\d|[SH]\d[-/ ]?[12]\d{3}", "a half-year"),
        (r"[12]\d{3}[-: ]?T\d", "a term of four months"),
        (r"[12]\d{3}[-: ]?W\d{1,2}(?:-\d)?|W\d{1,2}[-/ ]?[12]\d{3}", "a week"),
        (r"[12]\d{3}[-: ]?D\d{1,3}", "a day of the year"),
        (r"[12]\d{3}-?A\d+", "a part of a year"),
        (r"\d{4}-\d{2}(?:-\d{2})?(?:T[\d:.]+)?Z?/P\w+", "a start with a duration"),
        (r"\d{4}-\d{2}-\d{2}[T ]\d{1,2}:.*", "a time of day"),
        (rf"{_MONTH_NAME}[-/ .']{{1,2}}\d{{2}}", "a year of two digits"),
        (r"\d{1,2}[-/.]\d{1,2}[-/.]\d{2}", "a year of two digits"),
    )
)
_DURATION = re.compile(
    rf"{_YEAR}-(?P<month>\d{{2}})(?:-(?P<day>\d{{2}}))?(?:T00:00:00(?:\.0+)?)?Z?"
    r"/P(?:(?P<months>\d{1,2})M|(?P<years>1)Y)",
    re.ASCII,
)
_DIGIT = re.compile(r"[0-9]")
_FISCAL = re.compile(r"([12]\d)(\d\d)[-/](?:\1)?(\d\d)", re.ASCII)


class ReadPeriod(NamedTuple):
    """A period as a file gave it: calendar, place on it (1970 is 0) and the day, if any."""

    calendar: Calendar
    ordinal: int
    day: int | None = None

    @property
    def period(self) -> pd.Period:
        """The period as pandas holds it."""
        return pd.Period(ordinal=self.ordinal, freq=self.calendar)


@dataclass(frozen=True)
class PeriodTrouble:
    """Why a text is no period that is read.

    Attributes
    ----------
    message : str
        Rule and what was found.
    calendar : bool
        True for a period of a calendar that is not read (week, half-year, ...), False for a
        text that is no period at all.
    """

    message: str
    calendar: bool = False


_LONGEST = 80  # signs; no period has as many
RULE = "the period must be a month, a quarter or a year"


def read_period(text: str) -> ReadPeriod | PeriodTrouble:
    """Read one period, or say why not.

    Examples
    --------
    >>> str(read_period("2024-M01").period), str(read_period("Q1 2024").period)
    ('2024-01', '2024Q1')
    >>> read_period("2024-T1").message
    "the period must be a month, a quarter or a year, but got '2024-T1', a term of four months"
    """
    return _read_period(text.strip()[:_LONGEST])


@lru_cache(maxsize=65536)
def _read_period(stripped: str) -> ReadPeriod | PeriodTrouble:
    """Read a period without spaces around it."""
    for pattern in _READ:
        match = pattern.fullmatch(stripped)
        if match:
            return _period_of(match.groupdict(), stripped)
    lasting = _lasting(stripped)
    if lasting is not None:
        return lasting
    found = f"{RULE}, but got {quoted(stripped)}"
    for pattern, what in _REFUSED:
        if pattern.fullmatch(stripped):
            return PeriodTrouble(f"{found}, {what}", calendar=True)
    if _is_fiscal(stripped):
        return PeriodTrouble(f"{found}, a year that spans two", calendar=True)
    if _DATE_OF_THREE.fullmatch(stripped):
        return PeriodTrouble(
            f"{found}, of which day and month cannot be told apart; 2024-03-01 can", calendar=True
        )
    return PeriodTrouble(found)


def _period_of(parts: dict[str, str | None], text: str) -> ReadPeriod | PeriodTrouble:
    """Turn the named parts of a match into a period."""
    year = int(parts["year"] or 0)
    if parts.get("quarter"):
        quarter = int(parts["quarter"] or 0)
        if not 1 <= quarter <= 4:
            return PeriodTrouble(f"the quarter must be from 1 to 4, but got '{text}'")
        return ReadPeriod("Q", 4 * (year - 1970) + quarter - 1)
    if parts.get("name"):
        month = _MONTHS.index((parts["name"] or "")[:3].lower()) + 1
    elif parts.get("month"):
        month = int(parts["month"] or 0)
    else:
        return ReadPeriod("Y", year - 1970)
    if not 1 <= month <= 12:
        if _is_fiscal(text):
            return PeriodTrouble(f"{RULE}, but got '{text}', a year that spans two", calendar=True)
        return PeriodTrouble(f"the month must be from 1 to 12, but got '{text}'")
    day = int(parts.get("day") or 0) or None
    if day is not None:
        try:
            datetime.date(year, month, day)
        except ValueError:
            return PeriodTrouble(f"the day must be one of its month, but got '{text}'")
    return ReadPeriod("M", 12 * (year - 1970) + month - 1, day)


def _lasting(text: str) -> ReadPeriod | None:
    """Read a start with a duration, such as 2024-04-01/P3M, where it is a period of the calendar.

    The day counts from the first: one month, a quarter from its first month, a year from January.
    """
    match = _DURATION.fullmatch(text)
    if match is None or int(match["day"] or 1) != 1:
        return None
    year, month = int(match["year"]) - 1970, int(match["month"]) - 1
    months = 12 if match["years"] else int(match["months"])
    if months == 1 and 0 <= month < 12:
        return ReadPeriod("M", 12 * year + month)
    if months == 3 and month in (0, 3, 6, 9):
        return ReadPeriod("Q", 4 * year + month // 3)
    return ReadPeriod("Y", year) if months == 12 and month == 0 else None


def _is_fiscal(text: str) -> bool:
    """Tell whether a text is a year that spans two, such as 2023/24."""
    match = _FISCAL.fullmatch(text)
    return bool(match) and int(match[3]) == (int(match[2]) + 1) % 100  # type: ignore[index]


def looks_like_period(text: str) -> bool:
    """Tell whether a text is meant as a period, also one that is not read."""
    if not _DIGIT.search(text):
        return False
    found = read_period(text)
    return isinstance(found, ReadPeriod) or found.calendar or "from 1 to" in found.message


def read_periods(texts: Sequence[str]) -> list[ReadPeriod | PeriodTrouble]:
    """Read a column of periods; dates such as 31/03/2024 by what the whole column shows.

    A part above 12 is the day. Where none is, a part that is 1 in every row is the day. Otherwise
    day and month cannot be told apart and every such date is refused.

    Examples
    --------
    >>> [str(found.period) for found in read_periods(["01/03/2024", "01/04/2024"])]
    ['2024-03', '2024-04']
    """
    matches = [_DATE_OF_THREE.fullmatch(text.strip()) for text in texts]
    dates = [(int(match[1]), int(match[3])) for match in matches if match]
    day_first = None
    if dates:
        firsts, seconds = zip(*dates, strict=True)
        if max(firsts) > 12 or max(seconds) > 12:
            day_first = max(firsts) > 12
        elif set(firsts) == {1} or set(seconds) == {1}:
            day_first = None if set(firsts) == set(seconds) else set(firsts) == {1}
    if day_first is None:
        return [read_period(text) for text in texts]
    day, month = (1, 3) if day_first else (3, 1)
    return [
        read_period(f"{match[4]}-{match[month]}-{match[day]}") if match else read_period(text)
        for text, match in zip(texts, matches, strict=True)
    ]
