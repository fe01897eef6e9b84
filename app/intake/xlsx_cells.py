"""From the cells of a sheet to a table with one header: texts of cells, joined header rows."""

import datetime
import re
from collections.abc import Sequence
from decimal import Decimal
from functools import lru_cache
from typing import Any, NamedTuple

from app.intake.csv_files import MAX_CELLS, Sheet
from app.intake.numerals import decimal_mark, read_column
from app.intake.periods import looks_like_period
from app.intake.problems import Problem, counted, quoted, refusal
from app.intake.tables import long_header

Rows = Sequence[tuple[int, list[str]]]

_NOT_FORMAT = re.compile(r'"[^"]*"|\\.|\[[^\]]*\]|_.')  # words, escapes, colours, padding
_THREE_DECIMALS = re.compile(r"-?\d{1,3}\.\d{3}")
_PROVED = re.compile(r"-?\d+\.\d+(?:e[-+]?\d+)?%?")
_NUMBERING = re.compile(r"[(\[]?\d{1,3}[)\]]?")
_DIGIT = re.compile(r"[0-9]")
_PERIOD_COLUMNS = 12
_HEADER_ROWS = 3
_TOP = 1_000


class Area(NamedTuple):
    """Merged cells: first and last row and column, counted from 1."""

    top: int
    left: int
    bottom: int
    right: int


def cell_text(cell: Any) -> str:
    """Write a cell as text: numbers exactly, dates as 2024-03-01, shares as percent if so shown.

    A number with three decimals, such as 1.234, is written 1.2340, so that its point can not be
    taken to part thousands.
    """
    value = cell.value
    if value is None:
        return ""
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, int | float):
        return _number_text(value, cell.number_format or "")
    if isinstance(value, datetime.datetime):
        midnight = value.time() == datetime.time()
        return value.date().isoformat() if midnight else value.isoformat(" ", "seconds")
    return str(value)


def _number_text(value: float, shown_as: str) -> str:
    """Write a number exactly; a share shown with a percent sign is moved by two places."""
    if "%" in shown_as and _is_percent(shown_as):
        moved = Decimal(repr(value)).scaleb(2)
        text = repr(float(moved)) if moved.is_finite() else repr(value)
        return text.removesuffix(".0") + "%"
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        value = int(value)
    text = str(value) if isinstance(value, int) else repr(value)
    return text + "0" if _THREE_DECIMALS.fullmatch(text) else text


@lru_cache(maxsize=256)
def _is_percent(shown_as: str) -> bool:
    """Tell whether a number format has a percent sign of its own, not in words that it adds."""
    return "%" in _NOT_FORMAT.sub("", shown_as[:256].split(";")[0])


def workbook_table(file: str, rows: Rows, merged: Sequence[Area]) -> tuple[Sheet, list[Problem]]:
    """Bring the rows of a sheet into the form of a file: what stands above, one header, the rows.

    Blank columns before the periods are dropped. Up to three rows right above the first period
    are the header; their labels are joined as "Upper: lower", where the label of an upper row
    reaches over the cells merged with it or, where none of the row are merged, over the blank ones
    that follow.

    Raises
    ------
    IntakeError
        The sheet is empty.
    """
    if not rows:
        raise refusal(file, "must hold a header and rows below it, but the sheet is empty")
    if long_header([texts for _, texts in rows]) is not None:
        start = min(next(p for p, text in enumerate(texts) if text.strip()) for _, texts in rows)
        return _sheet(file, [(number, texts[start:] or [""]) for number, texts in rows]), []
    column = _period_column(rows)
    first = next(
        (p for p, (_, texts) in enumerate(rows) if looks_like_period(_at(texts, column)[:60])), None
    )
    header = [] if first is None else _header_places(rows[:first], column)
    if first is None or not header:
        return _sheet(file, [(n, texts[column:] or [" ".join(texts)]) for n, texts in rows]), []
    width = max(len(texts) for _, texts in rows[min(header) :])
    if width * len(rows) > 2 * MAX_CELLS:
        message = f"a sheet must not span more than {2 * MAX_CELLS:,} cells, but one does"
        raise refusal(file, message)
    labels = _labels([rows[place] for place in header], merged, column, width)
    body = [(n, [*texts, *[""] * width][column:width]) for n, texts in rows[first:]]
    kept, notes = _kept_columns(file, labels, body)
    above = [
        (number, [" ".join(text.strip() for text in texts if text.strip())])
        for place, (number, texts) in enumerate(rows[:first])
        if place not in header
    ]
    table = [(rows[header[-1]][0], labels), *body]
    table = [(number, [texts[place] for place in kept]) for number, texts in table]
    _settle_marks(table[1:])
    return _sheet(file, [*above, *(row for row in table if any(map(str.strip, row[1])))]), notes


def _sheet(file: str, rows: Rows) -> Sheet:
    return Sheet(file, [texts for _, texts in rows], [number for number, _ in rows], "")


def _at(texts: Sequence[str], column: int) -> str:
    return texts[column] if column < len(texts) else ""


def _period_column(rows: Rows) -> int:
    """Return the first column in which a period stands left of something."""
    for column in range(_PERIOD_COLUMNS):
        for _, texts in rows[:_TOP]:
            if len(texts) > column + 1 and looks_like_period(texts[column][:60]):
                return column
    return 0


def _header_places(above: Rows, column: int) -> list[int]:
    """Return which rows above the first period are its header, the topmost first."""
    found: list[int] = []
    for place in range(len(above) - 1, -1, -1):
        number, texts = above[place]
        labels = [text for text in texts[column + 1 :] if text.strip()]
        if not found and (not labels or all(map(_NUMBERING.fullmatch, labels))):
            continue
        if found:
            next_number, below = above[found[0]]
            both_named = _at(texts, column).strip() and _at(below, column).strip()
            fuller = len(labels) >= sum(1 for text in below[column + 1 :] if text.strip())
            if not labels or number != next_number - 1 or (both_named and not fuller):
                break
            if any(looks_like_period(label[:60]) for label in labels[:_PERIOD_COLUMNS]):
                break
        found.insert(0, place)
        if len(found) == _HEADER_ROWS:
            break
    return found


def _labels(header: Rows, merged: Sequence[Area], column: int, width: int) -> list[str]:
    """Join the labels of the header rows, one a column from `column` to `width`."""
    spread = [_spread(row, merged, column, width) for row in header[:-1]]
    lowest = [*header[-1][1], *[""] * width][column:width]
    columns = list(zip(*spread, lowest, strict=True))
    whole = [len({row[place] for place in range(1, width - column)}) for row in spread]
    joined = []
    for place, parts in enumerate(columns):
        words: list[str] = []
        for level, part in enumerate(parts):
            title = level < len(whole) and whole[level] == 1 and width - column > 2
            text = part.strip()
            if text and not title and (not words or words[-1] != text):
                words.append(text)
        joined.append(": ".join(words if place else words[-1:]))
    return joined


def _spread(
    row: tuple[int, list[str]], merged: Sequence[Area], column: int, width: int
) -> list[str]:
    """Let the labels of an upper header row reach over merged cells, else over blank ones."""
    number, texts = row
    labels = [*texts, *[""] * width][:width]
    areas = [area for area in merged if area.top == number and area.right > area.left]
    for area in areas:
        for place in range(area.left, min(area.right, width)):
            labels[place] = labels[area.left - 1]
    if not areas:
        for place in range(column + 2, width):
            labels[place] = labels[place] if labels[place].strip() else labels[place - 1]
    return labels[column:]


def _kept_columns(file: str, labels: Sequence[str], body: Rows) -> tuple[list[int], list[Problem]]:
    """Choose the columns to read: not those without a name that hold words and no number."""
    kept = [0]
    dropped: list[tuple[int, str]] = []
    for place in range(1, len(labels)):
        texts = [(number, row[place]) for number, row in body if row[place].strip()]
        if labels[place].strip() or any(_DIGIT.search(text) for _, text in texts):
            kept.append(place)
        elif texts:
            dropped.append(texts[0])
    if not dropped:
        return kept, []
    number, text = dropped[0]
    message = (
        f"a column of words without a name was not read; it begins with {quoted(text.strip())}"
    )
    message = counted(message, len(dropped) - 1, "such column")
    return kept, [Problem("note", file, number, None, message)]


def _settle_marks(body: list[tuple[int, list[str]]]) -> None:
    """Rewrite numbers stored as text with a decimal comma where true numbers stand beside them."""
    for place in range(1, len(body[0][1]) if body else 0):
        cells = [texts[place] for _, texts in body]
        others = [text for text in cells if "," in text]
        if not others or not any(map(_PROVED.fullmatch, cells)) or decimal_mark(others) != ",":
            continue
        read = read_column(others, ",")
        if read.wrong:
            continue
        written = iter(read.values.tolist())
        for _, texts in body:
            if "," in texts[place]:
                sign = "%" if texts[place].rstrip().endswith("%") else ""
                texts[place] = repr(next(written)) + sign
