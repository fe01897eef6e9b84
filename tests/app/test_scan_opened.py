"""A result file looked at again: shown as it was, drawn where its series are loaded, or refused."""

import json
from dataclasses import replace

import numpy as np
import pytest

from analytics.panel import PairScan, panel_result, panel_scan
from app.compute import Bridge
from app.pages import scan as page
from app.places import software_version
from app.scan import opened as opening
from app.scan.bridge import question, scan
from app.scan.exports import csv_export
from app.scan.league import league
from app.scan.opened import read_result
from app.scan.result_file import panel_text, row
from app.scan.task import ScanError
from app.server import build_app
from app.state import StateError, ViewState
from app.words import p_words
from app.workspace import Workspace
from tests.app.components import nodes, words
from tests.app.panels import DRAWS, SMALL, panel_file, panel_workspace
from tests.app.test_scan_page import rows_of

STATE = ViewState(**SMALL)
SLOPES = {"Ardenquay": 1.0, "Belmorrow": 0.0, "Corvessa": 0.6, "Dunmarrel": 0.0, "Elquire": 0.8}


@pytest.fixture(scope="module")
def searched():
    """The question and the result of the five economies."""
    asked = question(STATE, Bridge(panel_workspace(SLOPES)))
    refused = PairScan(economy="Short", driver="M2", response="CPI", seed=3, refused="too short")
    return asked, panel_result([*panel_scan(asked.pairs, **DRAWS).pairs, refused])


@pytest.fixture(scope="module")
def content(searched):
    asked, panel = searched
    return panel_text(panel, asked.settings).encode()


def shown_in(desk, content, **fields):
    """The page over a desk, with the file open."""
    bridge = Bridge(desk)
    state = replace(ViewState(), result=bridge.results.hold(read_result("r.csv", content)))
    return page.answer(replace(state, **fields), bridge), bridge


def test_pairs_and_settings_come_back_to_the_bit(searched, content):
    _, panel = searched
    opened = read_result("r.csv", content)
    assert repr(opened.panel.to_frame().to_dict()) == repr(panel.to_frame().to_dict())
    assert opened.asked == replace(ViewState(), **SMALL)
    assert (opened.version, opened.finished, opened.cut) == (software_version(), True, False)
    for other in (content.replace(b"\r\n", b"\n"), b"\xef\xbb\xbf" + content):  # by other programs
        assert repr(read_result("r.csv", other).panel.pairs) == repr(panel.pairs)


def test_without_the_series_the_table_and_the_shifts_are_there(searched, content):
    _, panel = searched
    shown, bridge = shown_in(Workspace(), content)
    assert set(shown.charts) == {"shifts"}
    assert "6 pairs of 6 economies, windows 1 to 4 and shifts −2 to +8 months" in shown.sentence
    assert shown.sentence.endswith("opened from r.csv.")
    assert shown.verdict.startswith("3 of 5 pairs hold")
    said = words(shown.words["notes"])
    assert f"Opened from r.csv, written by Pricewake {software_version()}: seed 1, 99" in said
    assert "maps and averages are missing" in said
    table = words(shown.words["pairs"])
    for scan_, p in zip(panel.pairs, panel.p_scan, strict=True):
        assert scan_.economy in table
        assert scan_.refused in table if scan_.refused else p_words(p) in table
    assert nodes(shown.words["pairs"], "Link") == []  # there is nothing to lead to
    assert (shown.jobs, shown.state.surrogates) == ({}, 99)
    assert sum(sum(bar.y) for bar in shown.charts["shifts"].data) == 5
    with pytest.raises(StateError, match="not held any more; open its file again"):
        scan(replace(STATE, result="0" * 16), bridge)


def test_with_the_series_maps_averages_and_links_are_those_of_the_search(searched, content):
    asked, _ = searched
    shown, bridge = shown_in(panel_workspace(SLOPES), content)
    assert set(shown.charts) == {"surfaces", "shifts", "averages"}
    assert len(nodes(shown.words["pairs"], "Link")) == len(nodes(shown.words["maps"], "Link")) == 5
    assert "maps and averages are of the 5 of 6 pairs" in words(shown.words["notes"])
    known = scan(shown.state, bridge)
    assert [one.names for one in known.question.pairs] == [one.names for one in asked.pairs]
    assert known.question.averages == asked.averages
    # A series that has changed since is not drawn as if it were the one that was searched.
    other = panel_workspace(SLOPES | {"Corvessa": 0.5})
    shown, _ = shown_in(other, content)
    assert len(nodes(shown.words["maps"], "Link")) == 4
    assert "the 4 of 6 pairs" in words(shown.words["notes"])


def test_its_views_leave_as_csv_and_the_pairs_can_be_opened_again(content):
    shown, bridge = shown_in(panel_workspace(SLOPES), content, correction="holm")
    query = shown.state.to_query()
    for row_, line in zip(
        scan(shown.state, bridge).panel.pairs, rows_of(bridge, "pairs", query), strict=True
    ):
        assert line["economy"] == row_.economy
        assert float(line["p_search"] or "nan") == pytest.approx(row_.p_search, nan_ok=True)
    name, body = csv_export("pairs", query, bridge)
    assert "# result: r.csv; content " in body
    again = read_result(name, body.encode())
    assert repr(again.panel.pairs) == repr(read_result("r.csv", content).panel.pairs)
    assert len(rows_of(bridge, "surfaces", query)) == 5 * 4 * 11
    assert len(league(scan(shown.state, bridge))) == 6


def test_a_scan_that_was_stopped_says_so(searched, content):
    _, panel = searched
    lines = content.split(b"\r\n")
    head = b"\r\n".join(line for line in lines if line.startswith(b"# "))
    columns = next(line for line in lines if line.startswith(b"economy,"))
    rows = [",".join(map(_cell, row(one))).encode() for one in panel.pairs[:3]]
    growing = b"\r\n".join([head, columns, *rows, b""])
    shown, _ = shown_in(Workspace(), growing + b"Dunmarrel,Broad mon")
    said = words(shown.words["notes"])
    assert "had not come to its end" in said
    assert "last line of the file is cut short" in said
    assert "2 of 3 pairs hold" in shown.verdict


def _cell(value):
    if value is None or value != value:
        return ""
    if isinstance(value, float | np.floating):
        return repr(float(value))
    return f'"{value}"' if "," in str(value) else str(value)


@pytest.mark.parametrize(
    ("was", "now", "what"),
    [
        (b",any,", b",all,", "sign in line 7 of 'r.csv' must be any or positive, but got 'all'"),
        (b",120,any", b",12O,any", "months in line 7 of 'r.csv' must be whole, but got '12O'"),
        (b",120,any", b",120", "a row must have 25 fields, but line 7 of 'r.csv' has 24"),
        (b"Ardenquay,", b",Ardenquay,", "a row must have 25 fields, but line 7 of 'r.csv' has 26"),
        (b",{5},", b",{5 5},", "shift_set in line 7 of 'r.csv' must be shifts, each once"),
        (b",2001-02,", b",2001-13,", "first in line 7 of 'r.csv' must be a period such as"),
        (b"Belmorrow", b"Ardenquay", "pairs must have different names"),
        (b"Ardenquay", b"Arden\x07quay", "economy in line 7 of 'r.csv' must be a name in one line"),
        (b"seed=1\r\n", b"seed=x\r\n", "the settings in 'r.csv' cannot be followed: Seed must be"),
        (b"sign=any", b"sign=positive", "sign in line 7 of 'r.csv' must be positive, as the setti"),
        (b",p_error,", b",p_wrong,", "a result must have the column p_error, but 'r.csv', written"),
        (b",p_holm\r\n", b",p_holm,odd\r\n", "has 'odd'"),
        (b"# Pricewake", b"# Program", "wrote, but 'r.csv' holds something else"),
        (b"Ardenquay", b"\xff", "wrote, but 'r.csv' holds something else"),
    ],
)
def test_a_bad_file_is_one_sentence(content, was, now, what):
    assert was in content
    with pytest.raises(ScanError) as refused:
        read_result("r.csv", content.replace(was, now, 1))
    assert what in str(refused.value)
    assert "\n" not in str(refused.value)


def test_rows_taken_away_or_changed_are_seen_by_the_adjusted_p(content):
    lines = content.split(b"\r\n")
    without = [line for line in lines if not line.startswith(b"Belmorrow")]
    with pytest.raises(ScanError, match=r"rows are missing or were changed"):
        read_result("r.csv", b"\r\n".join(without))


def test_sizes_are_limited(content, monkeypatch):
    monkeypatch.setattr(opening, "MOST_ROWS", 4)
    with pytest.raises(ScanError, match="at most 4 rows"):
        read_result("r.csv", content)
    monkeypatch.setattr(opening, "MOST_BYTES", 2**20)
    with pytest.raises(ScanError, match=r"at most 1 MB, but 'r.csv' has more"):
        read_result("r.csv", b"x" * 2**21)


def test_damage_anywhere_is_a_refusal_or_the_same_pairs(content):
    # Every byte of a row in turn becomes another one: no result that holds, differs and is shown.
    rng, whole = np.random.default_rng(1), read_result("r.csv", content)
    start = content.index(b"Ardenquay")
    for at in rng.integers(start, len(content), 150):
        damaged = bytearray(content)
        damaged[at] = rng.integers(0, 256)
        try:
            read = read_result("r.csv", bytes(damaged))
        except ScanError as refused:
            assert "\n" not in str(refused)
        else:
            assert len(read.panel.pairs) in (len(whole.panel.pairs), len(whole.panel.pairs) - 1)


def test_the_page_takes_a_file_and_refuses_in_one_sentence(content):
    client = build_app(Workspace()).server.test_client()
    headers = {"Sec-Fetch-Site": "same-origin"}
    answer = client.post("/scan/result?name=a%0Ab.csv", data=content, headers=headers)
    assert answer.status_code == 200
    mark = answer.get_json()["result"]
    export = client.get(f"/export/scan/shifts.csv?result={mark}")
    assert export.status_code == 200
    assert b"Corvessa" in export.data
    answer = client.post("/scan/result?name=x.csv", data=b"a,b\r\n", headers=headers)
    assert answer.status_code == 422
    assert "'x.csv' holds something else" in answer.get_json()["message"]
    gone = client.get(f"/export/scan/shifts.csv?result={'0' * 16}")
    assert gone.status_code in (400, 422)
    assert b"open its file again" in gone.data


def test_the_command_shows_a_result_with_or_without_its_series(run, content, tmp_path):
    path = tmp_path / "r.csv"
    path.write_bytes(content)
    code, out, _ = run("scan", "--from", path)
    assert code == 0
    assert "3 of 5 pairs hold" in out
    assert "maps and averages are missing" in out
    panel = panel_file(tmp_path / "panel.csv", SLOPES)
    code, out, _ = run("scan", panel, "--from", path, "--json")
    answer = json.loads(out)
    assert code == 0
    assert answer["opened"]["file"] == "r.csv"
    assert answer["opened"]["drawn"] == 5
    assert len(answer["averages"]["slope_without"]) == 5
    code, _, err = run("scan", panel, "--from", path, "--seed", "2")
    assert (code, "so --seed cannot go with --from" in err) == (2, True)
    code, _, err = run("scan", panel, "--from", path, "--driver", "Broad money")
    assert "so --driver cannot go with --from" in err
    code, _, err = run("scan", "--from", tmp_path / "none.csv")
    assert code == 2
    assert "--from must be a file that can be read" in err
    code, _, err = run("scan", "--from", panel)
    assert (code, err.count("\n")) == (2, 1)
