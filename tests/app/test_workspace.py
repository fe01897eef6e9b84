"""The workspace: series by name, the newest file winning, also under threads."""

from dataclasses import replace
from functools import partial

import numpy as np
import pandas as pd
import pytest

from analytics.series import Series
from app.demo import FILES, WEIGHTS, demo_releases
from app.intake.problems import Problem
from app.intake.reading import Release
from app.state import ViewState
from app.workspace import UnknownSeriesError, Workspace
from tests.app.threads import at_once


def series(name, value=1.0, n=30):
    return Series(name, pd.Period("2000-01", "M"), np.arange(n) + value, kind="level")


def release(file, *names, problems=()):
    return Release(file, tuple(series(name) for name in names), tuple(problems))


def test_series_are_found_by_name_in_the_order_of_the_files():
    here = Workspace((release("a.csv", "One", "Two"), release("b.csv", "Three")))
    assert list(here.series) == ["One", "Two", "Three"]
    assert here.named("Two").name == "Two"
    assert [each.name for each in here.releases] == ["a.csv", "b.csv"]


def test_a_file_read_again_takes_the_place_of_the_earlier_one():
    here = Workspace((release("a.csv", "One", "Two"), release("b.csv", "Three")))
    here.add(Release("a.csv", (series("One", 50.0),), ()))
    assert [each.name for each in here.releases] == ["b.csv", "a.csv"]
    assert here.named("One").values[0] == 50.0
    with pytest.raises(UnknownSeriesError):
        here.named("Two")


def test_of_one_name_in_two_files_the_newest_file_wins():
    here = Workspace((release("a.csv", "One"),))
    here.add(Release("b.csv", (series("One", 50.0),), ()))
    assert here.named("One").values[0] == 50.0
    here.add(Release("a.csv", (series("One", 70.0),), ()))
    assert here.named("One").values[0] == 70.0


def test_an_unknown_name_gets_the_nearest_ones():
    here = Workspace((release("a.csv", "Broad money", "Narrow money", "Consumer prices"),))
    with pytest.raises(UnknownSeriesError) as caught:
        here.named("Broad mony")
    assert str(caught.value).startswith(
        "no loaded series is named 'Broad mony'; there is 'Broad money'"
    )
    with pytest.raises(UnknownSeriesError, match="there is 'Broad money', 'Narrow money', 'Con"):
        here.named("zzz")
    with pytest.raises(UnknownSeriesError, match=r"^nothing is loaded yet; open release files"):
        Workspace().named("zzz")


@pytest.mark.parametrize("name", ["", "x" * 200, "\x00", "\u202e", "'; drop table", "é" * 50])
def test_a_hostile_name_gets_one_printable_sentence(name):
    with pytest.raises(UnknownSeriesError) as caught:
        Workspace((release("a.csv", *(f"Series {i}" for i in range(50))),)).named(name)
    assert str(caught.value).isprintable()
    assert len(str(caught.value)) < 400


def test_problems_of_all_files_are_together():
    found = [Problem("error", "a.csv", 3, "x", "m"), Problem("note", "b.csv", None, None, "m")]
    here = Workspace(
        (release("a.csv", problems=found[:1]), release("b.csv", "One", problems=found[1:]))
    )
    assert here.problems == tuple(found)


@pytest.mark.parametrize(
    ("names", "driver", "response"),
    [
        (["Consumer prices", "Policy rate", "Broad money"], "Broad money", "Consumer prices"),
        (["CPI", "M2 money"], "M2 money", "CPI"),
        (["cpi all items", "Wages"], "Wages", "cpi all items"),
        (["cpi", "m1"], "m1", "cpi"),
        (["Wages", "Oil price"], "Wages", "Oil price"),
        (["Money", "Money market rate"], "Money", "Money market rate"),
        (["A", "B", "C"], "A", "B"),
        (["Prices of oil", "Cpi"], "Cpi", "Prices of oil"),
        (["Only"], "Only", "Only"),
    ],
)
def test_the_opening_pair_is_money_and_prices_where_they_can_be_told(names, driver, response):
    state = Workspace((release("a.csv", *names),)).opening_state()
    assert (state.driver, state.response) == (driver, response)
    assert state == replace(ViewState(), driver=driver, response=response)


def test_the_opening_pair_shares_a_calendar_where_one_does():
    quarterly = Series("Consumer prices", pd.Period("2000Q1"), np.arange(30) + 1.0)
    files = Release("a.csv", (series("Money"), quarterly, series("Wages")), ())
    state = Workspace((files,)).opening_state()
    assert (state.driver, state.response) == ("Money", "Wages")
    alone = Workspace((Release("a.csv", (series("Money"), quarterly), ()),)).opening_state()
    assert alone.driver == "Money"


def test_what_stands_in_goes_when_the_first_file_of_ones_own_comes():
    here = Workspace(placeholder=(release("demo.csv", "One"), release("more.csv", "Two")))
    assert list(here.series) == ["One", "Two"]
    here.add(release("own.csv", "Three"))
    assert list(here.series) == ["Three"]
    here.add(release("demo.csv", "Four"))
    assert list(here.series) == ["Three", "Four"]
    assert list(Workspace((release("own.csv", "Three"),), (release("d.csv", "One"),)).series) == [
        "Three"
    ]


def test_an_empty_workspace_opens_with_the_usual_state():
    assert Workspace().opening_state() == ViewState()


def test_what_a_reader_holds_does_not_change_under_it():
    here = Workspace((release("a.csv", "One"),))
    before, names = here.releases, list(here.series)
    here.add(release("b.csv", "Two"))
    assert [each.name for each in before] == ["a.csv"]
    assert names == ["One"]


def test_threads_may_add_and_read_at_once():
    here = Workspace((release("a.csv", "One"),))

    def work(place):
        for k in range(100):
            if place % 2:
                here.add(Release(f"{place}.csv", (series(f"S{place}", k),), ()))
            else:
                assert "One" in here.series
                assert here.named("One").values[0] == 1.0
                seen = here.releases
                assert len({each.name for each in seen}) == len(seen)

    assert at_once(*(partial(work, place) for place in range(8))) == [None] * 8
    assert sorted(here.series) == ["One", "S1", "S3", "S5", "S7"]
    assert here.named("S7").values[0] == 99.0


def test_the_invented_economy_is_read_without_a_fault():
    releases = demo_releases()
    here = Workspace(releases)
    assert tuple(each.name for each in releases) == (*FILES, WEIGHTS)
    assert here.as_of().weights.years == tuple(range(1960, 2027))
    assert here.problems == ()
    assert here.opening_state() == ViewState()
    assert len(here.series) == 19
    assert all("invented" in one.source for one in here.series.values())
    assert here.named("Real output").frequency == "quarterly"
    assert here.named("Consumer prices").adjustment == "no"
    assert here.named("Policy rate").kind == "rate"
