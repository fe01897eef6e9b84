"""Every axis of every chart of every page says what it counts and in what unit."""

import json
from functools import cache

import pytest

from app.compute import Bridge
from app.demo import demo_releases
from app.page_table import PAGES
from app.pages import lag, lag_evidence
from app.state import ViewState
from app.workspace import Workspace

# Words that name a unit, or a number that has none.
UNITS = (
    "percent",
    "%",
    "point",
    "month",
    "quarter",
    "year",
    "0 to 100",
    "of 100",
    "rank",
    "density",
    "quantile",
    "correlation",
    "per unit",
    "index",
    "2015 = 100",
    "probability",
)
DRAWN = [
    page for page in PAGES if page is lag or hasattr(page, "answer")
]  # with charts of their own


@cache
def bridge():
    return Bridge(Workspace(demo_releases()))


@cache
def figures_of(page):
    """The charts of a page as plain data, by view."""
    if page is lag:
        state = ViewState()
        *_, data = lag_evidence.answer(state, bridge(), tuple(lag_evidence.FOLDS))
        drawn = lag.charts(lag.view(state, bridge()), bridge()).items()
        return {view: json.loads(chart.to_json()) for view, chart in drawn} | data["figures"]
    charts = page.answer(ViewState(), bridge()).charts
    return {
        view: json.loads(chart if isinstance(chart, str) else chart.to_json())
        for view, chart in charts.items()
    }


def kind_of(figure, name):
    """What an axis counts: date, category or number, from its traces where it does not say."""
    axis = figure["layout"].get(name, {})
    if axis.get("type"):
        return axis["type"]
    short = name.replace("axis", "")
    letter = short[0]
    values = [
        trace.get(letter)
        for trace in figure["data"]
        if (trace.get(f"{letter}axis") or letter) == short
    ]
    for given in values:
        first = given[0] if isinstance(given, list) and given else None
        if isinstance(first, str):
            return "date" if first[:4].isdigit() and first[4:5] == "-" else "category"
    return "number"


def titles_of(figure):
    """(axis, title) of each axis that counts something and is shown."""
    found = []
    used = {"xaxis", "yaxis"} | {
        name for name in figure["layout"] if name[:5] in ("xaxis", "yaxis")
    }
    for name in sorted(used):
        axis = figure["layout"].get(name, {})
        if axis.get("visible") is False or axis.get("showticklabels") is False:
            continue
        if kind_of(figure, name) in ("date", "category"):
            continue
        found.append((name, (axis.get("title") or {}).get("text", "")))
    return found


@pytest.mark.parametrize("page", DRAWN, ids=lambda p: p.TITLE)
def test_every_axis_that_counts_names_its_unit(page):
    figures = figures_of(page)
    lacking = {
        (view, axis): title
        for view, figure in figures.items()
        for axis, title in titles_of(figure)
        if not any(unit in title.lower() for unit in UNITS)
    }
    assert lacking == {}


@pytest.mark.parametrize("page", DRAWN, ids=lambda p: p.TITLE)
def test_every_scale_of_colours_names_what_it_shows(page):
    for view, figure in figures_of(page).items():
        for trace in figure["data"]:
            bar = trace.get("colorbar") or (trace.get("marker") or {}).get("colorbar")
            if bar and trace.get("showscale", True):
                assert (bar.get("title") or {}).get("text"), view


def test_the_judge_finds_an_axis_without_a_unit():
    bare = {"data": [{"x": [1, 2], "y": [3, 4]}], "layout": {"xaxis": {"title": {"text": "shift"}}}}
    assert titles_of(bare) == [("xaxis", "shift"), ("yaxis", "")]
    dated = {"data": [{"x": ["2024-01-01"], "y": [1]}], "layout": {}}
    assert titles_of(dated) == [("yaxis", "")]
