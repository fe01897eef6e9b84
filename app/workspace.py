"""What is loaded: series by name, and what intake found wrong with the files they came from."""

import difflib
import threading

from analytics.series import Series
from app.intake.problems import Problem
from app.intake.reading import Release
from app.state import ViewState


class UnknownSeriesError(ValueError):
    """A name that no loaded series has; the text is one sentence for the user."""


class Workspace:
    """Series of the files read so far, kept in memory; safe to share between threads.

    A series read again under the same name takes the place of the earlier one.
    """

    def __init__(self, releases: tuple[Release, ...] = ()) -> None:
        self._lock = threading.Lock()
        self._releases: dict[str, Release] = {}
        for release in releases:
            self.add(release)

    def add(self, release: Release) -> None:
        """Take in a release; a file of the same name is replaced."""
        with self._lock:
            self._releases.pop(release.name, None)
            self._releases[release.name] = release

    @property
    def releases(self) -> tuple[Release, ...]:
        """The releases in the order in which they came."""
        with self._lock:
            return tuple(self._releases.values())

    @property
    def series(self) -> dict[str, Series]:
        """The loaded series by name, newest file winning."""
        return {series.name: series for release in self.releases for series in release.series}

    @property
    def problems(self) -> tuple[Problem, ...]:
        """Everything that intake found in the files."""
        return tuple(problem for release in self.releases for problem in release.problems)

    def named(self, name: str) -> Series:
        """Return a series by its name.

        Raises
        ------
        UnknownSeriesError
            No loaded series has the name.
        """
        loaded = self.series
        if name in loaded:
            return loaded[name]
        if not loaded:
            raise UnknownSeriesError("nothing is loaded yet; open release files on the Data page")
        near = difflib.get_close_matches(name, loaded, n=3, cutoff=0.4) or list(loaded)[:6]
        known = f"; there is {', '.join(repr(each) for each in near)}" if near else ""
        raise UnknownSeriesError(f"no loaded series is named {name!r}{known}")

    def opening_state(self) -> ViewState:
        """Return the view to open with: the usual pair if it is loaded, else the first two series.

        A name with "money" in it is preferred as driver, one with "price" or "cpi" as response.
        """
        usual, names = ViewState(), list(self.series)
        if usual.driver in names and usual.response in names:
            return usual
        if not names:
            return usual
        driver = next((n for n in names if "money" in n.lower()), names[0])
        others = [n for n in names if n != driver] or [driver]
        response = next((n for n in others if any(w in n.lower() for w in ("price", "cpi"))), None)
        return ViewState(driver=driver, response=response or others[0])
