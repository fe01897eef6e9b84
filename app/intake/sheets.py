"""From columns of text to series, with everything that is wrong with them."""

from collections.abc import Mapping, Sequence

import numpy as np

from analytics.series import PERIOD_NOUN, Series, period_label
from app.intake.calendars import RowCalendar, row_calendar
from app.intake.csv_files import MAX_CELLS, Sheet
from app.intake.kinds import inferred_adjustment, inferred_kind, inferred_unit
from app.intake.numerals import Mark, ReadColumn, decimal_mark, read_column, undecided
from app.intake.problems import IntakeError, Problem, counted, quoted, refusal
from app.intake.tables import Block, blocks_of

Metadata = Mapping[str, Mapping[str, str]]


def read_sheet(
    sheet: Sheet, metadata: Metadata | None = None
) -> tuple[list[Series], list[Problem]]:
    """Read all series of a sheet.

    Parameters
    ----------
    sheet : Sheet
        Rows of text, wide or long.
    metadata : mapping of str to mapping, optional
        Name of a series to its `kind`, `unit`, `adjustment` and `source`; these replace what
        would be told from name and values. "Broad money" also serves "Abrisund: Broad money".

    Returns
    -------
    tuple of list of Series and list of Problem
        A column with an error is left out, the others are there.

    Raises
    ------
    IntakeError
        There is no header, no row with a period, or no calendar of months, quarters or years.
    """
    blocks = blocks_of(sheet)
    return read_columns(sheet.file, blocks, sheet.separator, quotes=sheet.quotes, metadata=metadata)


def read_columns(
    file: str,
    blocks: Sequence[Block],
    separator: str,
    *,
    quotes: bool,
    metadata: Metadata | None = None,
) -> tuple[list[Series], list[Problem]]:
    """Read the columns of blocks cut from a text with this separator; see `read_blocks`."""
    columns = [column for block in blocks for column in block.columns]
    marks, problems = decimal_marks(file, columns, separator, quotes)
    series, found = read_blocks(file, blocks, marks, metadata)
    return series, [*problems, *found]


def read_blocks(
    file: str,
    blocks: Sequence[Block],
    marks: Sequence[Mark],
    metadata: Metadata | None = None,
) -> tuple[list[Series], list[Problem]]:
    """Read the columns of blocks; `marks` holds the decimal mark of each column, block by block.

    Where there are several blocks, one without a calendar is left out with an error.

    Raises
    ------
    IntakeError
        The only block has no calendar, or the periods of one lie too far apart.
    """
    long = len(blocks) > 1
    series: list[Series] = []
    problems: list[Problem] = []
    given, laid = iter(marks), 0
    rows, before = None, None
    for block in blocks:
        name = block.columns[0][0] if long else None
        marks_here = [next(given) for _ in block.columns]
        problems += block.problems
        try:
            if rows is None or rows.problems or (block.periods, block.calendar) != before:
                rows, before = None, (block.periods, block.calendar)
                rows = row_calendar(file, block.periods, block.lines, name, block.calendar)
        except IntakeError as error:
            if not long:
                raise
            problems.append(error.problem)
            continue
        laid += rows.span * len(block.columns)
        if laid > 2 * MAX_CELLS:
            raise refusal(
                file,
                f"periods must lie closer together, but the file spans {rows.span:,} of them for"
                f" {sum(len(one.columns) for one in blocks):,} series",
            )
        problems += rows.problems
        for column, mark in zip(block.columns, marks_here, strict=True):
            one, found = _series(file, block, column, mark, rows, metadata or {})
            series += [] if one is None else [one]
            problems += found
    return series, problems


def _series(
    file: str,
    block: Block,
    column: tuple[str, Sequence[str]],
    mark: Mark,
    rows: RowCalendar,
    metadata: Metadata,
) -> tuple[Series | None, list[Problem]]:
    """Read one column; None and an error where a cell is no number or none has a value."""
    name, cells = column
    numbers = read_column(cells, mark)
    if numbers.wrong:
        message = counted(numbers.message, len(numbers.wrong) - 1, "such cell")
        return None, [Problem("error", file, block.lines[numbers.wrong[0]], name, message)]
    values = rows.laid_out(numbers.values[rows.kept])
    if np.isnan(values).all():
        message = "a series must have at least one value, but got none"
        return None, [Problem("error", file, None, name, message)]
    given = metadata.get(name) or metadata.get(name.partition(": ")[2], {})
    kind = given.get("kind") or inferred_kind(name, values, percent=numbers.percent)
    series = Series(
        name,
        rows.first,
        values,
        kind=kind,  # type: ignore[arg-type]
        unit=given.get("unit") or inferred_unit(name, kind),  # type: ignore[arg-type]
        adjustment=given.get("adjustment") or inferred_adjustment(name),  # type: ignore[arg-type]
        source=given.get("source") or file,
    )
    return series, [
        *_low_values(file, block, column, numbers, series),
        *_empty_cells(file, block, rows, series),
    ]


def _low_values(
    file: str,
    block: Block,
    column: tuple[str, Sequence[str]],
    numbers: ReadColumn,
    series: Series,
) -> list[Problem]:
    """Warn of values that an index or a level cannot grow from."""
    low = np.flatnonzero(numbers.values <= 0)
    if series.kind == "rate" or not low.size:
        return []
    name, cells = column
    message = f"an {series.kind}" if series.kind == "index" else f"a {series.kind}"
    message += f" must be positive to have a growth rate, but got {quoted(cells[low[0]].strip())}"
    message = counted(message, int(low.size) - 1, "such value")
    return [Problem("warning", file, block.lines[int(low[0])], name, message)]


def _empty_cells(file: str, block: Block, rows: RowCalendar, series: Series) -> list[Problem]:
    """Warn of periods inside a series that have a row and no value in it."""
    gaps = np.flatnonzero(np.isnan(series.values)) + series.first.ordinal
    if not gaps.size:
        return []
    empty = np.flatnonzero(np.isin(rows.ordinals, gaps))
    if not empty.size:
        return []
    earliest = empty[np.argmin(rows.ordinals[empty])]
    noun = PERIOD_NOUN[series.frequency]
    others = int(np.unique(rows.ordinals[empty]).size) - 1
    absent = counted(period_label(rows.at(int(rows.ordinals[earliest]))), others, noun)
    message = f"every {noun} must have a value, but {absent} has none; the gap is kept"
    return [Problem("warning", file, block.lines[rows.kept[earliest]], series.name, message)]


def decimal_marks(
    file: str, columns: Sequence[tuple[str, Sequence[str]]], separator: str, quotes: bool
) -> tuple[list[Mark], list[Problem]]:
    """Decide the decimal mark of each column: what it proves, else what all others prove.

    Where nothing is proved anywhere, 1.234 has a decimal point, and 1,234 a decimal comma in a
    file with semicolons and grouped thousands in any other; a warning says so if in doubt.
    """
    if separator == "," and not quotes:
        return ["."] * len(columns), []
    proved = [decimal_mark(cells) for _, cells in columns]
    others = {mark for mark in proved if mark is not None}
    shared: Mark | None = others.pop() if len(others) == 1 else None
    marks: list[Mark] = []
    problems: list[Problem] = []
    for (name, cells), own in zip(columns, proved, strict=True):
        mark, doubt = own or shared, None if own or shared else undecided(cells)
        if doubt is not None and ("," in doubt or separator == ";"):
            comma = "," in doubt
            mark = "," if comma and separator == ";" else "."
            how = "thousands" if comma and mark == "." else "decimals"
            message = f"the mark in {quoted(doubt)} may part decimals or thousands; read as {how}"
            problems.append(Problem("warning", file, None, name, message))
        marks.append(mark or ".")
    return marks, problems
