"""`pricewake scan`: what it prints and writes, what it goes on from, and its refusals."""

import json
import os
import re
import resource
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from app.compute import Bridge
from app.intake.reading import read_path
from app.scan.bridge import draws, question, scan_work
from app.scan.result_file import panel_text
from app.state import ViewState
from app.workspace import Workspace
from tests.app.panels import SMALL, panel_file
from tests.exported import rows_of

ROOT = Path(__file__).resolve().parents[2]
SLOPES = {"Ardenquay": 1.0, "Belmorrow": 0.0, "Corvessa": 0.6}
FLAGS = ["--windows", "1:4", "--shifts", "-2:8", "--surrogates", "99"]
KEYS = {"economy", "driver", "response", "window", "shift", "correlation", "p_search", "p_scan"}


@pytest.fixture(scope="module")
def panel(tmp_path_factory):
    return panel_file(tmp_path_factory.mktemp("panel") / "panel.csv", SLOPES)


@pytest.fixture
def counted(monkeypatch):
    """Search in this process, and count the pairs that are searched."""
    from analytics.panel import pair_scan

    seen = []

    def scanned(pairs, asked, _pool):
        for pair in pairs:
            seen.append(pair.economy)
            yield pair_scan(pair, **asked)

    monkeypatch.setattr("app.scan.run.scanned", scanned)
    return seen


def test_the_json_has_every_pair_with_its_keys(run, counted, panel):
    code, out, err = run("scan", panel, *FLAGS, "--json")
    answer = json.loads(out)
    assert (code, err) == (0, "")
    assert [pair["economy"] for pair in answer["pairs"]] == list(SLOPES) == counted
    assert all(pair.keys() >= KEYS for pair in answer["pairs"])
    assert [one["economy"] for one in answer["found"]["holm"]] == ["Ardenquay", "Corvessa"]
    assert answer["pairs"][0]["shift"] == 5
    asked = question(ViewState(**SMALL), Bridge(Workspace((read_path(panel),))))
    assert answer["settings"] == asked.settings
    assert draws(ViewState(**SMALL)) == {"surrogates": 99, "seed": 1, "sign": "any"}


@pytest.mark.usefixtures("counted")
def test_without_json_it_says_what_holds_and_what_it_does_not_say(run, panel):
    code, out, _ = run("scan", panel, *FLAGS)
    assert code == 0
    assert "2 of 3 pairs hold at 5 % once all of them are paid for" in out
    assert "Long averages. No line here: long averages must have at least 4 economies" in out
    assert "None of it is a cause" in out


@pytest.mark.usefixtures("counted")
@pytest.mark.parametrize(
    ("view", "first", "rows"),
    [
        ("pairs", "economy,driver,response,fingerprint", 3),
        ("surfaces", "economy,driver,response,window,shift,correlation,slope,pairs", 3 * 4 * 11),
        ("shifts", "economy,driver,response,shift,unit,p_scan,p_holm,found", 3),
        ("averages", "part,economy,driver,response,first,last,slope_without", 3),
    ],
)
def test_each_view_is_written_as_a_table(run, panel, tmp_path, view, first, rows):
    path = tmp_path / "view.csv"
    code, _, _ = run("scan", panel, *FLAGS, "--csv", path, "--view", view)
    names, *body = rows_of(path.read_text(encoding="utf-8"))
    assert code == 0
    assert ",".join(names).startswith(first)
    assert len(body) == rows


def test_drivers_and_responses_are_named_by_what_they_are_called_within(run, counted, panel):
    code, out, _ = run(
        "scan", panel, *FLAGS, "--driver", "consumer prices", "--response", "Broad money", "--json"
    )
    assert code == 0
    assert {pair["driver"] for pair in json.loads(out)["pairs"]} == {"Consumer prices"}
    assert len(counted) == 3
    code, _, err = run("scan", panel, "--driver", "Wages")
    assert code == 2
    assert "Drivers must be names of series within an economy, but got 'Wages'" in err


def test_a_result_is_gone_on_from_and_nothing_is_searched_twice(run, counted, panel, tmp_path):
    path = tmp_path / "result.csv"
    assert run("scan", panel, *FLAGS, "--out", path)[0] == 0
    whole = path.read_bytes()
    counted.clear()
    assert run("scan", panel, *FLAGS, "--out", path)[0] == 0
    assert counted == []
    assert path.read_bytes() == whole
    # One more economy in the files: only that one is searched.
    wider = panel_file(tmp_path / "panel.csv", SLOPES | {"Dunmarrel": 0.4})
    assert run("scan", wider, *FLAGS, "--out", path)[0] == 0
    assert counted == ["Dunmarrel"]
    # Another seed is another question.
    code, _, err = run("scan", wider, *FLAGS, "--seed", "2", "--out", path)
    assert code == 2
    assert "--out must be a result of the same question" in err
    # Fewer economies than the file has: their rows would be lost.
    code, _, err = run("scan", panel, *FLAGS, "--out", path)
    assert code == 2
    assert "which is not asked for" in err


def test_new_data_in_an_old_result_are_refused(run, counted, panel, tmp_path):
    path = tmp_path / "result.csv"
    assert run("scan", panel, *FLAGS, "--out", path)[0] == 0
    other = panel_file(tmp_path / "panel.csv", dict.fromkeys(SLOPES, 0.9))
    code, _, err = run("scan", other, *FLAGS, "--out", path)
    assert (code, len(counted)) == (2, 3)
    assert "the series of Ardenquay / Broad money / Consumer prices have changed" in err


def test_a_scan_killed_half_way_goes_on_where_it_was(panel, tmp_path):
    # Two programs, the first killed without a warning while it searches.
    path = tmp_path / "result.csv"
    big = panel_file(tmp_path / "panel.csv", {f"Economy {i:02}": 0.3 for i in range(9)})
    words = [sys.executable, "-m", "app", "scan", str(big), "--surrogates", "99"]
    words += ["--windows", "1:4", "--shifts", "-2:8", "--processes", "1"]
    env = os.environ | {"PYTHONPATH": str(ROOT)}
    first = subprocess.Popen(
        [*words, "--out", str(path)], cwd=ROOT, env=env, stdout=subprocess.DEVNULL
    )
    end = time.monotonic() + 90
    while time.monotonic() < end and whole_rows(path) < 2:
        time.sleep(0.02)
    first.send_signal(signal.SIGKILL)
    first.wait()
    left = whole_rows(path)
    assert 2 <= left < 9
    text = path.read_bytes()
    assert text.endswith(b"\r\n")
    subprocess.run([*words, "--out", str(path)], cwd=ROOT, env=env, check=True, capture_output=True)
    # The same to the byte as a scan that was never stopped.
    state = ViewState(windows="1:4", shifts="-2:8", surrogates=99)
    bridge = Bridge(Workspace((read_path(big),)))
    never_stopped = bridge.jobs.complete(scan_work(state, bridge))
    assert path.read_bytes().decode() == panel_text(never_stopped, question(state, bridge).settings)


def whole_rows(path):
    """Whole rows below the head and the names of the columns."""
    if not path.exists():
        return 0
    return max(0, sum(not line.startswith(b"#") for line in path.read_bytes().splitlines()) - 1)


@pytest.mark.parametrize(
    ("words", "what"),
    [
        (["--processes", "2", "--cluster", "tcp://127.0.0.1:9"], "must not both be given"),
        (["--processes", "0"], "0 is not in the range"),
        (["--surrogates", "0"], "Surrogates must be a whole number from 1 to 20000"),
        (["--sign", "up"], "Relations looked for must be one of any, positive"),
        (["--out", "."], "--out must be a file that may be written"),
    ],
)
def test_wrong_use_is_one_sentence(run, panel, words, what):
    code, out, err = run("scan", panel, *words)
    assert (code, out) == (2, "")
    assert what in err
    assert err.count("\n") == 1


@pytest.mark.usefixtures("counted")
def test_a_disk_that_fills_half_way_leaves_whole_rows_and_no_half_file(panel, tmp_path, run):
    # The size that files may have runs out, as a disk does.
    before = resource.getrlimit(resource.RLIMIT_FSIZE)
    handler = signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (1200, before[1]))
    try:
        code, _, err = run("scan", panel, *FLAGS, "--out", tmp_path / "r.csv")
        assert code == 2
        assert re.search(
            r"--out must be a file that may be written.*(no space|too large)", err, re.I
        )
        code, _, err = run("scan", panel, *FLAGS, "--csv", tmp_path / "v.csv", "--view", "surfaces")
        assert code == 2
        assert "--csv must be a file that may be written" in err
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, before)
        signal.signal(signal.SIGXFSZ, handler)
    assert os.listdir(tmp_path) == ["r.csv"]
    assert (tmp_path / "r.csv").read_bytes().endswith(b"\r\n")
    assert run("scan", panel, *FLAGS, "--out", tmp_path / "r.csv")[0] == 0  # and goes on
    assert whole_rows(tmp_path / "r.csv") == 3


def test_a_device_is_no_result_and_is_not_read_to_its_end(run, panel):
    for words in (["--out", "/dev/zero"], ["--from", "/dev/zero"]):
        code, _, err = run("scan", panel, *words)
        assert (code, err.count("\n")) == (2, 1)


def test_files_without_a_pair_are_one_sentence(run, tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("period,Wages\n2001-01,100\n2001-02,101\n")
    code, _, err = run("scan", path)
    assert code == 2
    assert "no economy in the files has both a driver and a response" in err
