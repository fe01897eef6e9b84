"""Export and import of a workspace: exact, whole or not at all, and suspicious."""

import csv
import json
import shutil

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from analytics.series import Series
from app.intake.problems import Problem
from app.intake.reading import Release
from app.migrations import TABLES, VERSION
from app.store import Store, WorkspaceError, row_values
from app.workspace import Workspace
from app.workspace_folder import export_folder, import_folder


def rows(store):
    """Every row of every table, blobs as bytes."""
    with store.look() as db:
        return {
            table: [row_values(row) for row in db.execute(f"SELECT * FROM {table} ORDER BY rowid")]
            for table in TABLES
        }


def filled(path=":memory:"):
    rng = np.random.default_rng(4)
    here = Workspace(path=path)
    walk = np.exp(rng.standard_normal(200).cumsum() / 50) / 3
    walk[[5, 17]] = np.nan
    monthly = Series('=Prices, "all"\n', pd.Period("1999-11", "M"), walk, "index", "2015 = 100")
    tiny = Series("价格", pd.Period("1960Q2", "Q-DEC"), [5e-324, -0.0, 1e308, 0.1 + 0.2], "level")
    weights = Series("../../x", pd.Period("1000", "Y-DEC"), [1 / 3], "rate", adjustment="yes")
    found = (Problem("warning", "a.csv", 3, "x", "gap"), Problem("note", "a.csv", None, None, "é"))
    here.add(Release("a.csv", (monthly, tiny), found), "2024-03-12")
    here.add(Release("b.csv", (weights, monthly), ()), "2024-04-10")
    here.add(Release("c.csv", (), ()))
    here.correct("价格", "unit", "千")
    here.hide("c.csv")
    with here.store.change() as db:
        db.execute("INSERT INTO rules VALUES ('rate_12m above 3', 1, 'now')")
        db.execute("INSERT INTO marks VALUES (7, '价格', '1960-Q3', 'splice', 'why', 'now')")
        db.execute(
            "INSERT INTO statements VALUES (3, 'at', '2024-03-12', 's', 'w=1', '{\"a\": 1}')"
        )
    return here


@pytest.fixture
def exported(tmp_path):
    export_folder(filled().store, tmp_path / "out")
    return tmp_path / "out"


def test_the_round_trip_is_exact_byte_for_byte(tmp_path, exported):
    here = filled()
    there = Store(tmp_path / "new.sqlite")
    assert import_folder(exported, there) == 3
    before, after = rows(here.store), rows(there)
    times = [before["loads"], before["corrections"]], [after["loads"], after["corrections"]]
    for row in (*times[0][0], *times[0][1], *times[1][0], *times[1][1]):
        row.pop("at")  # two calls of filled() differ in the second
    assert after == before
    assert all(isinstance(row["content"], bytes) for row in after["vintages"])
    again = tmp_path / "again"
    export_folder(there, again)
    for file in sorted(p for p in exported.rglob("*") if p.is_file()):
        assert (again / file.relative_to(exported)).read_bytes() == file.read_bytes()
    there.close()


@given(
    arrays(np.float64, st.integers(1, 12), elements=st.floats(allow_infinity=False)).filter(
        lambda v: not np.isnan(v).all()
    )
)
def test_any_values_make_the_round_trip(tmp_path_factory, values):
    here = Workspace((Release("a.csv", (Series("S", pd.Period("2024-01", "M"), values),), ()),))
    folder = tmp_path_factory.mktemp("trip") / "out"
    export_folder(here.store, folder)
    there = Store()
    import_folder(folder, there)
    assert rows(there) == rows(here.store)


def test_the_folder_is_plain_csv_and_json(exported):
    index = json.loads((exported / "workspace.json").read_text(encoding="utf-8"))
    assert set(index) == {"format", "version", *TABLES}
    assert index["version"] == VERSION
    names = sorted(path.name for path in (exported / "vintages").iterdir())
    assert names == ["0001-prices-all.csv", "0002.csv", "0003-x.csv"]
    with (exported / "vintages" / "0002.csv").open(encoding="utf-8", newline="") as stream:
        table = list(csv.reader(stream))
    assert table[:3] == [["period", "value"], ["1960-Q2", "5e-324"], ["1960-Q3", "-0.0"]]
    first = (exported / "vintages" / "0001-prices-all.csv").read_text().splitlines()
    assert first[6] == "2000-04,"  # a gap is an empty cell


def test_an_export_needs_a_new_or_empty_folder(tmp_path):
    here = filled()
    full = tmp_path / "full"
    full.mkdir()
    (full / "mine.txt").write_text("x")
    with pytest.raises(WorkspaceError, match="must be new or empty"):
        export_folder(here.store, full)
    assert [path.name for path in tmp_path.iterdir()] == ["full"]
    (tmp_path / "empty").mkdir()
    assert export_folder(here.store, tmp_path / "empty") == 3
    with pytest.raises(WorkspaceError, match="may be written, but got"):
        export_folder(here.store, full / "mine.txt" / "out")


def test_an_export_that_fails_leaves_nothing(tmp_path):
    here = filled()
    with here.store.change() as db:
        db.execute("UPDATE vintages SET content = x'0102' WHERE id = 2")
    with pytest.raises(WorkspaceError, match="is damaged"):
        export_folder(here.store, tmp_path / "out")
    assert list(tmp_path.iterdir()) == []


def test_an_import_needs_an_empty_workspace(exported):
    here = filled()
    before = rows(here.store)
    with pytest.raises(WorkspaceError, match="must go into an empty workspace"):
        import_folder(exported, here.store)
    assert rows(here.store) == before


def spoil(folder, how):
    index = json.loads((folder / "workspace.json").read_text(encoding="utf-8"))
    values = folder / "vintages" / "0003-x.csv"
    match how:
        case "value":
            values.write_text("period,value\n1000,0.4\n")
        case "period":
            values.write_text(f"period,value\n1001,{1 / 3!r}\n")
        case "short":
            values.write_text("period,value\n1000\n")
        case "empty":
            values.write_text("")
        case "word":
            values.write_text("period,value\n1000,many\n")
        case "infinite":
            values.write_text("period,value\n1000,inf\n")
        case "gone":
            values.unlink()
        case "place":
            index["vintages"][2]["values"] = "../../secret.csv"
        case "kind":
            index["vintages"][2]["kind"] = "other"
        case "key":
            index["members"][0]["vintage"] = 99
        case "column":
            index["loads"][0]["id, at) VALUES (1, 2); --"] = 1
        case "row":
            index["loads"][0] = "x"
        case "list":
            index["marks"] = {"a": 1}
        case "format":
            index["format"] = "else"
        case "json":
            (folder / "workspace.json").write_text("{")
            return
        case "nothing":
            shutil.rmtree(folder)
            return
        case "newer":
            index["version"] = VERSION + 1
    (folder / "workspace.json").write_text(json.dumps(index), encoding="utf-8")


@pytest.mark.parametrize(
    ("how", "said"),
    [
        ("value", "0003-x.csv was changed: its values are not those of the export"),
        ("period", "its periods must follow each other from the first"),
        ("short", "0003-x.csv was changed: it is cut short"),
        ("empty", "0003-x.csv was changed: it is cut short"),
        ("word", "0003-x.csv was changed: could not convert"),
        ("infinite", "must be finite"),
        ("gone", "0003-x.csv cannot be read"),
        ("place", "'../../secret.csv' is no place for values"),
        ("kind", "0003-x.csv was changed: .*kind must be one of"),
        ("key", "does not hold the rows of a workspace"),
        ("column", "does not hold the rows of a workspace"),
        ("row", "does not hold the rows of a workspace"),
        ("list", "its marks are no list"),
        ("format", "is of another kind"),
        ("json", "is not JSON"),
        ("nothing", "has no workspace.json that can be read"),
        ("newer", "was written by a newer Pricewake"),
    ],
)
def test_a_folder_that_was_changed_is_refused_and_nothing_is_imported(exported, how, said):
    spoil(exported, how)
    there = Store()
    with pytest.raises(WorkspaceError, match=said) as caught:
        import_folder(exported, there)
    assert "\n" not in str(caught.value)
    assert not any(rows(there).values())


# The command ---------------------------------------------------------------------------------


def test_the_command_exports_and_imports(tmp_path, run):
    desk, new = tmp_path / "desk.sqlite", tmp_path / "new.sqlite"
    filled(desk).close()
    out = tmp_path / "out"
    assert run("workspace", "export", out, "--workspace", desk) == (
        0,
        f"3 vintages written to {out}.\n",
        "",
    )
    assert run("workspace", "import", out, "--workspace", new)[0] == 0
    one, two = Store(desk), Store(new)
    assert rows(one) == rows(two)
    one.close()
    two.close()
    status, _, err = run("workspace", "import", out, "--workspace", new)
    assert (status, err.count("\n")) == (2, 1)
    assert "must go into an empty workspace" in err
    status, _, err = run("workspace", "export", out / "x", "--workspace", tmp_path / "no")
    assert status == 2
    assert "there is no workspace at" in err
    assert not (tmp_path / "no").exists()


@pytest.mark.skipif("sys.platform != 'linux'", reason="the rule of another platform")
def test_the_usual_workspace_is_the_one_in_the_data_folder(tmp_path, run, monkeypatch):
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path))
    status, _, err = run("workspace", "export", tmp_path / "out")
    assert status == 2
    assert "there is no workspace at" in err
    export_folder(filled().store, tmp_path / "out")
    assert run("workspace", "import", tmp_path / "out")[0] == 0
    assert (tmp_path / "pricewake" / "workspace.sqlite").is_file()


def test_commands_depend_on_their_files_alone_unless_a_workspace_is_named(
    tmp_path, run, monkeypatch
):
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "data"))
    text = "month,Own prices\n" + "".join(f"2020-{m:02d},{100 + m}\n" for m in range(1, 13))
    file, desk = tmp_path / "own.csv", tmp_path / "desk.sqlite"
    file.write_text(text)

    def names(*words):
        status, out, err = run("inspect", "--json", *words)
        assert (status, err) == (0, "")
        return [one["name"] for one in json.loads(out)["series"]]

    assert names(file) == ["Own prices"]
    assert not (tmp_path / "data").exists()
    assert names(file, "--workspace", desk) == ["Own prices"]
    assert names("--workspace", desk) == ["Own prices"]  # it was kept
    assert "Own prices" not in names()  # and is not seen without being named
    assert len(Workspace(path=desk).vintages("Own prices")) == 1
    other = tmp_path / "other.csv"
    other.write_text(text.replace("Own", "Other"))
    assert names(other) == ["Other prices"]
    assert names(other, "--workspace", desk) == ["Own prices", "Other prices"]


def test_a_workspace_that_is_not_there_is_no_reason_to_show_the_invented_economy(tmp_path, run):
    for command in ("inspect", "lag"):
        status, out, err = run(command, "--workspace", tmp_path / "typo.sqlite")
        assert (status, out) == (2, "")
        assert "there is no workspace at" in err
    assert list(tmp_path.iterdir()) == []
    assert run("inspect", "--json", "--workspace", ":memory:")[:2] == (
        0,
        '{"series": [], "problems": []}\n',
    )
    bad = tmp_path / "notes.txt"
    bad.write_text("not a workspace")
    status, _, err = run("inspect", "--workspace", bad)
    assert (status, err.count("\n")) == (2, 1)
    assert "nothing was changed in it" in err


def test_lag_answers_as_it_stood_on_a_date(tmp_path, run):
    rng = np.random.default_rng(8)
    growth = rng.standard_normal((2, 120)) / 2
    levels = 100 * np.exp(np.cumsum(growth, axis=1) / 100)
    here = Workspace(path=tmp_path / "desk.sqlite")
    for n, day in ((100, "2024-03-12"), (120, "2025-11-12")):
        pair = [
            Series(name, pd.Period("2010-01", "M"), side[:n], "level")
            for name, side in zip(("Money", "Prices"), levels, strict=True)
        ]
        here.add(Release("release.csv", tuple(pair), ()), day)
    here.close()
    words = ("lag", "--json", "--surrogates", "19", "--workspace", tmp_path / "desk.sqlite")
    assert json.loads(run(*words)[1])["last"] == "2019-12"
    assert json.loads(run(*words, "--as-of", "2024-06-30")[1])["last"] == "2018-04"
    status, _, err = run(*words, "--as-of", "2024-01-01")
    assert status == 2
    assert "nothing was loaded yet on 2024-01-01; the first file stands from 2024-03-12" in err
