"""What is refused: one sentence each."""

import io
import zipfile
from pathlib import Path

import pytest

from app.intake import csv_files
from app.intake.reading import (
    IntakeError,
    read_path,
    read_release,
)

DATA = Path(__file__).parent.parent / "data"
PLAIN = "month,Prices,Money\n2024-01,100.5,1200\n2024-02,101,1234.5\n2024-03,101.25,1300\n"


def _zip(*names: str) -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w") as archive:
        for name in names:
            archive.writestr(name, "<x/>")
    return stream.getvalue()


FORMS = "must be CSV, XLSX, SDMX or a zip of them, but this"
REFUSED: dict[str, tuple[str | bytes, str]] = {
    "empty": ("", "a.csv: must hold a header and rows below it, but the file is empty"),
    "blank": (" \n\n", "a.csv: must hold a header and rows below it, but the file is empty"),
    "only comments": ("# a\n# b\n", "a.csv: must hold a header and rows below it, but"),
    "only mark": (b"\xef\xbb\xbf", "a.csv: must hold a header and rows below it, but"),
    "only header": ("month,Prices\n", "a.csv, row 1: must have rows below the header, but"),
    "one column": ("month\n2024-01\n", "a.csv, row 1: must have a column of periods and at least"),
    "one column of words": ("hello\nworld\n", "a.csv, row 1: must have a column of periods and"),
    "no header": ("2024-01,1\n2024-02,2\n", "a.csv, row 1: the first row must name the series,"),
    "no names": ("month,\n2024-01,1\n", "a.csv, row 1: the header must name a column of values"),
    "no period": (
        "month,Prices\nfoo,1\n",
        "a.csv, row 2, column 'month': the period must be a month, a quarter or a year, but got"
        " 'foo'",
    ),
    "row numbers": ("n,Prices\n1,100\n2,101\n", "a.csv, row 2, column 'n': the period must be"),
    "periods across": (
        "series,2024-01,2024-02\nPrices,1,2\n",
        "a.csv, row 1: periods must run down the first column, but run across",
    ),
    "weeks": ("p,A\n2024-W01,1\n", "a.csv, row 2: the period must be a month, a quarter or a year"),
    "half-years": ("p,A\n2024-S1,1\n", "a.csv, row 2: the period must be a month, a quarter or"),
    "days": (
        "day,Prices\n2024-03-01,1\n2024-03-02,2\n",
        "a.csv, row 3: a month must have one value, as daily and weekly data are not read, but"
        " '2024-03-01' and '2024-03-02' in rows 2 and 3 share one",
    ),
    "dates in doubt": ("p,A\n01/02/2024,1\n02/03/2024,1\n", "a.csv, row 2: the period must be a"),
    "two calendars": (
        "p,A\n2023,1\n2023-Q1,2\n2023-Q2,3\n",
        "a.csv, row 2: periods must keep to one calendar, but '2023' is annual among quarterly"
        " ones",
    ),
    "fiscal years": ("p,A\n2010-11,1\n2011-12,1\n2012-13,2\n", "a.csv, row 4: the period must be"),
    "decimal comma without quotes": (
        "month,Prices\n2024-01,100,5\n2024-02,101,2\n",
        "a.csv, row 2: a row must have 2 cells as the header has, but got 3; a decimal comma needs"
        " quotes around it or semicolons between cells",
    ),
    "open quote": (
        'month,Prices\n2024-01,"100\n2024-02,101\n',
        "a.csv, row 2: a quote that opens must close, but the one opened in this row does not",
    ),
    "text after a quote": (
        'month,Prices\n2024-01,"100"x\n',
        "a.csv, row 2: a closing quote must end its cell, but more text follows it",
    ),
    "long cell": (
        "month,Prices\n2024-01," + "9" * 200_000,
        "a.csv, row 2: a cell must not have more than 131,072 signs, but one has",
    ),
    "PNG": (b"\x89PNG\r\n\x1a\n" + bytes(40), f"a.csv: {FORMS} is a PNG picture"),
    "PDF": (b"%PDF-1.7\n", f"a.csv: {FORMS} is a PDF document"),
    "locked": (b"\xd0\xcf\x11\xe0", f"a.csv: {FORMS} is an old or locked binary workbook"),
    "gzip": (b"\x1f\x8b\x08\x00", f"a.csv: {FORMS} is a gzip"),
    "HTML": ("<!doctype html><p>", f"a.csv: {FORMS} looks like HTML"),
    "JSON": ('{"a": 1}', f"a.csv: {FORMS} is JSON of another kind"),
    "OpenDocument": (_zip("mimetype", "content.xml"), f"a.csv: {FORMS} is an office document of"),
    "zero bytes": (PLAIN.encode("utf-16-le"), "a.csv: must be text, but holds zero bytes"),
    "control code": (
        "month,Prices\n2024-01,1\x07\n",
        "a.csv, row 2: must be text, but holds the control code 7",
    ),
    "broken UTF-16": (b"\xff\xfe\x00\xd8", "a.csv: must be UTF-16 as its first bytes promise, but"),
    "long without rows": ("period,series,value\n", "a.csv, row 1: must have rows below the header"),
    "long without a name": ("period,series,value\n2024-01,,1\n", "a.csv, row 2: a row must name"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_refused_in_one_sentence(case: str) -> None:
    content, sentence = REFUSED[case]
    with pytest.raises(IntakeError) as caught:
        read_release("a.csv", content if isinstance(content, bytes) else content.encode())
    assert str(caught.value).startswith(sentence)
    assert "\n" not in str(caught.value) and "Traceback" not in str(caught.value)
    assert caught.value.problem.severity == "error" and caught.value.problem.file == "a.csv"


@pytest.mark.parametrize(
    ("limit", "size", "sentence"),
    [
        ("MAX_BYTES", 20, "a file must not be larger than"),
        ("MAX_CELLS", 7, "a file must not have more than 7 cells"),
        ("MAX_CELLS", 10, "a file must not have more than 10 cells"),
        ("MAX_ROWS", 3, "a file must not have more than 3 lines"),
        ("MAX_COLUMNS", 2, "a row must not have more than 2 cells"),
    ],
)
def test_limits(monkeypatch: pytest.MonkeyPatch, limit: str, size: int, sentence: str) -> None:
    assert len(read_release("a.csv", PLAIN.encode()).series) == 2
    monkeypatch.setattr(csv_files, limit, size)
    with pytest.raises(IntakeError, match=sentence):
        read_release("a.csv", PLAIN.encode())


def test_a_span_of_centuries_for_many_series_is_refused() -> None:
    names = ",".join(f"S{number}" for number in range(800))
    ones = ",".join("1" for _ in range(800))
    content = f"p,{names}\n1000-01,{ones}\n2999-12,{ones}\n".encode()
    with pytest.raises(IntakeError, match="periods must lie closer together"):
        read_release("a.csv", content)
    pairs = "".join(f"1000-01,S{n},1\n2999-12,S{n},2\n" for n in range(800))
    with pytest.raises(IntakeError, match="24,000 of them for 800 series"):
        read_release("a.csv", f"period,series,value\n{pairs}".encode())


def test_a_file_on_the_disk_is_refused_by_its_own_size_before_it_is_read(tmp_path, monkeypatch):
    monkeypatch.setattr("app.intake.csv_files.MAX_BYTES", 2**20)
    path = tmp_path / "a.csv"
    path.write_bytes(b"month,A\n" + b"2020-01,1\n" * 300_000)
    with pytest.raises(IntakeError, match=r"larger than 1 MB, but this one has 2\.9 MB"):
        read_path(path)
