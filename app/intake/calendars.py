"""The calendar of a table: which months, quarters or years its rows stand for, in which order."""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from analytics.series import PERIOD_NOUN, FloatArray, frequency_of, period_label
from app.intake.periods import Calendar, PeriodTrouble, ReadPeriod, read_periods
from app.intake.problems import Problem, counted, quoted, refusal

IntArray = NDArray[np.int64]
_CALENDAR_NAME: dict[Calendar, str] = {"M": "monthly", "Q": "quarterly", "Y": "annual"}


@dataclass(frozen=True, eq=False)
class RowCalendar:
    """Where each row of a table belongs.

    Attributes
    ----------
    calendar : {"M", "Q", "Y"}
        Months, quarters or years.
    ordinals : ndarray of int, shape (n,)
        Period of each kept row, in file order; 1970 is 0.
    kept : ndarray of int, shape (n,)
        Places of the kept rows in the table.
    problems : tuple of Problem
        What was found on the way.
    """

    calendar: Calendar
    ordinals: IntArray
    kept: IntArray
    problems: tuple[Problem, ...]

    @cached_property
    def first(self) -> pd.Period:
        """The earliest period."""
        return self.at(int(self.ordinals.min()))

    @property
    def span(self) -> int:
        """Periods from the earliest to the latest, both included."""
        return int(self.ordinals.max() - self.ordinals.min()) + 1

    def at(self, ordinal: int) -> pd.Period:
        """Period of an ordinal."""
        return pd.Period(ordinal=ordinal, freq=self.calendar)

    def laid_out(self, values: FloatArray) -> FloatArray:
        """Put the values of the kept rows, shape (n,), on the calendar, shape (span,).

        Where rows share a period, their value is taken if they agree, and none if they do not.
        """
        places = self.ordinals - self.ordinals.min()
        filled = np.full(self.span, np.nan)
        known = ~np.isnan(values)
        filled[places[known]] = values[known]
        clash = np.flatnonzero(known & (filled[places] != values))
        filled[places[clash]] = np.nan
        return filled


def row_calendar(
    file: str,
    texts: Sequence[str],
    lines: Sequence[int],
    column: str | None = None,
    stated: Calendar | None = None,
) -> RowCalendar:
    """Read the period of every row and decide the calendar.

    A single row whose period is no period is left out with an error; a calendar that is not read
    refuses the file, and so do rows of several calendars and several days of one month.
    Months that all lie three (twelve) apart are quarters (years), unless the file has `stated`
    its calendar; then that one holds.

    Raises
    ------
    IntakeError
        No calendar of months, quarters or years can be made of the rows.
    """
    found = read_periods(texts)
    problems: list[Problem] = []

    def refused(message: str, place: int) -> Exception:
        return refusal(file, message, row=lines[place], column=column)

    wrong = [(place, item) for place, item in enumerate(found) if isinstance(item, PeriodTrouble)]
    for place, trouble in wrong:
        if trouble.calendar or 2 * len(wrong) > len(found):
            raise refused(trouble.message, place)
    if wrong:
        place, trouble = wrong[0]
        message = counted(f"{trouble.message}; the row was left out", len(wrong) - 1, "such row")
        problems.append(Problem("error", file, lines[place], column, message))
    kept = [place for place, item in enumerate(found) if isinstance(item, ReadPeriod)]
    periods = [item for item in found if isinstance(item, ReadPeriod)]
    calendar = Counter(item.calendar for item in periods).most_common(1)[0][0]
    for place, item in zip(kept, periods, strict=True):
        if item.calendar != calendar:
            raise refused(
                f"periods must keep to one calendar, but {quoted(texts[place].strip())} is"
                f" {_CALENDAR_NAME[item.calendar]} among {_CALENDAR_NAME[calendar]} ones",
                place,
            )
    _refuse_days(file, texts, lines, column, kept, periods)
    ordinals = np.array([item.ordinal for item in periods], dtype=np.int64)
    if stated is not None and stated != calendar:
        if calendar != "M":
            raise refused(
                f"periods must be {_CALENDAR_NAME[stated]} as the file states, but"
                f" {quoted(texts[kept[0]].strip())} is {_CALENDAR_NAME[calendar]}",
                kept[0],
            )
        calendar, ordinals = stated, ordinals // (3 if stated == "Q" else 12)
    elif stated is None and calendar == "M":
        calendar, ordinals = _longer_calendar(ordinals)
        if calendar != "M":
            apart = "three" if calendar == "Q" else "twelve"
            message = f"months that lie {apart} apart were read as {_CALENDAR_NAME[calendar]} data"
            problems.append(Problem("note", file, lines[0], column, message))
    result = RowCalendar(calendar, ordinals, np.array(kept, dtype=np.int64), ())
    problems += _order_problems(file, lines, column, result)
    return RowCalendar(calendar, ordinals, result.kept, tuple(problems))


def _refuse_days(
    file: str,
    texts: Sequence[str],
    lines: Sequence[int],
    column: str | None,
    kept: Sequence[int],
    periods: Sequence[ReadPeriod],
) -> None:
    """Raise where two rows give different days of one month: daily or weekly data."""
    seen: dict[int, tuple[int, int]] = {}
    for place, item in zip(kept, periods, strict=True):
        if item.day is None:
            continue
        earlier, day = seen.setdefault(item.ordinal, (place, item.day))
        if day != item.day:
            raise refusal(
                file,
                "a month must have one value, as daily and weekly data are not read, but"
                f" {quoted(texts[earlier].strip())} and {quoted(texts[place].strip())}"
                f" in rows {lines[earlier]} and {lines[place]} share one",
                row=lines[place],
                column=column,
            )


def _longer_calendar(months: IntArray) -> tuple[Calendar, IntArray]:
    """Read months as quarters or years where at least three all lie that far apart."""
    steps: IntArray = np.diff(np.unique(months)).astype(np.int64)
    if steps.size >= 2 and (steps % 12 == 0).all():
        return "Y", months // 12
    if steps.size >= 2 and (steps % 3 == 0).all():
        return "Q", months // 3
    return "M", months


def _order_problems(
    file: str, lines: Sequence[int], column: str | None, rows: RowCalendar
) -> list[Problem]:
    """Tell of reversed or mixed order, periods that stand twice, and periods without a row."""
    problems: list[Problem] = []
    noun = PERIOD_NOUN[frequency_of(rows.first)]
    line = np.asarray(lines, dtype=np.int64)[rows.kept]
    steps = np.diff(rows.ordinals)

    def add(severity: str, row: int, message: str) -> None:
        problems.append(Problem(severity, file, row, column, message))  # type: ignore[arg-type]

    if steps.size and (steps <= 0).all() and (steps < 0).any():
        add("note", int(line[0]), "the newest period comes first; the rows were read in reverse")
    elif (steps < 0).any():
        place = int(np.flatnonzero(steps < 0)[0])
        before, after = (period_label(rows.at(int(o))) for o in rows.ordinals[place : place + 2])
        add(
            "warning",
            int(line[place + 1]),
            f"periods must stand in order, but {after} follows {before}; they were put in order",
        )
    order = np.argsort(rows.ordinals, kind="stable")
    ordered, ordered_line = rows.ordinals[order], line[order]
    twice = np.flatnonzero(np.diff(ordered) == 0)
    if twice.size:
        place = int(twice[0])
        stands = (
            f"a {noun} must stand once, but {period_label(rows.at(int(ordered[place])))} stands in"
            f" rows {ordered_line[place]} and {ordered_line[place + 1]}"
        )
        message = counted(stands, int(twice.size) - 1, "such row")
        add(
            "error",
            int(ordered_line[place + 1]),
            f"{message}; where they differ no value was taken",
        )
    jumps = np.flatnonzero(np.diff(ordered) > 1)
    if jumps.size:
        place = int(jumps[0])
        absent = period_label(rows.at(int(ordered[place]) + 1))
        total = int((np.diff(ordered)[jumps] - 1).sum())
        add(
            "warning",
            int(ordered_line[place + 1]),
            f"every {noun} must have a row, but {counted(absent, total - 1, noun)} has none;"
            " the gap is kept",
        )
    return problems
