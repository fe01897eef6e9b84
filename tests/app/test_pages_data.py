"""The Data page: what it says and offers for a state; its requests; its files; its charts."""

from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_releases
from app.desk import bridge as desk
from app.desk.exports import csv_export
from app.intake.problems import Problem
from app.intake.reading import Release, read_release
from app.pages import data as page
from app.server import build_app
from app.state import ViewState
from app.workspace import Workspace
from tests.app.asking import GOOD
from tests.app.components import props, words
from tests.app.test_desk import vintages
from tests.exported import rows_of

STATE = ViewState(series="Prices")


def answer(workspace, state=STATE):
    return page.answer(state, Bridge(workspace))


# What it says --------------------------------------------------------------------------------


def test_every_series_and_problem_is_listed():
    found = Problem("error", "a.csv", 7, "Prices", "must be a number, but got 'x'")
    here = Workspace(
        (
            Release("a.csv", (Series("Prices", pd.Period("2024-01", "M"), [1.0, 2.0]),), (found,)),
            Release("b.csv", (Series("Output", pd.Period("2024Q1"), [1.0, np.nan, 2.0]),), ()),
        )
    )
    shown = answer(here)
    assert shown.sentence == "2 series from 2 files, as they stand now."
    assert shown.verdict == "1 error was found in the files."
    text = words(shown.words["series"])
    for part in ("Prices", "a.csv", "Jan 2024 to Feb 2024", "month", "Output", "quarter"):
        assert part in text
    assert "2, 1 missing" in text
    problems = words(shown.words["problems"])
    assert "error a.csv 7 Prices must be a number, but got 'x'" in " ".join(problems.split())
    assert "No series has been loaded twice" in words(shown.words["revisions-words"])
    assert shown.charts == {}


def test_the_invented_economy_is_shown_and_cannot_be_changed():
    here = Workspace(placeholder=demo_releases())
    shown = answer(here)
    assert shown.sentence.startswith("An invented economy stands here until you open files")
    for name in here.series:
        assert name in words(shown.words["series"])
    everything = props([list(shown.words.values())])
    assert not any("data-correct" in each or "data-act" in each for each in everything)


def test_an_empty_workspace_says_what_to_do():
    shown = answer(Workspace())
    assert shown.sentence == "Nothing is in view."
    assert "Open the files of a release above" in words(shown.words["series"])
    here = Workspace()
    here.add(
        Release("a.csv", (Series("Prices", pd.Period("2024-01", "M"), [1.0]),), ()), "2024-02-12"
    )
    shown = answer(here, ViewState(as_of="2024-01-31"))
    assert shown.sentence == "Nothing is in view on 31 Jan 2024."
    assert "the first file stands from 12 Feb 2024" in words(shown.words["series"])


def test_every_control_has_a_name_and_knows_its_series():
    shown = answer(vintages(3))
    controls = [p for p in props(shown.words["series"]) if "data-correct" in p]
    assert len(controls) == 2 * 3  # kind, unit and adjustment of two series
    for each in controls:
        label = each.get("aria-label") or each.get("data-label")
        assert label.endswith(f"of {each['data-series']}")
    selected = [p["value"] for p in props(shown.words["series"]) if p.get("selected")]
    assert selected == ["level", "unknown"] * 2
    buttons = [p for p in props(shown.words["files"]) if "data-act" in p]
    assert {p["data-act"] for p in buttons} == {"hide"}
    assert all(p["data-file"] in p["aria-label"] for p in buttons)


def test_cells_carry_the_heading_they_stand_under():
    for table in ("series", "files", "prints"):
        for body in [p for p in props(answer(vintages(3)).words[table]) if "data-label" in p]:
            assert body["data-label"]


def test_earlier_files_and_those_out_of_view_fold_away():
    here = vintages(5)
    here.hide("2020-02-12.csv")
    text = words(answer(here).words["files"])
    assert "Earlier files (3): every series of theirs has a newer file" in text
    assert "Out of view (1): their vintages are kept" in text
    assert "Bring back" in text


def test_revisions_are_said_with_their_numbers():
    here = vintages()
    found = desk.revised(STATE, Bridge(here))
    shown = answer(here)
    text = words(shown.words["revisions-words"])
    assert "40 vintages, 12 Jan 2020 to 12 Apr 2023." in text
    mean = f"{found.result.mean:+.3f}".replace("-", "−")
    assert f"39 first prints with a later value: mean revision {mean}, mean absolute" in text
    assert f"intercept {found.bias.intercept:+.3f}".replace("-", "−") in text
    assert "p below .001" in text
    assert f"First prints of Prices were revised by {mean} on average" in shown.verdict
    prints = words(shown.words["prints"])
    assert "The newest 24 of" in prints
    newest = found.result.periods.size - 2
    assert f"{found.result.first[newest]:.3f}".replace("-", "−") in prints


def test_the_page_for_an_address_shows_its_date_and_names_refused_values():
    shown = page.layout("?as_of=2024-02-30&revised=values", Bridge(Workspace()))
    text = words(shown)
    assert "As it stood on must be a date such as 2024-03-12" in text
    good = page.layout("?as_of=2024-02-29", Bridge(Workspace()))
    (field,) = [p for p in props(good) if p.get("data-control") == "as_of"]
    assert (field["data-type"], field["data-value"]) == ("date", "2024-02-29")


def test_a_very_long_list_is_cut_and_says_so():
    many = tuple(Series(f"S{k}", pd.Period("2024-01", "M"), [1.0, 2.0]) for k in range(320))
    text = words(answer(Workspace((Release("a.csv", many, ()),))).words["series"])
    assert "320 series; the CSV has them all." in text
    assert "S59" in text
    assert "S60" not in text


def test_every_page_of_a_long_list_can_be_asked_for():
    many = tuple(
        Series(f"S{k}", pd.Period("2024-01", "M"), [1.0, 2.0], unit=("even", "odd")[k % 2])
        for k in range(150)
    )
    client = build_app(Workspace((Release("a.csv", many, ()),))).server.test_client()

    def asked(query):
        tag, marks, _, (_, _, *rows) = client.get(f"/rows/series?{query}").json["table"]
        assert tag == "table"
        return marks, [row[3][2][2] for row in rows]

    marks, names = asked("at=3")
    assert names == [f"S{k}" for k in range(120, 150)]
    assert [marks[f"data-{key}"] for key in ("total", "found", "at", "pages")] == [
        *("150", "150", "3", "3")
    ]
    marks, names = asked("at=9&find=ODD+s14")  # each word somewhere in name, unit or source
    assert names == ["S141", "S143", "S145", "S147", "S149"]
    assert (marks["data-found"], marks["data-at"], marks["data-pages"]) == ("5", "1", "1")
    marks, names = asked("find=nowhere")
    assert (names, marks["data-found"]) == ([], "0")
    for query, code in (("series?at=x", 422), ("series?as_of=x", 422), ("other", 404)):
        refused = client.get(f"/rows/{query}")
        assert refused.status_code == code and len(refused.json["message"].splitlines()) == 1
    assert client.get("/rows/preview?token=none").status_code == 404


# The preview ---------------------------------------------------------------------------------


def test_the_preview_says_what_was_understood_and_changes_nothing():
    here = Workspace((read_release("old.csv", GOOD),))
    before = here.releases
    new = read_release("new.csv", GOOD + b"2005-01,160,x\n")
    found = page.preview([("token-1", new)], Bridge(here))
    text = " ".join(words(found).split())
    assert "Understood, and not kept yet new.csv" in text
    assert "Money index not named month Jan 2000 to Jan 2005 61 adds 1 month (Jan 2005)" in text
    assert "error new.csv 62 Prices must be a number, but got 'x'" in text
    acts = [p["data-act"] for p in props(found) if "data-act" in p]
    assert acts == ["discard", "keep", "discard-all"]
    assert here.releases == before
    assert page.preview([], Bridge(here)) == []
    fresh = words(page.preview([("t", new)], Bridge(Workspace(placeholder=demo_releases()))))
    assert "new" in fresh
    assert "revises" not in fresh


# Files ---------------------------------------------------------------------------------------


def test_the_revisions_leave_as_they_are_on_the_page():
    here = Bridge(vintages())
    found = desk.revised(STATE, here)
    name, text = csv_export("revisions", STATE.to_query(), here)
    assert name == "revisions-prices-growth.csv"
    table = rows_of(text)
    assert table[0] == [
        *("period", "first", "stood from", "latest", "revision", "vintages"),
        *("first print", "counted"),
    ]
    assert len(table) == found.result.periods.size + 1
    for place in (0, 40, 70, found.result.periods.size - 1):
        row = table[place + 1]
        assert float(row[1]) == found.result.first[place]
        assert float(row[3]) == found.result.latest[place]
        assert float(row[4]) == found.result.revision[place]
        assert row[2] == found.loaded[place]
    assert f"mean revision {found.result.mean!r}" in text
    assert f"p {found.bias.p!r}" in text
    assert text.count("# vintage: ") == 40
    dated = replace(STATE, as_of="2020-03-20", revised="values")
    assert csv_export("revisions", dated.to_query(), here)[0] == (
        "revisions-prices-values-as-of-2020-03-20.csv"
    )


def test_the_list_of_series_leaves_as_a_file():
    here = Bridge(vintages(4))
    name, text = csv_export("series", "", here)
    assert name == "series.csv"
    table = rows_of(text)
    found = dict(zip(table[0], table[1], strict=True))
    assert found["name"] == "Prices"
    assert found["vintages"] == "4"
    assert found["fingerprint"] == here.workspace.named("Prices").fingerprint
    assert len(table) == 3


@pytest.mark.parametrize(
    ("view", "workspace", "said"),
    [
        ("nope", Workspace(), "view must be one of series, revisions, season, but got 'nope'"),
        ("series", Workspace(), "nothing is loaded yet"),
        ("revisions", Workspace(demo_releases()), "no series has been loaded twice"),
    ],
)
def test_what_is_not_there_cannot_be_exported(view, workspace, said):
    with pytest.raises(ValueError, match=said):
        csv_export(view, "", Bridge(workspace))
    client = build_app(workspace).server.test_client()
    answer = client.get(f"/export/data/{view}.csv")
    assert answer.status_code == 400
    assert said in answer.get_data(as_text=True)
