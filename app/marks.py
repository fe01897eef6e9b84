"""Breaks that the user has marked: rows of the workspace, treatments, and their words."""

import sqlite3
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from analytics.linking import Treatment, break_treated
from analytics.series import PERIOD_NOUN, Series, period_code, period_label
from app.intake.problems import MAX_NAME, plain_text, quoted
from app.workspace_rows import period_of

if TYPE_CHECKING:
    from app.workspace_view import WorkspaceView

OVERLAPS: dict[str, tuple[Treatment, str]] = {  # each followed by the overlapping series' name
    "overlap:": ("overlap", ""),
    "overlap-mean:": ("overlap_mean", ", by the means of a year on each side"),
}
TREATMENTS: dict[str, str] = {
    "exclude": "growth of the {noun} set to the mean of the {noun}s before and after",
    "before": "growth of the {noun} set to that of the {noun} before",
    "after": "growth of the {noun} set to that of the {noun} after",
}


@dataclass(frozen=True)
class Mark:
    """A break of a series.

    Attributes
    ----------
    series : str
        Its name.
    period : str
        First period of the new definition, such as ``1987-07``.
    treatment : str
        A key of `TREATMENTS`, or one of `OVERLAPS` and the name of the overlapping series.
    note : str
        What the user wrote beside it.
    """

    series: str
    period: str
    treatment: str
    note: str = ""

    def words(self, noun: str = "month") -> str:
        """Say what is done at the break."""
        for start, (_, how) in OVERLAPS.items():
            if self.treatment.startswith(start):
                return f"spliced by overlap with {self.treatment.removeprefix(start)}{how}"
        return TREATMENTS[self.treatment].format(noun=noun)


@dataclass(frozen=True, eq=False)
class Treated:
    """A series with its breaks treated, and a sentence on each; `marks` in order of time."""

    series: Series
    said: tuple[str, ...] = ()
    marks: tuple[Mark, ...] = ()


def checked(mark: Mark, loaded: Mapping[str, Series], others: Sequence[Mark]) -> Mark:
    """Return a mark as it is kept, having tried it.

    Raises
    ------
    ValueError
        The period is none of the series, the treatment is unknown, or it cannot be done.
    """
    series = loaded[mark.series]
    period = period_of(series.frequency, mark.period.strip())
    treatment, other = _parts(mark.treatment)
    if treatment.startswith("overlap") and other not in loaded:
        raise ValueError(f"the overlapping series must be loaded, but {quoted(other)} is not")
    if other == mark.series:
        raise ValueError(f"the overlapping series must be another one, but got {quoted(other)}")
    kept = Mark(mark.series, period_code(period), mark.treatment, plain_text(mark.note, MAX_NAME))
    marked = [period_of(series.frequency, one.period) for one in others]
    break_treated(series, period, treatment, other=loaded.get(other), marked=marked)
    return kept


def treated(series: Series, marks: Sequence[Mark], loaded: Mapping[str, Series]) -> Treated:
    """Apply the marks of a series to it, oldest first.

    A mark that this vintage does not allow, for example since it ends before the break, is left
    out and said; one outside its span is passed over. The sentences are a part of the source of
    the result, which every chart and file names.
    """
    said, used = [], []
    noun = PERIOD_NOUN[series.frequency]
    there = []
    for mark in marks:
        try:
            period = period_of(series.frequency, mark.period)
        except ValueError:
            continue  # the series has another frequency than when it was marked
        if series.first < period <= series.last:
            there.append((period, mark))
    there.sort(key=lambda each: each[0].ordinal)
    done = series
    for period, mark in there:
        when = period_label(period)
        try:
            treatment, other = _parts(mark.treatment)
            marked = [each for each, _ in there if each != period]
            done = break_treated(
                done, period, treatment, other=loaded.get(other), marked=marked
            ).series
        except ValueError as error:
            said.append(f"break marked at {when} but not treated: {error}")
            continue
        used.append(mark)
        said.append(f"break treated at {when}: {mark.words(noun)}")
    if not said:
        return Treated(series)
    source = "; ".join([series.source or series.name, *said])
    attributes = {n: getattr(done, n) for n in ("kind", "unit", "adjustment")}
    return Treated(
        Series(done.name, done.first, done.values, source=source, **attributes),
        tuple(said),
        tuple(used),
    )


def mark_words(mark: Mark, in_view: "WorkspaceView") -> str:
    """Say where a mark stands and what is done there, or why nothing is."""
    when, noun = mark_when(mark, in_view)
    said = [each for each in in_view.breaks(mark.series) if f"at {when}" in each]
    if said:
        return said[0]
    return f"break at {when}: {mark.words(noun)}; the series in view has no such {noun}"


def mark_when(mark: Mark, in_view: "WorkspaceView") -> tuple[str, str]:
    """Return the period of a mark in words, and the noun of the periods of its series."""
    series = in_view.as_read.get(mark.series)
    try:
        if series is not None:
            period = period_of(series.frequency, mark.period)
            return period_label(period), PERIOD_NOUN[series.frequency]
    except ValueError:
        pass  # the series has another frequency than when it was marked
    return mark.period, "period"


def read_marks(db: sqlite3.Connection) -> tuple[Mark, ...]:
    """Return every mark of a workspace, by series and period."""
    rows = db.execute("SELECT series, period, treatment, note FROM marks ORDER BY series, period")
    return tuple(Mark(*row) for row in rows)


def write_mark(db: sqlite3.Connection, mark: Mark, at: str) -> None:
    """Write a mark; one at the same period of the series is replaced."""
    db.execute(
        "INSERT INTO marks (series, period, treatment, note, at) VALUES (?, ?, ?, ?, ?)"
        " ON CONFLICT (series, period) DO UPDATE SET treatment = excluded.treatment,"
        " note = excluded.note, at = excluded.at",
        (mark.series, mark.period, mark.treatment, mark.note, at),
    )


def _parts(text: str) -> tuple[Treatment, str]:
    for start, (treatment, _) in OVERLAPS.items():
        if text.startswith(start):
            return treatment, text.removeprefix(start)
    if text not in TREATMENTS:
        ways = ", ".join([*TREATMENTS, *(f"{start}NAME" for start in OVERLAPS)])
        raise ValueError(f"treatment must be one of {ways}, but got {quoted(text)}")
    return text, ""  # type: ignore[return-value]
