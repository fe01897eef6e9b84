"""SDMX-CSV, versions 1.0 and 2.x, with codes, with names, or with both.

The rules are those of the SDMX-CSV field guides of the SDMX technical working group: the header
begins with DATAFLOW (1.0) or STRUCTURE (2.x), and the sign behind it parts the cells.
"""

import re
from collections.abc import Sequence
from dataclasses import dataclass

from analytics.series import Series
from app.intake.csv_files import Sheet, split_rows
from app.intake.periods import looks_like_period
from app.intake.problems import Problem, counted, quoted, refusal
from app.intake.sdmx import (
    STATUS,
    TIME,
    VALUE,
    YEAR_START,
    Message,
    Observation,
    is_attribute,
    labels_of,
)
from app.intake.sdmx_series import read_message
from app.intake.sheets import Metadata

_START = re.compile(r"\s*\"?(?:DATAFLOW|STRUCTURE(?:\[.\])?)\"?([,;\t|])")
_BRACKETS = re.compile(r"\[[^\]]*\]$")
_ID = re.compile(r"[A-Z][A-Z0-9_@$-]*")
_HEAD = (
    "DATAFLOW",
    "STRUCTURE",
    "STRUCTURE_ID",
    "STRUCTURE_NAME",
    "ACTION",
    "SERIES_KEY",
    "OBS_KEY",
)


@dataclass(frozen=True, eq=False)
class _Columns:
    """Where the components of a file stand: column of each id, of its labels, of the key."""

    place: dict[str, int]
    label: dict[str, int]
    time: str
    dimensions: list[str]


def is_sdmx_csv(text: str) -> bool:
    """Tell by the first cell of the header whether a text is SDMX-CSV."""
    return _START.match(text) is not None


def read_sdmx_csv(
    file: str, text: str, metadata: Metadata | None = None
) -> tuple[list[Series], list[Problem]]:
    """Read the series of an SDMX-CSV file.

    Raises
    ------
    IntakeError
        The header lacks the time or the value, no row holds one, or the cells do not fit it.
    """
    start = _START.match(text)
    sheet = split_rows(file, text, start[1] if start else None)
    header, rows = sheet.rows[0], sheet.rows[1:]
    columns = _columns(sheet, header, rows)
    message = Message(file, separator=sheet.separator)
    kept = _usable(sheet, columns, message)
    if not kept:
        raise refusal(file, "must have rows with a value, but has none", row=sheet.lines[0])
    if "STRUCTURE_NAME" in columns.place:
        message.title = sheet.rows[kept[0]][columns.place["STRUCTURE_NAME"]]
    dimensions = _told_apart(sheet, columns, kept)
    _collect(sheet, columns, kept, dimensions, message)
    return read_message(message, metadata)


def _columns(sheet: Sheet, header: Sequence[str], rows: Sequence[Sequence[str]]) -> _Columns:
    """Read the header: ids, columns of names beside them, the time, the dimensions."""
    both = [cell.partition(": ") for cell in header]
    ids = [_BRACKETS.sub("", part[0].strip()) for part in both]
    named = "STRUCTURE_NAME" in ids
    place: dict[str, int] = {}
    label: dict[str, int] = {}
    for column, name in enumerate(ids):
        before = ids[column - 1] if column else ""
        if (
            named
            and column
            and before not in _HEAD
            and _ID.fullmatch(before)
            and not _ID.fullmatch(name)
        ):
            label[before.upper()] = column
        elif name and name.upper() in place:
            rule = "a column must stand once"
            raise refusal(
                sheet.file, f"{rule}, but {quoted(name)} stands again", row=sheet.lines[0]
            )
        elif name:
            place[name.upper()] = column
    if VALUE not in place:
        raise refusal(sheet.file, f"must have a column {VALUE}, but has none", row=sheet.lines[0])
    time = TIME if TIME in place else _time_column(place, rows)
    if time is None:
        raise refusal(sheet.file, f"must have a column {TIME}, but has none", row=sheet.lines[0])
    dimensions = [
        name
        for name, column in place.items()
        if column < place[VALUE] and name != time and name not in _HEAD and name != "LAST UPDATE"
    ]
    return _Columns(place, label, time, dimensions)


def _time_column(place: dict[str, int], rows: Sequence[Sequence[str]]) -> str | None:
    """Find the one column of periods where none is called TIME_PERIOD."""
    head = rows[:50]
    for name, column in place.items():
        cells = [_code(row[column]) for row in head if column < len(row) and row[column].strip()]
        if name not in (*_HEAD, VALUE) and cells and all(looks_like_period(c[:60]) for c in cells):
            return name
    return None


def _code(cell: str) -> str:
    """Return the code of a cell that may carry its name behind it: "A: Annual"."""
    return cell.partition(": ")[0].strip()


def _usable(sheet: Sheet, columns: _Columns, message: Message) -> list[int]:
    """Choose the rows that hold an observation: those as wide as the header and not deleted."""
    width = len(sheet.rows[0])
    action, time = columns.place.get("ACTION"), columns.place[columns.time]
    kept: list[int] = []
    odd: list[int] = []
    deleted: list[int] = []
    for place in range(1, len(sheet.rows)):
        row = sheet.rows[place]
        if len(row) != width:
            odd.append(place)
        elif action is not None and row[action].strip().upper() == "D":
            deleted.append(place)
        elif row[time].strip():
            kept.append(place)
    if odd:
        text = f"a row must have {width} cells as the header has, but got {len(sheet.rows[odd[0]])}"
        if 2 * len(odd) > len(sheet.rows) - 1:
            raise refusal(sheet.file, text, row=sheet.lines[odd[0]])
        text = counted(f"{text}; the row was left out", len(odd) - 1, "such row")
        message.problems.append(Problem("error", sheet.file, sheet.lines[odd[0]], None, text))
    if deleted:
        text = counted("a row that deletes was not read", len(deleted) - 1, "such row")
        message.problems.append(Problem("warning", sheet.file, sheet.lines[deleted[0]], None, text))
    return kept


def _told_apart(sheet: Sheet, columns: _Columns, kept: Sequence[int]) -> list[str]:
    """Return the dimensions; where periods repeat under them, columns behind that vary join in."""
    time = columns.place[columns.time]
    places = [columns.place[name] for name in columns.dimensions]
    seen: dict[tuple[str, ...], int] = {}
    vary: set[str] = set()
    others = {
        name: column
        for name, column in columns.place.items()
        if name not in (*_HEAD, *STATUS, VALUE, columns.time)
        and name not in columns.dimensions
        and not is_attribute(name)
    }
    if not others:
        return columns.dimensions
    for place in kept:
        row = sheet.rows[place]
        earlier = seen.setdefault((row[time], *(row[column] for column in places)), place)
        if earlier != place:
            vary |= {n for n, c in others.items() if row[c] != sheet.rows[earlier][c]}
    return [*columns.dimensions, *(name for name in others if name in vary)]


def _collect(
    sheet: Sheet,
    columns: _Columns,
    kept: Sequence[int],
    dimensions: Sequence[str],
    message: Message,
) -> None:
    """Group the rows by their key, with labels and attributes."""
    skip = {*_HEAD, *STATUS, VALUE, columns.time, *dimensions}
    attributes = {n: c for n, c in columns.place.items() if n not in skip}
    keys = [columns.place[name] for name in dimensions]
    time, value = columns.place[columns.time], columns.place[VALUE]
    status = next((columns.place[name] for name in STATUS if name in columns.place), None)
    labels: dict[tuple[str, str], str] = {}
    alike: dict[tuple[str, ...], dict[str, str]] = {}
    for place in kept:
        row = sheet.rows[place]
        cells = tuple(row[column] for column in keys)

        def key(row: Sequence[str] = row, cells: tuple[str, ...] = cells) -> dict[str, str]:
            _gather(row, columns, dimensions, labels)
            return {n: _code(c) for n, c in zip(dimensions, cells, strict=True) if c.strip()}

        told = tuple(row[column] for column in attributes.values())
        held = alike.get(told)
        if held is None:
            held = alike[told] = {}
            for name, column in attributes.items():
                cell = row[column].strip()
                if cell:
                    held[name] = cell if name == YEAR_START else _code(cell)
            _gather(row, columns, list(held), labels)
        flag = "" if status is None else _code(row[status])
        text = _code(row[time]) if ": " in row[time] else row[time]
        message.add(cells, key, held, Observation(text, row[value], flag, sheet.lines[place]))
    message.labels = labels_of(labels)


def _gather(
    row: Sequence[str],
    columns: _Columns,
    names: Sequence[str],
    labels: dict[tuple[str, str], str],
) -> None:
    """Remember the words for codes of one row, in their cell or in the column beside it."""
    for name in names:
        code, _, words = row[columns.place[name]].partition(": ")
        if name in columns.label:
            words = row[columns.label[name]]
        if words.strip():
            labels.setdefault((name, code.strip()), words)
