"""What intake says about a file: one plain sentence with the place, never a traceback."""

import unicodedata
from dataclasses import dataclass
from pathlib import PurePath
from typing import Literal

Severity = Literal["error", "warning", "note"]

MAX_FILE_NAME = 80
MAX_NAME = 200
MAX_QUOTED = 40


@dataclass(frozen=True)
class Problem:
    """One thing found in a file.

    Attributes
    ----------
    severity : {"error", "warning", "note"}
        An error left something out, a warning asks for a look, a note tells what was done.
    file : str
        Display name of the file.
    row : int or None
        Line of the file, counted from 1; None where the file as a whole is meant.
    column : str or None
        Name of the series.
    message : str
        The sentence without its place.
    """

    severity: Severity
    file: str
    row: int | None
    column: str | None
    message: str

    def __str__(self) -> str:
        place = self.file
        if self.row is not None:
            place += f", row {self.row}"
        if self.column is not None:
            place += f", column {quoted(self.column)}"
        return f"{place}: {self.message}"


class IntakeError(ValueError):
    """A file that cannot be read; ``str()`` is the sentence of its `problem`."""

    def __init__(self, problem: Problem) -> None:
        super().__init__(str(problem))
        self.problem = problem


def refusal(
    file: str, message: str, *, row: int | None = None, column: str | None = None
) -> IntakeError:
    """Return the error that refuses a whole file."""
    return IntakeError(Problem("error", file, row, column, message))


def plain_text(text: str, limit: int) -> str:
    """Drop control, direction and other invisible characters; join white space; cap the length."""
    kept = text
    if not text.isprintable():
        kept = "".join(c for c in text if c.isspace() or unicodedata.category(c)[0] != "C")
    joined = " ".join(kept.split())
    return joined if len(joined) <= limit else joined[: limit - 1].rstrip() + "…"


def display_name(name: str) -> str:
    r"""Return a file name that is safe to show: no folders, nothing invisible, at most 80 signs.

    Examples
    --------
    >>> display_name("C:\\desk\\2024\\prices.csv")
    'prices.csv'
    >>> display_name("../../etc/prices\u202e.csv")
    'prices.csv'
    """
    last = name.replace("\\", "/").rstrip("/").rsplit("/", 1)[-1]
    text = plain_text(last, 10 * MAX_FILE_NAME)
    if len(text) > MAX_FILE_NAME:
        ending = PurePath(text).suffix[:10]
        text = text[: MAX_FILE_NAME - len(ending) - 1] + "…" + ending
    return text if text.strip(".… ") else "file"


def quoted(text: str) -> str:
    """Put what was found in quotes, cut to 40 signs, with invisible characters as ``?``."""
    shown = text if len(text) <= MAX_QUOTED else text[: MAX_QUOTED - 1] + "…"
    shown = "".join("?" if unicodedata.category(char)[0] == "C" else char for char in shown)
    return f"'{shown}'"


def counted(first: str, others: int, noun: str) -> str:
    """Append how many more there are: ``Mar 2024 (and 2 more months)``."""
    if others <= 0:
        return first
    return f"{first} (and {others} more {noun}{'' if others == 1 else 's'})"
