"""Files that were read and are looked at before anything of them is kept."""

import secrets
import threading
from collections import OrderedDict

from app.intake.reading import Release

MOST_FILES = 60
MOST_BYTES = 256 * 2**20


class Pending:
    """Releases by a token that nobody can guess; the oldest give way when there are too many."""

    def __init__(self) -> None:
        self._lock = threading.Lock()
        self._held: OrderedDict[str, Release] = OrderedDict()

    def hold(self, release: Release) -> str:
        """Hold a release and return its token."""
        token = secrets.token_urlsafe(12)
        with self._lock:
            self._held[token] = release
            while len(self._held) > 1 and (
                len(self._held) > MOST_FILES or sum(map(_size, self._held.values())) > MOST_BYTES
            ):
                self._held.popitem(last=False)
        return token

    def found(self, token: str) -> Release | None:
        """Return the release of a token while it is held."""
        with self._lock:
            return self._held.get(token)

    def drop(self, token: str) -> None:
        """Let go of a release."""
        with self._lock:
            self._held.pop(token, None)


def _size(release: Release) -> int:
    return sum(series.values.nbytes for series in release.series)
