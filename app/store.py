"""The file of a workspace: opening, one transaction a change, waiting for others, plain refusals.

SQLite with a write-ahead log: a change that has returned is on the disk, and a process that is
killed leaves the file sound.
"""

import datetime
import os
import sqlite3
import sys
import threading
import time
from collections import Counter
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any, TypeVar

from app.migrations import APPLICATION_ID, VERSION, migrate

T = TypeVar("T")
MEMORY = ":memory:"
PATIENCE = 30.0  # seconds that a change waits for other programs
_BUSY = {sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED}
# Files that this process holds open. Opening and closing one by other means gives up the locks of
# its connections (POSIX), and the next program to close it takes away a log still in use.
_HELD: Counter[tuple[int, int]] = Counter()
_DAMAGED = {sqlite3.SQLITE_CORRUPT, sqlite3.SQLITE_NOTADB, sqlite3.SQLITE_FORMAT}
_UNWRITABLE = {
    sqlite3.SQLITE_READONLY,
    sqlite3.SQLITE_CANTOPEN,
    sqlite3.SQLITE_PERM,
    sqlite3.SQLITE_IOERR,
    sqlite3.SQLITE_AUTH,
}


class WorkspaceError(ValueError):
    """A workspace that cannot be opened, read or written; the text is one sentence."""


def default_path() -> Path:
    """Return the workspace in the user's data folder, by the rule of the platform.

    ``XDG_DATA_HOME`` or ``~/.local/share`` on Linux, as the XDG base directory specification has
    it (a relative path there is ignored); ``Library/Application Support`` on macOS;
    ``%LOCALAPPDATA%`` on Windows.
    """
    try:
        home = Path.home()
    except RuntimeError:
        raise WorkspaceError(
            "the workspace must have a place, but this account has no home folder;"
            " name a file with --workspace"
        ) from None
    if sys.platform == "win32":
        base = Path(os.environ.get("LOCALAPPDATA") or home / "AppData" / "Local")
    elif sys.platform == "darwin":
        base = home / "Library" / "Application Support"
    else:
        given = Path(os.environ.get("XDG_DATA_HOME", ""))
        base = given if given.is_absolute() else home / ".local" / "share"
    return base / "pricewake" / "workspace.sqlite"


class Store:
    """One connection to a workspace file, shared by the threads of a process.

    Parameters
    ----------
    path : str or Path
        The file, made where there is none; ``":memory:"`` keeps everything in memory.

    Raises
    ------
    WorkspaceError
        The file is no workspace, comes from a newer version, or may not be opened.
    """

    def __init__(self, path: str | Path = MEMORY) -> None:
        self.path = None if str(path) == MEMORY else Path(path)
        self._lock = threading.RLock()
        self._changes = 0
        self._held: tuple[int, int] | None = None
        if self.path is not None:
            _make_private(self.path)
        with self._told():
            self._connection = sqlite3.connect(
                MEMORY if self.path is None else self.path,
                timeout=PATIENCE,
                isolation_level=None,
                check_same_thread=False,
            )
            if self.path is not None:
                self._held = _identity(self.path)
                _HELD[self._held] += 1
            try:
                self._set_up()
            except BaseException:
                self.close()
                raise

    def _set_up(self) -> None:
        connection = self._connection
        connection.row_factory = sqlite3.Row
        for pragma in (
            "foreign_keys = ON",
            "recursive_triggers = ON",  # a REPLACE must not get round the triggers
            "trusted_schema = OFF",
            "synchronous = FULL",
        ):
            connection.execute(f"PRAGMA {pragma}")
        if _patient(self._check_kind) < VERSION:
            if self.path is not None:
                _patient(lambda: connection.execute("PRAGMA journal_mode = WAL").fetchone())
            with self.change() as db:
                if self._check_kind() < VERSION:  # another program may have been first
                    migrate(db)

    def _check_kind(self) -> int:
        """Return the version of the file; refuse what is not ours, before anything is written."""
        one = self._connection.execute
        identity = one("PRAGMA application_id").fetchone()[0]
        version: int = one("PRAGMA user_version").fetchone()[0]
        if identity != APPLICATION_ID and one("SELECT 1 FROM sqlite_master LIMIT 1").fetchone():
            raise WorkspaceError(
                f"a workspace must be a file that Pricewake made, but {self._name} is a database of"
                " another program; nothing was changed in it"
            )
        if version > VERSION and identity == APPLICATION_ID:
            raise WorkspaceError(
                f"{self._name} was written by a newer Pricewake (workspace version {version}; this"
                f" one reads up to {VERSION}); update the program, or name another file with"
                " --workspace"
            )
        return version if identity == APPLICATION_ID else 0

    @property
    def _name(self) -> str:
        return "the workspace" if self.path is None else f"the workspace {str(self.path)!r}"

    @contextmanager
    def change(self) -> Iterator[sqlite3.Connection]:
        """Give the connection for one transaction: all of it is kept, or nothing is.

        Returns only after the change is on the disk. Waits while another program writes.
        """
        with self._lock, self._told():
            db = self._connection
            _patient(lambda: db.execute("BEGIN IMMEDIATE"))
            try:
                yield db
                _patient(lambda: db.execute("COMMIT"))
            except BaseException:
                if db.in_transaction:
                    db.execute("ROLLBACK")
                raise
            self._changes += 1

    @contextmanager
    def look(self) -> Iterator[sqlite3.Connection]:
        """Give the connection for several reads of one and the same state of the file."""
        with self._lock, self._told():
            db = self._connection
            _patient(lambda: db.execute("BEGIN"))
            try:
                yield db
            finally:
                with suppress(sqlite3.Error):
                    db.execute("COMMIT")

    def version(self) -> tuple[int, int]:
        """Return two numbers, one of which grows with every change, of this program or another."""
        with self._lock, self._told():
            row = _patient(lambda: self._connection.execute("PRAGMA data_version").fetchone())
            return row[0], self._changes

    def close(self) -> None:
        """Close the file; the last program to do so folds the log into it."""
        with self._lock, suppress(sqlite3.Error):
            self._connection.close()
        if self._held is not None:
            _HELD[self._held] -= 1
            self._held = None

    @contextmanager
    def _told(self) -> Iterator[None]:
        """Turn what SQLite says into one sentence for the user."""
        try:
            yield
        except sqlite3.IntegrityError:
            raise
        except sqlite3.Error as error:
            raise WorkspaceError(self._sentence(error)) from error

    def _sentence(self, error: sqlite3.Error) -> str:
        code = getattr(error, "sqlite_errorcode", sqlite3.SQLITE_ERROR) & 0xFF
        if code in _BUSY:
            return (
                f"another program has been writing to {self._name} for {PATIENCE:.0f} seconds;"
                " nothing was changed, try again"
            )
        if code in _DAMAGED:
            return (
                f"{self._name} is damaged and cannot be read; name another file with --workspace"
                " and import your last export into it"
            )
        if code == sqlite3.SQLITE_FULL:
            return f"the disk is full; nothing was changed in {self._name}"
        if code in _UNWRITABLE:
            return f"{self._name} must be a file that may be written, but it is not"
        return f"{self._name} cannot be used: {error}"


def _patient(act: Callable[[], T]) -> T:
    """Do something that another program may hold up, and wait for it.

    SQLite waits by itself in most places; where waiting could be a deadlock, or while a log is
    being recovered, it reports at once, and the question has to be put again.
    """
    end = time.monotonic() + PATIENCE
    while True:
        try:
            return act()
        except sqlite3.OperationalError as error:
            busy = getattr(error, "sqlite_errorcode", 0) & 0xFF in _BUSY
            if not busy or time.monotonic() > end:
                raise
            time.sleep(0.01)


def _make_private(path: Path) -> None:
    """Make folder and file for the user alone, and refuse what cannot be a workspace."""
    try:
        if not path.parent.exists():
            path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        if path.exists():
            _refuse_other_content(path)
        else:
            with suppress(FileExistsError):
                os.close(os.open(path, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o600))
    except (OSError, ValueError) as error:
        if isinstance(error, WorkspaceError):
            raise
        reason = getattr(error, "strerror", None) or "that is no path"
        raise WorkspaceError(
            f"a workspace must be a file that may be opened, but got {str(path)!r}: {reason}"
        ) from None


def _identity(path: Path) -> tuple[int, int]:
    found = path.stat()
    return found.st_dev, found.st_ino


def _refuse_other_content(path: Path) -> None:
    if not path.is_file():
        raise WorkspaceError(f"a workspace must be a file, but {str(path)!r} is a folder or device")
    if _HELD[_identity(path)]:  # it is a workspace, and must not be read here but by SQLite
        return
    with path.open("rb") as stream:
        start = stream.read(16)
    if start and start != b"SQLite format 3\x00":
        raise WorkspaceError(
            f"a workspace must be a file that Pricewake made, but {str(path)!r} is of another kind;"
            " nothing was changed in it"
        )


def now() -> str:
    """Return the present moment in UTC, as rows carry it."""
    return datetime.datetime.now(datetime.UTC).isoformat(timespec="microseconds")


def row_values(row: sqlite3.Row) -> dict[str, Any]:
    """Return a row as column to value."""
    return dict(zip(row.keys(), tuple(row), strict=True))
