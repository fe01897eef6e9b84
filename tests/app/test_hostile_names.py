"""Hostile names in the files that pages give, over all pages and views there are."""

import csv
import io
import re

import pytest

from app.compute import Bridge
from app.page_table import EXPORTS, PAGES
from app.state import ViewState
from tests.app.components import nodes
from tests.exported import rows_of
from tests.hostile import FORMULA, LINK, NAMES, workspace

NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")
RUNS = tuple("=+-@\t\r＝＋－＠")  # what makes a spreadsheet take a cell for a formula


@pytest.fixture(scope="module")
def bridge():
    return Bridge(workspace())


@pytest.fixture(scope="module")
def query(bridge):
    names = list(bridge.in_view(ViewState()).series)
    return ViewState(
        driver=names[0], response=names[2], series=names[2], surrogates=19, draws=99, shift=6
    ).to_query()


def views_of(component):
    """The views that a page offers as CSV, read from its own buttons."""
    all_of = nodes(component)
    marks = (getattr(one, "data-csv", None) or getattr(one, "data-saves", None) for one in all_of)
    return [mark for mark in marks if mark]


def test_the_names_are_cut_and_kept_as_text(bridge):
    names = list(bridge.in_view(ViewState()).series)
    assert FORMULA in names
    assert max(map(len, names)) <= 200
    assert len([name for name in names if not name.startswith("Weight of")]) == len(NAMES)


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.TITLE)
def test_no_cell_of_any_file_is_a_formula_and_numbers_stay_numbers(page, bridge, query):
    name = page.PATH.strip("/")
    if name not in EXPORTS:
        pytest.skip("this page gives no tables")
    views = views_of(page.layout(f"?{query}", bridge))
    assert views
    given, numbers = 0, 0
    for view in views:
        try:
            file, text = EXPORTS[name](view, query, bridge)
        except ValueError:  # this state has no such view
            continue
        given += 1
        assert re.fullmatch(r"[a-z0-9-]+\.csv", file), file
        for row in rows_of(text):
            for cell in row:
                assert not cell.startswith(RUNS) or NUMBER.fullmatch(cell), (view, cell)
                numbers += bool(NUMBER.fullmatch(cell))
        for line in text.split("\r\n"):
            if line.startswith("#"):
                assert not line.startswith(("#=", "#@"))
    assert given >= len(views) // 2, f"{given} of {len(views)} files"
    assert numbers > 0


def test_defused_text_is_still_there_to_read(bridge):
    _, text = EXPORTS["data"]("series", "", bridge)
    cells = {cell for row in csv.reader(io.StringIO(text)) for cell in row}
    assert f"'{FORMULA}" in cells
    assert any(cell.startswith(f"'{LINK[:8]}") for cell in cells)
