"""What the checks of `analytics.quality` find in the series in view, with the file of each."""

from dataclasses import dataclass

from analytics.quality import Finding, code_of, findings, frequency_mix
from analytics.series import Series
from app.intake.problems import Problem
from app.intake.weights import is_weight
from app.memory import Memory
from app.workspace import Workspace, WorkspaceView


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


def found_in(
    in_view: WorkspaceView,
    workspace: Workspace,
    memory: Memory | None = None,
    window: int = 12,
    most: int | None = None,
) -> list[Found]:
    """Check every series in view as read, in order; weights are left out.

    Parameters
    ----------
    in_view : WorkspaceView
        What is checked.
    workspace : Workspace
        Asked for the vintage before, of series that have several.
    memory : Memory, optional
        Where findings of equal content are kept.
    window : int, default 12
        Periods averaged, for the check of length.
    most : int, optional
        Series checked, the first ones; all without it.
    """
    marked = {(mark.series, mark.period) for mark in in_view.marks}
    found: list[Found] = []
    for name, series in list(in_view.as_read.items())[:most]:
        if is_weight(series):
            continue
        stored = _before(name, in_view, workspace)
        for one in _checked(series, stored, window, memory):
            place = (name, code_of(one))
            found.append(Found(one, in_view.file_of(name), place in marked))
    for one in frequency_mix(in_view.as_read.values()):
        found.append(Found(one, in_view.file_of(one.series), False))
    return sorted(found, key=lambda each: each.finding.severity != "warning")


def _before(name: str, in_view: WorkspaceView, workspace: Workspace) -> Series | None:
    if in_view.vintages.get(name, 1) < 2:
        return None
    kept = workspace.vintages(name, in_view.day)
    return kept[-2].series if len(kept) > 1 else None


def _checked(
    series: Series, stored: Series | None, window: int, memory: Memory | None
) -> tuple[Finding, ...]:
    if memory is None:
        return findings(series, stored=stored, window=window)
    before = stored.fingerprint if stored is not None else ""
    key = f"findings:{series.fingerprint}:{series.adjustment}:{before}:{window}:{series.name}"
    return memory.once(key, lambda: findings(series, stored=stored, window=window))
