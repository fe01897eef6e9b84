"""From rows of text to columns with a name and a calendar: wide tables and long ones."""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import NoReturn

from app.intake.csv_files import MAX_COLUMNS, SEPARATORS, Sheet
from app.intake.periods import RULE, Calendar, PeriodTrouble, looks_like_period, read_period
from app.intake.problems import MAX_NAME, Problem, counted, plain_text, quoted, refusal

_LONG = ({"period", "series", "value"}, {"economy", "period", "series", "value"})
_TOP = 20
_DIGIT = re.compile(r"[0-9]")


@dataclass(frozen=True, eq=False)
class Block:
    """Columns that share one calendar.

    Attributes
    ----------
    lines : sequence of int, length n
        Line of the file of each row.
    periods : sequence of str, length n
        Text of the period of each row.
    columns : list of (str, sequence of str)
        Name of each series and its n cells.
    problems : tuple of Problem
        What was found while the block was cut out.
    calendar : {"M", "Q", "Y"} or None
        The calendar, where the file states it.
    """

    lines: Sequence[int]
    periods: Sequence[str]
    columns: list[tuple[str, Sequence[str]]]
    problems: tuple[Problem, ...] = ()
    calendar: Calendar | None = None


def blocks_of(sheet: Sheet) -> list[Block]:
    """Cut a sheet into blocks: one if wide (a column a series), many if long (a row a value).

    A long table is told by its header: period, series, value and perhaps economy, in any order.

    Raises
    ------
    IntakeError
        There is no header, no period, no column of values, or the rows do not fit the header.
    """
    place = long_header(sheet.rows)
    if place is None:
        return [_wide_block(sheet)]
    return _long_blocks(sheet, place, words(sheet.rows[place]))


def long_header(rows: Sequence[Sequence[str]]) -> int | None:
    """Return which of the first rows heads a long table, if one does."""
    for place, row in enumerate(rows[:_TOP]):
        header = words(row)
        if set(header) in _LONG and len(set(header)) == len(header):
            return place
    return None


def words(row: Sequence[str]) -> list[str]:
    """Return the cells of a header, bare and in small letters, without blank ones at the end."""
    header = [cell.strip().lower() for cell in row]
    while header and not header[-1]:
        header.pop()
    return header


def _wide_block(sheet: Sheet) -> Block:
    """Cut out header and columns of a table whose first column holds the periods."""
    file, rows, lines = sheet.file, sheet.rows, sheet.lines
    first = next((p for p, row in enumerate(rows) if looks_like_period(row[0][:60])), None)
    if first is None:
        _refuse_without_period(sheet)
    filled = [sum(1 for cell in row if cell.strip()) for row in rows[:first]]
    if not filled or max(filled) < 2:
        _refuse_without_header(sheet, first)
    header = filled.index(max(filled))
    problems = _remarks(sheet, [place for place in range(first) if place != header])
    width = len(rows[header])
    data, found = _data_rows(sheet, first, width)
    problems += found
    padded = (
        row if len(row) == width else [*row, *[""] * width][:width]
        for row in (rows[place] for place in data)
    )
    periods, *cells = zip(*padded, strict=True)
    places = [
        place
        for place, column in enumerate(cells)
        if rows[header][place + 1].strip() or any(map(str.strip, column))
    ]
    names, found = _unique_names(
        file, lines[header], [(place + 2, rows[header][place + 1]) for place in places]
    )
    columns: list[tuple[str, Sequence[str]]] = [
        (name, cells[place]) for name, place in zip(names, places, strict=True)
    ]
    return Block([lines[p] for p in data], periods, columns, (*problems, *found))


def _data_rows(sheet: Sheet, first: int, width: int) -> tuple[list[int], list[Problem]]:
    """Choose the rows to read: those as wide as the header that are more than a remark."""
    file, rows, lines = sheet.file, sheet.rows, sheet.lines
    problems: list[Problem] = []
    data, long, short, remarks = list[int](), list[int](), list[int](), list[int]()
    for place in range(first, len(rows)):
        row = rows[place]
        if not looks_like_period(row[0][:60]) and _is_remark(row):
            remarks.append(place)
        elif len(row) > width and any(map(str.strip, row[width:])):
            long.append(place)
        else:
            data.append(place)
            if len(row) < width:
                short.append(place)
    problems += _remarks(sheet, remarks)
    rule = f"a row must have {width} cells as the header has, but got"
    if long:
        message = f"{rule} {len(rows[long[0]])}"
        if len(long) > len(data):
            if sheet.separator == ",":
                message += "; a decimal comma needs quotes around it or semicolons between cells"
            raise refusal(file, message, row=lines[long[0]])
        message = counted(f"{message}; the row was left out", len(long) - 1, "such row")
        problems.append(Problem("error", file, lines[long[0]], None, message))
    if short:
        message = f"{rule} {len(rows[short[0]])}; the absent ones were read as no value"
        message = counted(message, len(short) - 1, "such row")
        problems.append(Problem("warning", file, lines[short[0]], None, message))
    return data, problems


def _unique_names(
    file: str, line: int, header: Sequence[tuple[int, str]]
) -> tuple[list[str], list[Problem]]:
    """Make the names of columns visible and different; `header` holds (column, text)."""
    problems: list[Problem] = []
    written = [(column, plain_text(text, MAX_NAME)) for column, text in header]
    wanted = {name for _, name in written}
    taken: set[str] = set()
    number: dict[str, int] = {}
    names: list[str] = []
    for column, name in written:
        new = base = name or f"Column {column}"
        while new in taken or (new != name and new in wanted):
            number[base] = number.get(base, 1) + 1
            new = f"{base} ({number[base]})"
        if new != name:
            rule = "a name must stand once" if name else "a column must have a name"
            found = f"{quoted(name)} stands again" if name else f"column {column} has none"
            message = f"{rule}, but {found}; it is called {quoted(new)} here"
            problems.append(Problem("warning", file, line, new, message))
        taken.add(new)
        names.append(new)
    return names, problems


def _is_remark(row: Sequence[str]) -> bool:
    """Tell whether a row without a period is words alone: no digit behind its first cell."""
    return row[0].startswith("#") or not any(map(_DIGIT.search, row[1:]))


def _remarks(sheet: Sheet, places: Sequence[int]) -> list[Problem]:
    """Note the rows around the table that were passed over."""
    if not places:
        return []
    message = counted(_start(sheet.rows[places[0]]), len(places) - 1, "row")
    verb = "was" if len(places) == 1 else "were"
    message = f"{message} outside the table {verb} not read"
    return [Problem("note", sheet.file, sheet.lines[places[0]], None, message)]


def _start(row: Sequence[str]) -> str:
    """Quote the first cell of a row that says something."""
    return quoted(next((cell.strip() for cell in row if cell.strip()), ""))


def _refuse_without_period(sheet: Sheet) -> NoReturn:
    """Raise the sentence for a sheet in which no row begins with a period."""
    file, rows, lines = sheet.file, sheet.rows, sheet.lines
    if max(map(len, rows)) < 2:
        raise refusal(file, _two_columns(sheet), row=lines[0])
    across = sum(looks_like_period(cell[:60]) for cell in rows[0])
    if across > 1:
        raise refusal(file, "periods must run down the first column, but run across", row=lines[0])
    if len(rows) == 1:
        raise refusal(
            file, "must have rows below the header, but the header is all there is", row=lines[0]
        )
    trouble = read_period(rows[1][0])
    message = trouble.message if isinstance(trouble, PeriodTrouble) else RULE
    raise refusal(file, message, row=lines[1], column=plain_text(rows[0][0], MAX_NAME) or None)


def _refuse_without_header(sheet: Sheet, first: int) -> NoReturn:
    """Raise the sentence for a sheet whose first period has no names above it."""
    file, rows, lines = sheet.file, sheet.rows, sheet.lines
    if max(map(len, rows)) < 2:
        raise refusal(file, _two_columns(sheet), row=lines[0])
    if first == 0:
        raise refusal(
            file,
            "the first row must name the series, but it begins with the period"
            f" {quoted(rows[0][0].strip())}",
            row=lines[0],
        )
    raise refusal(
        file,
        f"the header must name a column of values, but got only {_start(rows[first - 1])}",
        row=lines[first - 1],
    )


def _two_columns(sheet: Sheet) -> str:
    *most, last = SEPARATORS.values()
    parted = f", parted by {', '.join(most)} or {last}" if sheet.separator else ""
    return f"must have a column of periods and at least one of values{parted}, but got one column"


def _long_blocks(sheet: Sheet, top: int, header: Sequence[str]) -> list[Block]:
    """Cut a long table into one block a series, in the order in which they first appear."""
    file, lines = sheet.file, sheet.lines
    width = len(header)
    period, series, value = (header.index(word) for word in ("period", "series", "value"))
    economy = header.index("economy") if "economy" in header else None
    found: dict[tuple[str, str], list[int]] = {}
    remarks, odd = list[int](), list[int]()
    for place, row in enumerate(sheet.rows[top + 1 :], start=top + 1):
        if len(row) < width or any(map(str.strip, row[width:])):
            dated = any(looks_like_period(cell[:60]) for cell in row[:width])
            (remarks if _is_remark(row) and not dated else odd).append(place)
            continue
        whose = "" if economy is None else row[economy]
        found.setdefault((whose, row[series]), []).append(place)
        if len(found) > MAX_COLUMNS:
            message = f"a file must not have more than {MAX_COLUMNS:,} series, but this one has"
            raise refusal(file, message, row=lines[place])
    problems = _remarks(sheet, remarks)
    if odd:
        message = (
            f"a row must have {width} cells as the header has, but got {len(sheet.rows[odd[0]])}"
        )
        if len(odd) > len(sheet.rows) // 2:
            raise refusal(file, message, row=lines[odd[0]])
        message = counted(f"{message}; the row was left out", len(odd) - 1, "such row")
        problems.append(Problem("error", file, lines[odd[0]], None, message))
    if not found:
        message = "must have rows below the header, but the header is all there is"
        raise refusal(file, message, row=lines[top])
    named: dict[str, list[int]] = {}
    for (whose, text), places in found.items():
        name = plain_text(text, MAX_NAME)
        if not name:
            message = "a row must name its series, but this one does not"
            raise refusal(file, message, row=lines[places[0]])
        name = f"{plain_text(whose, MAX_NAME)}: {name}" if economy is not None else name
        named.setdefault(name, []).extend(places)
    return [
        Block(
            [lines[place] for place in places],
            [sheet.rows[place][period] for place in places],
            [(name, [sheet.rows[place][value] for place in places])],
            () if number else tuple(problems),
        )
        for number, (name, places) in enumerate(named.items())
    ]
