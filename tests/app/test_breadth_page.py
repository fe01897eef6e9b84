"""The Breadth page: words, charts, table, files and command say the numbers of the result."""

import json
from dataclasses import replace
from functools import partial

import numpy as np
import pytest

from app.breadth.bridge import breadth
from app.breadth.exports import VIEWS, csv_export, view_text
from app.breadth.fields import BREADTH_VIEWS, SORTED_BY
from app.breadth.table import TOP_BARS, TOP_PARTS, TOP_ROWS, bars, parts, rows
from app.breadth.words import adding_up, sentence, verdict
from app.compute import Bridge
from app.demo import demo_releases
from app.figures import breadth as figures
from app.pages import breadth as page
from app.places import bundled
from app.server import build_app
from app.state import StateError, ViewState
from app.workspace import Workspace
from tests.app.baskets import SHARES, basket, prices_of, series_of, usual, weights_of
from tests.app.components import nodes, words
from tests.exported import rows_of


@pytest.fixture(scope="module")
def demo():
    return Bridge(Workspace(placeholder=demo_releases()))


@pytest.fixture(scope="module")
def shown(demo):
    return breadth(ViewState(), demo)


def many(count=60):
    names = [f"{i:02d} Item <b>{i}</b>" for i in range(count)]
    weights = np.random.default_rng(3).uniform(5, 25, (3, count))
    weights *= 1000 / weights.sum(axis=1, keepdims=True)
    series = series_of(prices_of(30, components=count), names=names)
    return basket(series, weights_of(weights, names=names))


# Words ---------------------------------------------------------------------------------------


def test_the_headline_counts_and_names_the_largest(shown):
    rose = int((shown.rates[-1] > 0).sum())
    assert sentence(shown) == (
        f"Prices of {rose} of 12 components rose over the 12 months to Oct 2026; Housing and"
        f" energy gave {shown.weighted.points[-1].max():.1f} of the {shown.rate[-1]:.1f} points."
    )


@pytest.mark.parametrize(
    ("points", "rate", "said"),
    [
        ([0.3, -0.5, 0.0, 0.2], 0.0, "A gave 0.3 points and B took 0.5, all items unchanged."),
        ([-0.3, -0.9, 0.0, 0.2], -1.0, "B took 0.9 of the 1.0 points that all items lost."),
        ([1.0, 0.5, 0.0, 0.5], 2.0, "A gave 1.0 of the 2.0 points."),
        ([1.5, -1.4, 0.0, 0.5], 0.6, "A gave 1.5 points and B took 1.4, all items +0.6 %."),
        ([0.0, 0.0, 0.0, 0.0], 0.0, "; all items unchanged."),
    ],
)
def test_the_headline_fits_rises_falls_and_none(points, rate, said):
    base = breadth(ViewState(), Bridge(usual()))
    table = base.weighted.points.copy()
    table[-1] = points
    rates = base.rate.copy()
    rates[-1] = rate
    changed = replace(
        base,
        names=("01 A", "02 B", "03 C", "04 D"),
        rate=rates,
        weighted=replace(base.weighted, points=table),
    )
    assert sentence(changed).endswith(said)


def test_the_verdict_names_measures_and_diffusion(shown):
    text = verdict(shown)
    for name in ("Weighted median", "Trimmed mean"):
        assert f"{shown.weighted.measures[name][-1]:+.1f} %" in text
    assert f"Diffusion {shown.diffusion[-1]:.0f}" in text
    assert "10 of 12 rise faster than 2 % a year" in text
    assert "rounding" in adding_up(shown)


# Table ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("way", ["up", "down"])
@pytest.mark.parametrize("column", SORTED_BY)
def test_the_table_is_in_the_order_of_its_column(demo, column, way):
    listed = rows(breadth(ViewState(sort=f"{column}-{way}"), demo))
    values = [getattr(row, column) for row in listed]
    assert values == sorted(values, reverse=way == "down")
    assert len(listed) == 12


def test_a_click_on_a_heading_turns_its_order(demo):
    answer = page.answer(ViewState(), demo)
    heads = [h for h in nodes(answer.words["table"], "Th") if h.scope == "col"]
    state = {words(h).split(",")[0].strip(): getattr(h, "aria-sort", None) for h in heads}
    assert state["Contribution"] is not None
    marked = [h for h in heads if getattr(h, "aria-sort", "none") not in ("none", None)]
    assert [getattr(h, "aria-sort") for h in marked] == ["descending"]
    (button,) = nodes(marked, "Button")
    assert getattr(button, "data-value") == "points-up"


def test_of_many_components_the_first_ones_and_the_rest_are_shown():
    bridge = Bridge(many())
    result = breadth(ViewState(), bridge)
    table = page.answer(ViewState(), bridge).words["table"]
    body = nodes(nodes(table, "Tbody"), "Tr")
    assert len(body) == TOP_ROWS + 1
    assert words(body[-1]).startswith(f"the other {60 - TOP_ROWS}")
    whole = page.answer(ViewState(rows="all"), bridge).words["table"]
    assert len(nodes(nodes(whole, "Tbody"), "Tr")) == 60
    names, points, left_out = bars(result)
    assert len(names) == len(points) == TOP_BARS
    rest = result.weighted.points[-1].sum() - points.sum()
    assert f"the other {60 - TOP_BARS} give {rest:+.2f}".replace("-", "−") in left_out
    stacked = parts(result, result.weighted.points)
    assert len(stacked) == TOP_PARTS + 1
    whole_rate = np.array(list(stacked.values())).sum(axis=0)
    np.testing.assert_allclose(whole_rate, result.rate[result.drawn], atol=1e-9)


def test_leaving_out_is_a_button_a_row(demo):
    table = page.answer(ViewState(), demo).words["table"]
    buttons = {
        getattr(b, "aria-label"): b
        for b in nodes(table, "Button")
        if getattr(b, "data-set", "") == "excluded"
    }
    food = buttons["01 Food and soft drinks is left out"]
    assert getattr(food, "aria-pressed") == "true"
    assert getattr(food, "data-value") == "04 Housing and energy"
    travel = buttons["Leave out 07 Transport"]
    assert "07 Transport" in getattr(travel, "data-value").split("|")
    ViewState(excluded=getattr(travel, "data-value"))


# Charts --------------------------------------------------------------------------------------


def test_charts_hold_the_numbers_of_the_result(demo, shown):
    charts = page.answer(ViewState(), demo).charts
    assert set(charts) == {"contributions", "history", "strip", "core", "diffusion", "weights"}
    assert sorted(charts["contributions"].data[0].x) == sorted(shown.weighted.points[-1])
    drawn = shown.drawn
    stacked = sum(np.nan_to_num(t.y) for t in charts["history"].data[:-1])
    np.testing.assert_allclose(stacked, shown.rate[drawn], atol=0.02)
    strip = charts["strip"].data[0]
    assert strip.z.shape == (12, 120)
    np.testing.assert_allclose(np.sort(strip.z[:, -1]), np.sort(shown.ranks[-1]), rtol=1e-5)
    lines = {trace.name: trace.y for trace in charts["core"].data}
    for name, values in shown.weighted.measures.items():
        np.testing.assert_array_equal(lines[name], values[drawn])
    np.testing.assert_array_equal(charts["diffusion"].data[0].y, shown.diffusion[drawn])
    shares = sum(np.asarray(t.y) for t in charts["weights"].data)
    np.testing.assert_allclose(shares, 100, rtol=1e-12)


def test_the_strip_shows_rates_where_asked(demo, shown):
    strip = page.answer(ViewState(strip="rate"), demo).charts["strip"].data[0]
    np.testing.assert_allclose(np.sort(strip.z[:, -1]), np.sort(shown.rates[-1]), rtol=1e-5)


def test_a_component_has_one_colour_in_every_chart(demo):
    charts = page.answer(ViewState(), demo).charts
    keys = [{w: t for _, t, w in charts[c].layout.meta["key"]} for c in ("history", "weights")]
    shared = keys[0].keys() & keys[1].keys()
    assert len(shared) >= TOP_PARTS
    assert all(keys[0][name] == keys[1][name] for name in shared)


def test_hostile_names_are_text():
    charts = page.answer(ViewState(), Bridge(many())).charts
    for chart in charts.values():
        assert "<b>0" not in json.dumps(json.loads(chart.to_json()))


def test_every_colour_of_the_figures_is_a_token():
    assert all(figures.colour(name) for name in (*figures.PARTS, "rest"))


# Weights that are refused --------------------------------------------------------------------


def refused():
    shares = [SHARES[0], (380.0, 220.0, 290.0, 93.0), SHARES[2]]
    return basket(series_of(prices_of()), weights_of(shares))


def test_weights_that_do_not_sum_come_with_an_offer_and_the_rest_of_the_page():
    answer = page.answer(ViewState(), Bridge(refused()))
    assert set(answer.charts) == {"strip", "diffusion"}
    said = words(answer.words["notes"])
    assert "Weights of 2021 must sum to 1000, but sum to 983." in said
    (offer,) = nodes(answer.words["notes"], "Button")
    assert (getattr(offer, "data-set"), getattr(offer, "data-value")) == ("scale", "yes")
    assert nodes(answer.words["table"], "Tr")
    assert "983" in words(answer.words["contributions-words"])
    scaled = page.answer(ViewState(scale="yes"), Bridge(refused()))
    assert "contributions" in scaled.charts


@pytest.mark.parametrize("months", [2, 11, 13, 30])
def test_short_records_give_a_page(months):
    answer = page.answer(ViewState(), Bridge(usual(months)))
    assert answer.sentence.startswith("Prices of")
    assert "strip" in answer.charts


def test_flat_prices_give_a_page():
    flat = basket(series_of(np.full((30, 4), 100.0)), weights_of())
    answer = page.answer(ViewState(), Bridge(flat))
    assert "unchanged" in answer.sentence


# Files ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("view", VIEWS)
def test_each_view_has_a_file_with_header_and_rows(demo, view):
    name, text = csv_export(view, "", demo)
    assert name == f"{view}-breadth-consumer-prices-2026-10.csv"
    assert "# weights: weights.csv; fingerprint" in text
    assert "# state: /breadth?" in text
    head, *body = rows_of(text)
    assert body
    assert all(len(row) == len(head) for row in body)


def test_the_files_hold_every_digit(demo, shown):
    head, *body = rows_of(csv_export("history", "", demo)[1])
    last = dict(zip(head, body[-1], strict=True))
    assert float(last["rate_of_all_items"]) == shown.rate[-1]
    assert float(last["04 Housing and energy"]) == shown.weighted.points[-1][3]
    parts_of_file = sum(float(last[name]) for name in shown.names)
    assert parts_of_file + float(last["residual"]) == pytest.approx(shown.rate[-1], abs=1e-12)
    assert len(body) == 802


def test_views_and_flags_agree():
    assert tuple(VIEWS) == BREADTH_VIEWS


def test_a_view_that_is_none_or_needs_weights_is_refused(shown):
    with pytest.raises(ValueError, match="view must be one of contributions"):
        view_text("secret", shown)
    without = breadth(ViewState(), Bridge(refused()))
    with pytest.raises(StateError, match="must sum to 1000"):
        view_text("core", without)
    assert view_text("strip", without)


def test_the_server_sends_the_files():
    client = build_app(Workspace(placeholder=demo_releases())).server.test_client()
    answer = client.get("/export/breadth/contributions.csv?span=month")
    assert answer.status_code == 200
    assert "rate of all items" in answer.text
    assert client.get("/export/breadth/contributions.csv?trim=200").status_code == 400
    assert client.get("/export/breadth/nothing.csv").status_code == 400


# The command ---------------------------------------------------------------------------------


@pytest.fixture
def run(run):
    return partial(run, "breadth")


def test_the_command_answers_for_files_and_weights(run, shown):
    folder = bundled("data_samples")
    status, out, err = run(
        folder / "divisions.csv",
        folder / "economy_monthly.csv",
        "--weights",
        folder / "weights.csv",
        "--json",
    )
    assert (status, err) == (0, "")
    answer = json.loads(out)
    assert answer["rate_12m"] == shown.rate[-1]
    assert answer["contributions"] == dict(zip(shown.names, shown.weighted.points[-1], strict=True))


def test_the_command_works_on_the_invented_economy(run, shown):
    status, out, err = run()
    assert (status, err) == (0, "")
    assert out.splitlines()[0] == sentence(shown)
    status, out, _ = run("--as-of", "2001-05", "--span", "month", "--json")
    assert (status, json.loads(out)["period"], json.loads(out)["span"]) == (0, "2001-05", 1)


def test_the_command_writes_a_view(run, tmp_path, demo):
    path = tmp_path / "core.csv"
    assert run("--csv", path, "--view", "core")[0] == 0
    assert path.read_bytes().decode() == csv_export("core", "", demo)[1]


def test_own_weights_on_the_invented_economy(run, tmp_path):
    path = tmp_path / "mine.csv"
    path.write_text("year,07 Transport,10 Education\n2000,60,40\n", encoding="utf-8")
    status, out, _ = run("--weights", path, "--json")
    assert status == 0
    assert set(json.loads(out)["contributions"]) == {"07 Transport", "10 Education"}


def test_weights_that_do_not_sum_end_with_status_1(run, tmp_path):
    path = tmp_path / "mine.csv"
    path.write_text("year,07 Transport,10 Education\n2000,60,30\n", encoding="utf-8")
    status, out, err = run("--weights", path, "--json")
    assert (status, json.loads(out)["contributions"]) == (1, None)
    assert err.startswith("pricewake: weights of 2000 must sum to 100, but sum to 90; --scale yes")
    assert run("--weights", path, "--scale", "yes")[0] == 0


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--weights", "none.csv"], "must be a file"),
        (["--trim", "70"], "Trim must cut less than 100 percent"),
        (["--pace", "fast"], "Pace must be a number of percent a year"),
        (["--aggregate", "Nothing"], "no loaded series is named 'Nothing'"),
    ],
)
def test_wrong_use_gives_one_sentence_and_status_2(run, words, said):
    status, out, err = run(*words)
    assert (status, out) == (2, "")
    assert said in err
    assert err.count("\n") == 1


# Files dropped on the Data page --------------------------------------------------------------


def test_weights_dropped_on_the_data_page_reach_the_breadth_page():
    folder = bundled("data_samples")
    desk = Workspace(placeholder=demo_releases())
    client = build_app(desk).server.test_client()
    for name in ("divisions.csv", "weights.csv"):
        body = (folder / name).read_bytes()
        assert client.post(f"/intake?name={name}", data=body).status_code == 200
    answer = page.answer(ViewState(), Bridge(desk))
    assert "12 components" in answer.sentence
    assert len(desk.series) == 12  # weights are no series to be paired
    assert desk.as_of().weights.years[0] == 1960
