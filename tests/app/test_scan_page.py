"""The Scan page: words, charts and tables hold the numbers of the result; many pairs wait."""

import json
import math
from dataclasses import replace

import numpy as np
import pytest

from analytics.panel import panel_surface
from app.compute import Bridge
from app.demo import demo_releases
from app.figures.scan import surface_maps
from app.pages import scan as page
from app.scan import exports
from app.scan.bridge import scan, scan_work
from app.scan.exports import csv_export
from app.scan.league import league, map_chart_parts
from app.server import build_app
from app.state import ViewState
from app.words import p_words, signed
from app.workspace import Workspace
from tests.app.components import nodes, words
from tests.app.panels import SMALL, panel_workspace
from tests.exported import records

STATE = replace(ViewState(), **SMALL)
SLOPES = {"Ardenquay": 1.0, "Belmorrow": 0.0, "Corvessa": 0.6, "Dunmarrel": 0.0, "Elquire": 0.8}


@pytest.fixture(scope="module")
def bridge():
    return Bridge(panel_workspace(SLOPES))


@pytest.fixture(scope="module")
def done(bridge):
    """The page once every pair is searched."""
    bridge.jobs.complete(scan_work(STATE, bridge))
    return page.answer(STATE, bridge)


def rows_of(bridge, view, query):
    return records(csv_export(view, query, bridge)[1])


def test_before_the_search_the_maps_and_averages_are_there_and_the_table_waits():
    shown = page.answer(STATE, Bridge(panel_workspace(SLOPES)))
    assert shown.jobs == {"scan": "Searching 5 pairs"}
    assert set(shown.charts) == {"surfaces", "averages"}
    assert "comes once every pair is searched" in words(shown.words["pairs"])
    assert "5 pairs to be searched" in shown.verdict
    assert len(nodes(shown.words["maps"], "Canvas")) == 5


def test_the_maps_have_the_correlations_of_the_surfaces_in_hundredths(done, bridge):
    figure = surface_maps(*map_chart_parts(scan(STATE, bridge)))
    assert done.charts["surfaces"] == figure.to_json()
    maps = [trace for trace in figure.data if trace.type == "heatmap"]
    rings = [trace for trace in figure.data if trace.type == "scatter"]
    known = scan(STATE, bridge)
    pairs = {pair.names: pair for pair in known.question.pairs}
    for trace, ring, row in zip(maps, rings, league(known), strict=True):
        surface = panel_surface(pairs[row.scan.names])
        assert trace.z.dtype == np.int8
        np.testing.assert_allclose(trace.z / 100.0, surface.correlation, atol=0.005)
        assert (ring.x[0], ring.y[0]) == (row.scan.shift, row.scan.window)
    assert figure.layout.meta["stamp"] == done.words["maps"].to_plotly_json()["props"]["data-stamp"]
    assert "months, r +" in figure.layout.annotations[0].text


def test_the_table_and_the_small_maps_lead_to_the_lag_page(done, bridge):
    known = scan(STATE, bridge)
    table = nodes(done.words["pairs"], "Tr")[1:]
    tiles = nodes(done.words["maps"], "Link")
    for line, tile, row in zip(table, tiles, league(known), strict=True):
        (link,) = nodes(line, "Link")
        assert link.href == tile.href
        state = ViewState.from_query(link.href.partition("?")[2])
        assert state.driver == f"{row.scan.economy}: Broad money"
        assert (state.window, state.shift) == (row.scan.window, row.scan.shift)
        assert (state.seed, state.surrogates) == (row.scan.seed, 99)
        shown = words(line)
        for written in (
            row.scan.economy,
            signed(row.scan.shift, 0),
            signed(row.scan.correlation),
            p_words(row.scan.p_search),
            p_words(row.p_scan),
            p_words(row.p_holm),
            f"{100 * row.scan.share:.0f} %",
        ):
            assert written in shown
    assert [line.className for line in table] == ["held"] * 3 + ["not-held"] * 2


def test_the_bars_count_the_pairs_and_the_points_are_the_economies(done, bridge):
    held, others = done.charts["shifts"].data
    assert (sum(held.y), sum(others.y)) == (3, 2)
    known = scan(STATE, bridge)
    points = next(t for t in done.charts["averages"].data if t.name == "economies")
    assert list(points.x) == [one.driver for one in known.question.averages]
    assert list(points.text) == list(SLOPES)
    assert done.charts["averages"].layout.xaxis.title.text == "Broad money, percent a year"
    log = page.answer(replace(STATE, axes="log"), bridge)
    if "averages" in log.charts:
        assert log.charts["averages"].layout.xaxis.type == "log"


def test_every_number_of_the_table_is_in_the_csv(bridge, done):
    known = scan(STATE, bridge)
    rows = {row["economy"]: row for row in rows_of(bridge, "pairs", STATE.to_query())}
    for row in league(known):
        line = rows[row.scan.economy]
        assert float(line["correlation"]) == row.scan.correlation
        assert float(line["p_search"]) == row.scan.p_search
        assert float(line["p_scan"]) == row.p_scan
        assert float(line["p_holm"]) == row.p_holm
        assert float(line["share"]) == row.scan.share
        assert int(line["seed"]) == row.scan.seed
    held = [row for row in rows_of(bridge, "shifts", STATE.to_query()) if row["found"] == "yes"]
    assert sorted(row["economy"] for row in held) == ["Ardenquay", "Corvessa", "Elquire"]
    cells = rows_of(bridge, "surfaces", STATE.to_query())
    assert len(cells) == 5 * 4 * 11
    averages = rows_of(bridge, "averages", STATE.to_query())
    slope = next(row for row in averages if row["part"] == "slope")
    assert float(slope["driver"]) == known.averages.slope
    assert set(done.charts) == {"surfaces", "shifts", "averages"}


def test_the_correction_decides_what_is_found():
    bridge = Bridge(panel_workspace(SLOPES))
    few = replace(STATE, surrogates=60)
    bridge.jobs.complete(scan_work(few, bridge))
    by_bh = page.answer(few, bridge)
    by_holm = page.answer(replace(few, correction="holm"), bridge)
    assert by_bh.jobs == by_holm.jobs == {}  # the same search
    assert by_bh.verdict.startswith("3 of 5 pairs hold")
    assert by_holm.verdict.startswith(
        "None of 5 pairs hold at 5 % once all of them are paid for (Holm)"
    )
    assert "Benjamini-Hochberg leaves 3" in by_holm.verdict
    assert "Holm can find none" in words(by_holm.words["notes"])


def test_many_pairs_wait_to_be_asked_for(monkeypatch):
    monkeypatch.setattr(page, "MANY", 4)
    monkeypatch.setattr(exports, "MANY", 4)
    bridge = Bridge(panel_workspace(SLOPES))
    shown = page.answer(STATE, bridge)
    assert shown.jobs == {}
    (button,) = nodes(shown.words["notes"], "Button")
    assert button.to_plotly_json()["props"]["data-set"] == "begin"
    with pytest.raises(ValueError, match="the pairs must be searched first"):
        csv_export("pairs", STATE.to_query(), bridge)
    assert page.answer(replace(STATE, begin="yes"), bridge).jobs


def test_one_economy_says_how_to_load_more_and_shows_the_invented_panel_when_asked():
    desk = Workspace(placeholder=demo_releases())
    bridge = Bridge(desk)
    shown = page.answer(STATE, bridge)
    assert "One economy is loaded" in words(shown.words["notes"])
    (button,) = nodes(shown.words["notes"], "Button")
    assert button.id == "scan-panel"
    client = build_app(desk).server.test_client()
    headers = {"Sec-Fetch-Site": "same-origin"}
    assert client.post("/scan/panel", headers=headers).status_code == 200
    assert client.post("/scan/panel", headers=headers).status_code == 200  # twice is once
    shown = page.answer(STATE, bridge)
    assert "34 pairs of 31 economies" in shown.sentence
    assert desk.as_of().placeholder
    assert desk.as_of().files == ()  # nothing is stored


def test_the_invented_panel_stays_away_from_files_of_the_users_own():
    desk = panel_workspace({"Ardenquay": 1.0})
    client = build_app(desk).server.test_client()
    answer = client.post("/scan/panel", headers={"Sec-Fetch-Site": "same-origin"})
    assert answer.status_code == 422
    assert len(desk.as_of().series) == 2
    shown = page.answer(STATE, Bridge(desk))
    assert nodes(shown.words["notes"], "Button") == []
    assert "must have at least 4 economies" in words(shown.words["averages-words"])


def test_the_work_comes_pair_by_pair():
    client = build_app(panel_workspace(SLOPES)).server.test_client()
    address = f"/scan/work/scan?{STATE.to_query()}"
    seen = [json.loads(client.get(address).data) for _ in range(5)]
    assert [one["done"] for one in seen] == [1, 2, 3, 4, 5]
    assert {one["total"] for one in seen} == {5}
    text_of = client.get(f"/export/scan/pairs.csv?{STATE.to_query()}")
    assert text_of.status_code == 200
    assert b"Ardenquay" in text_of.data


def test_a_cell_without_a_correlation_is_left_out_of_its_map():
    bridge = Bridge(panel_workspace({"Ardenquay": 1.0}))
    (pair,) = scan(STATE, bridge).question.pairs
    surface = panel_surface(pair)
    holed = replace(surface, correlation=np.where(surface.correlation > 0.5, np.nan, 0.25))
    (trace,) = surface_maps([holed], [("a", "")], [None], "stamp").data
    assert trace.z.dtype == np.float32
    assert set(trace.z[np.isfinite(trace.z)].tolist()) == {25.0}
    assert any(math.isnan(value) for value in trace.z.ravel().tolist())


def test_a_page_without_a_pair_is_one_sentence():
    with pytest.raises(ValueError, match="no economy in the files has both"):
        page.answer(replace(STATE, drivers=""), Bridge(Workspace()))
    laid = page.layout("?surrogates=0", Bridge(Workspace()))
    assert "Surrogates must be a whole number" in words(laid)
