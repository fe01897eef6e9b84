"""Tables of a page, and how they reach the browser: described in one attribute, built by a script.

Dash's renderer takes seconds for some hundreds of rows; assets/tables.js takes milliseconds. Pages
write tables as components, which a brief reads; only what goes to a browser is `packed`. A table
of several pages says so in its attributes (`page_of`), and the script asks the server for others.
"""

import json
from collections.abc import Callable, Iterable, Sequence
from copy import copy
from dataclasses import dataclass
from typing import Any, TypeVar

from dash import html
from dash.development.base_component import Component

ROWS = 60  # a page of a table
FEW = 30  # rows among which nobody needs to look for one
T = TypeVar("T")
_NAMES = {"className": "class", "htmlFor": "for", "colSpan": "colspan", "rowSpan": "rowspan"}


def table(
    head: Sequence[str], rows: Sequence[Sequence[Any]], label: str, *, cards: bool = True
) -> html.Table:
    """Return a table; with `cards` it becomes a list of cards where the page is narrow."""
    names = [name or "Picture" for name in head]
    return html.Table(
        [
            html.Thead(
                html.Tr(
                    [
                        html.Th(
                            name or html.Span("Picture", className="hidden-label"),
                            scope="col",
                            role="columnheader",
                        )
                        for name in head
                    ],
                    role="row",
                ),
                role="rowgroup",
            ),
            html.Tbody(
                [
                    html.Tr(
                        [
                            html.Td(cell, role="cell", **{"data-label": name})
                            for name, cell in zip(names, row, strict=True)
                        ],
                        role="row",
                    )
                    for row in rows
                ],
                role="rowgroup",
            ),
        ],
        className="table cards" if cards else "table",
        role="table",
        **{"aria-label": label},
    )


def sorter(
    field: str, column: str, words: str, sorted_by: str, *, first: str, numeric: bool
) -> html.Th:
    """Return the head of a column whose button orders the table by it, or turns the order round.

    `field` of the state holds column and way, as `sorted_by` does; the button of another column
    orders `first` "up" or "down".
    """
    by, _, way = sorted_by.rpartition("-")
    here = column == by
    turned = {"up": "down", "down": "up"}[way] if here else first
    sign = {"up": "\N{NO-BREAK SPACE}▲", "down": "\N{NO-BREAK SPACE}▼"}[way] if here else ""
    return html.Th(
        html.Button(
            [words, html.Span(sign, **{"aria-hidden": "true"})],
            type="button",
            className="sorter",
            **{"data-set": field, "data-value": f"{column}-{turned}"},
        ),
        scope="col",
        className="numeric" if numeric else "",
        **{"aria-sort": {"up": "ascending", "down": "descending"}[way] if here else "none"},
    )


def packed(words: Any) -> Any:
    """Return components with every table packed that holds nothing but HTML and links.

    Examples
    --------
    >>> packed(html.Table([html.Tr(html.Td("1"))], className="table")).to_plotly_json()["props"]
    {'className': 'packed', 'data-table': '["table",{"class":"table"},["tr",{},["td",{},"1"]]]'}
    """
    if isinstance(words, list | tuple):
        return [packed(each) for each in words]
    if not isinstance(words, Component):
        return words
    if words._type == "Table":
        found = described(words)
        if found is None:
            return words
        text = json.dumps(found, ensure_ascii=False, separators=(",", ":"))
        return html.Div(className="packed", **{"data-built": text})
    inside = getattr(words, "children", None)
    if isinstance(inside, list | tuple | Component):
        words = copy(words)  # the answer may be kept, and a brief reads it as it was written
        words.children = packed(inside)
    return words


def described(part: Any) -> Any:
    """Return a component as text or ``[tag, attributes, *children]``; None where it cannot be."""
    if not isinstance(part, Component):
        return str(part)
    props = dict(part.to_plotly_json()["props"])
    tag = part._type.lower()
    if tag == "link":
        tag, props["data-route"] = "a", "yes"  # followed without a new load
    elif part._namespace != "dash_html_components":
        return None
    inside = props.pop("children", None)
    children = inside if isinstance(inside, list | tuple) else [inside]
    found = [tag, _attributes(props)]
    for each in _flat(children):
        one = described(each)
        if one is None:
            return None
        found.append(one)
    return found


def _flat(parts: Any) -> list[Any]:
    flat = []
    for each in parts:
        if isinstance(each, list | tuple):
            flat += _flat(each)
        elif each is not None and each != "":
            flat.append(each)
    return flat


def _attributes(props: dict[str, Any]) -> dict[str, Any]:
    found = {}
    for name, value in props.items():
        if value is None or value is False:
            continue
        found[_NAMES.get(name, name.lower() if name != "style" else name)] = value
    return found


@dataclass(frozen=True)
class Page:
    """What of a long list is shown: the words looked for, and the page from 1."""

    find: str = ""
    at: int = 1


FIRST = Page()


def page_of(
    items: Sequence[T],
    page: Page,
    words: Callable[[T], str],
    draw: Callable[[Sequence[T]], html.Table],
    address: str,
    noun: str,
) -> html.Table:
    """Return the table of one page of a list, marked so that the browser can ask for the others.

    `words` gives what is searched in an item; each word looked for must be in it. `draw` makes
    the table of the chosen items; `noun` is what one item is called, such as "a series". A page
    beyond the last one is the last one. A list of `FEW` items is drawn whole and not marked.
    """
    wanted = page.find.casefold().split()
    found = [one for one in items if all(each in words(one).casefold() for each in wanted)]
    pages = max(1, -(-len(found) // ROWS))
    at = min(max(1, page.at), pages)
    table = draw(found[(at - 1) * ROWS : at * ROWS])
    if len(items) > FEW:
        marks = {
            "address": address,
            "noun": noun,
            "total": len(items),
            "found": len(found),
            "at": at,
            "pages": pages,
            "rows": ROWS,
        }
        for name, value in marks.items():
            setattr(table, f"data-{name}", str(value))
    return table


def names_select(
    names: Iterable[str], current: str, *, first: str = "", **marks: str
) -> html.Select:
    """Return a drop-down of series names; assets/tables.js fills it, a thousand names at once.

    `first` is what stands before the names where none is chosen.
    """
    pairs = [*([("", first)] if first else []), *((name, name) for name in names)]
    text = json.dumps(pairs, ensure_ascii=False, separators=(",", ":"))
    return html.Select(**{**marks, "data-options": text, "data-value": current})
