"""The shapes in which good release files come: each gives the same two series."""

import numpy as np
import pytest

from app.intake.reading import read_release

PLAIN = "month,Prices,Money\n2024-01,100.5,1200\n2024-02,101,1234.5\n2024-03,101.25,1300\n"
SEMICOLON = PLAIN.replace(",", ";").replace(".", ",")
COMMENTS = "# Uldrevay, invented\n#\n# by hand\n\n"
REVERSED = "month,Prices,Money\n2024-03,101.25,1300\n2024-02,101,1234.5\n2024-01,100.5,1200\n"
SHUFFLED = "month,Prices,Money\n2024-03,101.25,1300\n2024-01,100.5,1200\n2024-02,101,1234.5\n"
LONG = """period,series,value
2024-01,Prices,100.5
2024-01,Money,1200
2024-02,Prices,101
2024-03,Prices,101.25
2024-02,Money,1234.5
2024-03,Money,1300
"""


def _periods(*texts: str) -> str:
    """Put other periods into the plain file."""
    header, *rows = PLAIN.splitlines()
    cells = [row.partition(",")[2] for row in rows]
    return "\n".join([header, *(f"{text},{rest}" for text, rest in zip(texts, cells, strict=True))])


MONTHLY: dict[str, str | bytes] = {
    "plain": PLAIN,
    "no line end at the end": PLAIN.rstrip("\n"),
    "CRLF": PLAIN.replace("\n", "\r\n"),
    "CR": PLAIN.replace("\n", "\r"),
    "mixed line ends": PLAIN.replace("\n", "\r\n", 2),
    "semicolon and decimal comma": SEMICOLON,
    "semicolon and decimal point": PLAIN.replace(",", ";"),
    "tab": PLAIN.replace(",", "\t"),
    "tab and decimal comma": SEMICOLON.replace(";", "\t"),
    "declared separator": "sep=;\n" + SEMICOLON,
    "quoted decimal comma": PLAIN.replace("100.5", '"100,5"').replace("101.25", '"101,25"'),
    "grouped, quoted": PLAIN.replace("1234.5", '"1,234.5"').replace("1300", '"1,300"'),
    "grouped by points": SEMICOLON.replace("1234,5", "1.234,5").replace("1300", "1.300"),
    "grouped by spaces": SEMICOLON.replace("1234,5", "1 234,5").replace("1300", "1 300"),
    "grouped by hard spaces": PLAIN.replace("1234.5", "1\u00a0234.5"),
    "grouped by thin spaces": PLAIN.replace("1234.5", "1\u202f234.5"),
    "all quoted": "\n".join(
        ",".join(f'"{cell}"' for cell in line.split(",")) for line in PLAIN.split()
    ),
    "spaces around cells": PLAIN.replace(",", " , "),
    "byte-order mark": b"\xef\xbb\xbf" + PLAIN.encode(),
    "UTF-16": PLAIN.encode("utf-16"),
    "UTF-16 big end first": b"\xfe\xff" + PLAIN.encode("utf-16-be"),
    "UTF-32": PLAIN.encode("utf-32"),
    "trailing blank lines": PLAIN + "\n\n , ,\n",
    "trailing blank columns": PLAIN.replace("\n", ",,\n"),
    "blank column in the middle": "\n".join(line.replace(",", ",,", 1) for line in PLAIN.split()),
    "blank lines between": PLAIN.replace("\n", "\n\n"),
    "comments above": COMMENTS + PLAIN,
    "quoted comment above": '"# one, two"\n' + PLAIN,
    "title above": "Prices and money of Uldrevay\n\n" + PLAIN,
    "wide title above": "Uldrevay, invented\n" + PLAIN,
    "remark below": PLAIN + "Source: Uldrevay (invented)\n",
    "comment below": PLAIN + "# end, of file\n",
    "end-of-file sign": PLAIN + "\x1a",
    "newest first": REVERSED,
    "out of order": SHUFFLED,
    "days, first of month": _periods("2024-01-01", "2024-02-01", "2024-03-01"),
    "days, end of month": _periods("2024-01-31", "2024-02-29", "2024-03-29"),
    "midnight": _periods("2024-01-31 00:00:00", "2024-02-29 00:00:00", "2024-03-31 00:00:00"),
    "month first": _periods("01/2024", "02/2024", "03/2024"),
    "M": _periods("2024M1", "2024M2", "2024M3"),
    "M and hyphen": _periods("2024-M01", "2024-M02", "2024-M03"),
    "names": _periods("Jan 2024", "Feb 2024", "Mar 2024"),
    "day, month, year": _periods("31/01/2024", "29/02/2024", "31/03/2024"),
    "month, day, year": _periods("1/31/2024", "2/29/2024", "3/31/2024"),
    "periods without a head": PLAIN.replace("month", ""),
    "long": LONG,
    "long, other order": "\n".join(
        ",".join((c, a, b)) for a, b, c in (line.split(",") for line in LONG.split())
    ),
    "declared tab": "sep=\t\n" + PLAIN.replace(",", "\t"),
}


@pytest.mark.parametrize("shape", MONTHLY)
def test_monthly_shapes(shape: str) -> None:
    content = MONTHLY[shape]
    release = read_release("a.csv", content if isinstance(content, bytes) else content.encode())
    assert [series.name for series in release.series] == ["Prices", "Money"]
    prices, money = release.series
    assert str(prices.first) == "2024-01" and prices.first.freqstr == "M"
    np.testing.assert_array_equal(prices.values, [100.5, 101.0, 101.25])
    np.testing.assert_array_equal(money.values, [1200.0, 1234.5, 1300.0])
    assert (prices.kind, money.kind) == ("index", "level")
    assert not [problem for problem in release.problems if problem.severity == "error"]


QUARTERLY = {
    "2024-Q1": ("2024-Q1", "2024-Q2", "2024-Q3"),
    "2024Q1": ("2024Q1", "2024Q2", "2024Q3"),
    "Q1 2024": ("Q1 2024", "Q2 2024", "Q3 2024"),
    "2024 Q1": ("2024 Q1", "2024 Q2", "2024 Q3"),
    "first months": ("2024-01", "2024-04", "2024-07"),
    "last months": ("2024-03", "2024-06", "2024-09"),
    "last days": ("2024-03-31", "2024-06-30", "2024-09-30"),
}


@pytest.mark.parametrize("shape", QUARTERLY)
def test_quarterly_shapes(shape: str) -> None:
    release = read_release("a.csv", _periods(*QUARTERLY[shape]).encode())
    assert [str(series.first) for series in release.series] == ["2024Q1", "2024Q1"]
    assert [series.values.size for series in release.series] == [3, 3]
    months = shape.startswith(("first", "last"))
    assert [str(problem) for problem in release.problems] == (
        ["a.csv, row 2: months that lie three apart were read as quarterly data"] if months else []
    )


@pytest.mark.parametrize(
    "texts",
    [
        ("2022", "2023", "2024"),
        ("2022-A1", "2023-A1", "2024-A1"),
        ("2022-12-31", "2023-12-31", "2024-12-31"),
    ],
)
def test_annual_shapes(texts: tuple[str, ...]) -> None:
    release = read_release("a.csv", _periods(*texts).encode())
    assert [str(series.first) for series in release.series] == ["2022", "2022"]
    assert [series.values.size for series in release.series] == [3, 3]


@pytest.mark.parametrize(
    ("header", "name"),
    [
        ('"Prices, all items"', "Prices, all items"),
        ('"Prices ""core"""', 'Prices "core"'),
        ('"Prices\r\nall items"', "Prices all items"),
        ("Prices\u202e\u200b", "Prices"),
        ("  Prices  ", "Prices"),
        ("2015 = 100", "2015 = 100"),
        ("P" * 300, "P" * 199 + "…"),
    ],
)
def test_headers(header: str, name: str) -> None:
    # quotes doubled inside quotes, separators and line ends inside quotes: RFC 4180, section 2
    release = read_release("a.csv", f"month,{header}\r\n2024-01,100\r\n".encode())
    assert [series.name for series in release.series] == [name]


@pytest.mark.parametrize(
    ("cells", "separator", "values", "how"),
    [
        (('"1,234"', '"2,345"'), ",", [1234.0, 2345.0], "thousands"),
        (("1,234", "2,345"), ";", [1.234, 2.345], "decimals"),
        (("1.234", "2.345"), ";", [1.234, 2.345], "decimals"),
        (("1.234", "2.345"), ",", [1.234, 2.345], None),
    ],
)
def test_doubtful_marks_are_read_with_a_warning(
    cells: tuple[str, str], separator: str, values: list[float], how: str | None
) -> None:
    rows = f"month{separator}Money\n2024-01{separator}{cells[0]}\n2024-02{separator}{cells[1]}\n"
    release = read_release("a.csv", rows.encode())
    assert release.series[0].values.tolist() == values
    said = [problem.message for problem in release.problems if problem.severity == "warning"]
    assert len(said) == (how is not None) and all(text.endswith(f"read as {how}") for text in said)


def test_a_mark_proved_elsewhere_settles_a_doubt() -> None:
    content = b"month;Money;Prices\n2024-01;1.234;101,5\n2024-02;2.345;102\n"
    release = read_release("a.csv", content)
    assert release.series[0].values.tolist() == [1234.0, 2345.0] and not release.problems
