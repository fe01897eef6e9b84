"""The command: what it prints, what it writes, its flags, and that it runs as a process."""

import csv
import json
import socket
import subprocess
import sys
from dataclasses import fields

import click
import pytest

from app.cli import LAG_FIELDS, pricewake
from app.commands import parts as cli_parts
from app.commands.serve import free_port
from app.compute import Bridge
from app.demo import demo_releases
from app.intake.reading import read_path
from app.state import ViewState, field_kind
from app.workspace import Workspace
from tests.app.command import ROOT, few_surrogates, one_sentence, process, rows_of, write
from tests.app.economies import LAG

CELL = {"window", "shift", "n", "slope", "intercept", "correlation", "se_naive", "p_naive"}


@pytest.fixture
def run(run):
    return lambda *words: run(*few_surrogates(words))


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
    assert set(answer["cell"]) >= CELL
    assert answer["search"]["surrogates"] == 39
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


# As a process --------------------------------------------------------------------------------


def test_the_command_runs_as_a_process_and_prints_json_only():
    done = process("lag", "--json", "--surrogates", "39")
    assert (done.returncode, done.stderr) == (0, b"")
    assert json.loads(done.stdout)["best"]["correlation"] > 0.7


def test_a_refusal_of_a_process_is_one_sentence():
    done = process("lag", "no-such-file.csv")
    assert (done.returncode, done.stdout) == (2, b"")
    one_sentence(done.stderr.decode())


@pytest.mark.parametrize(("words", "console"), [(["--json"], "ascii"), ([], "latin-1")])
def test_a_console_without_the_letters_of_a_name_still_gets_the_answer(tmp_path, words, console):
    write(tmp_path / "namen.csv", rows_of(), ("period", "Geldmenge für alle", "价格"))
    done = process(
        "lag",
        tmp_path / "namen.csv",
        "--surrogates=39",
        *words,
        PYTHONIOENCODING=console,
        PYTHONUTF8="0",
    )
    assert (done.returncode, done.stderr) == (0, b"")
    if words:
        assert json.loads(done.stdout.decode("ascii"))["response"] == "价格"
    else:
        assert "Geldmenge für alle" in done.stdout.decode(console)
        assert "\\u4ef7\\u683c" in done.stdout.decode(console)


def test_a_taken_port_gives_way_to_the_next_free_one():
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
