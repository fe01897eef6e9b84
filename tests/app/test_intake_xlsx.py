"""Workbooks: which sheet, which header, which cells; and what is refused of them."""

import datetime
import io
import re
import zipfile
from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.intake import xlsx_files
from app.intake.reading import IntakeError, read_release
from app.intake.xlsx_cells import Area, workbook_table
from tests.data.make_xlsx import shared_strings

SHEET = "xl/worksheets/sheet1.xml"
PLAIN = [["Month", "Prices"], *([f"2024-{m:02d}", 100.5 + m] for m in range(1, 7))]


def saved(*sheets: tuple[str, Sequence[Sequence[Any]]], merge: Sequence[str] = ()) -> bytes:
    """Save sheets of rows as a workbook; `merge` merges cells of the first."""
    book = openpyxl.Workbook()
    for place, (title, rows) in enumerate(sheets):
        sheet = book.active if place == 0 else book.create_sheet()
        sheet.title = title
        for row in rows:
            sheet.append(list(row))
        for area in merge if place == 0 else ():
            sheet.merge_cells(area)
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def edited(content: bytes, change: Callable[[bytes], bytes], name: str = SHEET) -> bytes:
    """Change one part of a workbook."""
    stream = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as source,
        zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as target,
    ):
        for inside in source.namelist():
            part = source.read(inside)
            target.writestr(inside, change(part) if inside == name else part)
    return stream.getvalue()


def names(content: bytes, sheet: str | None = None) -> list[str]:
    return [series.name for series in read_release("a.xlsx", content, sheet=sheet).series]


# Which sheet ---------------------------------------------------------------------------------


def three() -> bytes:
    other = [["Quarter", "Output"], ["2024-Q1", 5.5], ["2024-Q2", 5.6]]
    return saved(
        ("Cover", [["Release of prices"], ["Next: July"]]), ("Data", PLAIN), ("GDP", other)
    )


def test_the_first_sheet_with_a_table_is_read_and_the_others_are_named() -> None:
    release = read_release("a.xlsx", three())
    assert [series.name for series in release.series] == ["Prices"]
    assert [str(problem) for problem in release.problems] == [
        "a.xlsx: sheet 'Data' was read; the file also holds 'Cover', 'GDP'"
    ]


@pytest.mark.parametrize("wanted", ["GDP", "gdp", " GDP "])
def test_a_sheet_can_be_chosen(wanted: str) -> None:
    assert names(three(), wanted) == ["Output"]


def test_choosing_a_sheet_that_is_not_there_or_holds_no_table() -> None:
    with pytest.raises(IntakeError) as caught:
        read_release("a.xlsx", three(), sheet="Prices")
    assert str(caught.value) == (
        "a.xlsx: the sheet must be 'Cover', 'Data' or 'GDP', but got 'Prices'"
    )
    with pytest.raises(IntakeError, match="row 1: must have a column of periods"):
        read_release("a.xlsx", three(), sheet="Cover")
    with pytest.raises(IntakeError, match="must be a workbook to have a sheet 'Data'"):
        read_release("a.csv", b"p,A\n2024-01,1\n", sheet="Data")


def test_without_any_table_the_sentence_names_the_sheet_that_came_nearest() -> None:
    bad = [["Month", "Prices"], ["foo", 1], ["bar", 2]]
    with pytest.raises(IntakeError) as caught:
        read_release("a.xlsx", saved(("Cover", [["Release"]]), ("Data", bad)))
    assert str(caught.value) == (
        "a.xlsx, row 2, column 'Month': no sheet holds a table that can be read; in sheet 'Data',"
        " the period must be a month, a quarter or a year, but got 'foo'"
    )
    with pytest.raises(IntakeError, match="must hold a header and rows below it"):
        read_release("a.xlsx", saved(("Sheet", [])))


# Header --------------------------------------------------------------------------------------


def table(rows: Sequence[Sequence[str]], merged: Sequence[Area] = ()) -> list[str]:
    """Header that is made of rows; the first data row is the last."""
    numbered = [(number, list(row)) for number, row in enumerate(rows, start=1) if any(row)]
    sheet, _ = workbook_table("a", numbered, merged)
    return sheet.rows[-2]


DATA = ["2024-01", "1", "2", "3", "4"]


@pytest.mark.parametrize(
    ("rows", "merged", "header"),
    [
        ([["Month", "A", "B", "C", "D"]], (), ["Month", "A", "B", "C", "D"]),
        (
            [["", "Prices", "", "Money", ""], ["Month", "A", "B", "C", "D"]],
            (),
            ["Month", "Prices: A", "Prices: B", "Money: C", "Money: D"],
        ),
        (
            [["", "Prices", "", "", "Money"], ["Month", "A", "B", "C", "D"]],
            (Area(1, 2, 1, 3),),
            ["Month", "Prices: A", "Prices: B", "C", "Money: D"],
        ),
        (
            [["Month", "Prices", "", "Rate", "Money"], ["", "A", "B", "", "M3"]],
            (Area(1, 1, 2, 1), Area(1, 2, 1, 3), Area(1, 4, 2, 4)),
            ["Month", "Prices: A", "Prices: B", "Rate", "Money: M3"],
        ),
        (
            [["", "X", "", "Y", ""], ["", "P", "", "Q", ""], ["Month", "A", "B", "C", "D"]],
            (),
            ["Month", "X: P: A", "X: P: B", "Y: Q: C", "Y: Q: D"],
        ),
        (  # a title over all columns is no label
            [["", "Table 1", "", "", ""], ["Month", "A", "B", "C", "D"]],
            (Area(1, 2, 1, 5),),
            ["Month", "A", "B", "C", "D"],
        ),
        (  # a line of numbers of columns
            [["Month", "A", "B", "C", "D"], ["", "(1)", "(2)", "(3)", "(4)"]],
            (),
            ["Month", "A", "B", "C", "D"],
        ),
        (  # a line above that is about the release
            [["Released", "2024-03-01", "", "", ""], ["Month", "A", "B", "C", "D"]],
            (),
            ["Month", "A", "B", "C", "D"],
        ),
        (  # a blank row parts the title from the header
            [["Uldrevay", "Prices", "", "", ""], [""], ["Month", "A", "B", "C", "D"]],
            (),
            ["Month", "A", "B", "C", "D"],
        ),
        (  # units below
            [["Month", "A", "B", "C", "D"], ["", "%", "%", "index", "index"]],
            (),
            ["Month", "A: %", "B: %", "C: index", "D: index"],
        ),
    ],
)
def test_headers(rows: list[list[str]], merged: Sequence[Area], header: list[str]) -> None:
    assert table([*rows, DATA], merged) == header


def test_rows_of_the_sheet_are_named_in_problems() -> None:
    rows = [
        ["Prices of Uldrevay"],
        [],
        ["Month", "A", "B"],
        ["2024-01", 1.5, "x"],
        ["2024-02", 2, 3],
    ]
    release = read_release("a.xlsx", saved(("S", rows)))
    assert [str(problem) for problem in release.problems] == [
        "a.xlsx, row 4, column 'B': must be a number, but got 'x'",
        "a.xlsx, row 1: 'Prices of Uldrevay' outside the table was not read",
    ]


# Cells ---------------------------------------------------------------------------------------


# openpyxl writes 16 digits, so the numbers have fewer.
@given(st.lists(st.floats(1e-6, 1e12).map(lambda v: float(f"{v:.15g}")), min_size=2, max_size=20))
@settings(max_examples=40)
def test_numbers_come_back_exactly(numbers: list[float]) -> None:
    rows = [
        ["Month", "A"],
        *([f"{2001 + n // 12}-{n % 12 + 1:02d}", value] for n, value in enumerate(numbers)),
    ]
    (series,) = read_release("a.xlsx", saved(("S", rows))).series
    assert series.values.tolist() == numbers


@pytest.mark.parametrize(
    ("cells", "values"),
    [
        ([1.234, 2.345], [1.234, 2.345]),  # no thousands, whatever stands in other columns
        ([1234, 2345], [1234.0, 2345.0]),
        (["1.234,5", "2,5"], [1234.5, 2.5]),
        ([1.5, "2,25"], [1.5, 2.25]),
        ([1.234, "2,5"], [1.234, 2.5]),
        (["1,234.5", 2.5], [1234.5, 2.5]),
        (["..", 2.5], [2.5]),
        ([" 101.5 ", "\u2212102"], [101.5, -102.0]),
        (["#N/A", 2], [2.0]),
    ],
)
def test_numbers_and_numbers_stored_as_text(cells: list[Any], values: list[float]) -> None:
    rows = [["Month", "A", "B"], *([f"2024-{n:02d}", v, "1,5"] for n, v in enumerate(cells, 1))]
    series, proof = read_release("a.xlsx", saved(("S", rows))).series
    assert series.values.tolist() == values
    assert set(proof.values) == {1.5}


@pytest.mark.parametrize(
    ("shown_as", "value", "expected"),
    [
        ("0.0%", 0.029, 2.9),
        ("0.00 %", -0.00125, -0.125),
        ('0.0" % points"', 2.9, 2.9),
        ('[Red]0"%"', 2.9, 2.9),
        ("0.0\\%", 2.9, 2.9),
        ("0;-0%", 2.9, 2.9),
    ],
)
def test_percent_formats(shown_as: str, value: float, expected: float) -> None:
    book = openpyxl.Workbook()
    for place, row in enumerate([["Month", "Rate"], ["2024-01", value], ["2024-02", value]]):
        book.active.append(row)
        if place:
            book.active.cell(place + 1, 2).number_format = shown_as
    stream = io.BytesIO()
    book.save(stream)
    (series,) = read_release("a.xlsx", stream.getvalue()).series
    assert series.values.tolist() == [expected, expected]


@pytest.mark.parametrize(
    ("dates", "first", "count"),
    [
        ([datetime.date(2024, m, 1) for m in (1, 2, 3)], "2024-01", 3),
        ([datetime.datetime(2024, m, 28) for m in (1, 2, 3)], "2024-01", 3),
        ([datetime.date(2023, m, 1) for m in (3, 6, 9)], "2023Q1", 3),
        ([datetime.date(y, 12, 31) for y in (2021, 2022, 2023)], "2021", 3),
        ([202401, 202402, 202403], "2024-01", 3),
        ([2021, 2022, 2023], "2021", 3),
        ([2021.0, 2022.0, 2023.0], "2021", 3),
        (["Jan 2024", "Feb 2024", "Mar 2024"], "2024-01", 3),
    ],
)
def test_periods(dates: list[Any], first: str, count: int) -> None:
    rows = [["Period", "A"], *([date, 1.5] for date in dates)]
    (series,) = read_release("a.xlsx", saved(("S", rows))).series
    assert (str(series.first), series.values.size) == (first, count)


def test_values_that_computation_left_and_values_that_it_did_not() -> None:
    def with_formula(kept: bytes) -> bytes:
        cell = rb'<c r="B3"[^>]*>.*?</c>'
        new = b'<c r="B3"><f>B2*1E9</f>' + kept + b"</c>"
        return edited(saved(("S", PLAIN)), lambda part: re.sub(cell, new, part))

    (stored,) = read_release("a.xlsx", with_formula(b"<v>7.5</v>")).series
    assert stored.values[1] == 7.5
    for nothing in (b"", b"<v></v>", b"<v/>"):
        release = read_release("a.xlsx", with_formula(nothing))
        assert np.isnan(release.series[0].values[1])
        assert "formulas are not evaluated" in str(release.problems[0])
        assert release.problems[0].severity == "warning"


# Refused -------------------------------------------------------------------------------------

BASE = saved(("S", PLAIN))


def promising(content: bytes, size: int) -> bytes:
    """Let the directory promise another size of the sheet than it has."""
    told = zipfile.ZipFile(io.BytesIO(content)).getinfo(SHEET).file_size
    return content.replace(told.to_bytes(4, "little"), size.to_bytes(4, "little"))


LONG = edited(BASE, lambda part: part + b" " * 5_000_000)

HOSTILE = {
    "entities": (
        edited(BASE, lambda part: b'<!DOCTYPE a [<!ENTITY b "c">]>' + part),
        "XML must not declare a document type or entities",
    ),
    "entities in UTF-16": (
        edited(BASE, lambda _: '<?xml version="1.0"?><!DOCTYPE a><a/>'.encode("utf-16")),
        "XML must not declare a document type or entities",
    ),
    "entities in the list of strings": (
        edited(shared_strings(BASE), lambda part: b"<!ENTITY x>" + part, "xl/sharedStrings.xml"),
        "XML must not declare a document type or entities",
    ),
    "odd encoding": (
        edited(BASE, lambda _: b'<?xml version="1.0" encoding="cp037"?><a/>'),
        "XML must be written in UTF-8",
    ),
    "ratio": (edited(BASE, lambda part: part + b" " * 20_000_000), "200 times its size"),
    "size": (promising(BASE, 300 * 1024**2), "unpack to more than 256 MB"),
    "size that is not told": (promising(LONG, 3_000), "must unpack as packed, but it is damaged"),
    "row beyond": (
        edited(BASE, lambda part: part.replace(b'r="7"', b'r="99999999999"')),
        "more than 2,100,000 rows",
    ),
    "column beyond": (
        edited(BASE, lambda part: part.replace(b'r="B7"', b'r="ZZZZZ7"')),
        "must be a whole workbook (XLSX), but its parts do not fit",
    ),
    "no sheet": (edited(BASE, lambda _: b"<a/>", "xl/workbook.xml"), "must hold a sheet of cells"),
    "broken sheet": (edited(BASE, lambda part: part[:900]), "whole workbook"),
    "broken archive": (BASE[:2000], "must be a whole zip archive, but its directory is missing"),
    "styles too large": (
        edited(
            BASE, lambda part: part + np.random.default_rng(1).bytes(9_000_000), "xl/styles.xml"
        ),
        "'xl/styles.xml' must be smaller",
    ),
}


@pytest.mark.parametrize("case", HOSTILE)
def test_hostile_workbooks_are_refused_in_one_sentence(case: str) -> None:
    content, sentence = HOSTILE[case]
    with pytest.raises(IntakeError) as caught:
        read_release("a.xlsx", content)
    assert sentence in str(caught.value) and "\n" not in str(caught.value)
    assert str(caught.value).startswith("a.xlsx")


def test_a_false_size_of_the_sheet_and_a_far_cell_cost_nothing() -> None:
    wide = edited(BASE, lambda part: re.sub(rb'ref="[A-Z0-9:]+"', b'ref="A1:XFD1048576"', part))
    assert names(wide) == ["Prices"]
    far = edited(BASE, lambda part: part.replace(b'<row r="7"', b'<row r="1048576"'))
    assert names(far) == ["Prices"]


@pytest.mark.parametrize(
    ("limit", "size", "sentence"),
    [
        ("MAX_CELLS", 5, "more than 5 cells"),
        ("MAX_COLUMNS", 1, "more than 1 cells"),
        ("MAX_ROWS", 3, "more than 3 rows"),
        ("_MAX_TAGS", 40, "must not hold more than 10 cells"),
        ("_MAX_MERGED", 0, "more than 0 areas"),
    ],
)
def test_limits(monkeypatch: pytest.MonkeyPatch, limit: str, size: int, sentence: str) -> None:
    content = saved(("S", PLAIN), merge=["D1:E1"])
    assert names(content) == ["Prices"]
    monkeypatch.setattr(xlsx_files, limit, size)
    with pytest.raises(IntakeError, match=sentence):
        read_release("a.xlsx", content)


def test_one_far_column_does_not_widen_every_row(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("app.intake.xlsx_cells.MAX_CELLS", 500)
    rows = [*PLAIN, *([f"2025-{m:02d}", 1.5, *[""] * 200] for m in range(1, 7))]
    rows[-1][-1] = "x"
    with pytest.raises(IntakeError, match="must not span more than 1,000 cells"):
        read_release("a.xlsx", saved(("S", rows)))
