"""Statements: kept as they were said, never altered, superseded once, read back, carried over."""

import json
import sqlite3
from dataclasses import replace
from functools import partial

import numpy as np
import pandas as pd
import pytest
from scipy.special import stdtrit

from analytics.intervals import Fan
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_releases
from app.intake.reading import Release
from app.outlook.statements import (
    LONGEST,
    Statement,
    StatementError,
    keep_statement,
    kept_statements,
    stated_bounds,
)
from app.pages import reading as reading_page
from app.state import ViewState
from app.store import Store
from app.workspace import Workspace
from app.workspace_folder import export_folder, import_folder
from tests.app.threads import at_once

LEVELS = (0.5, 0.8, 0.95)


def path(middle, half):
    """A fan whose 80 % interval reaches `half` to each side; hundreds of degrees of freedom."""
    point = np.array(middle, dtype=float)
    wide = np.full(point.size, 500.0)
    scale = np.full(point.size, half / stdtrit(500.0, 0.9))
    whole = wide.astype(np.int64)
    held = np.full((len(LEVELS), point.size), 0.75)
    return Fan(np.arange(1, point.size + 1), point, scale, wide, whole, LEVELS, held, whole)


def said(**changes):
    one = Statement(
        driver=("Broad money",),
        response="Consumer prices",
        frequency="monthly",
        window=12,
        shift=24,
        compounding="percent",
        origin="2024-10",
        levels=LEVELS,
        paths={
            "yearly": path([2.0, 2.1, 0.1 + 0.2], 1.0),
            "single": path([0.2, 0.1, np.nan], 0.2),
        },
        words="Prices calm down.\nSlowly.",
        sources=(("Broad money", "0123456789abcdef", "2024-11"),),
        state="window=12",
        method="of past errors",
        version="1",
    )
    return replace(one, **changes)


@pytest.fixture(params=["file", "memory"])
def store(request, tmp_path):
    made = Store(tmp_path / "w.sqlite" if request.param == "file" else ":memory:")
    yield made
    made.close()


def test_a_statement_comes_back_to_the_last_digit(store):
    number = keep_statement(store, said(), "2024-11-12")
    (back,) = kept_statements(store).statements
    first = said()
    assert (back.id, back.day, back.words) == (number, "2024-11-12", first.words)
    for name in ("driver", "response", "origin", "levels", "sources", "state", "method"):
        assert getattr(back, name) == getattr(first, name)
    for target, one in first.paths.items():
        for part in ("ahead", "centre", "scale", "freedom", "errors", "measured", "judged"):
            np.testing.assert_array_equal(getattr(back.paths[target], part), getattr(one, part))


def test_it_says_its_interval_for_a_period(store):
    one = said()
    found = one.interval("yearly", 0.8, pd.Period("2024-12", "M"))
    assert found == pytest.approx((1.1, 3.1), abs=1e-12)
    for nothing in (
        one.interval("window", 0.8, pd.Period("2024-12", "M")),
        one.interval("yearly", 0.8, pd.Period("2024-10", "M")),
        one.interval("yearly", 0.8, pd.Period("2025-02", "M")),
    ):
        assert np.isnan(nothing).all()


def test_words_are_needed_and_bounded_and_hold_nothing_invisible(store):
    for words in ("", "  \n ", "x" * (LONGEST + 1)):
        with pytest.raises(StatementError, match="must have words"):
            keep_statement(store, said(words=words), "2024-11-12")
    keep_statement(store, said(words="up\u202e a\x00 bit\n\n<b>"), "2024-11-12")
    assert kept_statements(store).statements[0].words == "up a bit\n\n<b>"


@pytest.mark.parametrize(
    "change",
    [
        "UPDATE statements SET content = 'nicer'",
        "UPDATE statements SET day = '2020-01-01'",
        "UPDATE statements SET id = 9",
        "UPDATE OR REPLACE statements SET content = 'nicer'",
        "DELETE FROM statements",
        "DELETE FROM statements WHERE id = 1",
        "INSERT OR REPLACE INTO statements VALUES (1, 'a', '2024-11-12', 'c', 'd', 'nicer')",
        "REPLACE INTO statements (id, at, day, subject, state, content)"
        " VALUES (1, '', '', '', '', '')",
        "INSERT INTO statements VALUES (1, 'a', '2024-11-12', 'c', 'd', 'nicer')"
        " ON CONFLICT DO UPDATE SET content = excluded.content",
    ],
)
def test_a_statement_cannot_be_altered_by_any_way(store, change):
    keep_statement(store, said(), "2024-11-12")
    with pytest.raises(sqlite3.IntegrityError, match="a statement is never"), store.change() as db:
        db.execute(change)
    (back,) = kept_statements(store).statements
    assert (back.words, back.day, back.id) == (said().words, "2024-11-12", 1)


def test_superseding_keeps_the_original_and_happens_once(store):
    first = keep_statement(store, said(), "2024-11-12")
    second = keep_statement(store, said(words="No.", supersedes=first), "2024-12-12")
    kept = kept_statements(store)
    assert [one.words for one in kept.statements] == [said().words, "No."]
    assert kept.successor == {first: second}
    with pytest.raises(StatementError, match="superseded by statement 2 already"):
        keep_statement(store, said(supersedes=first), "2024-12-13")
    with pytest.raises(StatementError, match="there is no number 7"):
        keep_statement(store, said(supersedes=7), "2024-12-13")
    assert len(kept_statements(store).statements) == 2


def test_of_two_programs_that_supersede_the_same_statement_one_is_refused(tmp_path):
    programs = [Store(tmp_path / "w.sqlite"), Store(tmp_path / "w.sqlite")]
    first = keep_statement(programs[0], said(), "2024-11-12")
    second = said(supersedes=first)
    answers = at_once(*(partial(keep_statement, one, second, "2024-12-12") for one in programs))
    assert sorted(map(str, answers)) == [
        "2",
        "statement 1 is superseded by statement 2 already; supersede that one",
    ]
    for one in programs:
        assert len(kept_statements(one).statements) == 2
        one.close()


def test_statements_make_the_round_trip_through_a_folder(tmp_path, store):
    first = keep_statement(store, said(), "2024-11-12")
    keep_statement(store, said(words="Später mehr: 价格", supersedes=first), "2024-12-12")
    export_folder(store, tmp_path / "out")
    there = Store()
    import_folder(tmp_path / "out", there)
    with store.look() as one, there.look() as other:
        asked = "SELECT * FROM statements ORDER BY id"
        assert [tuple(r) for r in one.execute(asked)] == [tuple(r) for r in other.execute(asked)]
    with pytest.raises(sqlite3.IntegrityError, match="never"), there.change() as db:
        db.execute("DELETE FROM statements")


@pytest.mark.parametrize(
    "content",
    [
        "prices rise",
        "[]",
        "{}",
        json.dumps({"paths": {"yearly": {"centre": [1]}}, "levels": [0.5]}),
    ],
)
def test_one_that_cannot_be_read_is_named_and_the_rest_stands(content):
    store = Store()
    with store.change() as db:
        db.execute("INSERT INTO statements VALUES (1, 'at', '2024-03-12', 's', '', ?)", [content])
    keep_statement(store, said(), "2024-11-12")
    kept = kept_statements(store)
    assert [one.id for one in kept.statements] == [2]
    assert kept.refused == ("Statement 1 of 2024-03-12 cannot be read.",)


def test_bounds_for_an_alert_are_those_of_the_newest_statement_that_stands(store):
    first = keep_statement(store, said(), "2024-11-12")
    keep_statement(store, said(response="Wages"), "2024-11-12")
    period = pd.Period("2024-11", "M")
    kept = kept_statements(store)
    found = stated_bounds(kept, "Consumer prices", period)
    ends = [found[f"rate_12m_outlook_80_{side}"] for side in ("low", "high")]
    assert ends == pytest.approx([1.0, 3.0], abs=1e-12)
    assert found["rate_1m_outlook_80_low"] == pytest.approx(0.0, abs=1e-12)
    assert found["rate_12m_outlook_95_low"] < found["rate_12m_outlook_80_low"]
    logs = stated_bounds(kept, "Consumer prices", period, "log")
    assert logs["rate_12m_outlook_80_high"] == pytest.approx(100 * np.log(1.03), abs=1e-12)
    assert stated_bounds(kept, "Consumer prices", pd.Period("2024-10", "M")) == {}
    assert stated_bounds(kept, "Consumer prices", pd.Period("2025-02", "M")) == {}
    assert stated_bounds(kept, "Consumer prices", pd.Period("2024Q4", "Q-DEC")) == {}
    higher = {"yearly": path([9.0, 9.0], 1.0)}
    keep_statement(store, said(paths=higher, supersedes=first), "2024-11-13")
    found = stated_bounds(kept_statements(store), "Consumer prices", period)
    assert found["rate_12m_outlook_80_low"] == pytest.approx(8.0, abs=1e-12)
    assert np.isnan(found["rate_1m_outlook_50_low"])
    keep_statement(store, said(compounding="log"), "2024-11-14")
    found = stated_bounds(kept_statements(store), "Consumer prices", period)
    assert found["rate_12m_outlook_80_high"] == pytest.approx(100 * np.expm1(0.03), abs=1e-12)


def test_a_print_outside_what_was_stated_raises_an_alert_on_the_reading_page():
    values = 100 * 1.004 ** np.arange(48)  # 4.9 percent over 12 months
    prices = Series("Consumer prices", pd.Period("2020-12", "M"), values, "index")
    desk = Workspace((Release("a.csv", (prices,), ()),))
    keep_statement(desk.statement_store, said(), "2024-11-12")
    shown = reading_page.answer(ViewState(newest="2024-11"), Bridge(desk))
    text = str(shown.words["alerts"])
    assert "The 12-month rate is 4.91 percent, outside 1.00 to 3.00 percent, the 80 %" in text


def test_a_statement_about_the_invented_economy_is_not_stored():
    desk = Workspace((), demo_releases())
    keep_statement(desk.statement_store, said(), "2024-11-12")
    assert len(kept_statements(desk.statement_store).statements) == 1
    assert kept_statements(desk.store).statements == ()
    own = Series("Own", pd.Period("2020-12", "M"), [1.0, 2.0], "index")
    desk.add(Release("own.csv", (own,), ()))
    assert kept_statements(desk.statement_store).statements == ()
