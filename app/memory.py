"""Results kept by explicit key: flask-caching under the server, a plain dict for the command."""

import threading
from collections.abc import Callable
from typing import Any, TypeVar

from flask_caching import Cache

T = TypeVar("T")


class Memory:
    """Results by explicit key, one lock a key, so that two tabs never compute the same twice."""

    def __init__(self, cache: Cache | None = None) -> None:
        self._cache = cache
        self._kept: dict[str, Any] = {}
        self._guard = threading.Lock()
        self._locks: dict[str, threading.Lock] = {}

    def found(self, key: str) -> Any:
        """Return what is kept under `key`, or None."""
        return self._kept.get(key) if self._cache is None else self._cache.get(key)

    def once(self, key: str, make: Callable[[], T]) -> T:
        """Return what is kept under `key`, or make it and keep it."""
        with self._guard:
            lock = self._locks.setdefault(key, threading.Lock())
        try:
            with lock:
                found = self.found(key)
                if found is None:
                    found = make()
                    if self._cache is None:
                        self._kept[key] = found
                    else:
                        self._cache.set(key, found)
        finally:
            with self._guard:
                self._locks.pop(key, None)
        return found  # type: ignore[no-any-return]
