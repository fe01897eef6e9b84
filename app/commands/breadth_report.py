"""What `pricewake breadth` reads and prints: the same words and numbers as the page."""

from dataclasses import replace
from pathlib import Path
from typing import Any

from app.breadth.answer import breadth_answer
from app.breadth.bridge import Breadth
from app.breadth.words import adding_up, sentence, verdict
from app.demo import WEIGHTS, demo_releases
from app.intake.reading import Release, read_path
from app.intake.weights import weight_series
from app.pages.breadth import CAUTION
from app.words import signed
from app.workspace import Workspace


def weights_release(path: Path) -> Release:
    """Read a file that must be weights.

    Raises
    ------
    IntakeError
        It cannot be read, or holds no weights; one sentence.
    """
    release = read_path(path)
    return replace(release, series=weight_series(release.name, release.series, release.problems))


def with_weights(desk: Workspace, path: Path | None) -> Workspace:
    """Return a workspace that has the weights of a file beside its prices."""
    if path is None:
        return desk
    release = weights_release(path)
    if not desk.as_of().placeholder:
        desk.add(release)
        return desk
    prices = tuple(each for each in demo_releases() if each.name != WEIGHTS)
    return Workspace((*prices, release))


def report(shown: Breadth) -> tuple[dict[str, Any], list[str]]:
    """Return the JSON answer and the lines to print."""
    answer = breadth_answer(shown)
    said = [sentence(shown), verdict(shown)]
    if shown.weighted is not None:
        order = sorted(answer["contributions"].items(), key=lambda item: -abs(item[1]))
        said.append(
            "Contributions in points: "
            + ", ".join(f"{name} {signed(points)}" for name, points in order[:12])
            + (f" and {len(order) - 12} more." if len(order) > 12 else ".")
        )
        said.append(adding_up(shown))
    return answer, [*said, *shown.notes, CAUTION]
