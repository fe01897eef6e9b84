"""Breaks marked in a workspace: what they change, what says so, and what forgets them."""

import math
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.series import Series
from app import exports, page_table
from app.compute import Bridge
from app.demo import demo_releases
from app.desk.findings import found_in
from app.intake.reading import Release
from app.marks import Mark, treated
from app.pages import data_breaks, lag, reading
from app.server import build_app
from app.state import ViewState
from app.store import Store
from app.workspace import UnknownSeriesError, Workspace
from app.workspace_folder import export_folder, import_folder

JULY = pd.Period("1987-07", "M")
SAID = (
    "break treated at Jul 1987: growth of the month set to the mean of the months before and after"
)
START = pd.Period("2000-01", "M")


def made(name="Money", seed=1, break_at=None, n=120, first=START):
    steps = np.random.default_rng(seed).normal(0.4, 0.5, n)
    values = 100 * np.exp(np.cumsum(steps) / 100)
    if break_at is not None:
        values[break_at:] *= 1.3
    return Series(name, first, values, "level", "crowns", "no", "bank.csv")


def desk(*series, path=":memory:"):
    return Workspace((Release("bank.csv", series, ()),), path=path)


@pytest.fixture
def demo():
    return Bridge(Workspace(placeholder=demo_releases()))


@pytest.fixture
def state(demo):
    return replace(demo.workspace.opening_state(), driver="Narrow money")


# Numbers -------------------------------------------------------------------------------------


def test_only_the_growth_of_the_marked_month_changes(demo, state):
    before = demo.pair(state).driver
    demo.workspace.mark("Narrow money", "1987-07", "exclude")
    after = demo.pair(state).driver
    place = JULY.ordinal - before.first.ordinal
    others = np.arange(before.values.size) != place
    np.testing.assert_allclose(after.values[others], before.values[others], atol=1e-10)
    mean = (before.values[place - 1] + before.values[place + 1]) / 2
    assert after.values[place] == pytest.approx(mean, abs=1e-10)
    assert before.values[place] - after.values[place] == pytest.approx(
        100 * math.log(1.30), abs=3.0
    )


def test_every_key_and_cell_follows_a_mark_and_its_treatment(demo, state):
    keys, cells = [], []
    for treatment in (None, "exclude", "before", "after"):
        if treatment:
            demo.workspace.mark("Narrow money", "1987-07", treatment)
        keys.append(demo.key(state))
        cells.append(demo.cell(state).slope)
    assert len(set(keys)) == len(set(cells)) == 4
    demo.workspace.unmark("Narrow money", "1987-07")
    assert (demo.key(state), demo.cell(state).slope) == (keys[0], cells[0])


def test_overlap_takes_the_true_growth_from_a_series_of_one_definition():
    old = made()
    here = desk(made("Wide", break_at=60), Series("Old", START, old.values, "level"))
    here.mark("Wide", "2005-01", "overlap:Old")
    np.testing.assert_allclose(here.named("Wide").values, 1.3 * old.values, rtol=1e-13)
    assert here.as_of().breaks("Wide") == (
        "break treated at Jan 2005: spliced by overlap with Old",
    )


def test_overlap_by_means_of_a_year_and_its_sentence():
    old = made()
    here = desk(made("Wide", break_at=60), Series("Old", START, old.values, "level"))
    here.mark("Wide", "2005-01", "overlap-mean:Old")
    np.testing.assert_allclose(here.named("Wide").values, 1.3 * old.values, rtol=1e-13)
    (said,) = here.as_of().breaks("Wide")
    assert said.endswith("spliced by overlap with Old, by the means of a year on each side")
    assert said in here.named("Wide").source


def test_vintages_and_files_stay_as_read():
    raw = made(break_at=60)
    here = desk(raw)
    here.mark("Money", "2005-01", "before")
    assert here.vintages("Money")[0].series.fingerprint == raw.fingerprint
    assert here.releases[0].series[0].fingerprint == raw.fingerprint
    assert here.as_of().as_read["Money"].fingerprint == raw.fingerprint
    assert here.named("Money").fingerprint != raw.fingerprint
    assert here.series["Money"].fingerprint == here.named("Money").fingerprint


# Words ---------------------------------------------------------------------------------------


def test_the_lag_page_its_source_line_and_its_files_say_the_treatment(demo, state):
    assert "break" not in exports.csv_export("surface", state.to_query(), demo)[1].lower()
    demo.workspace.mark("Narrow money", "1987-07", "exclude")
    data = lag.payload(state, demo)
    assert f"Narrow money: {SAID}." in data["notes"]
    assert SAID in data["source"]
    assert data["invented"]
    text = exports.csv_export("overlay", state.to_query(), demo)[1]
    assert f"# break: Narrow money: {SAID}" in text
    raw = demo.workspace.as_of().as_read["Narrow money"].fingerprint
    assert f"level as read: fingerprint {raw}" in text


def test_the_reading_page_says_the_treatment(demo):
    demo.workspace.mark("Narrow money", "1987-07", "exclude")
    shown = reading.answer(ViewState(series="Narrow money"), demo)
    assert SAID in shown.source


# Findings ------------------------------------------------------------------------------------


def test_findings_name_the_file_and_a_marked_one_becomes_a_note():
    raw = made(break_at=60)
    here = desk(raw)
    (found,) = found_in(here.as_of(), here)
    assert (found.problem.severity, found.problem.file) == ("warning", "bank.csv")
    assert "mark a break there" in found.problem.message
    here.mark("Money", "2005-01", "exclude")
    (found,) = found_in(here.as_of(), here)
    assert found.marked and found.problem.severity == "note"
    assert found.problem.message.endswith("a break is marked there")


def test_a_re_referenced_vintage_is_found_against_the_one_before():
    old = made(n=100)
    new = made(n=101)
    here = desk(old)
    assert found_in(here.as_of(), here) == []
    scaled = Series("Money", START, 0.8 * new.values, "level")
    here.add(Release("bank.csv", (scaled,), ()))
    (found,) = found_in(here.as_of(), here)
    assert found.finding.check == "re-referenced" and "0.8 times" in found.finding.message


def test_the_page_marks_and_takes_away_over_its_routes():
    here = desk(made(break_at=60))
    client = build_app(here).server.test_client()
    base = "http://127.0.0.1"

    def post(act, **body):
        return client.post(f"/workspace/{act}", json=body, base_url=base)

    sent = {"series": "Money", "period": "2005-01"}
    assert post("mark", **sent, treatment="after", note="wider").status_code == 200
    assert here.as_of().marks == (Mark("Money", "2005-01", "after", "wider"),)
    refused = post("mark", **sent, treatment="mend")
    assert refused.status_code == 422 and "treatment must be" in refused.get_json()["message"]
    assert post("mark", series="Money").status_code == 422
    assert post("unmark", **sent).status_code == 200
    assert post("unmark", **sent).status_code == 422
    assert here.as_of().marks == ()


def test_the_part_of_the_page_lists_findings_and_marks():
    here = desk(made("Wide", break_at=60), made("Old"))
    bridge = Bridge(here)

    def section():
        found = data_breaks.checked(here.as_of(), ViewState(), bridge)
        return str(data_breaks.section(here.as_of(), found, ViewState()))

    shown = section()
    assert "Mark break at Jan 2005" in shown and "overlap, means of a year" in shown
    assert 'data-names=\'["Wide", "Old"]\'' in shown
    assert "data-options='#names-level-monthly'" in shown and "data-except='Wide'" in shown
    here.mark("Wide", "2005-01", "overlap:Old")
    shown = section()
    assert "Break treated at Jan 2005: spliced by overlap with Old." in shown
    assert "Mark break at Jan 2005" not in shown and "Remove the break of Wide" in shown
    assert data_breaks.section(Workspace().as_of(), [], ViewState()) == []


def test_many_series_are_checked_in_steps_and_all_of_them():
    many = [made(f"S{k}", n=60) for k in range(data_breaks.AT_ONCE)]
    here = desk(*many, made("Wide", break_at=60))
    bridge, state = Bridge(here), ViewState()
    assert data_breaks.checked(here.as_of(), state, bridge) is None
    assert "not done yet" in str(data_breaks.section(here.as_of(), None, state))
    work = page_table.WORKS["data"]["checks"](state, bridge)
    steps = [bridge.jobs.step(work)]
    while steps[-1].result is None:
        steps.append(bridge.jobs.step(work))
    assert [step.done for step in steps] == [1, 2, 3]
    found = data_breaks.checked(here.as_of(), state, bridge)
    assert [f.finding for f in found] == [f.finding for f in found_in(here.as_of(), here)]
    assert "Wide" in {each.finding.series for each in found}


# Kept and forgotten --------------------------------------------------------------------------


def test_marks_are_kept_counted_once_a_period_and_travel(tmp_path):
    path = tmp_path / "desk.sqlite"
    here = desk(made(break_at=60), path=path)
    here.mark("Money", "2005-01", "before", note="wider  definition")
    here.mark("Money", "2005-01", "after", note="wider definition")
    here.close()
    again = Workspace(path=path)
    kept = (Mark("Money", "2005-01", "after", "wider definition"),)
    assert again.as_of().marks == again.as_of("2999-01-01").marks == kept
    export_folder(again.store, tmp_path / "out")
    other = Store(tmp_path / "other.sqlite")
    import_folder(tmp_path / "out", other)
    other.close()
    there = Workspace(path=tmp_path / "other.sqlite")
    assert there.as_of().marks == kept
    assert there.named("Money").fingerprint == again.named("Money").fingerprint


def test_a_mark_in_the_invented_economy_touches_no_file_of_the_user():
    here = Workspace(placeholder=demo_releases())
    here.mark("Narrow money", "1987-07", "exclude")
    own = Series("Narrow money", pd.Period("1980-01", "M"), made().values, "level")
    here.add(Release("own.csv", (own,), ()))
    assert here.as_of().marks == ()
    assert here.named("Narrow money").fingerprint == own.fingerprint


def test_a_later_vintage_is_treated_too_and_a_shorter_one_says_why_not():
    here = desk(made(break_at=60))
    here.mark("Money", "2005-01", "after")
    here.add(Release("bank.csv", (made(break_at=60, n=121),), ()))
    assert here.as_of().breaks("Money")[0].startswith("break treated at Jan 2005")
    here.add(Release("bank.csv", (made(break_at=60, n=61),), ()))
    (said,) = here.as_of().breaks("Money")
    assert said == (
        "break marked at Jan 2005 but not treated: 'Money' must have a value in Feb 2005, but has"
        " none"
    )
    here.add(Release("bank.csv", (made(n=50),), ()))
    assert here.as_of().breaks("Money") == ()


def test_two_breaks_of_one_series():
    values = np.array(made(break_at=60).values)
    values[90:] *= 0.5
    series = Series("Money", START, values, "level")
    marks = [Mark("Money", "2007-07", "before"), Mark("Money", "2005-01", "before")]
    done = treated(series, marks, {})
    assert [mark.period for mark in done.marks] == ["2005-01", "2007-07"]
    rate = np.diff(np.log(done.series.values))
    assert rate[59] == pytest.approx(rate[58], abs=1e-12)
    assert rate[89] == pytest.approx(rate[88], abs=1e-12)
    assert np.abs(rate).max() < 0.03


# Refusals ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("ask", "match"),
    [
        (("Money", "2005-01", "mend"), "treatment must be one of exclude, before, after"),
        (("Money", "2005-Q1", "after"), "a period must be monthly, but got '2005-Q1'"),
        (("Money", "2000-01", "after"), "must have a value in Dec 1999"),
        (("Money", "2005-01", "overlap:Gone"), "must be loaded, but 'Gone' is not"),
        (("Money", "2005-01", "overlap-mean:Money"), "must be another one, but got 'Money'"),
        (("Policy rate", "2005-01", "before"), "'Policy rate' is a rate already"),
    ],
)
def test_marks_that_cannot_be(ask, match):
    rate = Series("Policy rate", START, made().values, "rate")
    here = desk(made(), rate)
    with pytest.raises(ValueError, match=match):
        here.mark(*ask)
    assert here.as_of().marks == ()


def test_marks_of_what_is_not_there():
    here = desk(made())
    with pytest.raises(UnknownSeriesError, match="no loaded series is named 'Gone'"):
        here.mark("Gone", "2005-01", "after")
    with pytest.raises(ValueError, match="no break of 'Money' is marked at '2005-01'"):
        here.unmark("Money", "2005-01")
