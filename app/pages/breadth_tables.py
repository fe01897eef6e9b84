"""The two tables of the Breadth page: components, and how each core measure tracked."""

from typing import Any

from dash import html

from app.breadth.bridge import Breadth
from app.breadth.table import TOP_ROWS, Row, rows
from app.breadth.words import over_words, tracking_words
from app.pages.tables import sorter
from app.words import plain, signed


def component_table(shown: Breadth) -> list[Any]:
    """Return the components in the order of the state, a button a column to order by it."""
    over, noun = over_words(shown), shown.noun
    columns = (
        ("name", "Component"),
        ("weight", "Weight, %"),
        ("rate", f"{over[0].upper()}{over[1:]} rate, %"),
        *((("rate_1m", f"One-{noun} rate, %"),) if shown.span > 1 else ()),
        ("rank", "Rank in own history"),
        ("points", f"Contribution, {over}"),
        *((("points_1m", f"Contribution, one-{noun}"),) if shown.span > 1 else ()),
    )
    head = [
        sorter(
            "sort",
            column,
            words,
            shown.state.sort,
            first="up" if column == "name" else "down",
            numeric=column != "name",
        )
        for column, words in columns
    ]
    listed = rows(shown)
    cut = listed if shown.state.rows == "all" or len(listed) <= TOP_ROWS + 1 else listed[:TOP_ROWS]
    kept = [column for column, _ in columns]
    chosen = [row.name for row in listed if row.left_out]
    body = [html.Tr([*_cells(row, kept), html.Td(_leave_out(row, chosen))]) for row in cut]
    rest = listed[len(cut) :]
    if rest:
        body.append(_rest_row(rest, kept))
    more: list[Any] = []
    if len(listed) > TOP_ROWS + 1:
        value = "all" if rest else "top"
        label = f"Show all {len(listed)}" if rest else f"Show the first {TOP_ROWS}"
        more = [_set_button(label, "rows", value)]
    restored = (
        [_set_button("Leave out food and energy again", "excluded", "")]
        if shown.state.excluded
        else []
    )
    return [
        html.Table(
            [
                html.Thead(html.Tr([*head, html.Th("Exclusion", scope="col")])),
                html.Tbody(body),
            ],
            className="table components",
        ),
        html.P([*more, " ", *restored]),
    ]


def _cells(row: Row, columns: list[str]) -> list[Any]:
    shape = {
        "weight": lambda v: plain(v, 2),
        "rate": lambda v: signed(v, 1),
        "rate_1m": lambda v: signed(v, 2),
        "rank": lambda v: plain(v, 0),
        "points": lambda v: signed(v, 2),
        "points_1m": lambda v: signed(v, 3),
    }
    cells: list[Any] = [html.Th(row.name, scope="row")]
    for column in columns[1:]:
        value = getattr(row, column)
        text = "–" if value != value else shape[column](value)
        cells.append(html.Td(text, className="numeric"))
    return cells


def _rest_row(rest: list[Row], columns: list[str]) -> html.Tr:
    """Sum up the rows that are not listed: weights and contributions add, rates do not."""
    sums = {
        column: sum(v for row in rest if (v := getattr(row, column)) == v)
        for column in ("weight", "points", "points_1m")
    }
    cells: list[Any] = [html.Th(f"the other {len(rest)}", scope="row")]
    for column in columns[1:]:
        text = ""
        if column in sums:
            digits = {"weight": 2, "points": 2, "points_1m": 3}[column]
            text = (plain if column == "weight" else signed)(sums[column], digits)
        cells.append(html.Td(text, className="numeric"))
    return html.Tr([*cells, html.Td("")], className="rest")


def _leave_out(row: Row, chosen: list[str]) -> html.Button:
    kept = [name for name in chosen if name != row.name]
    wanted = kept if row.left_out else [*chosen, row.name]
    return html.Button(
        "left out" if row.left_out else "leave out",
        type="button",
        className="leave-out",
        title=f"Put {row.name} back" if row.left_out else f"Leave {row.name} out",
        **{
            "data-set": "excluded",
            "data-value": "|".join(wanted) or "none",
            "aria-pressed": str(row.left_out).lower(),
            "aria-label": f"{row.name} is left out" if row.left_out else f"Leave out {row.name}",
        },
    )


def _set_button(words: str, field: str, value: str) -> html.Button:
    return html.Button(words, type="button", **{"data-set": field, "data-value": value})


def tracking_table(shown: Breadth) -> list[Any]:
    """Return how near each measure came to the trend and to what followed."""
    if shown.weighted is None:
        return [html.P(f"Nothing here: {shown.refusal}.", className="quiet")]
    found = shown.weighted.tracking
    head = (
        "Measure",
        "Distance from the trend",
        "Mean difference",
        f"Distance from the next {shown.per_year} {shown.noun}s"
        if shown.per_year > 1
        else "Distance from the next year",
        "Mean difference",
    )
    body = []
    for place, name in enumerate(found.names):
        values = (
            (found.trend_rmse, plain),
            (found.trend_bias, signed),
            (found.next_rmse, plain),
            (found.next_bias, signed),
        )
        cells = [
            html.Td("–" if (v := float(column[place])) != v else words(v, 2), className="numeric")
            for column, words in values
        ]
        body.append(html.Tr([html.Th(name, scope="row"), *cells]))
    return [
        html.P(tracking_words(shown), className="view-words"),
        html.Table(
            [
                html.Thead(
                    html.Tr(
                        [
                            html.Th(words, scope="col", className="numeric" if i else "")
                            for i, words in enumerate(head)
                        ]
                    )
                ),
                html.Tbody(body),
            ],
            className="table tracking",
        ),
        html.P(
            "Distances are root mean squares in percentage points a year; the trend uses later "
            "months and was not known at the time.",
            className="quiet",
        ),
    ]
