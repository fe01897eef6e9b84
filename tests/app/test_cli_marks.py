"""Breaks and sheets by command: the same code as the Data page, the same words."""

import json
from pathlib import Path

import pytest

from app.workspace import Workspace

DATA = Path(__file__).resolve().parents[1] / "data"
BOOK = DATA / "xlsx_second_sheet.xlsx"


@pytest.fixture
def kept(run, tmp_path):
    path = tmp_path / "desk.sqlite"
    assert run("inspect", DATA / "csv_plain.csv", "--workspace", path)[0] == 0
    return path


def marks(path):
    desk = Workspace(path=path)
    try:
        return [vars(each) for each in desk.as_of().marks]
    finally:
        desk.close()


def test_a_break_is_marked_listed_and_taken_away(run, kept):
    at = ("--workspace", kept)
    words = ("workspace", "mark", "Broad money", "2022-07", "--note", "new definition", *at)
    status, out, _ = run(*words)
    assert status == 0
    line = (
        "Broad money: break treated at Jul 2022: growth of the month set to the mean of the months"
        " before and after (new definition)\n"
    )
    assert out == line
    assert run("workspace", "marks", *at)[1] == line
    listed = json.loads(run("workspace", "marks", "--json", *at)[1])["marks"]
    assert (
        listed
        == marks(kept)
        == [
            {
                "series": "Broad money",
                "period": "2022-07",
                "treatment": "exclude",
                "note": "new definition",
            }
        ]
    )
    assert run("workspace", "unmark", "Broad money", "2022-07", *at)[0] == 0
    assert marks(kept) == []
    assert run("workspace", "marks", *at)[1] == "No break is marked.\n"


@pytest.mark.parametrize(
    ("flags", "treatment"),
    [
        (("--growth", "before"), "before"),
        (("--growth", "mean"), "exclude"),
        (("--overlap", "Consumer prices"), "overlap:Consumer prices"),
        (("--overlap", "Consumer prices", "--year"), "overlap-mean:Consumer prices"),
    ],
)
def test_every_treatment_has_its_flag(run, kept, flags, treatment):
    words = ("workspace", "mark", "Broad money", "2022-10", *flags, "--workspace", kept)
    assert run(*words)[0] == 0
    assert marks(kept)[0]["treatment"] == treatment


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("mark", "Broad money", "1930-01"), "must have a value in Jan 1930"),
        (("mark", "Gold", "2022-07"), "no loaded series is named 'Gold'"),
        (("mark", "Broad money", "2022-07", "--overlap", "Gold"), "must be loaded, but 'Gold'"),
        (("mark", "Broad money", "2022-07", "--year"), "--year must come with --overlap"),
        (
            ("mark", "Broad money", "2022-07", "--year", "--overlap", "G", "--growth", "mean"),
            "--growth or --overlap, but got both",
        ),
        (("unmark", "Broad money", "2022-07"), "no break of 'Broad money' is marked"),
    ],
)
def test_what_cannot_be_done_is_one_sentence_and_changes_nothing(run, kept, words, said):
    status, out, err = run("workspace", *words, "--workspace", kept)
    assert (status, out, err.count("\n")) == (2, "", 1)
    assert said in err
    assert marks(kept) == []


def test_a_workspace_that_is_not_there_is_not_made(run, tmp_path):
    status, _, err = run("workspace", "marks", "--workspace", tmp_path / "none.sqlite")
    assert status == 2
    assert "there is no workspace" in err
    assert not (tmp_path / "none.sqlite").exists()


def test_a_sheet_is_chosen_among_files_of_which_one_is_a_workbook(run):
    words = ("inspect", BOOK, DATA / "csv_plain.csv", "--json")
    read = json.loads(run(*words)[1])["series"]
    assert {one["file"] for one in read} == {"xlsx_second_sheet.xlsx", "csv_plain.csv"}
    status, out, _ = run(*words, "--sheet", "quarterly")
    assert status == 0
    chosen = json.loads(out)["series"]
    assert {one["file"] for one in chosen} == {"xlsx_second_sheet.xlsx, Quarterly", "csv_plain.csv"}
    assert "quarterly" in {one["frequency"] for one in chosen}


@pytest.mark.parametrize(
    ("file", "said"),
    [
        (BOOK, "the sheet must be 'Contents', 'Data' or 'Quarterly', but got 'Money'"),
        (DATA / "csv_plain.csv", "--sheet must be of a workbook among FILES, but got 'Money'"),
    ],
)
def test_a_sheet_that_is_not_there_is_one_sentence(run, file, said):
    status, _, err = run("inspect", file, "--sheet", "Money")
    assert (status, err.count("\n")) == (2, 1)
    assert said in err
