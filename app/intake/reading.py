"""The door of intake: a release file in, its series and what was found in it out."""

import csv
import io
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, get_args

import numpy as np

from analytics.series import Adjustment, Kind, Series, period_code
from app.intake import csv_files
from app.intake.archives import archive_names, is_archive, read_archive
from app.intake.csv_files import FORMATS, read_text, split_rows
from app.intake.long_csv import plain_long_blocks
from app.intake.problems import (
    MAX_NAME,
    IntakeError,
    Problem,
    display_name,
    plain_text,
    quoted,
    refusal,
)
from app.intake.sdmx_csv import is_sdmx_csv, read_sdmx_csv
from app.intake.sdmx_json import read_sdmx_json
from app.intake.sdmx_xml import read_sdmx_xml
from app.intake.sheets import Metadata, read_columns, read_sheet
from app.intake.weights import canonical, recognised
from app.intake.xlsx_files import ReadSheet, is_workbook, read_workbook

__all__ = [
    "IntakeError",
    "Metadata",
    "Problem",
    "Release",
    "demo_metadata",
    "inspection",
    "read_path",
    "read_release",
]

_OTHER_OFFICE = frozenset(
    ("mimetype", "xl/workbook.bin", "word/document.xml", "Index/Document.iwa")
)
_METADATA_COLUMNS = ("file", "name", "kind", "unit", "adjustment", "source", "note")


@dataclass(frozen=True)
class Release:
    """What one file holds.

    Attributes
    ----------
    name : str
        Display name of the file.
    series : tuple of Series
        In the order of the file; one that could not be read is left out and is in `problems`.
    problems : tuple of Problem
        Errors, warnings and notes, in that order.
    sheet : str
        Sheet of a workbook that was read; empty for other files.
    sheets : tuple of str
        All sheets of the workbook.
    """

    name: str
    series: tuple[Series, ...]
    problems: tuple[Problem, ...]
    sheet: str = ""
    sheets: tuple[str, ...] = ()


def read_release(
    name: str, content: bytes, metadata: Metadata | None = None, sheet: str | None = None
) -> Release:
    r"""Read the series of a release file: CSV, a workbook (XLSX), SDMX, or a zip of them.

    What a file is, its content tells, not its name. In CSV and workbooks the first column holds
    periods (2024-03, 2024-Q1, 2024, Mar 2024, ...), each further column a series under its name;
    or the header is period, series, value and perhaps economy, and each row holds one value.
    SDMX is read as CSV (1.0, 2.x), as XML (2.1, generic and structure-specific) and as JSON
    (1.0, 2.0); the labels of the dimensions that vary make the name. Kind, unit and adjustment
    are what the file states, else told from name and values by the rule in
    `app.intake.kinds.inferred_kind`, unless `metadata` gives them. A file of weights, a row a
    year, gives series named "Weight of ..." (`app.intake.weights.recognised`).

    Parameters
    ----------
    name : str
        File name, as the user's machine gave it.
    content : bytes
        The file.
    metadata : mapping of str to mapping, optional
        Name of a series to any of its `kind`, `unit`, `adjustment` and `source`.
    sheet : str, optional
        Sheet of a workbook, which is then a part of the name; the first that holds a readable
        table if not given.

    Raises
    ------
    IntakeError
        The file cannot be read; the error is one sentence with file, row, column and rule.

    Examples
    --------
    >>> read_release("prices.csv", b"month,Prices\n2024-01,100.5\n2024-02,101\n").series
    (Series('Prices', monthly index, Jan 2024 to Feb 2024, 2 values),)
    """
    file = display_name(name)
    if is_archive(content) and not is_workbook(archive_names(file, content)):
        return _archive_release(file, content, metadata, sheet)
    read = _read_file(file, content, metadata, sheet)
    name = file if sheet is None else f"{file}, {plain_text(read.sheet, MAX_NAME)}"
    return replace(_release(file, *read), name=name)


def _release(
    file: str,
    series: Iterable[Series],
    problems: Iterable[Problem],
    sheet: str = "",
    sheets: tuple[str, ...] = (),
) -> Release:
    """Put problems in order of weight."""
    rank = {"error": 0, "warning": 1, "note": 2}
    found = sorted(problems, key=lambda problem: rank[problem.severity])
    return Release(file, recognised(file, tuple(series)), tuple(found), sheet, sheets)


def _read_file(
    file: str, content: bytes, metadata: Metadata | None, sheet: str | None
) -> ReadSheet:
    """Read a file that is no archive by the reader that its first signs ask for."""
    if is_archive(content):
        return read_workbook(file, content, metadata, sheet)
    if sheet is not None:
        raise refusal(file, f"must be a workbook to have a sheet {quoted(sheet)}, but is not")
    text, notes = read_text(file, content)
    head = text.lstrip()[:1]
    if head == "<":
        series, problems = read_sdmx_xml(file, content, text, metadata)
    elif head == "{":
        series, problems = read_sdmx_json(file, text, metadata)
    elif is_sdmx_csv(text):
        series, problems = read_sdmx_csv(file, text, metadata)
    else:
        text = canonical(text)
        plain = plain_long_blocks(file, text)
        if plain is not None:
            series, problems = read_columns(file, *plain, quotes=False, metadata=metadata)
        else:
            series, problems = read_sheet(split_rows(file, text), metadata)
    return ReadSheet(series, [*notes, *problems], "", ())


def _archive_release(
    file: str, content: bytes, metadata: Metadata | None, sheet: str | None
) -> Release:
    """Read all files of an archive into one release; names that clash carry their file's name."""
    if archive_names(file, content) & _OTHER_OFFICE:
        raise refusal(file, f"must be {FORMATS}, but this is an office document of another kind")

    def member(name: str, inside: bytes) -> Release:
        if is_archive(inside) and not is_workbook(archive_names(name, inside)):
            raise refusal(name, "an archive must not hold another archive, but this one does")
        return _release(name, *_read_file(name, inside, metadata, sheet))

    releases, warnings = read_archive(file, content, member)
    counts = Counter(one.name for release in releases for one in release.series)
    taken: set[str] = set()
    series: list[Series] = []
    problems: list[Problem] = [*warnings]
    for release in releases:
        stem = Path(release.name.rpartition(", ")[2]).stem
        new: dict[str | None, str] = {}
        for one in release.series:
            name = base = f"{stem}: {one.name}" if counts[one.name] > 1 else one.name
            number = 1
            while name in taken:
                number += 1
                name = f"{base} ({number})"
            taken.add(name)
            new[one.name] = name
            series.append(one if name == one.name else replace(one, name=name))
        problems += (
            replace(problem, column=new.get(problem.column, problem.column))
            for problem in release.problems
        )
    return _release(file, series, problems)


def looks_like_archive(path: str | Path) -> bool:
    """Tell whether the file at a path begins as workbooks and zip archives do."""
    try:
        with Path(path).open("rb") as stream:
            return is_archive(stream.read(4))
    except (OSError, ValueError):
        return False  # reading it says why


def read_path(
    path: str | Path, metadata: Metadata | None = None, sheet: str | None = None
) -> Release:
    """Read the release file at a path.

    Raises
    ------
    IntakeError
        There is no such file, it may not be opened, or its content cannot be read.
    """
    place = Path(path)
    file = display_name(str(path))
    try:
        if not place.exists():
            raise refusal(file, "must be a file, but there is none of this name")
        if not place.is_file():
            raise refusal(file, "must be a file, but this is a folder or a device")
        csv_files.refuse_size(file, place.stat().st_size)
        with place.open("rb") as stream:
            content = stream.read(csv_files.MAX_BYTES + 1)
    except (OSError, ValueError) as error:
        if isinstance(error, IntakeError):
            raise
        raise refusal(file, "must be a file that may be read, but it could not be opened") from None
    return read_release(str(path), content, metadata, sheet)


def demo_metadata(text: str) -> dict[str, dict[str, dict[str, str]]]:
    """Read the table that tells what the series of some files are.

    Parameters
    ----------
    text : str
        CSV with the columns file, name, kind, unit, adjustment, source, note.

    Returns
    -------
    dict
        File name to series name to kind, unit, adjustment, source and note; an inner mapping is
        the `metadata` of `read_release`.

    Raises
    ------
    IntakeError
        A column is absent, or a kind or adjustment is not one that series have.
    """
    table = "series.csv"
    reader = csv.DictReader(io.StringIO(text.removeprefix("\ufeff"), newline=""))
    absent = [column for column in _METADATA_COLUMNS if column not in (reader.fieldnames or ())]
    if absent:
        raise refusal(table, f"must have a column {quoted(absent[0])}, but has none", row=1)
    files: dict[str, dict[str, dict[str, str]]] = {}
    for entry in reader:
        row = {column: (entry[column] or "").strip() for column in _METADATA_COLUMNS}
        for field, allowed in (("kind", Kind), ("adjustment", Adjustment)):
            if row[field] and row[field] not in get_args(allowed):
                raise refusal(
                    table,
                    f"must be one of {', '.join(get_args(allowed))}, but got {quoted(row[field])}",
                    row=reader.line_num,
                    column=field,
                )
        file, name = row.pop("file"), row.pop("name")
        files.setdefault(file, {})[name] = row
    return files


def inspection(releases: Iterable[Release]) -> dict[str, list[dict[str, Any]]]:
    """Return what intake understood and found, as ``pricewake inspect --json`` writes it.

    Returns
    -------
    dict
        `series`: name, kind, frequency, first, last, n (values that are there), gaps,
        fingerprint, unit, adjustment, file. `problems`: severity, file, row, column, message.
    """
    series: list[dict[str, Any]] = []
    problems: list[dict[str, Any]] = []
    for release in releases:
        series += (_described(one, release.name) for one in release.series)
        problems += (vars(problem).copy() for problem in release.problems)
    return {"series": series, "problems": problems}


def _described(series: Series, file: str) -> dict[str, Any]:
    """Describe one series in values that JSON has."""
    return {
        "name": series.name,
        "kind": series.kind,
        "frequency": series.frequency,
        "first": period_code(series.first),
        "last": period_code(series.last),
        "n": int(np.isfinite(series.values).sum()),
        "gaps": [period_code(period) for period in series.gaps],
        "fingerprint": series.fingerprint,
        "unit": series.unit,
        "adjustment": series.adjustment,
        "file": file,
    }
