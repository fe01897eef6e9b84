"""A workspace in a file: vintages, dates, corrections, files out of view, programs at once."""

import datetime
import subprocess
import sys
import threading
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from analytics.series import Series
from app.intake.problems import Problem
from app.intake.reading import Release
from app.state import StateError
from app.store import WorkspaceError
from app.workspace import UnknownSeriesError, Workspace, today
from app.workspace_rows import content_of, period_of

ROOT = Path(__file__).resolve().parents[2]


def series(name="Prices", values=(100.0, 101.0, 102.0), **attributes):
    first = attributes.pop("first", pd.Period("2024-01", "M"))
    return Series(name, first, np.array(values, float), **attributes)


def release(file, *found, problems=()):
    return Release(file, tuple(found), tuple(problems))


def same(one, other):
    """Whether two series are equal to the last bit of their values and every attribute."""
    return (
        content_of(one) == content_of(other)
        and one.first == other.first
        and one.first.freqstr == other.first.freqstr
        and [getattr(one, f) for f in ("name", "kind", "unit", "adjustment", "source")]
        == [getattr(other, f) for f in ("name", "kind", "unit", "adjustment", "source")]
    )


@pytest.fixture
def path(tmp_path):
    return tmp_path / "desk.sqlite"


# There and back ------------------------------------------------------------------------------


@given(
    arrays(np.float64, st.integers(1, 30), elements=st.floats(allow_infinity=False)).filter(
        lambda v: not np.isnan(v).all()
    ),
    st.sampled_from(["1023-04", "2024-12", "9999-01", "1960-Q1", "2024-Q4", "1000", "2024"]),
    st.text(st.characters(exclude_categories=("Cs",)), max_size=20),
)
def test_a_series_comes_back_to_the_last_bit(values, code, text):
    frequency = "quarterly" if "Q" in code else "monthly" if "-" in code else "annual"
    given_ = Series(
        f"S{text}", period_of(frequency, code), values, "level", f"u{text}", "no", f"s{text}"
    )
    here = Workspace((release("a.csv", given_),))
    assert same(here.named(given_.name), given_)
    assert here.named(given_.name).fingerprint == given_.fingerprint


def test_files_and_problems_are_there_after_closing(path):
    found = (
        Problem("error", "a.csv", 3, "Prices", "must be a number, but got 'x'"),
        Problem("note", "a.csv", None, None, "was read as Latin-1"),
    )
    here = Workspace(path=path)
    here.add(release("b.csv", series("Money", source="Bank"), problems=()))
    here.add(
        release("a.csv", series("Prices", unit="2015 = 100", adjustment="yes"), problems=found)
    )
    before = here.releases
    here.close()
    again = Workspace(path=path)
    assert [each.name for each in again.releases] == ["b.csv", "a.csv"]
    assert again.problems == found
    for old, new in zip(before, again.releases, strict=True):
        assert all(same(*pair) for pair in zip(old.series, new.series, strict=True))
    again.close()


@pytest.mark.parametrize("code", ["2024-13", "2024-Q5", "2024-1", "24", "", "2024-01-01", "x"])
def test_a_period_that_is_none_is_refused(code):
    for frequency in ("monthly", "quarterly", "annual"):
        with pytest.raises(ValueError, match=f"a period must be {frequency}, but got"):
            period_of(frequency, code)


def test_a_damaged_vintage_is_told_in_a_sentence(path):
    here = Workspace((release("a.csv", series()),), path=path)
    with here.store.change() as db:
        db.execute("UPDATE vintages SET content = x'0102'")
    here.close()
    with pytest.raises(WorkspaceError, match="the vintage of 'Prices' in the workspace is damaged"):
        Workspace(path=path).named("Prices")


def test_the_invented_economy_is_never_stored(path):
    demo = (release("demo.csv", series("Demo")),)
    here = Workspace(placeholder=demo, path=path)
    assert here.as_of().placeholder
    assert here.as_of("2020-01-01").placeholder
    with pytest.raises(UnknownSeriesError):
        here.correct("Demo", "unit", "x")
    with pytest.raises(ValueError, match=r"no file in view is named 'demo.csv'"):
        here.hide("demo.csv")
    here.close()
    assert Workspace(path=path).series == {}
    own = Workspace(placeholder=demo, path=path)
    own.add(release("own.csv", series("Own")))
    assert list(own.series) == ["Own"]
    assert list(Workspace(placeholder=demo, path=path).series) == ["Own"]
    own.hide("own.csv")
    assert own.series == {}  # put away is put away
    own.close()


# Vintages ------------------------------------------------------------------------------------


def test_every_content_is_kept_once():
    here = Workspace()
    march, april = series(values=(1, 2, 3)), series(values=(1, 2.5, 3, 4))
    for day, one in (("2024-03-12", march), ("2024-04-10", april), ("2024-04-11", april)):
        here.add(release("cpi.csv", one), day)
    assert [(v.day, v.series.values.size) for v in here.vintages("Prices")] == [
        ("2024-03-12", 3),
        ("2024-04-10", 4),
    ]
    assert here.as_of().vintages == {"Prices": 2}
    with here.store.look() as db:
        assert db.execute("SELECT COUNT(*) FROM vintages").fetchone()[0] == 2
        assert db.execute("SELECT COUNT(*) FROM loads").fetchone()[0] == 3
    here.add(release("cpi.csv", march), "2024-05-10")  # and back to what it was
    assert [v.series.values.size for v in here.vintages("Prices")] == [3, 4, 3]
    assert here.as_of().vintages == {"Prices": 2}
    assert here.named("Prices").values.tolist() == [1, 2, 3]


def test_files_of_the_past_may_be_loaded_in_any_order():
    here = Workspace()
    for month in (5, 3, 4):
        one = series(values=np.arange(1, month + 1))
        here.add(release(f"cpi-{month}.csv", one), f"2024-{month:02d}-12")
    assert [v.series.values.size for v in here.vintages("Prices")] == [3, 4, 5]
    assert here.named("Prices").values.size == 5
    assert [file.name for file in here.as_of().files] == ["cpi-3.csv", "cpi-4.csv", "cpi-5.csv"]


def test_any_date_shows_what_stood_on_it():
    here = Workspace()
    for month in (3, 4, 5):
        one = series(values=np.arange(1, month + 1))
        here.add(release("cpi.csv", one), f"2024-{month:02d}-12")
    here.add(release("money.csv", series("Money")), "2024-04-20")
    sizes = {
        day: {name: one.values.size for name, one in here.as_of(day).series.items()}
        for day in ("2024-03-11", "2024-03-12", "2024-04-12", "2024-04-20", "2024-06-01", "")
    }
    assert sizes["2024-03-11"] == {}
    assert sizes["2024-03-12"] == {"Prices": 3}
    assert sizes["2024-04-12"] == {"Prices": 4}
    assert sizes["2024-04-20"] == {"Prices": 4, "Money": 3}
    assert sizes["2024-06-01"] == sizes[""] == {"Money": 3, "Prices": 5}
    assert here.as_of(datetime.date(2024, 4, 12)) is here.as_of("2024-04-12")
    assert here.as_of("2024-04-12").vintages == {"Prices": 2}
    assert here.vintages("Prices", "2024-04-12")[-1].series.values.size == 4
    with pytest.raises(
        UnknownSeriesError, match="on 2024-01-01; the first file stands from 2024-0"
    ):
        here.as_of("2024-01-01").named("Prices")
    with pytest.raises(UnknownSeriesError, match="named 'Money' as it stood on 2024-04-12; there"):
        here.as_of("2024-04-12").named("Money")
    with pytest.raises(StateError, match="must be a date"):
        here.as_of("yesterday")
    with pytest.raises(StateError, match="must be a date"):
        here.add(release("a.csv", series()), "2024-02-30")


def test_without_a_date_a_file_stands_from_today():
    before = today()
    here = Workspace((release("a.csv", series()),))
    (file,) = here.as_of().files
    assert before <= file.day <= today()
    assert file.at.endswith("+00:00")
    assert (file.series, file.problems, file.hidden) == (("Prices",), 0, "")


def test_a_view_held_does_not_change():
    here = Workspace((release("a.csv", series()),))
    before = here.as_of()
    here.add(release("a.csv", series(values=(7, 8))))
    assert before.named("Prices").values.size == 3
    assert here.as_of() is not before
    assert here.as_of() is here.as_of()


# Corrections ---------------------------------------------------------------------------------


def test_a_correction_holds_for_every_vintage_and_every_later_load(path):
    here = Workspace((release("a.csv", series(kind="index", unit="")),), path=path)
    here.correct("Prices", "kind", "rate")
    here.correct("Prices", "unit", "percent")
    here.correct("Prices", "unit", "  percent a\n month ")
    here.correct("Prices", "adjustment", "yes")
    here.add(release("b.csv", series(values=(1, 2), kind="level", unit="x", adjustment="no")))
    for one in (here.named("Prices"), *(v.series for v in here.vintages("Prices"))):
        assert (one.kind, one.unit, one.adjustment) == ("rate", "percent a month", "yes")
    here.close()
    again = Workspace(path=path)
    assert again.named("Prices").unit == "percent a month"
    assert again.corrections()["Prices"]["kind"] == "rate"
    with again.store.look() as db:
        kinds = [row[0] for row in db.execute("SELECT kind FROM vintages ORDER BY id")]
    assert kinds == ["index", "level"]  # as read
    again.close()


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (("Prices", "kind", "index number"), "kind must be one of index, level, rate, but got"),
        (("Prices", "adjustment", ""), "adjustment must be one of yes, no, unknown, but got ''"),
        (("Prices", "name", "x"), "a correction must be of kind, unit, adjustment, but got 'name'"),
        (("Nope", "unit", "x"), "no loaded series is named 'Nope'"),
    ],
)
def test_a_correction_that_is_none_is_refused(change, said):
    here = Workspace((release("a.csv", series()),))
    with pytest.raises(ValueError, match=said):
        here.correct(*change)
    assert here.corrections() == {}


# Out of view ---------------------------------------------------------------------------------


def test_a_file_out_of_view_keeps_its_vintages_and_comes_back(path):
    here = Workspace(path=path)
    here.add(release("a.csv", series()), "2020-03-12")
    here.add(release("b.csv", series("Money")), "2020-03-12")
    here.hide("a.csv")
    assert list(here.series) == ["Money"]
    assert list(here.as_of("2020-03-12").series) == ["Prices", "Money"]  # it stood there then
    assert len(here.vintages("Prices")) == 1
    (out,) = here.hidden_files()
    assert (out.name, out.series, out.hidden) == ("a.csv", ("Prices",), today())
    with pytest.raises(ValueError, match=r"no file in view is named 'a.csv'"):
        here.hide("a.csv")
    here.close()
    again = Workspace(path=path)
    again.show("a.csv")
    assert list(again.series) == ["Prices", "Money"]
    assert again.hidden_files() == ()
    with pytest.raises(ValueError, match=r"no file out of view is named 'a.csv'"):
        again.show("a.csv")
    again.close()


def test_a_file_loaded_again_is_in_view_again():
    here = Workspace((release("a.csv", series()),))
    here.hide("a.csv")
    here.add(release("a.csv", series(values=(1, 2))))
    assert here.named("Prices").values.size == 2
    assert here.hidden_files() == ()


# Several at once -----------------------------------------------------------------------------

OTHER = """
import sys
import numpy as np, pandas as pd
from analytics.series import Series
from app.intake.reading import Release
from app.workspace import Workspace
here = Workspace(path=sys.argv[1])
for k in range(int(sys.argv[2])):
    one = Series("Theirs", pd.Period("2024-01", "M"), np.arange(k + 2.0), kind="level")
    here.add(Release(f"theirs {k}.csv", (one,), ()))
    here.correct("Theirs", "unit", f"unit {k}")
    assert here.named("Theirs").values.size == k + 2, (here.named("Theirs"), k)
here.close()
"""


def test_two_threads_and_a_command_lose_nothing(path):
    times = 25
    here, tab, failures = Workspace(path=path), Workspace(path=path), []

    def work(desk, name):
        try:
            for k in range(times):
                desk.add(release(f"{name} {k}.csv", series(name, np.arange(k + 2.0))))
                desk.correct(name, "unit", f"unit {k}")
                assert desk.named(name).values.size == k + 2
        except Exception as error:
            failures.append(error)

    command = subprocess.Popen(
        [sys.executable, "-c", OTHER, str(path), str(times)], cwd=ROOT, stderr=subprocess.PIPE
    )
    threads = [
        threading.Thread(target=work, args=pair) for pair in ((here, "A"), (here, "B"), (tab, "C"))
    ]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert command.communicate(timeout=120)[1] == b""
    assert failures == []
    for desk in (here, tab):  # each sees what the others did
        assert set(desk.series) == {"A", "B", "C", "Theirs"}
        assert len(desk.releases) == 4 * times
        for name in ("A", "B", "C", "Theirs"):
            assert desk.named(name).unit == f"unit {times - 1}"
            assert [v.series.values.size for v in desk.vintages(name)] == list(range(2, times + 2))
    here.close()
    tab.close()
