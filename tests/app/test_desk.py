"""What the Data page computes: new files against what is kept, revisions, pending files."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from analytics.rates import growth_rate
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_releases
from app.desk import bridge as desk
from app.desk import pending
from app.intake.reading import Release, read_release
from app.pages.data import preview
from app.state import ViewState
from app.workspace import Workspace

STATE = ViewState(series="Prices")
DATA = Path(__file__).resolve().parents[1] / "data"


def series(values, first="2024-01", name="Prices", freq="M", **attributes):
    attributes.setdefault("kind", "level")
    return Series(name, pd.Period(first, freq), np.array(values, float), **attributes)


def vintages(n=40, seed=2, scale=1.0):
    """A workspace in which a level is printed month by month and revised once."""
    rng = np.random.default_rng(seed)
    final = 100 * np.exp(np.cumsum(rng.normal(0.2, 0.3, 60 + n)) / 100)
    here = Workspace()
    for k in range(n):
        values = final[: 60 + k].copy()
        values[-1] *= np.exp(rng.normal(0.1, 0.05) / 100)
        day = f"{2020 + k // 12}-{k % 12 + 1:02d}-12"
        one = series(values * (scale if k > n // 2 else 1.0), "2015-02")
        here.add(Release(f"{day}.csv", (one, series([1, 2], name="Other")), ()), day)
    return here


@pytest.mark.parametrize(
    ("new", "said"),
    [
        (series([1, 2, 3]), "the same as kept"),
        (series([1, 2, 3, 4]), "adds 1 month (Apr 2024)"),
        (series([1, 2, 3, 4, 5]), "adds 2 months (Apr 2024 to May 2024)"),
        (series([1, 2.5, 3.5]), "revises 2 values, Feb 2024 to Mar 2024"),
        (
            series([1, 9, 3, 4]),
            "adds 1 month (Apr 2024); revises 1 value, Feb 2024",
        ),
        (series([2, 3], "2024-02"), "no longer has 1 month (Jan 2024)"),
        (series([1, np.nan, 3]), "no longer has 1 month (Feb 2024)"),
        (series([1, 2, 3], kind="rate"), "was read as level before"),
        (series([1.0], "2024Q1", freq="Q-DEC"), "was monthly before"),
    ],
)
def test_a_new_file_is_held_against_what_is_kept(new, said):
    assert desk.against_kept(new, series([1, 2, 3])) == said
    assert desk.against_kept(new, None) == "new"


def test_corrections_are_in_the_preview():
    here = Workspace((Release("a.csv", (series([1, 2]),), ()),))
    here.correct("Prices", "kind", "rate")
    new = Release("b.csv", (series([1, 2]), series([1], name="Other")), ())
    shown = desk.corrected(new, here)
    assert [one.kind for one in shown.series] == ["rate", "level"]
    assert new.series[0].kind == "level"


def test_revisions_of_growth_are_those_of_the_growth_rates():
    here = vintages()
    found = desk.revised(STATE, Bridge(here))
    assert (found.name, len(found.vintages), found.unit) == ("Prices", 40, "percent a month")
    assert found.noun == "month"
    rates = [growth_rate(v.series, formula="percent") for v in found.vintages]
    np.testing.assert_array_equal(found.result.latest, rates[-1].values)
    last = found.result.periods.size - 1
    assert found.result.n == 39
    assert found.result.first[last - 1] == rates[-2].values[-1]
    assert found.loaded[last - 1] == "2023-03-12"
    assert found.result.mean == pytest.approx(-0.1, abs=0.03)  # prints were 0.1 % too high
    assert found.bias.n == 39
    assert found.bias.p < 0.001
    assert found.start == 60 - 1 - 1 - desk.BEFORE  # a year before the first first print
    assert found.moved[0] == 58


def test_a_re_referencing_does_not_count_as_a_revision_of_growth():
    plain, scaled = (desk.revised(STATE, Bridge(vintages(scale=s))) for s in (1.0, 0.37))
    np.testing.assert_allclose(scaled.result.revision, plain.result.revision, atol=1e-9)
    assert scaled.moved == plain.moved
    values = replace(STATE, revised="values")
    assert abs(desk.revised(values, Bridge(vintages(scale=0.37))).result.mean) > 10


def test_revisions_as_they_stood_on_a_date():
    here = Bridge(vintages())
    found = desk.revised(replace(STATE, as_of="2020-03-20"), here)
    assert [v.day for v in found.vintages] == ["2020-01-12", "2020-02-12", "2020-03-12"]
    assert found.result.n == 2
    assert (found.bias, found.bias_refusal) == (
        None,
        "a test of bias must have at least 24 first prints, but got 2",
    )
    assert desk.revised(replace(STATE, as_of="2020-01-20"), here) is None


def test_the_first_series_with_revisions_stands_in():
    found = desk.revised(replace(STATE, series="Other"), Bridge(vintages(3)))
    assert found.name == "Prices"
    assert desk.revised(STATE, Bridge(Workspace(placeholder=demo_releases()))) is None


def test_what_cannot_be_compared_gives_its_sentence():
    here = Workspace()
    here.add(Release("a.csv", (series([1, 2, 3]),), ()), "2024-04-01")
    here.add(Release("a.csv", (series([1, 2], "2024Q1", freq="Q-DEC"),), ()), "2024-05-01")
    found = desk.revised(STATE, Bridge(here))
    assert found.result is None
    assert found.refusal == "vintages must have one calendar, but got monthly and quarterly"
    below = Workspace()
    for day, last in (("2024-04-01", -1), ("2024-05-01", -2)):
        below.add(Release("a.csv", (series([1, 2, last]),), ()), day)
    assert "must be positive" in desk.revised(STATE, Bridge(below)).refusal
    assert desk.revised(replace(STATE, revised="values"), Bridge(below)).result.mean == -1.0


# Pending -------------------------------------------------------------------------------------


def test_what_is_looked_at_is_held_by_token_until_dropped():
    held, one = pending.Pending(), Release("a.csv", (series([1, 2]),), ())
    token, other = held.hold(one), held.hold(one)
    assert token != other
    assert held.found(token) is one
    held.drop(token)
    assert held.found(token) is None
    assert held.found(other) is one
    held.drop("never")


def test_the_oldest_gives_way_when_there_are_too_many(monkeypatch):
    held, one = pending.Pending(), Release("a.csv", (series([1, 2]),), ())
    tokens = [held.hold(one) for _ in range(pending.MOST_FILES + 3)]
    assert [held.found(token) is None for token in tokens[:4]] == [True, True, True, False]
    monkeypatch.setattr(pending, "MOST_BYTES", 40)
    tokens = [held.hold(one) for _ in range(4)]
    assert [held.found(token) is None for token in tokens] == [True, True, False, False]
    big = held.hold(Release("b.csv", (series(np.arange(1, 100)),), ()))
    assert held.found(big) is not None  # one file is always held


def book(name="xlsx_second_sheet"):
    return (DATA / f"{name}.xlsx").read_bytes()


def test_another_sheet_of_a_held_workbook_can_be_read_in_its_place():
    held = pending.Pending()
    first = read_release("b.xlsx", book())
    token = held.hold(first, "b.xlsx", book())
    second = held.choose(token, "Quarterly")
    assert held.found(token) is second
    assert (second.name, second.sheet) == ("b.xlsx, Quarterly", "Quarterly")
    assert second.series[0].frequency == "quarterly"
    again = held.choose(token, "Data")  # the one that was read first keeps the plain name
    assert (again.name, again.sheets) == ("b.xlsx", ("Contents", "Data", "Quarterly"))
    with pytest.raises(ValueError, match="the period must be a month, a quarter or a year"):
        held.choose(token, "Contents")
    assert held.found(token) is again
    for gone in (held.hold(Release("a.csv", (series([1, 2]),), ()), "a.csv", b"x"), "never"):
        with pytest.raises(ValueError, match="no longer held"):
            held.choose(gone, "Data")


def test_the_preview_offers_the_sheets_of_a_workbook_and_of_nothing_else():
    shown = str(preview([("t", read_release("b.xlsx", book()))], Bridge(Workspace())))
    assert "data-sheet" in shown and "Quarterly" in shown
    shown = str(preview([("t", read_release("b.xlsx", book("xlsx_plain")))], Bridge(Workspace())))
    assert "data-sheet" not in shown
