"""The command on faulty files and wrong use: one sentence, a status, nothing half written."""

import json

import pytest

from tests.app.command import few_surrogates, one_sentence, rows_of, write
from tests.app.economies import LAG


@pytest.fixture
def run(run):
    return lambda *words: run(*few_surrogates(words))


def changed(place, *cells, at=None):
    """Rows of a good file with one of them replaced, or with one more."""
    rows = rows_of()
    if at is None:
        rows[place] = [rows[place][0], *cells]
    else:
        rows.insert(at, [rows[place][0], *cells])
    return rows


def swapped():
    rows = rows_of()
    rows[51], rows[61] = rows[61], rows[51]
    return rows


def dropped():
    rows = rows_of()
    del rows[51]
    return rows


FILES = {
    "good.csv": lambda path: write(path, rows_of()),
    "empty.csv": lambda path: path.write_text(""),
    "blank.csv": lambda path: path.write_text("\n \n\n"),
    "header.csv": lambda path: path.write_text("period,Money,Prices\n"),
    "one.csv": lambda path: write(path, [row[:1] for row in rows_of()], ["period"]),
    "text.csv": lambda path: write(path, changed(51, "abc", "101.0")),
    "twice.csv": lambda path: write(path, changed(51, "1.0", "2.0", at=52)),
    "gap.csv": lambda path: write(path, changed(51, "", "101.0")),
    "row.csv": lambda path: write(path, dropped()),
    "negative.csv": lambda path: write(path, changed(51, "100", "-1.0")),
    "zero.csv": lambda path: write(path, changed(51, "100", "0")),
    "order.csv": lambda path: write(path, swapped()),
    "picture.csv": lambda path: path.write_bytes(b"\x89PNG\r\n\x1a\n" + bytes(range(256))),
    "zeros.csv": lambda path: path.write_bytes(bytes(1000)),
    "folder": lambda path: path.mkdir(),
    "short.csv": lambda path: write(path, rows_of(20)),
    "flat.csv": lambda path: write(path, [[row[0], "100", row[2]] for row in rows_of()]),
    "quarters.csv": lambda path: write(
        path, [row[:2] for row in rows_of(first="1990Q1")], ["period", "Output"]
    ),
    "=1+1.csv": lambda path: path.write_text(""),
}

REFUSED = [
    ("inspect empty.csv", "empty.csv: must hold a header and rows below it"),
    ("inspect blank.csv", "blank.csv: must hold a header and rows below it"),
    ("inspect header.csv", "must have rows below the header"),
    ("lag empty.csv", "empty.csv: must hold a header and rows below it"),
    ("inspect one.csv", "must have a column of periods and at least one of values"),
    ("inspect picture.csv", "this is a PNG picture"),
    ("inspect zeros.csv", "must be text, but holds zero bytes"),
    ("inspect missing.csv", "missing.csv: must be a file, but there is none of this name"),
    ("lag missing.csv --json", "missing.csv: must be a file"),
    ("missing.csv", "missing.csv: must be a file"),
    ("inspectt", "inspectt: must be a file"),
    ("inspect folder", "folder: must be a file, but this is a folder"),
    ("inspect =1+1.csv", "=1+1.csv: must hold a header"),
    ("inspect good.csv good.csv", "must have different names, but 'good.csv' stands twice"),
    ("lag text.csv", "two series must be loaded to be paired, but there is only 'Prices'"),
    ("lag twice.csv", "must have a value in every month of the sample, but Mar 2004 is missing"),
    ("lag gap.csv", "'Money' must have a value in every month of the sample, but Mar 2004"),
    ("lag row.csv", "must have a value in every month of the sample, but Mar 2004"),
    ("lag negative.csv", "'Prices' must be positive to have a growth rate, but Mar 2004 is -1"),
    ("lag zero.csv", "'Prices' must be positive to have a growth rate, but Mar 2004 is 0"),
    ("lag flat.csv", "driver must vary"),
    ("lag short.csv", "the sample must have at least 24 months, but Jan 2000 to Aug 2001 has 20"),
    ("lag quarters.csv", "two series must be loaded"),
    ("lag good.csv --driver Nope", "no loaded series is named 'Nope'; there is 'Money'"),
    ("lag good.csv --response money", "no loaded series is named 'money'; there is 'Money'"),
    ("lag good.csv --driver Prices", "driver and response must be two series"),
    ("lag good.csv --driver Money --response Money", "driver and response must be two series"),
    ("lag good.csv quarters.csv --response Output --season x", "Season must be one of read, stl"),
    ("lag good.csv --window 60 --shift 50", "window 60 and shift 50 leave 11 of 120 months"),
    ("lag good.csv --window 60 --last 2003-12", "window 60"),
    ("lag good.csv --shift 60 --last 2003-12", "shift 60 leave 0 of 48 months"),
    ("lag good.csv --shift -36 --last 2003-12", "shift -36 leave 1 of 48 months"),
    ("lag good.csv --window abc", "Window must be a whole number from 1 to 60, but got 'abc'"),
    ("lag good.csv --window 0", "Window must be a whole number from 1 to 60, but got 0"),
    ("lag good.csv --window 1.5", "Window must be a whole number"),
    ("lag good.csv --shift 61", "Shift must be a whole number from -36 to 60, but got 61"),
    ("lag good.csv --growth exp", "Growth formula must be one of log, percent, but got 'exp'"),
    ("lag good.csv --first 2000-13", "From must be a period such as"),
    ("lag good.csv --first 2050", "no value in the sample chosen"),
    ("lag good.csv --first 2005 --last 2001", "no value in the sample chosen"),
    ("lag good.csv --windows 1:500", "Windows searched must be a range within 1:60"),
    ("lag good.csv --shifts 9:1", "Shifts searched must be a range within -36:60"),
    ("lag good.csv --windows many", "Windows searched must be a range such as 1:60"),
    ("lag good.csv --months all", "Periods compared must be one of own, same, but got 'all'"),
    ("lag good.csv --view nope", "'nope' is not one of"),
    ("lag good.csv --nonsense", "No such option"),
    ("lag good.csv --window", "requires an argument"),
    ("lag good.csv --csv folder", "--csv must be a file that may be written, but got 'folder'"),
    ("lag good.csv --csv no/such/folder.csv", "--csv must be a file that may be written"),
    ("inspect good.csv --csv folder", "--csv must be a file that may be written"),
    ("--port 0", "'--port'"),
    ("--port 70000", "'--port'"),
    ("--port abc", "'--port'"),
]


@pytest.mark.parametrize(("words", "said"), REFUSED)
def test_wrong_use_gives_one_sentence_and_status_2(run, tmp_path, words, said):
    for name, make in FILES.items():
        if name in words.split():
            make(tmp_path / name)
    before = sorted(tmp_path.iterdir())
    status, out, err = run(*words.split())
    assert status == 2
    assert out == ""
    assert said in one_sentence(err)
    assert sorted(tmp_path.iterdir()) == before  # nothing is left half written


def test_a_column_with_text_is_left_out_and_the_rest_is_read(run, tmp_path):
    FILES["text.csv"](tmp_path / "text.csv")
    status, out, err = run("inspect", "text.csv", "--json")
    report = json.loads(out)
    assert (status, err) == (1, "")
    assert [series["name"] for series in report["series"]] == ["Prices"]
    (problem,) = report["problems"]
    assert problem == {
        "severity": "error",
        "file": "text.csv",
        "row": 53,
        "column": "Money",
        "message": "must be a number, but got 'abc'",
    }
    status, out, _ = run("inspect", "text.csv")
    assert status == 1
    assert "error: text.csv, row 53, column 'Money': must be a number, but got 'abc'" in out


def test_lag_beside_an_error_in_the_files_answers_tells_it_and_ends_with_1(run, tmp_path):
    rows = [[*row, "x" if i == 7 else "1"] for i, row in enumerate(rows_of())]
    write(tmp_path / "file.csv", rows, ["period", "Money", "Prices", "Wages"])
    status, out, err = run("lag", "file.csv", "--json")
    assert status == 1
    assert json.loads(out)["cell"]["n"] > 24
    assert one_sentence(err) == "file.csv, row 9, column 'Wages': must be a number, but got 'x'"


@pytest.mark.parametrize(
    ("file", "severity", "said"),
    [
        ("twice.csv", "error", "a month must stand once, but Mar 2004 stands in rows 53 and 54"),
        ("gap.csv", "warning", "Mar 2004 has none; the gap is kept"),
        ("row.csv", "warning", "every month must have a row, but Mar 2004 has none"),
        ("negative.csv", "warning", "must be positive to have a growth rate, but got '-1.0'"),
        ("order.csv", "warning", "periods must stand in order"),
    ],
)
def test_inspect_says_what_is_wrong_and_where(run, tmp_path, file, severity, said):
    FILES[file](tmp_path / file)
    status, out, err = run("inspect", file, "--json")
    report = json.loads(out)
    assert (status, err) == (int(severity == "error"), "")
    found = [p for p in report["problems"] if said in p["message"]]
    assert found
    assert {(p["severity"], p["file"]) for p in found} == {(severity, file)}
    assert all(p["row"] in (53, 54) for p in found)
    assert len(report["series"]) == 2


def test_dates_out_of_order_are_put_in_order(run, tmp_path):
    write(tmp_path / "good.csv", rows_of())
    FILES["order.csv"](tmp_path / "order.csv")
    answers = [json.loads(run("lag", file, "--json")[1]) for file in ("good.csv", "order.csv")]
    assert answers[0] == answers[1]


def test_the_free_part_of_a_series_with_a_gap_can_be_chosen(run, tmp_path):
    FILES["gap.csv"](tmp_path / "gap.csv")
    words = ("lag", "gap.csv", "--first", "2004-05", "--window", "3", "--shift", str(LAG), "--json")
    status, out, _ = run(*words)
    assert (status, json.loads(out)["first"]) == (0, "2004-05")
