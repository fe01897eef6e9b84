"""Results of scans that were opened from files, by the mark of their content."""

import threading
from collections import OrderedDict
from typing import TYPE_CHECKING

if TYPE_CHECKING:  # it reads what stands on `app.compute`, which has one of these
    from app.scan.opened import Opened

MOST = 8


class HeldResults:
    """The results opened last, until the program ends."""

    def __init__(self) -> None:
        self._lock = threading.Lock()
        self._held: OrderedDict[str, Opened] = OrderedDict()

    def hold(self, opened: "Opened") -> str:
        """Hold a result; return the mark that a state names it by."""
        with self._lock:
            self._held[opened.mark] = opened
            self._held.move_to_end(opened.mark)
            while len(self._held) > MOST:
                self._held.popitem(last=False)
        return opened.mark

    def found(self, mark: str) -> "Opened | None":
        """Return a result while it is held."""
        with self._lock:
            return self._held.get(mark)
