"""The door of intake: a release file in, its series and what was found in it out."""

import csv
import io
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, get_args

import numpy as np

from analytics.series import Adjustment, Kind, Series, period_code
from app.intake import csv_files
from app.intake.csv_files import read_csv_sheet
from app.intake.problems import IntakeError, Problem, display_name, quoted, refusal
from app.intake.sheets import Metadata, read_sheet

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
    """

    name: str
    series: tuple[Series, ...]
    problems: tuple[Problem, ...]


def read_release(name: str, content: bytes, metadata: Metadata | None = None) -> Release:
    r"""Read the series of a release file.

    The first column holds periods (2024-03, 2024-Q1, 2024, Mar 2024, ...), each further column a
    series under its name; or the header is period, series, value and perhaps economy, and each
    row holds one value. Kind, unit and adjustment are told from name and values by the rule in
    `app.intake.kinds.inferred_kind`, unless `metadata` gives them.

    Parameters
    ----------
    name : str
        File name, as the user's machine gave it.
    content : bytes
        The file.
    metadata : mapping of str to mapping, optional
        Name of a series to any of its `kind`, `unit`, `adjustment` and `source`.

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
    sheet, notes = read_csv_sheet(file, content)
    series, problems = read_sheet(sheet, metadata)
    rank = {"error": 0, "warning": 1, "note": 2}
    found = sorted((*notes, *problems), key=lambda problem: rank[problem.severity])
    return Release(file, tuple(series), tuple(found))


def read_path(path: str | Path, metadata: Metadata | None = None) -> Release:
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
        with place.open("rb") as stream:
            content = stream.read(csv_files.MAX_BYTES + 1)
    except (OSError, ValueError) as error:
        if isinstance(error, IntakeError):
            raise
        raise refusal(file, "must be a file that may be read, but it could not be opened") from None
    return read_release(str(path), content, metadata)


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
