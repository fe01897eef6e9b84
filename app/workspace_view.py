"""What of a workspace is in view: the series by name, now or as they stood on a date."""

import difflib
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

from analytics.series import Series
from analytics.weights import WeightTable
from app.intake.problems import Problem
from app.intake.reading import Release
from app.intake.weights import is_weight, weight_table
from app.marks import Mark, Treated, treated
from app.opening import opening_state
from app.state import ViewState


class UnknownSeriesError(ValueError):
    """A name that no loaded series has; the text is one sentence for the user."""


@dataclass(frozen=True)
class LoadedFile:
    """One file that was taken in.

    Attributes
    ----------
    name : str
        Display name.
    day : str
        Date from which it stands, such as ``2024-03-12``.
    at : str
        When it was taken in, in UTC.
    series : tuple of str
        Names, in the order of the file.
    problems : int
        How many things intake found in it.
    hidden : str
        The day on which it was taken out of view; empty while it is in view.
    """

    name: str
    day: str
    at: str
    series: tuple[str, ...]
    problems: int
    hidden: str = ""


@dataclass(frozen=True)
class Vintage:
    """A series as it stood from a day on; `file` is where it was read."""

    day: str
    file: str
    series: Series


@dataclass(frozen=True, eq=False)
class WorkspaceView:
    """What is in view at one time; it does not change when the workspace does.

    Attributes
    ----------
    releases : tuple of Release
        One a file, in the order in which they came; corrections are in them.
    placeholder : bool
        Whether this is the invented economy, which stands in until a file is taken in.
    day : str
        The date asked for, or empty for now.
    started : str
        First day from which any file stands; empty where there is none.
    files : tuple of LoadedFile
        The files of `releases`, in the same order; empty for the placeholder.
    vintages : mapping of str to int
        Contents that each series has had up to then.
    marks : tuple of Mark
        Breaks marked by the user; they count on every date.
    """

    releases: tuple[Release, ...] = ()
    placeholder: bool = False
    day: str = ""
    started: str = ""
    files: tuple[LoadedFile, ...] = ()
    vintages: Mapping[str, int] = field(default_factory=dict)
    marks: tuple[Mark, ...] = ()

    @cached_property
    def _by_name(self) -> dict[str, tuple[Series, str]]:
        return {
            one.name: (one, release.name)
            for release in self.releases
            for one in release.series
            if not is_weight(one)
        }

    @cached_property
    def weights(self) -> WeightTable | None:
        """Weights of components, from the newest file that holds any; they are no `series`."""
        for release in reversed(self.releases):
            table = weight_table(release.series, release.name)
            if table is not None:
                return table
        return None

    @cached_property
    def as_read(self) -> dict[str, Series]:
        """The series by name as their files have them, newest file winning."""
        return {name: series for name, (series, _) in self._by_name.items()}

    @cached_property
    def _treated(self) -> dict[str, Treated]:
        by_series: dict[str, list[Mark]] = {}
        for mark in self.marks:
            by_series.setdefault(mark.series, []).append(mark)
        return {
            name: treated(self.as_read[name], marks, self.as_read)
            for name, marks in by_series.items()
            if name in self.as_read
        }

    @property
    def series(self) -> dict[str, Series]:
        """The series by name as they are used: breaks treated, newest file winning."""
        return self.as_read | {name: one.series for name, one in self._treated.items()}

    def breaks(self, name: str) -> tuple[str, ...]:
        """Return a sentence on each marked break of a series."""
        return self._treated[name].said if name in self._treated else ()

    @property
    def problems(self) -> tuple[Problem, ...]:
        """Everything that intake found in the files."""
        return tuple(problem for release in self.releases for problem in release.problems)

    def file_of(self, name: str) -> str:
        """Return the name of the file that a series in view comes from."""
        return self._by_name[name][1]

    def named(self, name: str) -> Series:
        """Return a series by its name as it is used: with its breaks treated.

        Raises
        ------
        UnknownSeriesError
            No series in view has the name.
        """
        loaded = self._by_name
        if name in self._treated:
            return self._treated[name].series
        if name in loaded:
            return loaded[name][0]
        if not loaded and self.day and self.started:
            raise UnknownSeriesError(
                f"nothing was loaded yet on {self.day}; the first file stands from {self.started}"
            )
        if not loaded:
            raise UnknownSeriesError("nothing is loaded yet; open release files on the Data page")
        near = difflib.get_close_matches(name, loaded, n=3, cutoff=0.4) or list(loaded)[:6]
        known = f"; there is {', '.join(repr(each) for each in near)}" if near else ""
        stood = f" as it stood on {self.day}" if self.day else ""
        raise UnknownSeriesError(f"no loaded series is named {name!r}{stood}{known}")

    def opening_state(self) -> ViewState:
        """Return the view to open with: see `app.opening.opening_state`."""
        return opening_state(self.series)
