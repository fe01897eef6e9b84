"""The command: what it prints, what it writes, its exit status and its refusals."""

import csv
import json
import os
import subprocess
import sys
from dataclasses import fields
from pathlib import Path

import click
import pytest

from analytics.series import period_code
from app.breadth import fields as breadth_fields
from app.cli import LAG_FIELDS, main, pricewake
from app.commands import parts as cli_parts
from app.commands.serve import free_port
from app.compute import Bridge
from app.demo import demo_releases
from app.intake.reading import read_path
from app.state import ViewState, field_kind
from app.workspace import Workspace
from tests.app.economies import LAG, levels, planted

ROOT = Path(__file__).resolve().parents[2]
CELL = {"window", "shift", "n", "slope", "intercept", "correlation", "se_naive", "p_naive"}
ROBUST = {"se_robust", "p_robust", "effective_months"}
KEYS = {
    "search": "p p_one_sided p_with_level_shifts level_shifts_removed surrogates seed method",
    "shift_set": "level identified shifts",
}


@pytest.fixture
def run(capsys, tmp_path, monkeypatch):
    """Run the command in an empty folder; return status, standard output and standard error."""
    monkeypatch.chdir(tmp_path)

    def call(*words):
        with pytest.raises(SystemExit) as ended:
            # Few surrogates: what is judged here is the command and not the search.
            few = ["--surrogates", "39"] if words[0] == "lag" and len(words) > 1 else []
            main([str(word) for word in (words[0], *few, *words[1:])])
        out, err = capsys.readouterr()
        return ended.value.code, out, err

    return call


def rows_of(n=120, **options):
    money, prices = (levels(side) for side in planted(n, **options))
    return [
        [period_code(period), f"{m:.6f}", f"{p:.6f}"]
        for period, m, p in zip(money.periods, money.values, prices.values, strict=True)
    ]


def write(path, rows, head=("period", "Money", "Prices")):
    with path.open("w", newline="", encoding="utf-8") as stream:
        csv.writer(stream).writerows([head, *rows])
    return path


def one_sentence(err):
    assert err.startswith("pricewake: ")
    assert err.count("\n") == 1
    assert err.endswith("\n")
    assert "Traceback" not in err
    assert "Errno" not in err
    assert len(err) < 500
    return err.removeprefix("pricewake: ").rstrip()


# What it gives -------------------------------------------------------------------------------


def test_inspect_gives_the_keys_of_the_design(run):
    status, out, err = run("inspect", "--json")
    assert (status, err) == (0, "")
    report = json.loads(out)
    assert set(report) == {"series", "problems"}
    keys = {"name", "kind", "frequency", "first", "last", "n", "gaps", "fingerprint"}
    assert all(keys <= set(series) for series in report["series"])
    shift, mix = report["problems"]  # what was planted, and nothing else
    assert (shift["severity"], shift["column"]) == ("warning", "Narrow money")
    assert "+31.4 percent in Jul 1987" in shift["message"]
    assert (mix["severity"], mix["column"]) == ("note", "Real output")
    loaded = Workspace(demo_releases()).series
    prices_and_money = [s["name"] for s in report["series"] if s["unit"] != "weight"]
    assert prices_and_money == list(loaded)
    prices = report["series"][0]
    assert prices["fingerprint"] == loaded["Consumer prices"].fingerprint
    assert (prices["first"], prices["last"], prices["n"]) == ("1960-01", "2026-10", 802)


def test_lag_gives_the_chosen_and_the_best_cell_unrounded(run):
    status, out, err = run("lag", "--json")
    assert (status, err) == (0, "")
    assert out.count("\n") == 1  # one object on one line and nothing else
    answer = json.loads(out)
    assert set(answer["cell"]) >= CELL | ROBUST
    for key, names in KEYS.items():
        assert set(answer[key]) >= set(names.split())
    assert answer["search"]["surrogates"] == 39
    for episode in answer["episodes"]:
        assert set(episode) >= {"first", "last", "share", "slope_without", "p_without"}
    assert "fragility" in answer
    assert {"window", "shift", "correlation", "slope"} <= set(answer["best"])
    state, bridge = ViewState(), Bridge(Workspace(demo_releases()))
    cell, surface = bridge.cell(state), bridge.surface(state)
    assert (answer["driver"], answer["response"]) == ("Broad money", "Consumer prices")
    assert answer["frequency"] == "monthly"
    for key in CELL:
        assert answer["cell"][key] == getattr(cell, key)
    best = answer["best"]
    place = surface.cell(best["window"], best["shift"])
    assert best["correlation"] == surface.correlation[place] > 0.7
    assert best["slope"] == surface.slope[place]


def test_lag_finds_what_was_planted_in_a_file(run, tmp_path):
    write(tmp_path / "planted.csv", rows_of())
    words = ("lag", "planted.csv", "--window", "1", "--shift", str(LAG), "--json")
    status, out, _ = run(*words)
    answer = json.loads(out)
    assert status == 0
    assert answer["best"]["shift"] == LAG
    assert answer["cell"]["shift"] == LAG
    assert answer["cell"]["slope"] == pytest.approx(0.5, abs=0.05)
    assert answer["cell"]["n"] == 120 - LAG


def test_negative_numbers_and_ranges_are_values_and_not_flags(run, tmp_path):
    write(tmp_path / "planted.csv", rows_of(lag=-5))
    status, out, _ = run(
        "lag", "planted.csv", "--shift", "-5", "--window", "2", "--shifts", "-9:9", "--json"
    )
    assert (status, json.loads(out)["cell"]["shift"]) == (0, -5)
    assert json.loads(out)["best"]["shift"] == -5


def test_quarters_are_counted_as_quarters(run, tmp_path):
    write(tmp_path / "quarters.csv", rows_of(first="1990Q1"))
    status, out, _ = run("lag", "quarters.csv", "--window", "4", "--json")
    answer = json.loads(out)
    assert status == 0
    assert answer["frequency"] == "quarterly"
    assert (answer["cell"]["window"], answer["cell"]["shift"]) == (4, 8)
    assert answer["first"] == "1990-Q1"
    assert answer["best"]["shift"] == LAG


def test_words_for_people_name_the_cell_the_best_and_the_caution(run):
    status, out, err = run("lag", "--window", "12")
    assert (status, err) == (0, "")
    assert out.startswith("Broad money, 12-month window, leading Consumer prices by 24 months")
    assert "Chosen cell: correlation +0.80, slope 0.548" in out
    assert "search-adjusted" in out
    assert "naive p" in out
    assert "not a cause" in out


@pytest.mark.parametrize("view", ["surface", "scatter", "overlay"])
def test_a_csv_is_the_view_asked_for(run, tmp_path, view):
    write(tmp_path / "planted.csv", rows_of())
    status, out, err = run("lag", "planted.csv", "--csv", "out.csv", "--view", view, "--json")
    assert (status, err) == (0, "")
    assert json.loads(out)
    lines = (tmp_path / "out.csv").read_bytes().decode().split("\r\n")
    assert lines[0].startswith("# Pricewake: ")
    head = next(line for line in lines if not line.startswith("#"))
    first = {"surface": "window,shift", "scatter": "part,driver_period", "overlay": "period,driver"}
    assert head.startswith(first[view])
    assert sorted(path.name for path in tmp_path.iterdir()) == ["out.csv", "planted.csv"]


def test_inspect_writes_its_table_and_defuses_names(run, tmp_path):
    write(tmp_path / "names.csv", rows_of(), ("period", "=1+1", 'Money, "broad"'))
    status, _, err = run("inspect", "names.csv", "--csv", "out.csv")
    assert (status, err) == (0, "")
    with (tmp_path / "out.csv").open(newline="", encoding="utf-8") as stream:
        rows = [row for row in csv.reader(stream) if not row[0].startswith("#")]
    place = rows[0].index("name")
    assert [row[place] for row in rows[1:]] == ["'=1+1", 'Money, "broad"']
    found = read_path(tmp_path / "names.csv").series
    assert [row[rows[0].index("fingerprint")] for row in rows[1:]] == [
        series.fingerprint for series in found
    ]


def test_a_view_is_the_same_from_flags_as_from_an_address(run, tmp_path):
    state = ViewState(window=6, shift=18, first="1970-01", last="2019-12", months="same")
    words = [f"--{part.replace('=', ' ', 1)}".split(" ", 1) for part in state.to_query().split("&")]
    status, out, _ = run("lag", "--json", *(word for pair in words for word in pair))
    cell = Bridge(Workspace(demo_releases())).cell(state)
    assert status == 0
    assert json.loads(out)["cell"]["slope"] == cell.slope
    assert json.loads(out)["cell"]["n"] == cell.n


def test_json_holds_no_nan():
    assert cli_parts.finite({"a": [float("nan"), 1.5], "b": (float("inf"),)}) == {
        "a": [None, 1.5],
        "b": [None],
    }


# The flags -----------------------------------------------------------------------------------


def test_flags_come_from_the_table_of_the_state():
    flags = {option.name: option for option in pricewake.commands["lag"].params}
    for name in LAG_FIELDS:
        assert flags[name].opts == [f"--{name.replace('_', '-')}"]
        assert flags[name].help == field_kind(name).help


def test_every_number_of_a_view_has_a_flag_of_some_command():
    flags = {option.name for command in pricewake.commands.values() for option in command.params}
    lacking = [
        item.name
        for item in fields(ViewState)
        if item.name not in flags and not field_kind(item.name).display
    ]
    if "breadth" not in pricewake.commands:  # its fields came before its command
        coming = list(vars(breadth_fields).values())
        lacking = [name for name in lacking if field_kind(name) not in coming]
    assert lacking == []


def test_help_and_version_end_with_status_0(run):
    for words in (["--help"], ["lag", "--help"], ["inspect", "--help"], ["serve", "--help"]):
        status, out, err = run(*words)
        assert (status, err) == (0, "")
        assert "Usage: pricewake" in out
    status, out, _ = run("--version")
    assert status == 0
    assert out.startswith("pricewake, version ")


@pytest.mark.parametrize("words", [[], ["a.csv"], ["--port", "9000"], ["--no-browser", "a.csv"]])
def test_without_a_command_the_dashboard_is_served(words):
    context = pricewake.make_context("pricewake", list(words))
    name, command, rest = pricewake.resolve_command(
        context, [*context._protected_args, *context.args]
    )
    assert (name, rest) == ("serve", words)
    assert isinstance(command, click.Command)


# Refusals ------------------------------------------------------------------------------------


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


# As a process --------------------------------------------------------------------------------


def process(*words, **environment):
    return subprocess.run(
        [sys.executable, "-m", "app", *words],
        cwd=ROOT,
        capture_output=True,
        text=True,
        encoding="utf-8",
        timeout=120,
        env={**os.environ, **environment},
        stdin=subprocess.DEVNULL,
    )


def test_the_command_runs_as_a_process_and_prints_json_only():
    done = process("lag", "--json", "--surrogates", "39")
    assert (done.returncode, done.stderr) == (0, "")
    assert json.loads(done.stdout)["best"]["correlation"] > 0.7


def test_a_refusal_of_a_process_is_one_sentence():
    done = process("lag", "no-such-file.csv")
    assert (done.returncode, done.stdout) == (2, "")
    one_sentence(done.stderr)


@pytest.mark.parametrize(("words", "console"), [(["--json"], "ascii"), ([], "latin-1")])
def test_a_console_without_the_letters_of_a_name_still_gets_the_answer(tmp_path, words, console):
    write(tmp_path / "namen.csv", rows_of(), ("period", "Geldmenge für alle", "价格"))
    done = subprocess.run(
        [
            sys.executable,
            "-m",
            "app",
            "lag",
            str(tmp_path / "namen.csv"),
            "--surrogates=39",
            *words,
        ],
        cwd=ROOT,
        capture_output=True,
        timeout=120,
        env={**os.environ, "PYTHONIOENCODING": console, "PYTHONUTF8": "0"},
        check=False,
    )
    assert (done.returncode, done.stderr) == (0, b"")
    if words:
        assert json.loads(done.stdout.decode("ascii"))["response"] == "价格"
    else:
        assert "Geldmenge für alle" in done.stdout.decode(console)
        assert "\\u4ef7\\u683c" in done.stdout.decode(console)


def test_a_taken_port_gives_way_to_the_next_free_one():
    import socket

    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        port = taken.getsockname()[1]
        found = free_port(port, "127.0.0.1")
        assert port < found < port + 100


def test_starting_the_command_loads_no_slow_library():
    done = subprocess.run(
        [
            sys.executable,
            "-c",
            "import sys, app.cli;"
            "print([m for m in ('dash', 'plotly', 'pandas', 'statsmodels') if m in sys.modules])",
        ],
        cwd=ROOT,
        capture_output=True,
        text=True,
        timeout=120,
        check=True,
    )
    assert done.stdout.strip() == "[]"
