"""Numbers as files write them: decimal point or comma, grouped thousands, signs for missing."""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from analytics.series import FloatArray
from app.intake.problems import quoted

Mark = Literal[".", ","]

MISSING = frozenset(
    {"", "nan", "na", "n/a", "#n/a", "null", "none", "..", ".", ":", "-", "–", "—", "…", "..."}
)
_FAST = {".": re.compile(r"[-+0-9.eE\n]*"), ",": re.compile(r"[-+0-9,eE\n]*")}
_SPACES = "\u0020\u00a0\u2007\u2009\u202f'\u2019"  # signs that group thousands beside . and ,


def _number(mark: str, group: str) -> re.Pattern[str]:
    """Pattern of a number with this decimal mark and these signs between thousands."""
    whole = rf"[1-9][0-9]{{0,2}}(?:(?P<sign>[{group}])[0-9]{{3}})(?:(?P=sign)[0-9]{{3}})*|[0-9]+"
    return re.compile(
        rf"(?P<minus>[-+\u2212\u2013]?)\s*"
        rf"(?P<whole>{whole})?(?:{re.escape(mark)}(?P<part>[0-9]*))?"
        rf"(?P<power>[eE][-+]?[0-9]{{1,4}})?\s*(?P<percent>%?)"
    )


_NUMBER = {".": _number(".", "," + _SPACES), ",": _number(",", "." + _SPACES)}


def _decimal(mark: str, other: str) -> re.Pattern[str]:
    """Pattern of text that proves `mark` to be the decimal mark, over lines of numbers.

    One or two, or four and more, digits behind it; nothing but a zero, or four and more digits
    without a group, before it; a group by the other mark or a space before it.
    """
    mark, other = re.escape(mark), re.escape(other)
    return re.compile(
        rf"(?m)^[^\n]*?[0-9]{mark}(?:[0-9]{{1,2}}|[0-9]{{4,}})[ %]*$"
        rf"|^ *[-+\u2212]?(?:0|[0-9]{{4,}})?{mark}[0-9]+[ %]*$"
        rf"|[0-9]{other}[0-9]{{3}}{mark}[0-9]"
        rf"|[0-9][{_SPACES}][0-9]{{3}}{mark}[0-9]"
    )


_DECIMAL: dict[Mark, re.Pattern[str]] = {".": _decimal(".", ","), ",": _decimal(",", ".")}
_UNDECIDED = re.compile(r"(?m)^ *[-+\u2212]?[1-9][0-9]{0,2}[.,][0-9]{3}[ %]*$")


def decimal_mark(cells: Sequence[str]) -> Mark | None:
    """Return the decimal mark that these cells prove; None where they prove none, or both.

    Examples
    --------
    >>> decimal_mark(["101,5", "102"]), decimal_mark(["1.234", "2.345"])
    (',', None)
    """
    joined = "\n".join(cells)
    proved = [mark for mark, proof in _DECIMAL.items() if mark in joined and proof.search(joined)]
    return proved[0] if len(proved) == 1 else None


def undecided(cells: Sequence[str]) -> str | None:
    """Return the first number such as 1,234 whose mark may part decimals or thousands."""
    match = _UNDECIDED.search("\n".join(cells))
    return match[0].strip() if match else None


@dataclass(frozen=True, eq=False)
class ReadColumn:
    """Numbers of one column.

    Attributes
    ----------
    values : ndarray of float, shape (n,)
        nan where the cell says that there is no value, and where it is wrong.
    wrong : tuple of int
        Places in the column that hold no number.
    message : str
        What is wrong at the first of them.
    percent : bool
        Every number carries a percent sign.
    """

    values: FloatArray
    wrong: tuple[int, ...]
    message: str
    percent: bool


def read_column(cells: Sequence[str], mark: Mark) -> ReadColumn:
    """Read the numbers of one column exactly as written, to the nearest double.

    Examples
    --------
    >>> read_column(["1.234,5", "..", "−2"], ",").values
    array([1234.5,    nan,   -2. ])
    >>> read_column(["1_000", "100"], ".").wrong
    (0,)
    """
    joined = "\n".join(cells)
    if _FAST[mark].fullmatch(joined):
        plain = cells if mark == "." else joined.replace(",", ".").split("\n")
        try:
            values = np.array([float(cell or "nan") for cell in plain])
        except ValueError:
            pass
        else:
            if len(plain) == len(cells) and not np.isinf(values).any():
                return ReadColumn(values, (), "", percent=False)
    values = np.full(len(cells), np.nan)
    wrong: list[int] = []
    message, percent = "", 0
    for place, cell in enumerate(cells):
        stripped = cell.strip()
        if stripped.lower() in MISSING:
            continue
        match = _NUMBER[mark].fullmatch(stripped)
        if match is None or not (match["whole"] or match["part"]):
            message = message or f"must be a number, but got {quoted(cell)}"
            wrong.append(place)
            continue
        number = float(_digits(match))
        if np.isinf(number):
            message = message or f"must be a number below 1.8e308, but got {quoted(cell)}"
            wrong.append(place)
            continue
        values[place] = number
        percent += bool(match["percent"])
    known = np.flatnonzero(~np.isnan(values)).tolist()
    if not wrong and 0 < percent < len(known):
        wrong = [place for place in known if "%" not in cells[place]]
        message = f"must carry a percent sign as others do, but got {quoted(cells[wrong[0]])}"
    return ReadColumn(values, tuple(wrong), message, percent=percent > 0)


def _digits(match: re.Match[str]) -> str:
    """Write a matched number the way float() takes it."""
    minus = "-" if match["minus"] in ("-", "\u2212", "\u2013") else ""
    whole = re.sub(r"[^0-9]", "", match["whole"] or "0")
    return f"{minus}{whole}.{match['part'] or '0'}{match['power'] or ''}"
