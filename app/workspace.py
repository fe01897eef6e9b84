"""What is loaded: series by name, and what intake found wrong with the files they came from."""

import difflib
import threading

from analytics.series import Series
from app.intake.problems import Problem
from app.intake.reading import Release
from app.opening import opening_state
from app.state import ViewState


class UnknownSeriesError(ValueError):
    """A name that no loaded series has; the text is one sentence for the user."""


class Workspace:
    """Series of the files read so far, kept in memory; safe to share between threads.

    A series read again under the same name takes the place of the earlier one. The releases given
    as `placeholder` are shown until the first file of the user's own comes in.
    """

    def __init__(
        self, releases: tuple[Release, ...] = (), placeholder: tuple[Release, ...] = ()
    ) -> None:
        self._lock = threading.Lock()
        self._releases = {release.name: release for release in placeholder}
        self._only_placeholder = bool(placeholder)
        for release in releases:
            self.add(release)

    def add(self, release: Release) -> None:
        """Take in a release; a file of the same name is replaced."""
        with self._lock:
            if self._only_placeholder:
                self._releases.clear()
                self._only_placeholder = False
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
        """Return the view to open with: see `app.opening.opening_state`."""
        return opening_state(self.series)
