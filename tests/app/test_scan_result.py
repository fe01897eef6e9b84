"""The result file of a scan: whole rows, gone on from, refused where it is another question's."""

import math
import os

import pytest

from analytics.panel import PairScan, panel_result
from app.scan import result_file
from app.scan.result_file import COLUMNS, ResultFile, panel_text
from app.scan.task import ScanError
from tests.exported import records, taken_apart

SETTINGS = "growth=log&surrogates=99&seed=1"
SCANS = (
    PairScan(
        economy="Ardenquay",
        driver="Broad money",
        response="Consumer prices, all",
        fingerprint="0123456789abcdef",
        first="2001-02",
        last="2011-01",
        months=120,
        window=3,
        shift=-5,
        correlation=0.1 + 0.2,
        slope=1e-7,
        p_search=0.01,
        p_one_sided=1.0,
        level_shifts_removed=True,
        shift_set=(-6, -5, 4),
        identified=True,
        share=0.4,
        episode="2003-01:2004-02",
        fragility=0.2,
        seed=12345,
    ),
    PairScan(economy="=cmd", driver="-M2", response="'CPI\u2028", refused='too "short", by far'),
    PairScan(economy="# odd", driver="M2", response="CPI", months=1, p_search=0.5, seed=3),
)
WANTED = {scan.names: scan.fingerprint for scan in SCANS}


def opened(path, settings=SETTINGS, wanted=WANTED):
    return ResultFile(path, settings, wanted)


def equal(one, other):
    return repr(one) == repr(other)  # nan equal to nan


def test_pairs_come_back_to_the_bit(tmp_path):
    path = tmp_path / "r.csv"
    file = opened(path)
    assert file.known == ()
    for scan in SCANS:
        file.add(scan)
    assert equal(opened(path).known, SCANS)
    file.finish(panel_result(SCANS))
    assert equal(opened(path).known, SCANS)
    assert path.read_bytes().decode() == panel_text(panel_result(SCANS), SETTINGS)
    assert os.listdir(tmp_path) == ["r.csv"]


def test_the_file_is_a_table_that_others_can_read(tmp_path):
    path = tmp_path / "r.csv"
    opened(path).finish(panel_result(SCANS))
    head, rows = taken_apart(path.read_text(encoding="utf-8"))
    assert f"question: {SETTINGS}" in head
    assert rows[0] == list(COLUMNS)
    assert {len(row) for row in rows} == {len(COLUMNS)}
    first = dict(zip(*rows[:2], strict=True))
    assert float(first["correlation"]) == 0.1 + 0.2
    assert (first["shift_set"], first["identified"]) == ("{-6 -5 4}", "yes")
    assert (float(first["p_scan"]), float(first["p_holm"])) == (0.02, 0.02)
    assert rows[2][0] == "'=cmd"  # a spreadsheet would run it


@pytest.mark.parametrize("cut", [1, 2, 40])
def test_a_half_row_at_the_end_does_not_count(tmp_path, cut):
    path = tmp_path / "r.csv"
    file = opened(path)
    file.add(SCANS[0])
    whole = path.read_bytes()
    file.add(SCANS[2])
    path.write_bytes(path.read_bytes()[:-cut])
    assert equal(opened(path).known, SCANS[:1])
    assert path.read_bytes() == whole  # and is gone before anything is added


def test_a_file_cut_anywhere_is_a_start_or_a_refusal_and_never_a_wrong_pair(tmp_path):
    path = tmp_path / "r.csv"
    opened(path).finish(panel_result(SCANS))
    whole = path.read_bytes()
    for size in range(0, len(whole), 7):
        path.write_bytes(whole[:size])
        try:
            known = opened(path).known
        except ScanError:
            assert path.read_bytes() == whole[:size]  # not touched
        else:
            assert equal(known, SCANS[: len(known)])


def test_a_full_disk_leaves_whole_rows(tmp_path, monkeypatch):
    path = tmp_path / "r.csv"
    file = opened(path)
    file.add(SCANS[0])
    before, write = path.read_bytes(), os.write
    monkeypatch.setattr(result_file.os, "write", lambda place, line: write(place, line[:30]))
    with pytest.raises(ScanError, match=r"--out must be a file that may be written.*no space left"):
        file.add(SCANS[2])
    assert path.read_bytes() == before


@pytest.mark.parametrize(
    ("settings", "wanted", "what"),
    [
        (SETTINGS + "0", WANTED, "must be a result of the same question.*seed=10.*another file"),
        (SETTINGS, {SCANS[1].names: ""}, "the same pairs.*Ardenquay.*is not asked for"),
        (SETTINGS, WANTED | {SCANS[0].names: "other"}, "the same data, but the series of Ardenq"),
    ],
)
def test_a_result_of_another_question_is_refused_and_left_alone(tmp_path, settings, wanted, what):
    path = tmp_path / "r.csv"
    opened(path).finish(panel_result(SCANS))
    before = path.read_bytes()
    with pytest.raises(ScanError, match=what):
        opened(path, settings, wanted)
    assert path.read_bytes() == before


def test_a_result_of_another_version_is_refused(tmp_path, monkeypatch):
    path = tmp_path / "r.csv"
    opened(path).add(SCANS[0])
    monkeypatch.setattr(result_file, "software_version", lambda: "99.0")
    with pytest.raises(ScanError, match=r"has Pricewake '.*' where this scan has '99.0'"):
        opened(path)


@pytest.mark.parametrize("content", [b"period,CPI\r\n2001-01,100\r\n", b"\xff\xfe\x00", b"\r\n"])
def test_any_other_file_is_left_alone(tmp_path, content):
    path = tmp_path / "r.csv"
    path.write_bytes(content)
    with pytest.raises(ScanError, match="must be a new file or a result of a scan"):
        opened(path)
    assert path.read_bytes() == content


def test_a_damaged_number_is_no_pair(tmp_path):
    path = tmp_path / "r.csv"
    opened(path).finish(panel_result(SCANS))
    path.write_bytes(path.read_bytes().replace(b",120,", b",12O,"))
    with pytest.raises(ScanError, match="something else"):
        opened(path)


def test_a_folder_and_a_missing_folder_are_refused(tmp_path):
    for path in (tmp_path, tmp_path / "none" / "r.csv"):
        with pytest.raises(ScanError, match="--out must be a file that may be written"):
            opened(path)


def test_adjusted_p_values_wait_until_all_pairs_are_there(tmp_path):
    path = tmp_path / "r.csv"
    opened(path, wanted=WANTED).finish(panel_result(SCANS))
    grown = WANTED | {("New", "M2", "CPI"): "f"}
    assert len(opened(path, wanted=grown).known) == 3
    first = records(path.read_text(encoding="utf-8"))[0]
    assert (first["p_scan"], first["p_holm"]) == ("", "")
    assert math.isclose(float(first["p_search"]), 0.01)
