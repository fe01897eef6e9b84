"""The table of pairs and the small maps of the Scan page; both lead to the Lag page."""

from collections.abc import Collection
from typing import Any

from dash import dcc, html

from analytics.panel import PanelPair
from app.pages.tables import sorter
from app.scan.bridge import Scan
from app.scan.league import TOP_ROWS, LeagueRow, lag_address, league
from app.scan.words import map_label, pair_words, waiting_words
from app.words import p_words, plain, runs_words, signed

COLUMNS = (
    ("economy", "Pair"),
    ("window", "Window"),
    ("shift", "Best shift"),
    ("correlation", "Correlation"),
    ("p_search", "Search-adjusted p"),
    ("p_scan", "p, Benjamini-Hochberg"),
    ("p_holm", "p, Holm"),
    ("", "Shifts that fit as well"),
    ("share", "Rests on one episode"),
)


def league_table(known: Scan) -> list[Any]:
    """Return the pairs in the order of the state, a button a column to order by it."""
    rows, state = league(known), known.question.state
    if not rows:
        return [html.P(waiting_words(known), className="quiet")]
    loaded = {pair.names for pair in known.question.pairs}
    cut = rows if state.league_rows == "all" or len(rows) <= TOP_ROWS + 1 else rows[:TOP_ROWS]
    more: list[Any] = []
    if len(rows) > TOP_ROWS + 1:
        every = len(cut) == len(rows)
        label = f"Show the first {TOP_ROWS}" if every else f"Show all {len(rows)}"
        value = "top" if every else "all"
        more = [
            html.Button(label, type="button", **{"data-set": "league_rows", "data-value": value})
        ]
    return [
        html.Table(
            [
                html.Thead(html.Tr([_head(*column, state.league) for column in COLUMNS])),
                html.Tbody([_row(row, known, loaded) for row in cut]),
            ],
            className="table league",
        ),
        *([html.P(more)] if more else []),
    ]


def map_list(
    known: Scan, pairs: tuple[PanelPair, ...], best: list[tuple[int, int] | None], stamp: str
) -> html.Ul:
    """Return the small maps, painted by assets/scan.js, each a link to its pair."""
    state = known.question.state
    scans = {row.scan.names: row for row in league(known)}
    items = []
    for place, (pair, cell) in enumerate(zip(pairs, best, strict=True)):
        row = scans.get(pair.names)
        windows, shifts = pair.windows, pair.shifts
        ring: list[Any] = []
        if cell is not None:
            left = (cell[1] - shifts[0] + 0.5) / len(shifts)
            up = (cell[0] - windows[0] + 0.5) / len(windows)
            at = {"left": f"{100 * left:.2f}%", "bottom": f"{100 * up:.2f}%"}
            ring = [html.Span(className="ring", style=at)]
        zero = []
        if shifts[0] < 0 < shifts[-1]:
            where = {"left": f"{100 * (0.5 - shifts[0]) / len(shifts):.2f}%"}
            zero = [html.Span(className="zero", style=where)]
        canvas = html.Canvas(
            width=len(shifts),
            height=len(windows),
            **{"data-map": str(place), "aria-hidden": "true"},
        )
        items.append(
            html.Li(
                dcc.Link(
                    [
                        html.Span([canvas, *zero, *ring], className="tile"),
                        html.Span(
                            pair_words(row.scan if row else pair, known.question),
                            className="tile-name",
                        ),
                        html.Span(
                            map_label(row.scan, row.p(known), known) if row else "to be searched",
                            className="tile-words",
                        ),
                    ],
                    href=lag_address(row.scan if row else pair, state),
                    className="held" if row and row.found else "",
                )
            )
        )
    return html.Ul(items, className="small-maps", **{"data-stamp": stamp})


def _head(column: str, words: str, sorted_by: str) -> html.Th:
    if not column:
        return html.Th(words, scope="col")
    first = "down" if column in ("correlation", "share") else "up"
    return sorter("league", column, words, sorted_by, first=first, numeric=column != "economy")


def _row(row: LeagueRow, known: Scan, loaded: Collection[tuple[str, str, str]]) -> html.Tr:
    scan, state = row.scan, known.question.state
    name: Any = pair_words(scan, known.question)
    if known.question.opened is None or scan.names in loaded:
        name = dcc.Link(name, href=lag_address(scan, state))
    if scan.refused:
        return html.Tr(
            [
                html.Th(name, scope="row"),
                html.Td(
                    f"not searched: {scan.refused}", colSpan=len(COLUMNS) - 1, className="quiet"
                ),
            ]
        )
    fits = "–"
    if scan.shift_set:
        fits = runs_words(list(scan.shift_set)) if scan.identified else "lag not identified"
    numbers = (
        plain(scan.window, 0),
        signed(scan.shift, 0),
        signed(scan.correlation),
        p_words(scan.p),
        p_words(row.p_scan),
        p_words(row.p_holm),
    )
    share = html.Td(f"{100 * scan.share:.0f} %", className="numeric", title=scan.episode)
    return html.Tr(
        [
            html.Th(name, scope="row"),
            *[html.Td(number, className="numeric") for number in numbers],
            html.Td(fits, title=f"shifts in {known.question.noun}s"),
            share,
        ],
        className="held" if row.found else "not-held",
    )
