"""The Reading page without a browser: its words, charts, files and the command."""

import json
from functools import partial

import numpy as np
import pytest

from app.compute import Bridge
from app.demo import demo_releases
from app.pages import plain
from app.pages import reading as page
from app.reading.bridge import completed_reading, reading
from app.reading.exports import VIEWS, csv_export, view_text
from app.reading.fields import READING_FIELDS, READING_VIEWS
from app.reading.words import set_off
from app.state import ViewState
from app.workspace import Workspace
from tests.app.components import nodes, words
from tests.app.economies import workspace
from tests.app.test_reading import prices, walk
from tests.exported import records, taken_apart

DRAWS = 99


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


def ids_of(tree):
    found = {node.id for node in nodes(tree) if getattr(node, "id", None)}
    saved = {getattr(node, "data-saves", None) for node in nodes(tree)} - {None}
    return found | {f"csv-{name}" for name in saved}  # buttons are built in the browser


def drawn(chart):
    return json.loads(chart) if isinstance(chart, str) else json.loads(chart.to_json())


# The page ------------------------------------------------------------------------------------


def test_the_page_has_a_place_for_every_view_and_every_word(bridge):
    ids = ids_of(page.layout("", bridge).children)
    assert {f"reading-{place}" for place in page.PLACES} <= ids
    assert {f"reading-{view}" for view in VIEWS} <= ids
    assert {f"csv-{view}" for view in VIEWS} <= ids


def test_every_view_is_drawn_and_the_long_work_is_left_to_be_asked_for(bridge):
    answer = page.answer(ViewState(draws=DRAWS, seed=9), bridge)
    assert set(answer.charts) == set(VIEWS)
    assert set(answer.words) == set(page.PLACES)
    assert list(answer.jobs) == ["goodness"]
    assert "is being tested" in words(answer.words["distribution-words"])
    completed_reading(ViewState(draws=DRAWS, seed=9), bridge)
    done = page.answer(ViewState(draws=DRAWS, seed=9), bridge)
    assert not done.jobs
    assert "Anderson-Darling p" in words(done.words["distribution-words"])


def test_a_slider_move_redraws_the_path_and_keeps_the_rest(bridge):
    one = page.answer(ViewState(coming=0.2), bridge).charts
    other = page.answer(ViewState(coming=1), bridge).charts
    changed = {view for view in one if drawn(one[view]) != drawn(other[view])}
    assert changed == {"whatif"}


def test_display_choices_change_the_chart_kept(bridge):
    rates = page.answer(ViewState(), bridge).charts["rates"]
    factor = page.answer(ViewState(timeline="factor"), bridge).charts["rates"]
    assert drawn(factor)["layout"]["yaxis"]["type"] == "log"
    assert drawn(rates) != drawn(factor)
    assert drawn(page.answer(ViewState(), bridge).charts["rates"]) == drawn(rates)


def test_the_words_beside_the_charts_have_the_numbers_of_the_results(bridge):
    state = ViewState(coming=1, draws=DRAWS)
    known, shown = reading(state, bridge), page.answer(state, bridge).words
    table = words(shown["summary"])
    for formula in ("percent", "log"):
        for name in ("one", "quarter_annualised", "half_annualised", "year", "annual_average"):
            assert f"{getattr(known.rates[formula], name):.2f}" in table
    assert f"{known.path.yearly[-1]:.1f} percent" in words(shown["whatif-words"])
    assert f"{known.drops.rate[0]:.2f} percent drops out" in words(shown["base-words"])
    assert f"{known.standing.below} below" in words(shown["rank-words"])
    assert "IAS 29" in words(shown["episodes-words"])


def test_alerts_stand_on_the_page(bridge):
    state = ViewState(newest="1973-07")
    said = words(page.answer(state, bridge).words["alerts"])
    assert "The 12-month rate is 14.91 percent, above 5.00 percent." in said
    assert words(page.answer(ViewState(), bridge).words["alerts"]) == ""


@pytest.mark.parametrize(
    ("series", "views"),
    [
        (prices(np.full(100, 100.0)), {"rates", "base", "whatif", "rank", "history", "episodes"}),
        (prices(walk(11)), {"rank", "whatif"}),
        (prices(walk(1)), {"whatif"}),
    ],
    ids=["equal", "eleven", "one"],
)
def test_a_view_that_cannot_be_drawn_says_why(series, views):
    answer = page.answer(ViewState(series="Prices"), Bridge(workspace(series)))
    assert set(answer.charts) == views
    for missing in set(VIEWS) - views:
        assert "Not shown: " in words(answer.words[f"{missing}-words"]), missing


def test_an_unknown_series_is_said_in_one_sentence(bridge):
    with pytest.raises(ValueError, match="no loaded series is named 'Nothing'"):
        page.answer(ViewState(series="Nothing"), bridge)


def test_charts_kept_as_text_and_figures_are_sent_alike(bridge):
    charts = page.charts(reading(ViewState(), bridge))
    for chart in charts.values():
        assert plain._text(chart) == plain._text(chart.to_json())


# The charts ----------------------------------------------------------------------------------


def test_what_is_drawn_is_what_was_computed(bridge):
    known = completed_reading(ViewState(draws=DRAWS), bridge)
    charts = page.charts(known)

    def trace(view, name):
        return next(t for t in charts[view].data if t.name == name)

    np.testing.assert_array_equal(trace("rates", "12-month rate").y, known.yearly.values)
    np.testing.assert_array_equal(trace("base", "new month").y, known.base.new)
    np.testing.assert_array_equal(trace("base", "month that dropped out").y, known.base.base)
    path = trace("whatif", "if every coming period brings 0.2 percent")
    np.testing.assert_array_equal(path.y[1:], known.path.yearly)
    assert trace("rank", "the print").name == "the print"
    marker = [t for t in charts["rank"].data if t.mode == "markers+text"]
    assert (marker[0].x[0], marker[0].y[0]) == (known.standing.value, known.standing.rank)
    np.testing.assert_array_equal(trace("history", "rank then").y, known.through_time.values)
    density = trace("distribution", "Laplace")
    np.testing.assert_allclose(density.y, known.fits["laplace"].density(density.x))
    quantiles = trace("quantiles", "readings")
    np.testing.assert_allclose(
        known.fits["laplace"].cdf(quantiles.x), quantiles.customdata / 100, atol=1e-9
    )
    peaks = trace("episodes", "peak")
    assert list(peaks.y) == [run.peak for run in known.runs]


def test_axes_carry_units(bridge):
    for view, chart in page.charts(reading(ViewState(), bridge)).items():
        assert chart.layout.yaxis.title.text, view
    assert "percent" in page.charts(reading(ViewState(), bridge))["rank"].layout.xaxis.title.text


# Files and command ---------------------------------------------------------------------------


def test_views_of_the_command_and_of_the_page_are_the_same():
    assert set(READING_VIEWS) == set(VIEWS)


@pytest.mark.parametrize("view", VIEWS)
def test_every_view_is_a_file_that_names_what_it_holds(bridge, view):
    name, text = csv_export(view, f"draws={DRAWS}", bridge)
    assert name == f"reading-{view}-consumer-prices-2026-10.csv"
    head, rows = taken_apart(text)
    assert len(rows) > 1
    assert any("fingerprint" in line for line in head)
    assert any("/reading?draws=99" in line for line in head)
    if view in ("distribution", "quantiles"):
        assert any("test of the fit: laplace; Anderson-Darling" in line for line in head)


def test_files_keep_every_digit(bridge):
    known = reading(ViewState(), bridge)
    rates = records(view_text("rates", known))
    assert float(rates[-1]["rate_12m_percent"]) == known.rates["percent"].year
    assert float(rates[-1]["annual_average_log"]) == known.rates["log"].annual_average
    assert rates[0]["rate_1m_percent"] == ""
    assert float(rates[-1]["factor"]) == known.factor.values[-1]
    base = records(view_text("base", known))
    for row in base[:24]:
        assert float(row["new"]) + float(row["base"]) == pytest.approx(float(row["change"]))
    assert [row["part"] for row in base] == ["observed"] * 24 + ["to come"] * 12
    steps = records(view_text("rank", known))
    assert float(steps[-1]["share_at_or_below"]) == 1.0


def test_an_unknown_view_is_refused(bridge):
    with pytest.raises(ValueError, match="view must be one of rates"):
        csv_export("pie", "", bridge)


@pytest.fixture
def run(run):
    return partial(run, "reading", "--draws", DRAWS)


def test_the_command_gives_one_object_with_unrounded_numbers(run, bridge):
    status, out, err = run("--json")
    assert (status, err, out.count("\n")) == (0, "", 1)
    answer = json.loads(out)
    known = completed_reading(ViewState(draws=DRAWS), bridge)
    assert answer["period"] == "2026-10"
    assert answer["rate_12m"] == known.rates["percent"].year
    assert answer["rank_percent"] == known.standing.rank
    assert answer["n"] == 801
    assert answer["laplace"] == known.fits["laplace"].parameters
    assert answer["goodness"]["p_anderson_darling"] == known.goodness.p_anderson_darling
    assert answer["alerts"] == []


def test_an_alert_gives_status_1_and_is_told(run):
    status, out, _ = run("--as-of", "1973-07", "--json")
    answer = json.loads(out)
    assert status == 1
    assert answer["period"] == "1973-07"
    assert answer["alerts"][0]["rule"] == "rate_12m above 5"
    status, out, _ = run("--as-of", "1973-07", "--alert", "rate_12m above 50")
    assert status == 0
    assert "Alert" not in out
    status, out, _ = run("--alert", "rate_12m above 4", "--alert", "rate_1m below -9")
    assert status == 1
    assert out.count("Alert (") == 1


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("--series", "Nothing"), "no loaded series is named 'Nothing'"),
        (("--as-of", "1973-13"), "Print of must be a period"),
        (("--as-of", "1950-01"), "no value in the sample"),
        (("--alert", "inflation high"), "an alert must read like"),
        (("--family", "cauchy"), "Family tested must be one of"),
        (("--coming", "much"), "Every coming period brings must be a number from -20 to 100"),
        (("--rank-level", "101"), "Rank must be a number from 0 to 100"),
    ],
)
def test_wrong_use_is_one_sentence_and_status_2(run, words, said):
    status, out, err = run(*words)
    assert (status, out) == (2, "")
    assert err.startswith("pricewake: ")
    assert said in err
    assert err.count("\n") == 1


def test_a_date_reads_the_vintages_and_a_month_the_print(run):
    status, _, err = run("--as-of", "1999-01-01")
    assert status in (0, 1, 2)
    assert "Print of must be" not in err


def test_the_command_writes_the_view_asked_for(run, tmp_path):
    status, _, _ = run("--csv", "out.csv", "--view", "episodes")
    assert status == 0
    rows = records((tmp_path / "out.csv").read_text(encoding="utf-8"))
    assert {"kind", "first", "last", "peak"} <= set(rows[0])


def test_every_number_of_the_page_has_a_flag():
    assert set(READING_FIELDS) <= set(ViewState.__dataclass_fields__)


def test_alerts_of_page_and_command_come_from_the_same_rules(bridge):
    from app.reading.alerts import DEFAULT_RULES, read_rules

    known = reading(ViewState(newest="1973-07"), bridge)
    assert [a.rule for a in set_off(known, read_rules(DEFAULT_RULES))]
