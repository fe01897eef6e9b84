"""The pairs of a scan in the order asked for, and those whose maps are drawn."""

import hashlib
from dataclasses import dataclass
from typing import Any

from analytics.long_averages import LongAverages
from analytics.panel import LEVEL, PairScan, PanelPair, pair_fingerprint, panel_surface
from analytics.surface import LagSurface
from app.scan.bridge import Scan
from app.scan.economies import series_name
from app.scan.words import map_label, pair_words
from app.state import ViewState

TOP_ROWS = 40
MOST_MAPS = 36
CARRIED = (  # fields that the Lag page shares with a scan
    "growth",
    "first",
    "last",
    "season",
    "meet",
    "windows",
    "shifts",
    "surrogates",
    "as_of",
)


@dataclass(frozen=True)
class LeagueRow:
    """One line of the table of pairs; numbers are nan until they are there."""

    scan: PairScan
    p_scan: float
    p_holm: float
    found: bool

    def p(self, known: Scan) -> float:
        """Return the adjusted p that decides whether the pair is found."""
        return self.p_scan if known.question.state.correction == "bh" else self.p_holm


def league(known: Scan) -> list[LeagueRow]:
    """Return every pair in the order of the state; what has no number comes last."""
    panel, state = known.panel, known.question.state
    if panel is None:
        return []
    rows = [
        LeagueRow(scan, p_scan, p_holm, (p_scan if state.correction == "bh" else p_holm) <= LEVEL)
        for scan, p_scan, p_holm in zip(
            panel.pairs, panel.p_scan.tolist(), panel.p_holm.tolist(), strict=True
        )
    ]
    column, _, way = state.league.rpartition("-")

    def value(row: LeagueRow) -> Any:
        if column in ("p_scan", "p_holm"):
            return getattr(row, column)
        return row.scan.p if column == "p_search" else getattr(row.scan, column)

    there = [row for row in rows if not row.scan.refused]
    gone = [row for row in rows if row.scan.refused]
    # Among equal p-values, which a finite number of surrogates makes common, the strongest first.
    there.sort(key=lambda row: -abs(row.scan.correlation))
    if column == "economy":
        there = [*there, *gone]
        gone = []
    there.sort(key=value, reverse=way == "down")
    return [*there, *gone]


def drawn_pairs(known: Scan) -> tuple[PanelPair, ...]:
    """Return the pairs whose maps are drawn: the first ones of the table."""
    by_names = {pair.names: pair for pair in known.question.pairs}
    names = [row.scan.names for row in league(known)] or list(by_names)
    return tuple(by_names[each] for each in names if each in by_names)[:MOST_MAPS]


def lag_address(scan: PairScan | PanelPair, state: ViewState) -> str:
    """Return the address that opens a pair on the Lag page, at its best cell once it is known.

    The pair's own seed goes along, so that the search there gives the p of the table.
    """
    carried = {name: getattr(state, name) for name in CARRIED}
    if isinstance(scan, PairScan):
        carried["seed"] = scan.seed
        if not scan.refused:
            carried |= {"window": scan.window, "shift": scan.shift}
    sides = {"driver": scan.driver, "response": scan.response}
    named = {side: series_name(scan.economy, name) for side, name in sides.items()}
    return f"/lag?{ViewState(**named, **carried).to_query()}"


def shift_bins(known: Scan) -> tuple[int, list[tuple[float, int, int]], tuple[int, int]]:
    """Return how many pairs have their best shift where.

    These are the width of a bin; middle, pairs found and others of each bin; and the shifts that
    were searched, lowest and highest.

    Bins are three months wide, one period for quarters and years; shift 0 is the middle of one.
    """
    rows = [row for row in league(known) if not row.scan.refused]
    width = 3 if known.question.noun == "month" else 1
    counts: dict[int, list[int]] = {}
    for row in rows:
        middle = round(row.scan.shift / width) * width
        counts.setdefault(middle, [0, 0])[0 if row.found else 1] += 1
    ends = [end for pair in known.question.pairs for end in (pair.shifts[0], pair.shifts[-1])]
    ends += [row.scan.shift for row in rows]
    span = min(ends, default=0), max(ends, default=0)
    return width, [(float(middle), *counts[middle]) for middle in sorted(counts)], span


def named_economies(found: LongAverages) -> tuple[str, ...]:
    """Return the economies that the chart of averages names: all of a few, else the outer ones."""
    if len(found.names) <= 12:
        return found.names
    outer = {found.most_telling}
    for side in (found.driver, found.response):
        outer |= {found.names[int(side.argmin())], found.names[int(side.argmax())]}
    return tuple(name for name in found.names if name in outer)


def map_chart_parts(
    known: Scan,
) -> tuple[list[LagSurface], list[tuple[str, str]], list[tuple[int, int] | None], str]:
    """Return surfaces, titles and best cells of the maps drawn, and a stamp that names them."""
    rows = {row.scan.names: row for row in league(known)}
    pairs = drawn_pairs(known)
    titles, best = [], []
    for pair in pairs:
        row = rows.get(pair.names)
        name = pair_words(pair, known.question)
        titles.append((name, "" if row is None else map_label(row.scan, row.p(known), known)))
        best.append(None if row is None else (row.scan.window, row.scan.shift))
    marks = [titles, best, known.question.settings, [pair_fingerprint(pair) for pair in pairs]]
    stamp = hashlib.sha256(repr(marks).encode("utf-8", "surrogatepass")).hexdigest()[:12]
    return [panel_surface(pair) for pair in pairs], titles, best, stamp
