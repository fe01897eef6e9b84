"""Results kept by explicit key: flask-caching under the server, a plain dict for the command."""

import threading
from collections.abc import Callable
from typing import Any, TypeVar

from flask import Flask
from flask_caching import Cache
from flask_caching.backends import SimpleCache

T = TypeVar("T")
MOST_KEPT = 300  # results


class _AsItIs:
    """Hands objects on without a copy: results are frozen, and their arrays cannot be written."""

    def dumps(self, value: Any) -> Any:
        """Return the value."""
        return value

    loads = dumps


class SameObjects(SimpleCache):
    """Cache in memory that returns the object kept; the oldest go first when there are many."""

    serializer = _AsItIs()

    def _prune(self) -> None:
        while self._over_threshold():
            del self._cache[next(iter(self._cache))]


def server_cache(server: Flask) -> Cache:
    """Return the cache of a server."""
    kind = f"{SameObjects.__module__}.{SameObjects.__name__}"
    config = {"CACHE_TYPE": kind, "CACHE_DEFAULT_TIMEOUT": 0, "CACHE_THRESHOLD": MOST_KEPT}
    return Cache(server, config=config)


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
                        with self._guard:  # two threads must not drop the oldest at once
                            self._cache.set(key, found)
        finally:
            with self._guard:
                self._locks.pop(key, None)
        return found  # type: ignore[no-any-return]
