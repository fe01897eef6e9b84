"""The numbers in the example files: Uldrevay, an invented economy with the undrel as its money.

Every value follows from its place by a formula, so each file can be made again to the byte.
"""

import math
from dataclasses import dataclass, field

NAN = math.nan
FIRST_MONTH, MONTHS = (2021, 7), 30
FIRST_QUARTER, QUARTERS = (2019, 3), 14
FIRST_YEAR, YEARS = 2012, 9


def _walk(start: float, step: float, wave: float, count: int, decimals: int) -> list[float]:
    return [
        round(start * (1 + step) ** t + wave * math.sin(0.7 * t + start), decimals)
        for t in range(count)
    ]


PRICES = _walk(100.0, 0.0032, 0.25, MONTHS, 2)
FOOD = _walk(98.5, 0.0041, 0.6, MONTHS, 3)
MONEY = _walk(38_500.0, 0.0055, 210.0, MONTHS, 1)
NARROW = [round(value) for value in _walk(14_200.0, 0.0045, 120.0, MONTHS, 0)]
POLICY = [round(1.5 + 0.25 * (t // 4), 2) for t in range(MONTHS)]
OUTPUT = _walk(5_120.0, 0.006, 31.0, QUARTERS, 1)
WAGES = _walk(81.3, 0.029, 0.4, YEARS, 1)


def month(place: int) -> tuple[int, int]:
    """Year and month so many months after the first."""
    year, first = FIRST_MONTH
    return year + (first - 1 + place) // 12, (first - 1 + place) % 12 + 1


def quarter(place: int) -> tuple[int, int]:
    """Year and quarter so many quarters after the first."""
    year, first = FIRST_QUARTER
    return year + (first - 1 + place) // 4, (first - 1 + place) % 4 + 1


ISO_MONTHS = [f"{year}-{number:02d}" for year, number in map(month, range(MONTHS))]
ISO_QUARTERS = [f"{year}-Q{number}" for year, number in map(quarter, range(QUARTERS))]
ISO_YEARS = [str(FIRST_YEAR + place) for place in range(YEARS)]


@dataclass(frozen=True, eq=False)
class Expected:
    """A series as a reader must give it back; attributes left empty are not compared."""

    name: str
    values: list[float]
    first: str = ISO_MONTHS[0]
    last: str = ISO_MONTHS[-1]
    attributes: dict[str, str] = field(default_factory=dict)


@dataclass(frozen=True, eq=False)
class Example:
    """A file and the series in it."""

    content: bytes
    series: list[Expected]
    problems: list[str] = field(default_factory=list)  # parts of the sentences, in any order


def monthly(name: str, values: list[float], **attributes: str) -> Expected:
    return Expected(name, values, attributes=attributes)


def quarterly(name: str, values: list[float], **attributes: str) -> Expected:
    return Expected(name, values, "2019Q3", "2022Q4", attributes)


def annual(name: str, values: list[float], **attributes: str) -> Expected:
    return Expected(name, values, ISO_YEARS[0], ISO_YEARS[-1], attributes)


BASIC = [
    monthly("Consumer prices", PRICES, kind="index"),
    monthly("Broad money", MONEY, kind="level"),
]
