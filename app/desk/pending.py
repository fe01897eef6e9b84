"""Files that were read and are looked at before anything of them is kept."""

import secrets
import threading
from collections import OrderedDict
from dataclasses import dataclass, replace

from app.intake.reading import Release, read_release

MOST_FILES = 600
MOST_BYTES = 256 * 2**20


@dataclass(frozen=True, eq=False)
class _Held:
    """A release; the bytes of its workbook, where that has other sheets; the usual sheet."""

    release: Release
    name: str = ""
    content: bytes = b""
    usual: str = ""

    @property
    def size(self) -> int:
        """Bytes that it holds."""
        return len(self.content) + sum(series.values.nbytes for series in self.release.series)


class Pending:
    """Releases by a token that nobody can guess; the oldest give way when there are too many."""

    def __init__(self) -> None:
        self._lock = threading.Lock()
        self._held: OrderedDict[str, _Held] = OrderedDict()

    def hold(self, release: Release, name: str = "", content: bytes = b"") -> str:
        """Hold a release, with the file it was read from where it may be read anew; give a token.

        `name` and `content` are kept only of a workbook of several sheets.
        """
        token = secrets.token_urlsafe(12)
        held = _Held(release)
        if len(release.sheets) > 1:
            held = _Held(release, name, content, release.sheet)
        with self._lock:
            self._held[token] = held
            while len(self._held) > 1 and (
                len(self._held) > MOST_FILES
                or sum(each.size for each in self._held.values()) > MOST_BYTES
            ):
                self._held.popitem(last=False)
        return token

    def found(self, token: str) -> Release | None:
        """Return the release of a token while it is held."""
        with self._lock:
            held = self._held.get(token)
            return held.release if held is not None else None

    def choose(self, token: str, sheet: str) -> Release:
        """Read another sheet of the workbook of a token in place of the one held.

        Raises
        ------
        ValueError
            The file is no longer held, or the sheet holds no table that can be read.
        """
        with self._lock:
            held = self._held.get(token)
        if held is None or not held.content:
            raise ValueError("a file is no longer held for a look; open it again")
        release = read_release(
            held.name, held.content, sheet=None if sheet == held.usual else sheet
        )
        if not release.series:
            said = " ".join(str(problem) for problem in release.problems[:3])
            raise ValueError(said or f"{release.name}: no series was found in it")
        with self._lock:
            if token in self._held:
                self._held[token] = replace(held, release=release)
        return release

    def drop(self, token: str) -> None:
        """Let go of a release."""
        with self._lock:
            self._held.pop(token, None)
