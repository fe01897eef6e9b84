"""A workspace as a folder that any program can read, and back without losing a bit.

``workspace.json`` holds the rows of every table; the values of each vintage are a CSV file with
the columns period and value, in the folder ``vintages``.
"""

import csv
import io
import json
import re
import shutil
import sqlite3
import tempfile
from pathlib import Path
from typing import Any

import numpy as np

from analytics.series import period_code
from app.intake.problems import plain_text, quoted
from app.migrations import TABLES, VERSION
from app.store import Store, WorkspaceError, row_values
from app.words import slug
from app.workspace_rows import content_of, period_of, read_series

FORMAT = "pricewake workspace"
INDEX = "workspace.json"
_PLACE = re.compile(r"vintages/[0-9]+(-[a-z0-9-]+)?\.csv")


def export_folder(store: Store, folder: Path) -> int:
    """Write a workspace to a new folder, whole or not at all; return the number of vintages.

    Raises
    ------
    WorkspaceError
        The folder is there already and not empty, or may not be written.
    """
    try:
        if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
            raise WorkspaceError(
                f"the folder of an export must be new or empty, but {str(folder)!r} is not"
            )
        folder.parent.mkdir(parents=True, exist_ok=True)
        part = Path(tempfile.mkdtemp(prefix=f".{folder.name}.", dir=folder.parent))
        try:
            count = _write(store, part)
            if folder.exists():
                folder.rmdir()
            part.rename(folder)
        except BaseException:
            shutil.rmtree(part, ignore_errors=True)
            raise
    except OSError as error:
        raise WorkspaceError(
            f"the folder of an export must be one that may be written, but got {str(folder)!r}:"
            f" {error.strerror}"
        ) from error
    return count


def _write(store: Store, folder: Path) -> int:
    (folder / "vintages").mkdir()
    index: dict[str, Any] = {"format": FORMAT, "version": VERSION}
    with store.look() as db:
        for table in TABLES:
            rows = db.execute(f"SELECT * FROM {table} ORDER BY rowid").fetchall()
            index[table] = [row_values(row) for row in rows]
    for row in index["vintages"]:
        words = slug(row["series"])
        row["values"] = f"vintages/{row['id']:04d}{'-' if words else ''}{words}.csv"
        series = read_series(
            {**row, "source": ""}, {"kind": row["kind"], "unit": "", "adjustment": "unknown"}
        )
        if content_of(series) != row.pop("content"):
            raise WorkspaceError(f"the vintage of {row['series']!r} in the workspace is damaged")
        out = io.StringIO(newline="")
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(("period", "value"))
        for place, value in enumerate(series.values):
            code = period_code(series.first + place)
            writer.writerow((code, "" if np.isnan(value) else repr(float(value))))
        (folder / row["values"]).write_text(out.getvalue(), encoding="utf-8", newline="")
    text = json.dumps(index, ensure_ascii=True, indent=1)
    (folder / INDEX).write_text(text + "\n", encoding="utf-8", newline="")
    return len(index["vintages"])


def import_folder(folder: Path, store: Store) -> int:
    """Fill an empty workspace from the folder of an export; return the number of vintages.

    Raises
    ------
    WorkspaceError
        The workspace holds something, or the folder is no export or was changed since.
    """
    index = _index(folder)
    with store.change() as db:
        for table in TABLES:
            if db.execute(f"SELECT 1 FROM {table} LIMIT 1").fetchone():
                raise WorkspaceError(
                    "an import must go into an empty workspace, but this one holds files already;"
                    " name a new one with --workspace"
                )
        try:
            for row in index["vintages"]:
                _read_values(folder, row)
            for table in TABLES:
                columns = [c["name"] for c in db.execute(f"PRAGMA table_info({table})")]
                for row in index[table]:
                    _insert(db, table, columns, row)
        except (sqlite3.Error, KeyError, TypeError, AttributeError) as error:
            if isinstance(error, sqlite3.Error) and not isinstance(error, sqlite3.IntegrityError):
                raise
            raise _no_export(folder, f"{INDEX} does not hold the rows of a workspace") from error
    return len(index["vintages"])


def _index(folder: Path) -> dict[str, Any]:
    try:
        index = json.loads((folder / INDEX).read_text(encoding="utf-8"))
    except OSError:
        raise _no_export(folder, f"it has no {INDEX} that can be read") from None
    except (ValueError, RecursionError):
        raise _no_export(folder, f"its {INDEX} is not JSON") from None
    if not isinstance(index, dict) or index.get("format") != FORMAT:
        raise _no_export(folder, f"its {INDEX} is of another kind")
    version = index.get("version")
    if not isinstance(version, int) or version > VERSION:
        raise WorkspaceError(
            f"the export in {str(folder)!r} was written by a newer Pricewake (workspace version"
            f" {version}; this one reads up to {VERSION}); update the program"
        )
    for table in TABLES:
        index.setdefault(table, [])
        if not isinstance(index[table], list):
            raise _no_export(folder, f"its {table} are no list")
    return index


def _read_values(folder: Path, row: dict[str, Any]) -> None:
    """Put the content of a vintage into its row, and check it against its fingerprint."""
    place = row.pop("values")
    if not isinstance(place, str) or not _PLACE.fullmatch(place):
        raise _no_export(folder, f"{quoted(str(place))} is no place for values")
    try:
        lines = list(csv.reader(io.StringIO((folder / place).read_text(encoding="utf-8"))))
        first = period_of(row["frequency"], row["first"])
        if lines[0] != ["period", "value"]:
            raise ValueError("its first line must be period,value")
        if [line[0] for line in lines[1:]] != [
            period_code(first + k) for k in range(len(lines) - 1)
        ]:
            raise ValueError("its periods must follow each other from the first")
        values = [float(line[1]) if line[1] else np.nan for line in lines[1:]]
        row["content"] = np.array(values, dtype="<f8").tobytes()
        series = read_series(
            {**row, "source": ""}, {"kind": row["kind"], "unit": "", "adjustment": "unknown"}
        )
        if (series.fingerprint, series.values.size) != (row["fingerprint"], len(values)):
            raise ValueError("its values are not those of the export")
    except OSError:
        raise _no_export(folder, f"{place} cannot be read") from None
    except (ValueError, IndexError) as error:
        said = plain_text(str(error), 120) if isinstance(error, ValueError) else "it is cut short"
        raise _no_export(folder, f"{place} was changed: {said}") from None


def _insert(db: sqlite3.Connection, table: str, columns: list[str], row: dict[str, Any]) -> None:
    unknown = row.keys() - set(columns)
    if unknown:
        raise KeyError(min(unknown))
    names = list(row)
    db.execute(
        f"INSERT INTO {table} ({', '.join(names)}) VALUES ({', '.join('?' * len(names))})",
        [row[name] for name in names],
    )


def _no_export(folder: Path, why: str) -> WorkspaceError:
    return WorkspaceError(
        f"an import must be the folder of an export, but of {str(folder)!r} {why};"
        " nothing was imported"
    )
