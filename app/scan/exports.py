"""The numbers of each view of a scan as CSV, every digit kept."""

from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import Any

from analytics.panel import LEVEL, panel_surface
from app.compute import Bridge
from app.exports import csv_text
from app.places import software_version
from app.scan.bridge import Scan, scan, scan_work
from app.scan.league import drawn_pairs
from app.scan.opened import Opened
from app.scan.result_file import COLUMNS, row
from app.scan.words import notes, sentence
from app.state import StateError, ViewState

Rows = Iterable[Sequence[Any]]


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Scan page.

    Raises
    ------
    ValueError
        No such view, a refused value, or nothing to show yet; one sentence.
    """
    known = scan(ViewState.from_query(query), bridge)
    if name in SEARCHED and known.panel is None:
        if len(known.question.pairs) > MANY:
            raise StateError("the pairs must be searched first; the page shows how far they are")
        bridge.jobs.complete(scan_work(known.question.state, bridge))
        known = scan(known.question.state, bridge)
    return f"{name}-{stem(known)}.csv", view_text(name, known)


def stem(known: Scan) -> str:
    """Return the words of a file name that follow the name of the view."""
    return f"scan-{len(known.question.roles.pairs)}-pairs-seed-{known.question.state.seed}"


def view_text(name: str, known: Scan, *, every: bool = False) -> str:
    """Return one view as CSV text under a header; `every` writes the surfaces of all pairs.

    Raises
    ------
    ValueError
        There is no such view.
    """
    if name not in VIEWS:
        raise StateError(f"view must be one of {', '.join(VIEWS)}, but got {name!r}")
    rows = _all_surfaces(known) if every and name == "surfaces" else VIEWS[name](known)
    return csv_text(header(known), rows)


def header(known: Scan) -> list[tuple[str, str]]:
    """Name what a file holds: sentence, settings, state, version."""
    asked = known.question
    return [
        ("Pricewake", software_version()),
        ("view", sentence(asked)),
        ("settings", asked.settings),
        ("state", f"/scan?{asked.state.to_query()}"),
        *([("result", opened_line(asked.opened))] if asked.opened is not None else []),
        *[("said", note) for note in notes(known)],
        ("note", "p_scan by Benjamini-Hochberg; p_holm by Holm; over all pairs of the scan"),
        ("note", "an association in past data; not a cause and not advice"),
    ]


def opened_line(opened: Opened) -> str:
    """Name the result file that was opened."""
    return f"{opened.name}; content {opened.mark}; written by Pricewake {opened.version}"


def _pairs(known: Scan) -> Rows:
    assert known.panel is not None
    yield COLUMNS
    panel = known.panel
    for one, p_scan, p_holm in zip(
        panel.pairs, panel.p_scan.tolist(), panel.p_holm.tolist(), strict=True
    ):
        yield row(one, p_scan, p_holm)


def _surfaces(known: Scan) -> Rows:
    yield from _cells(drawn_pairs(known))


def _all_surfaces(known: Scan) -> Rows:
    yield from _cells(known.question.pairs)


def _cells(pairs: Iterable[Any]) -> Iterator[Sequence[Any]]:
    yield ("economy", "driver", "response", "window", "shift", "correlation", "slope", "pairs")
    for pair in pairs:
        surface = panel_surface(pair)
        for i, window in enumerate(surface.windows.tolist()):
            for j, shift in enumerate(surface.shifts.tolist()):
                yield (
                    *pair.names,
                    window,
                    shift,
                    float(surface.correlation[i, j]),
                    float(surface.slope[i, j]),
                    int(surface.pairs[i, j]),
                )


def _shifts(known: Scan) -> Rows:
    assert known.panel is not None
    yield ("economy", "driver", "response", "shift", "unit", "p_scan", "p_holm", "found")
    panel, unit = known.panel, known.question.noun
    by_holm = known.question.state.correction == "holm"
    for one, p_scan, p_holm in zip(
        panel.pairs, panel.p_scan.tolist(), panel.p_holm.tolist(), strict=True
    ):
        if not one.refused:
            held = (p_holm if by_holm else p_scan) <= LEVEL
            yield (*one.names, one.shift, unit, p_scan, p_holm, "yes" if held else "no")


def _averages(known: Scan) -> Rows:
    yield ("part", "economy", "driver", "response", "first", "last", "slope_without")
    found = known.averages
    without = {} if found is None else dict(zip(found.names, found.slope_without, strict=True))
    for one in known.question.averages:
        left = without.get(one.economy)
        yield (
            "average",
            one.economy,
            one.driver,
            one.response,
            one.first,
            one.last,
            None if left is None else float(left),
        )
    if found is None:
        return
    most = found.names.index(found.most_telling)
    for part, outline in (
        ("line", found.line),
        ("line without the most telling", found.line_without(most)),
        ("ellipse", found.ellipse),
    ):
        name = found.most_telling if part.endswith("telling") else ""
        for driver, response in outline.tolist():
            yield (part, name, driver, response, None, None, None)
    for name, value in (
        ("slope", found.slope),
        ("slope low", found.slope_interval[0]),
        ("slope high", found.slope_interval[1]),
        ("intercept", found.intercept),
        ("correlation", found.correlation),
    ):
        yield (name, "", value, None, None, None, None)


VIEWS: dict[str, Callable[[Scan], Rows]] = {
    "pairs": _pairs,
    "surfaces": _surfaces,
    "shifts": _shifts,
    "averages": _averages,
}
SEARCHED = ("pairs", "shifts")
MANY = 60  # pairs beyond which neither page nor file begins to search by itself
