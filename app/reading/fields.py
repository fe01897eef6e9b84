"""Rows of the table of state fields that the Reading page is set by."""

import math
import re
from dataclasses import dataclass
from typing import Any

from app.state_kinds import NAME, PERIOD, Choice, FieldKind, StateError, Text, Whole


@dataclass(frozen=True, kw_only=True)
class Number(FieldKind):
    """A number of at most four decimals between two bounds, both included."""

    low: float
    high: float

    def read(self, text: str) -> Any:
        """Read a decimal number; anything else is handed on for `check` to refuse."""
        if not re.fullmatch(r"[+-]?([0-9]{1,9}(\.[0-9]{0,9})?|\.[0-9]{1,9})", text.strip()):
            return text
        value = float(text)
        return int(value) if value.is_integer() else value

    def write(self, value: Any) -> str:
        """Write the number as a page does: 1 and not 1.0."""
        return str(int(value) if float(value).is_integer() else value)

    def check(self, value: Any) -> None:
        """Raise StateError unless the value is such a number."""
        number = isinstance(value, int | float) and not isinstance(value, bool)
        fine = number and math.isfinite(value) and self.low <= value <= self.high
        if not fine or round(value, 4) != value:
            shown = repr(value)
            raise StateError(
                f"{self.label} must be a number from {self.low:g} to {self.high:g} with at most"
                f" four decimals, but got {shown if len(shown) <= 60 else shown[:57] + '...'}"
            )


SERIES = Text(
    label="Series",
    pattern=f"({NAME})?",
    shape="the name of a loaded series, or empty",
    help="The series whose newest value is read; empty takes the price index.",
)
NEWEST = Text(
    label="Print of",
    pattern=PERIOD,
    shape="a period such as 2024-03, 2024-Q1 or 2024, or empty",
    help="Period such as 2024-03 that is read as the print; empty takes the newest there is.",
)
FORMULA = Choice(
    label="Rates in",
    options={"percent": "percent", "log": "100 × log difference"},
    help="Formula of every rate: percent is what offices print.",
)
MEASURE = Choice(
    label="Rank and distribution of",
    options={
        "1m": "rate over one period",
        "3m": "3-month rate, annualised",
        "6m": "6-month rate, annualised",
        "12m": "12-month rate",
    },
    help="Which rate is ranked and fitted; a quarter counts as 3 months.",
)
AMONG = Choice(
    label="Compared with",
    options={
        "all": "all history",
        "prior": "earlier periods only",
        "rolling": "the last periods (window)",
        "since": "periods since",
        "season": "the same month of other years",
    },
    help="History that the print is ranked among and that distributions are fitted to.",
)
RANK_KIND = Choice(
    label="Rank counts",
    options={
        "mean": "below, and half of the equal (mean)",
        "weak": "at or below (weak)",
        "strict": "below (strict)",
    },
    help="Definition of the percentile rank: mean, weak or strict.",
)
RANK_WINDOW = Whole(
    label="Rolling window",
    low=24,
    high=1200,
    help="Periods in the rolling window of the rank, from 24.",
)
SINCE = Text(
    label="Since",
    pattern=PERIOD,
    shape="a period such as 1995-01, 1995-Q1 or 1995, or empty",
    help="Period from which the cumulative change, and the rank since, count; empty: the first.",
)
SPLIT = Text(
    label="Split at",
    pattern=PERIOD,
    shape="a period such as 1995-01, 1995-Q1 or 1995, or empty",
    help="First period of the second sub-sample; empty splits in the middle.",
)
FAMILY = Choice(
    label="Family tested",
    options={
        "laplace": "Laplace",
        "asymmetric_laplace": "asymmetric Laplace",
        "normal": "normal",
        "student_t": "Student t",
    },
    help="Distribution whose fit is tested and whose tail is read.",
)
DRAWS = Whole(
    label="Draws",
    low=99,
    high=20000,
    help="Samples drawn from the fitted distribution for its test; more makes p finer.",
)
COMING = Number(
    label="Every coming period brings",
    low=-20,
    high=100,
    help="Percent a period, such as 0.2, that the what-if path assumes for every coming period.",
)
BEYOND = Choice(
    label="Episodes",
    options={"rank": "12-month rate above a rank", "level": "12-month rate above a level"},
    help="Whether episodes of high inflation lie above a rank in history or above a level.",
)
LEVEL = Number(
    label="Level",
    low=-100,
    high=100000,
    help="Percent over 12 months that an episode lies above.",
)
RANK_LEVEL = Number(
    label="Rank",
    low=0,
    high=100,
    help="Percentile rank, 0 to 100, that an episode lies above.",
)
SHORTEST = Whole(
    label="At least",
    low=1,
    high=600,
    help="Fewest periods of an episode; shorter ones are left out.",
)
GAP = Whole(
    label="Bridging",
    low=0,
    high=120,
    help="Periods at or below the mark that do not end an episode.",
)
TIMELINE = Choice(
    label="Chart shows",
    options={"rates": "rates", "factor": "level as a multiple, log scale"},
    help="What is drawn through time: rates, or the level as a multiple of its first value.",
    display=True,
)

READING_VIEWS = (
    "rates",
    "base",
    "whatif",
    "rank",
    "history",
    "distribution",
    "quantiles",
    "episodes",
)
READING_FIELDS = (
    "series",
    "formula",
    "measure",
    "season",
    "among",
    "rank_kind",
    "rank_window",
    "since",
    "split",
    "family",
    "draws",
    "seed",
    "coming",
    "beyond",
    "level",
    "rank_level",
    "shortest",
    "gap",
)
