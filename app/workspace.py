"""What is loaded: every vintage of every series, and what intake found wrong with the files."""

import datetime
import sqlite3
import threading
from dataclasses import replace
from pathlib import Path
from typing import Any, get_args

from analytics.series import Adjustment, Kind, Series
from app.intake.problems import MAX_NAME, Problem, plain_text, quoted
from app.intake.reading import Release
from app.marks import Mark, checked, read_marks, write_mark
from app.state import ViewState, field_kind
from app.store import MEMORY, Store, now
from app.workspace_rows import add_member, read_series
from app.workspace_view import LoadedFile, UnknownSeriesError, Vintage, WorkspaceView

__all__ = ["LoadedFile", "UnknownSeriesError", "Vintage", "Workspace", "WorkspaceView"]

CORRECTED = ("kind", "unit", "adjustment")
_EVER = "9999-99-99"  # after any date
_SHOWN = """
    SELECT m.load, m.unit, m.adjustment, m.source, v.id, v.series, v.frequency, v.kind, v.first,
           v.content
    FROM members m JOIN vintages v ON v.id = m.vintage
"""


class Workspace:
    """Series of the files taken in; safe to share between threads and between programs.

    A file taken in again under the same name takes the place of the earlier one in view; every
    content that a series has had is kept as a vintage. The releases given as `placeholder` are
    shown until the first file of the user's own comes in, and are never stored.

    Parameters
    ----------
    releases : tuple of Release
        Files to take in at once.
    placeholder : tuple of Release
        Shown while the workspace has no file.
    path : str or Path
        SQLite file, made where there is none; ``":memory:"`` keeps nothing after the program.

    Raises
    ------
    WorkspaceError
        The file is no workspace, comes from a newer version, or may not be opened.
    """

    def __init__(
        self,
        releases: tuple[Release, ...] = (),
        placeholder: tuple[Release, ...] = (),
        path: str | Path = MEMORY,
    ) -> None:
        self.store = Store(path)
        self._placeholder = WorkspaceView(tuple(placeholder), placeholder=bool(placeholder))
        self._trial = Store()
        self._lock = threading.Lock()
        self._seen: tuple[int, int] | None = None
        self._views: dict[str, WorkspaceView] = {}
        self._decoded: dict[tuple[Any, ...], Series] = {}
        for release in releases:
            self.add(release)

    # What goes in --------------------------------------------------------------------------

    def add(self, release: Release, day: str = "") -> None:
        """Take in a release; in view it replaces a file of the same name.

        `day` is the date from which it stands, such as ``2024-03-12``; empty means today.
        """
        field_kind("as_of").check(day)
        with self.store.change() as db:
            load = db.execute(
                "INSERT INTO loads (at, day, file) VALUES (?, ?, ?)",
                (now(), day or today(), release.name),
            ).lastrowid
            for place, series in enumerate(release.series):
                add_member(db, load, place, series)
            db.executemany(
                "INSERT INTO problems VALUES (?, ?, ?, ?, ?, ?, ?)",
                [
                    (load, place, p.severity, p.file, p.row, p.column, p.message)
                    for place, p in enumerate(release.problems)
                ],
            )

    def correct(self, name: str, field: str, value: str) -> None:
        """Say what a series is; remembered for every later load of a series of that name.

        Raises
        ------
        ValueError
            No series has the name, or the kind, unit or adjustment is none.
        """
        allowed = {"kind": get_args(Kind), "adjustment": get_args(Adjustment)}.get(field)
        if field not in CORRECTED:
            raise ValueError(f"a correction must be of {', '.join(CORRECTED)}, but got {field!r}")
        if allowed is not None and value not in allowed:
            raise ValueError(
                f"{field} must be one of {', '.join(allowed)}, but got {quoted(str(value))}"
            )
        with self.store.change() as db:
            if not db.execute("SELECT 1 FROM vintages WHERE series = ?", (name,)).fetchone():
                raise UnknownSeriesError(f"no loaded series is named {name!r}")
            db.execute(
                "INSERT INTO corrections VALUES (?, ?, ?, ?) ON CONFLICT (series, field)"
                " DO UPDATE SET value = excluded.value, at = excluded.at",
                (name, field, plain_text(value, MAX_NAME), now()),
            )

    def mark(self, name: str, period: str, treatment: str, note: str = "") -> None:
        """Mark a break of a series, or say anew how it is treated; see `app.marks`.

        A mark in the invented economy is forgotten with the program.

        Raises
        ------
        ValueError
            No series in view has the name, or the treatment cannot be done there.
        """
        in_view = self.as_of()
        in_view.named(name)
        before = [m for m in in_view.marks if m.series == name and m.period != period.strip()]
        mark = checked(Mark(name, period, treatment, note), in_view.as_read, before)
        if not in_view.placeholder:
            with self.store.change() as db:
                write_mark(db, mark, now())
            return
        others = [m for m in in_view.marks if (m.series, m.period) != (name, mark.period)]
        self._try([*others, mark])

    def unmark(self, name: str, period: str) -> None:
        """Take a mark away.

        Raises
        ------
        ValueError
            No break of the series is marked there.
        """
        in_view = self.as_of()
        rest = [m for m in in_view.marks if (m.series, m.period) != (name, period)]
        if len(rest) == len(in_view.marks):
            raise ValueError(f"no break of {quoted(name)} is marked at {quoted(period)}")
        if in_view.placeholder:
            return self._try(rest)
        with self.store.change() as db:
            db.execute("DELETE FROM marks WHERE series = ? AND period = ?", (name, period))

    def _try(self, marks: list[Mark]) -> None:
        with self._lock:
            order = sorted(marks, key=lambda mark: (mark.series, mark.period))
            self._placeholder = replace(self._placeholder, marks=tuple(order))
            self._views = {}

    def show_beside(self, release: Release) -> None:
        """Show one more invented file beside the placeholder; never stored."""
        with self._lock:
            shown = self._placeholder
            if release.name not in {one.name for one in shown.releases}:
                self._placeholder = replace(shown, releases=(*shown.releases, release))
                self._views = {}

    def hide(self, file: str) -> None:
        """Take a file out of view from today on; its vintages stay."""
        self._set_hidden(file, today())

    def show(self, file: str) -> None:
        """Bring a file back into view."""
        self._set_hidden(file, None)

    def _set_hidden(self, file: str, day: str | None) -> None:
        with self.store.change() as db:
            done = db.execute(
                "UPDATE loads SET hidden = ? WHERE file = ? AND (hidden IS NULL) = ?",
                (day, file, day is not None),
            )
            if not done.rowcount:
                raise ValueError(f"no file {'in' if day else 'out of'} view is named {file!r}")

    @property
    def statement_store(self) -> Store:
        """Where statements are kept; about the invented economy, only until the program ends."""
        return self._trial if self.as_of().placeholder else self.store

    def close(self) -> None:
        """Close the file."""
        self.store.close()

    # What is in view -----------------------------------------------------------------------

    def as_of(self, day: str | datetime.date = "") -> WorkspaceView:
        """Return what is in view, as it stood on a date; empty for now.

        Raises
        ------
        StateError
            The date is none.
        """
        day = day.isoformat() if isinstance(day, datetime.date) else day
        field_kind("as_of").check(day)
        with self._lock:
            seen = self.store.version()
            if seen != self._seen:
                self._views, self._seen = {}, seen
            if day not in self._views:
                self._views[day] = self._read(day)
            return self._views[day]

    def _read(self, day: str) -> WorkspaceView:
        limit = day or _EVER
        with self.store.look() as db:
            started = db.execute("SELECT MIN(day) FROM loads").fetchone()[0]
            if started is None:
                return self._placeholder
            corrections = _corrections(db)
            shown: dict[str, sqlite3.Row] = {}
            for row in db.execute(
                "SELECT * FROM loads WHERE day <= ? AND coalesce(hidden > ?, 1) ORDER BY day, id",
                (limit, limit),
            ):
                shown.pop(row["file"], None)
                shown[row["file"]] = row
            parts = [self._release(db, row, corrections) for row in shown.values()]
            counts = db.execute(
                "SELECT v.series, COUNT(DISTINCT v.id) FROM vintages v"
                " JOIN members m ON m.vintage = v.id JOIN loads l ON l.id = m.load"
                " WHERE l.day <= ? GROUP BY v.series",
                (limit,),
            )
            return WorkspaceView(
                releases=tuple(release for release, _ in parts),
                day=day,
                started=started,
                files=tuple(file for _, file in parts),
                vintages=dict(tuple(row) for row in counts),
                marks=read_marks(db),
            )

    def _release(
        self, db: sqlite3.Connection, load: sqlite3.Row, corrections: dict[str, dict[str, str]]
    ) -> tuple[Release, LoadedFile]:
        rows = db.execute(f"{_SHOWN} WHERE m.load = ? ORDER BY m.place", (load["id"],))
        series = tuple(self._decode(row, corrections) for row in rows)
        problems = tuple(
            Problem(*tuple(row))
            for row in db.execute(
                "SELECT severity, file, line, series, message FROM problems WHERE load = ?"
                " ORDER BY place",
                (load["id"],),
            )
        )
        return Release(load["file"], series, problems), _file(load, series, len(problems))

    def _decode(self, row: sqlite3.Row, corrections: dict[str, dict[str, str]]) -> Series:
        """Return the series of a row with its corrections; the same object while those stay."""
        said = {"kind": row["kind"], "unit": row["unit"], "adjustment": row["adjustment"]}
        said |= corrections.get(row["series"], {})
        key = (row["id"], row["source"], *said.values())
        if key not in self._decoded:
            self._decoded[key] = read_series(row, said)
        return self._decoded[key]

    @property
    def releases(self) -> tuple[Release, ...]:
        """The releases in view, in the order in which they came."""
        return self.as_of().releases

    @property
    def series(self) -> dict[str, Series]:
        """The series in view by name, newest file winning."""
        return self.as_of().series

    @property
    def problems(self) -> tuple[Problem, ...]:
        """Everything that intake found in the files in view."""
        return self.as_of().problems

    def named(self, name: str) -> Series:
        """Return a series in view by its name; raises UnknownSeriesError where there is none."""
        return self.as_of().named(name)

    def opening_state(self) -> ViewState:
        """Return the view to open with: see `app.opening.opening_state`."""
        return self.as_of().opening_state()

    # What is kept --------------------------------------------------------------------------

    def vintages(self, name: str, day: str = "") -> tuple[Vintage, ...]:
        """Return what a series has been, oldest first, up to a date; empty for all of it.

        Of loads that follow each other with the same content, the first is given.
        """
        with self._lock, self.store.look() as db:
            corrections = _corrections(db)
            rows = db.execute(
                f"SELECT l.day, l.file, s.* FROM ({_SHOWN}) s JOIN loads l ON l.id = s.load"
                " WHERE s.series = ? AND l.day <= ? ORDER BY l.day, l.id",
                (name, day or _EVER),
            )
            found: list[Vintage] = []
            before = None
            for row in rows:
                if row["id"] != before:
                    one = self._decode(row, corrections)
                    found.append(Vintage(row["day"], row["file"], one))
                before = row["id"]
            return tuple(found)

    def corrections(self) -> dict[str, dict[str, str]]:
        """Return what the user has said of each series: name to field to value."""
        with self.store.look() as db:
            return _corrections(db)

    def hidden_files(self) -> tuple[LoadedFile, ...]:
        """Return the files out of view, by name, the newest load of each."""
        with self.store.look() as db:
            newest = {
                row["file"]: row
                for row in db.execute("SELECT * FROM loads ORDER BY day, id").fetchall()
            }
            found = []
            for name in sorted(n for n, row in newest.items() if row["hidden"]):
                names = db.execute(
                    "SELECT v.series FROM members m JOIN vintages v ON v.id = m.vintage"
                    " WHERE m.load = ? ORDER BY m.place",
                    (newest[name]["id"],),
                ).fetchall()
                row = newest[name]
                found.append(
                    LoadedFile(
                        name, row["day"], row["at"], tuple(n[0] for n in names), 0, row["hidden"]
                    )
                )
            return tuple(found)


def today() -> str:
    """Return the date of this machine."""
    return datetime.date.today().isoformat()


def _corrections(db: sqlite3.Connection) -> dict[str, dict[str, str]]:
    found: dict[str, dict[str, str]] = {}
    for row in db.execute("SELECT series, field, value FROM corrections"):
        found.setdefault(row["series"], {})[row["field"]] = row["value"]
    return found


def _file(load: sqlite3.Row, series: tuple[Series, ...], problems: int) -> LoadedFile:
    names = tuple(one.name for one in series)
    return LoadedFile(load["file"], load["day"], load["at"], names, problems, load["hidden"] or "")
