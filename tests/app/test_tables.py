"""Tables as pages write them, and as a browser gets them."""

import json

import pytest
from dash import dcc, html

from app.pages.tables import FEW, FIRST, ROWS, Page, described, packed, page_of, table


def listed(count, page=FIRST):
    return page_of(
        [f"row {k}" for k in range(count)],
        page,
        str,
        lambda chosen: table(("Name",), [(one,) for one in chosen], "Names"),
        "/rows/names",
        "a name",
    )


def shown(one):
    return [row[2][2] for row in described(one)[3][2:]]


def test_components_are_described_with_their_text_and_attributes_and_nothing_else():
    button = html.Button(
        ["Go ", html.B("on"), None],
        className="main",
        hidden=False,
        disabled=True,
        **{"data-act": "", "aria-label": "<b>"},
    )
    assert described(html.Td([button, 3], colSpan=2)) == [
        "td",
        {"colspan": 2},
        [
            "button",
            {"class": "main", "disabled": True, "aria-label": "<b>", "data-act": ""},
            "Go ",
            ["b", {}, "on"],
        ],
        "3",
    ]


def test_tables_are_packed_wherever_they_stand_and_the_page_keeps_its_own():
    page = html.Div([html.P("words"), html.Details([table(("A",), [("<i>",)], "One")])])
    sent = packed([page])
    holder = sent[0].children[1].children[0]
    assert json.loads(getattr(holder, "data-built")) == described(page.children[1].children[0])
    assert page.children[1].children[0]._type == "Table"  # a brief reads this one
    assert sent[0].children[0].children == "words"


def test_links_of_the_router_stay_links_and_what_is_no_html_is_left_to_dash():
    linked = html.Table(html.Tbody(html.Tr(html.Td(dcc.Link("pair", href="/lag?shift=3")))))
    link = described(linked)[2][2][2][2]
    assert link == ["a", {"href": "/lag?shift=3", "data-route": "yes"}, "pair"]
    charted = html.Table(html.Tbody(html.Tr(html.Td(dcc.Graph()))))
    assert packed(charted) is charted


@pytest.mark.parametrize("count", [0, 1, FEW])
def test_a_short_list_is_whole_and_not_marked(count):
    one = listed(count)
    assert shown(one) == [f"row {k}" for k in range(count)]
    assert not hasattr(one, "data-address")


@pytest.mark.parametrize(
    ("page", "first", "last", "found"),
    [
        (FIRST, 0, ROWS - 1, 150),
        (Page(at=3), 120, 149, 150),
        (Page(at=99), 120, 149, 150),
        (Page(at=-5), 0, ROWS - 1, 150),
        (Page("ROW 14", 2), 14, 149, 12),
    ],
)
def test_pages_of_a_long_list(page, first, last, found):
    one = listed(150, page)
    rows = shown(one)
    assert (rows[0], rows[-1]) == (f"row {first}", f"row {last}")
    assert getattr(one, "data-found") == str(found)
    assert getattr(one, "data-total") == "150"
