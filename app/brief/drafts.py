"""Briefs that are being made for the page, by a token that nobody can guess."""

import secrets
import threading
from collections import OrderedDict
from dataclasses import dataclass, field

from app.brief.building import Building
from app.brief.pictures import Pictures

MOST = 8  # held at a time; the oldest give way and are simply made again


@dataclass
class _Held:
    building: Building
    lock: threading.Lock = field(default_factory=threading.Lock)


class Drafts:
    """Buildings by token, each advanced by one request at a time."""

    def __init__(self) -> None:
        self.pictures = Pictures()
        self._guard = threading.Lock()
        self._held: OrderedDict[str, _Held] = OrderedDict()

    def hold(self, building: Building) -> str:
        """Hold a building and return its token."""
        token = secrets.token_urlsafe(12)
        with self._guard:
            self._held[token] = _Held(building)
            while len(self._held) > MOST:
                self._held.popitem(last=False)
        return token

    def step(self, token: str) -> tuple[Building, str] | None:
        """Do the next step; gives the building and what comes next in words, None if not held."""
        held = self._found(token)
        if held is None:
            return None
        with held.lock:
            return held.building, held.building.step()

    def files(self, token: str) -> dict[str, bytes] | None:
        """Return the files of a building that has come to its end, else None."""
        held = self._found(token)
        return None if held is None or held.building.steps else held.building.files

    def drop(self, token: str) -> None:
        """Let go of a building; without one that draws, the browser closes by itself."""
        with self._guard:
            self._held.pop(token, None)

    def _found(self, token: str) -> _Held | None:
        with self._guard:
            return self._held.get(token)
