"""From the bytes of a workbook (XLSX) to its sheets as rows of text. Formulas are not evaluated."""

import io
import re
import warnings
import zipfile
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any, NamedTuple

from analytics.series import Series
from app.intake.archives import open_archive, unpacked
from app.intake.csv_files import MAX_CELLS, MAX_COLUMNS, MAX_ROWS
from app.intake.problems import IntakeError, Problem, counted, plain_text, quoted, refusal
from app.intake.sheets import Metadata, read_sheet
from app.intake.xlsx_cells import Area, cell_text, workbook_table
from app.intake.xml_guard import refuse_entities

_NEEDED = re.compile(
    r"\[Content_Types\]\.xml|_rels/\.rels"
    r"|xl/(?:_rels/[^/]+\.rels|workbook[^/]*\.xml|sharedStrings[^/]*\.xml|styles[^/]*\.xml"
    r"|worksheets/[^/]+\.xml)",
    re.IGNORECASE,
)
_WORKBOOK = re.compile(r"xl/workbook[^/]*\.xml", re.IGNORECASE)
_LARGE = re.compile(r"xl/(?:worksheets/|sharedStrings)", re.IGNORECASE)
_MAX_PART = 8 * 1024 * 1024  # of the parts that hold no cells
_MERGED = re.compile(rb"<(?:\w+:)?mergeCell\s+ref=\"([A-Z]{1,3})(\d{1,7}):([A-Z]{1,3})(\d{1,7})\"")
_NOT_COMPUTED = re.compile(
    rb"(?:</(?:\w+:)?f>|<(?:\w+:)?f\b[^<>]*/>)\s*+"
    rb"(?:<(?:\w+:)?v\s*+/>|<(?:\w+:)?v></(?:\w+:)?v>)?+\s*+</(?:\w+:)?c>"
)
_MAX_TAGS = 12_000_000  # a cell has four, and openpyxl reads some 200,000 cells a second
_MAX_MERGED = 100_000


@dataclass(frozen=True, eq=False)
class _Workbook:
    """A workbook that was opened, its safe parts, and the names of the sheets that hold cells."""

    book: Any  # openpyxl.Workbook
    parts: zipfile.ZipFile
    shown: tuple[str, ...]
    hidden: tuple[str, ...]


class ReadSheet(NamedTuple):
    """Series and problems of one sheet, its name, and the names of all sheets of its workbook."""

    series: list[Series]
    problems: list[Problem]
    sheet: str
    sheets: tuple[str, ...]


def is_workbook(names: Iterable[str]) -> bool:
    """Tell from the names of its members whether a zip archive is a workbook of the XLSX kind."""
    inside = set(names)
    return "[Content_Types].xml" in inside and any(map(_WORKBOOK.fullmatch, inside))


def read_workbook(
    file: str, content: bytes, metadata: Metadata | None = None, sheet: str | None = None
) -> ReadSheet:
    """Read the series of a workbook: of `sheet`, else of the first that holds a readable table.

    Raises
    ------
    IntakeError
        The workbook is damaged or too large, has no such sheet, or none holds a table.
    """
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # styles and extensions that are not read
            opened = _opened(file, content)
            return _read_sheets(file, opened, metadata, sheet)
    except IntakeError:
        raise
    except Exception:  # hostile bytes: whatever the library raises means that it is damaged
        raise refusal(file, "must be a whole workbook (XLSX), but its parts do not fit") from None


def _opened(file: str, content: bytes) -> _Workbook:
    """Open a workbook from a copy that holds only the parts needed, each of them checked."""
    copy = io.BytesIO()
    with open_archive(file, content) as archive, zipfile.ZipFile(copy, "w") as kept:
        names, tags = set(), 0
        for member in archive.infolist():
            if not _NEEDED.fullmatch(member.filename) or member.filename in names:
                continue
            if member.file_size > _MAX_PART and not _LARGE.match(member.filename):
                raise refusal(file, f"{quoted(member.filename)} must be smaller, but is not")
            part = unpacked(file, archive, member)
            refuse_entities(file, part)
            tags += part.count(b"<")
            if tags > _MAX_TAGS:
                message = f"a workbook must not hold more than {_MAX_TAGS // 4:,} cells"
                raise refusal(file, f"{message}, but this one may")
            kept.writestr(member.filename, part)
            names.add(member.filename)
    import openpyxl  # type: ignore[import-untyped]

    book = openpyxl.load_workbook(copy, read_only=True, data_only=True, keep_links=False)
    sheets = [one for one in book.worksheets if hasattr(one, "reset_dimensions")]
    if not sheets:
        raise refusal(file, "must hold a sheet of cells, but holds none")
    return _Workbook(
        book,
        zipfile.ZipFile(copy),
        tuple(one.title for one in sheets if one.sheet_state == "visible"),
        tuple(one.title for one in sheets if one.sheet_state != "visible"),
    )


def _read_sheets(
    file: str, opened: _Workbook, metadata: Metadata | None, wanted: str | None
) -> ReadSheet:
    """Read the sheet that is wanted, else the first readable one that is shown."""
    names = (*opened.shown, *opened.hidden)
    if wanted is not None:
        alike = [name for name in names if name == wanted] or [
            name for name in names if name.casefold() == wanted.strip().casefold()
        ]
        if not alike:
            raise refusal(file, f"the sheet must be {_either(names)}, but got {quoted(wanted)}")
        series, problems = _read_one(file, opened, alike[0], metadata)
        return ReadSheet(series, [*problems, *_others(file, alike[0], names)], alike[0], names)
    refused: list[tuple[int, str, Problem]] = []
    for name in opened.shown or names:
        try:
            series, problems = _read_one(file, opened, name, metadata)
        except IntakeError as error:
            refused.append((error.problem.row or 0, name, error.problem))
            continue
        if series:
            return ReadSheet(series, [*problems, *_others(file, name, names)], name, names)
        errors = [one for one in problems if one.severity == "error"]
        refused.append((MAX_ROWS, name, errors[0]))
    _, name, problem = max(refused, key=lambda entry: entry[0])
    message = problem.message
    if len(names) > 1:
        message = f"no sheet holds a table that can be read; in sheet {quoted(name)}, {message}"
    raise refusal(file, message, row=problem.row, column=problem.column)


def _read_one(
    file: str, opened: _Workbook, name: str, metadata: Metadata | None
) -> tuple[list[Series], list[Problem]]:
    """Read the table of one sheet."""
    sheet = opened.book[name]
    part = opened.parts.read(sheet._worksheet_path)
    rows = list(_rows(file, sheet))
    table, notes = workbook_table(file, rows, _merged(file, part))
    empty = len(_NOT_COMPUTED.findall(part))
    if empty:
        message = (
            f"a formula must have its value stored with it, but {counted('one', empty - 1, 'cell')}"
            " has none and was read as no value; formulas are not evaluated"
        )
        notes.append(Problem("warning", file, None, None, message))
    series, problems = read_sheet(table, metadata)
    return series, [*notes, *problems]


def _rows(file: str, sheet: Any) -> Iterator[tuple[int, list[str]]]:
    """Yield number and text of each row that holds something."""
    sheet.reset_dimensions()  # what the file says of its size need not be true
    cells = 0
    for number, row in enumerate(sheet.iter_rows(), start=1):
        if number > MAX_ROWS:
            raise refusal(file, f"a sheet must not have more than {MAX_ROWS:,} rows, but one has")
        if not row:
            continue
        cells += len(row)
        if cells > MAX_CELLS:
            raise refusal(file, f"a sheet must not have more than {MAX_CELLS:,} cells, but one has")
        texts = [cell_text(cell) for cell in row]
        while texts and not texts[-1].strip():
            texts.pop()
        if len(texts) > MAX_COLUMNS:
            message = f"a row must not have more than {MAX_COLUMNS:,} cells, but has"
            raise refusal(file, f"{message} {len(texts):,}", row=number)
        if texts:
            yield number, texts


def _merged(file: str, part: bytes) -> list[Area]:
    """Read which cells are merged, in rows and columns counted from 1."""
    areas: list[Area] = []
    for left, top, right, bottom in _MERGED.findall(part):
        if len(areas) >= _MAX_MERGED:
            raise refusal(file, f"a sheet must not merge more than {_MAX_MERGED:,} areas, but does")
        areas.append(Area(int(top), _column(left), int(bottom), _column(right)))
    return areas


def _column(letters: bytes) -> int:
    number = 0
    for letter in letters:
        number = 26 * number + letter - 64
    return number


def _others(file: str, name: str, names: tuple[str, ...]) -> list[Problem]:
    """Note which sheet was read and which others there are."""
    others = [quoted(one) for one in names if one != name]
    if not others:
        return []
    shown = counted(", ".join(others[:5]), len(others) - 5, "sheet")
    message = f"sheet {quoted(name)} was read; the file also holds {shown}"
    return [Problem("note", file, None, None, message)]


def _either(names: tuple[str, ...]) -> str:
    """Name the sheets there are, the first ten of them."""
    shown = [quoted(plain_text(name, 60)) for name in names[:10]]
    return " or ".join([", ".join(shown[:-1]), shown[-1]]) if len(shown) > 1 else shown[0]
