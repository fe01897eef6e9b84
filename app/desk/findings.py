"""What the checks of `analytics.quality` find in the series in view, with the file of each."""

import hashlib
from collections.abc import Iterable
from dataclasses import dataclass

from analytics.quality import Finding, code_of, findings, frequency_mix
from analytics.series import Series
from app.intake.problems import Problem
from app.intake.weights import is_weight
from app.jobs import Work
from app.memory import Memory
from app.workspace import Workspace, WorkspaceView

GROUP = 30  # series checked in one step, at about 6 ms each


@dataclass(frozen=True)
class Found:
    """A finding, the file of its series, and whether its period is marked as a break."""

    finding: Finding
    file: str
    marked: bool

    @property
    def code(self) -> str:
        """Its period as addresses carry it; empty for the whole series."""
        return code_of(self.finding)

    @property
    def problem(self) -> Problem:
        """The finding as intake words what it finds."""
        said = f"{self.finding.message}; {self.finding.way}"
        if self.marked:
            said = f"{self.finding.message}; a break is marked there"
        severity = "note" if self.marked else self.finding.severity
        return Problem(severity, self.file, None, self.finding.series, said)


Checked = tuple[Finding, ...]  # what was found in one series


@dataclass(frozen=True, eq=False)
class _Plan:
    """Groups of names that are checked at once."""

    groups: tuple[tuple[str, ...], ...]

    @property
    def chunks(self) -> int:
        return len(self.groups)


def found_in(
    in_view: WorkspaceView,
    workspace: Workspace,
    window: int = 12,
    known: Checked | None = None,
) -> list[Found]:
    """Check every series in view as read, in order; weights are left out.

    Parameters
    ----------
    in_view : WorkspaceView
        What is checked.
    workspace : Workspace
        Asked for the vintage before, of series that have several.
    window : int, default 12
        Periods averaged, for the check of length.
    known : tuple of Finding, optional
        The result of `checks_work`; without it the series are checked here.
    """
    if known is None:
        known = _checked(tuple(in_view.as_read), in_view, workspace, window)
    marked = {(mark.series, mark.period) for mark in in_view.marks}
    found = [
        Found(one, in_view.file_of(one.series), (one.series, code_of(one)) in marked)
        for one in known
    ]
    for one in frequency_mix(in_view.as_read.values()):
        found.append(Found(one, in_view.file_of(one.series), False))
    return sorted(found, key=lambda each: each.finding.severity != "warning")


def checks_work(
    in_view: WorkspaceView, workspace: Workspace, memory: Memory, window: int = 12
) -> Work:
    """Return the checks of every series in view as work; its result is for `found_in`.

    A group of series whose content did not change is not checked again.
    """
    names = tuple(in_view.as_read)
    groups = tuple(names[k : k + GROUP] for k in range(0, len(names), GROUP))
    keys = [_key(group, in_view, window) for group in groups]

    def chunk(plan: _Plan, number: int) -> Checked:
        group = plan.groups[number]
        return memory.once(keys[number], lambda: _checked(group, in_view, workspace, window))

    def result(_plan: _Plan, chunks: list[Checked]) -> Checked:
        return tuple(one for each in chunks for one in each)

    text = hashlib.sha256("\n".join(keys).encode()).hexdigest()[:32]
    return Work(f"checks:{text}", lambda: _Plan(groups), chunk, result)


def _checked(
    names: Iterable[str], in_view: WorkspaceView, workspace: Workspace, window: int
) -> Checked:
    found: list[Finding] = []
    for name in names:
        series = in_view.as_read[name]
        if not is_weight(series):
            found += findings(series, stored=_before(name, in_view, workspace), window=window)
    return tuple(found)


def _before(name: str, in_view: WorkspaceView, workspace: Workspace) -> Series | None:
    if in_view.vintages.get(name, 1) < 2:
        return None
    kept = workspace.vintages(name, in_view.day)
    return kept[-2].series if len(kept) > 1 else None


def _key(group: Iterable[str], in_view: WorkspaceView, window: int) -> str:
    """Return the key of a group: its contents, and how many each had before as of the day."""
    parts = [in_view.day, str(window)]
    for name in group:
        one = in_view.as_read[name]
        parts += [name, one.fingerprint, one.adjustment, str(in_view.vintages.get(name, 1))]
    return f"findings:{hashlib.sha256(repr(parts).encode()).hexdigest()[:32]}"
