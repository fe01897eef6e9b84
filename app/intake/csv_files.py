"""From the bytes of a CSV file to rows of text: encoding, separator, quotes (RFC 4180)."""

import codecs
import contextlib
import csv
import io
import re
from dataclasses import dataclass

from app.intake.periods import looks_like_period
from app.intake.problems import Problem, refusal

MAX_BYTES = 64 * 1024 * 1024
MAX_CELLS = 8_000_000
MAX_COLUMNS = 20_000
MAX_ROWS = 2_100_000
MAX_ODD_ROWS = 800_000  # of a text that is not a plain long table

FORMATS = "CSV, XLSX, SDMX or a zip of them"
SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab"}
_SAMPLE = 200
_MAGIC = (
    (b"\x89PNG", "a PNG picture"),
    (b"\xff\xd8\xff", "a JPEG picture"),
    (b"GIF8", "a GIF picture"),
    (b"%PDF", "a PDF document"),
    (b"\x1f\x8b", "a gzip archive"),
    (b"\xd0\xcf\x11\xe0", "an old or locked binary workbook"),
    (b"SQLite format 3\x00", "a database"),
)
_BYTE_ORDER = (
    (codecs.BOM_UTF8, "utf-8", "UTF-8"),
    (codecs.BOM_UTF32_LE, "utf-32-le", "UTF-32"),
    (codecs.BOM_UTF32_BE, "utf-32-be", "UTF-32"),
    (codecs.BOM_UTF16_LE, "utf-16-le", "UTF-16"),
    (codecs.BOM_UTF16_BE, "utf-16-be", "UTF-16"),
)
_ABOVE = re.compile(  # blank lines and comments, quoted or not
    r"(?:[^\S\r\n]*(?:\r\n|\r|\n)|[^\S\r\n]*\"?#[^\r\n]*(?:\r\n|\r|\n|\Z))*+"
)
_DECLARED = re.compile(r" *sep=([,;\t]) *(?:\r\n|\r|\n|\Z)", re.IGNORECASE)
_CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


@dataclass(frozen=True, eq=False)
class Sheet:
    """Rows of text as a file holds them, without blank rows and leading comments.

    Attributes
    ----------
    file : str
        Display name of the file.
    rows : list of list of str
        Cells, spaces and all.
    lines : list of int
        Line of the file on which each row begins, counted from 1.
    separator : str
        Comma, semicolon or tab; empty for the sheet of a workbook.
    quotes : bool
        Whether any cell may be quoted, and so hold a separator.
    """

    file: str
    rows: list[list[str]]
    lines: list[int]
    separator: str
    quotes: bool = True


def refuse_size(file: str, size: int) -> None:
    """Refuse a file of more bytes than are read.

    Raises
    ------
    IntakeError
        It is too large.
    """
    if size > MAX_BYTES:
        raise refusal(
            file,
            f"a file must not be larger than {MAX_BYTES / 1024**2:g} MB,"
            f" but this one has {size / 1024**2:.1f} MB",
        )


def read_text(file: str, content: bytes) -> tuple[str, list[Problem]]:
    """Turn the bytes of a text file into text, and note the encoding where it is not UTF-8.

    Raises
    ------
    IntakeError
        The file is too large, or is no text.
    """
    refuse_size(file, len(content))
    what = next((name for magic, name in _MAGIC if content.startswith(magic)), None)
    if what:
        raise refusal(file, f"must be {FORMATS}, but this is {what}")
    return _decoded(file, content)


def split_rows(file: str, text: str, separator: str | None = None) -> Sheet:
    """Split the text of a CSV file into rows, at the separator given or else at the likeliest.

    Raises
    ------
    IntakeError
        The text is empty, holds control codes or too much, or its quotes do not close.
    """
    start = opened(file, text, separator)
    if _line_ends(text) > MAX_ODD_ROWS:
        raise refusal(
            file,
            f"a file of more than {MAX_ODD_ROWS:,} lines must be a row a value under the header"
            " period, series and value, without quotes or blank rows, but this one is not",
        )
    below = text[start.place :] if start.place else text
    rows, lines = _rows(file, below, start.separator, start.line - 1)
    if not rows:
        raise refusal(file, "must hold a header and rows below it, but the file is empty")
    return Sheet(file, rows, lines, start.separator, '"' in text)


@dataclass(frozen=True)
class Opening:
    """Where the table of a text starts: its place, its line from 1, and the separator of cells."""

    place: int
    line: int
    separator: str


def opened(file: str, text: str, separator: str | None = None) -> Opening:
    """Find where the table starts, at the separator given or else at the likeliest.

    Raises
    ------
    IntakeError
        The text holds control codes or too much.
    """
    found = _CONTROL.search(text)
    if found:
        row = _line_ends(text[: found.start()]) + 1
        raise refusal(file, f"must be text, but holds the control code {ord(found[0])}", row=row)
    if _line_ends(text) > MAX_ROWS:
        raise refusal(file, f"a file must not have more than {MAX_ROWS:,} lines, but this one has")
    start, skipped, declared = _below_comments(text)
    separator = separator or declared
    if separator is None:
        separator = _separator(text[start : start + 1_000_000])
    if text.count(separator, start) > MAX_CELLS:
        raise refusal(file, f"a file must not have more than {MAX_CELLS:,} cells, but this one has")
    return Opening(start, skipped + 1, separator)


def _decoded(file: str, content: bytes) -> tuple[str, list[Problem]]:
    """Turn bytes into text, and tell which encoding was taken where it is not UTF-8."""
    marked = (entry for entry in _BYTE_ORDER if content.startswith(entry[0]))
    mark, encoding, label = next(marked, (b"", "utf-8", "UTF-8"))
    if not mark and b"\x00" in content:
        raise refusal(file, "must be text, but holds zero bytes as programs and pictures do")
    try:
        text = content[len(mark) :].decode(encoding)
    except UnicodeDecodeError as error:
        if mark:
            raise refusal(
                file,
                f"must be {label} as its first bytes promise, but byte {error.start + len(mark)}"
                " is not",
            ) from None
        text, label = _western(content)
    text = text.rstrip("\x1a")
    if label == "UTF-8":
        return text, []
    return text, [Problem("note", file, None, None, f"read as {label} text")]


def _western(content: bytes) -> tuple[str, str]:
    """Read one byte a letter: Latin-1, or Windows-1252 where its extra signs are used."""
    text = content.decode("latin-1")
    if re.search(r"[\x80-\x9f]", text):
        try:
            return content.decode("cp1252"), "Windows-1252 (Latin-1 with more signs)"
        except UnicodeDecodeError:
            pass
    return text, "Latin-1"


def _line_ends(text: str) -> int:
    return text.count("\n") + text.count("\r") - text.count("\r\n")


def _below_comments(text: str) -> tuple[int, int, str | None]:
    """Return where the table starts, how many lines stand above, and a separator they declare."""
    place, separator = _ABOVE.match(text).end(), None  # type: ignore[union-attr]
    declared = _DECLARED.match(text, place)
    if declared:
        separator = declared[1]
        place = _ABOVE.match(text, declared.end()).end()  # type: ignore[union-attr]
    return place, _line_ends(text[:place]), separator


def _separator(sample: str) -> str:
    """Choose the separator that makes most rows begin with a period, then most rows alike."""
    lines = io.StringIO(sample, newline="")
    head = [line for line, _ in zip(lines, range(_SAMPLE), strict=False)]

    def score(separator: str) -> tuple[int, int, int]:
        rows: list[list[str]] = []
        with contextlib.suppress(csv.Error):
            rows.extend(row for row in csv.reader(head, delimiter=separator) if row)
        wide = [row for row in rows if len(row) > 1]
        dated = sum(looks_like_period(row[0][:40]) for row in wide)
        alike = sum(len(row) == len(wide[0]) for row in wide) if wide else 0
        return dated, alike, sum(map(len, wide))

    return max(SEPARATORS, key=score)


def _rows(file: str, text: str, separator: str, skipped: int) -> tuple[list[list[str]], list[int]]:
    """Read all rows that hold something, with the line on which each begins."""
    rows: list[list[str]] = []
    lines: list[int] = []
    cells, begin = 0, skipped + 1
    stream = io.TextIOWrapper(io.BytesIO(text.encode()), "utf-8", newline="")  # 1 byte a letter
    reader = csv.reader(stream, delimiter=separator, strict=True)
    try:
        for row in reader:
            if any(row) and any(map(str.strip, row)):
                rows.append(row)
                lines.append(begin)
                cells += len(row)
                if cells > MAX_CELLS:
                    message = (
                        f"a file must not have more than {MAX_CELLS:,} cells, but this one has"
                    )
                    raise refusal(file, message)
                if len(row) > MAX_COLUMNS:
                    message = f"a row must not have more than {MAX_COLUMNS:,} cells, but has"
                    raise refusal(file, f"{message} {len(row):,}", row=begin)
            begin = skipped + reader.line_num + 1
    except csv.Error as error:
        raise refusal(file, _csv_rule(str(error)), row=begin) from None
    return rows, lines


def _csv_rule(error: str) -> str:
    """Say in our words what the csv module found."""
    if "unexpected end" in error:
        return "a quote that opens must close, but the one opened in this row does not"
    if "expected after" in error:
        return "a closing quote must end its cell, but more text follows it"
    if "field limit" in error:
        return f"a cell must not have more than {csv.field_size_limit():,} signs, but one has"
    return "the row must follow the rules of comma-separated text, but does not"
