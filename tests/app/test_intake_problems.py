"""What is left out or told, with its place; everything else is still read."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.intake.problems import display_name, quoted
from app.intake.reading import (
    IntakeError,
    Release,
    read_path,
    read_release,
)

DATA = Path(__file__).parent.parent / "data"
PLAIN = "month,Prices,Money\n2024-01,100.5,1200\n2024-02,101,1234.5\n2024-03,101.25,1300\n"


def sentences(release: Release, severity: str) -> list[str]:
    return [str(problem) for problem in release.problems if problem.severity == severity]


def test_faults_of_one_file_and_their_places() -> None:
    release = read_path(DATA / "faults.csv")
    assert [series.name for series in release.series] == [
        "Consumer prices",
        "Consumer prices (2)",
        "Narrow money, new definition",
        "Policy rate",
    ]
    assert sentences(release, "error") == [
        "faults.csv, row 6: a month must stand once, but May 2024 stands in rows 5 and 6; where"
        " they differ no value was taken",
        "faults.csv, row 3, column 'Broad money': must be a number, but got 'n.a. '",
    ]
    assert sentences(release, "warning") == [
        "faults.csv, row 1, column 'Consumer prices (2)': a name must stand once, but 'Consumer"
        " prices' stands again; it is called 'Consumer prices (2)' here",
        "faults.csv, row 5: every month must have a row, but Apr 2024 has none; the gap is kept",
        "faults.csv, row 4, column 'Consumer prices': every month must have a value, but Mar 2024"
        " (and 1 more month) has none; the gap is kept",
        "faults.csv, row 4, column 'Narrow money, new definition': a level must be positive to"
        " have a growth rate, but got '0'",
    ]
    assert sentences(release, "note") == [
        "faults.csv, row 9: 'Source: Bank of Uldrevay (invented)' outside the table was not read"
    ]
    nan = np.nan
    np.testing.assert_array_equal(release.series[0].values, [100.0, 100.4, nan, nan, nan, 101.4])
    np.testing.assert_array_equal(release.series[1].values, [50.1, 50.2, 50.3, nan, 50.5, 50.6])


def test_semicolon_latin_file() -> None:
    release = read_path(DATA / "semicolon_latin1.csv")
    prices, money = release.series
    assert prices.name == "Prix à la consommation (2015 = 100)" and prices.unit == "2015 = 100"
    assert money.name == "Masse monétaire (millions)" and money.unit == "millions"
    np.testing.assert_array_equal(prices.values, [112.4, 112.9, 113.2, 113.1])
    np.testing.assert_array_equal(money.values, [12345.5, 12401.0, np.nan, 12512.25])
    assert sentences(release, "note") == ["semicolon_latin1.csv: read as Latin-1 text"]
    assert sentences(release, "warning")[0].startswith(
        "semicolon_latin1.csv, row 5, column 'Masse monétaire (millions)': every month must have"
    )


def test_newest_first_file() -> None:
    release = read_path(DATA / "newest_first_utf16.csv")
    output, rate = release.series
    assert str(output.first) == "2023Q1" and (output.kind, rate.kind) == ("level", "rate")
    np.testing.assert_array_equal(output.values, [103.8, 104.1, 104.9, 105.2])
    np.testing.assert_array_equal(rate.values, [3.75, -0.25, 4.5, 4.25])
    assert [problem.message for problem in release.problems] == [
        "read as UTF-16 text",
        "the newest period comes first; the rows were read in reverse",
    ]


PARTIAL = {
    "text": (
        "p,A,B\n2024-01,1,1\n2024-02,x,1\n2024-03,y,1\n",
        "error",
        "a.csv, row 3, column 'A': must be a number, but got 'x' (and 1 more such cell)",
        ["B"],
    ),
    "row after a quoted line end": (
        'p,"A\nB",C\n2024-01,1,1\n2024-02,1,x\n',
        "error",
        "a.csv, row 4, column 'C': must be a number, but got 'x'",
        ["A B"],
    ),
    "row after comments": (
        "# a\n# b\np,A,B\n2024-01,x,1\n",
        "error",
        "a.csv, row 4, column 'A': must be a number, but got 'x'",
        ["B"],
    ),
    "all missing": (
        "p,A,B\n2024-01,..,1\n",
        "error",
        "a.csv, column 'A': a series must have at least one value, but got none",
        ["B"],
    ),
    "infinite": (
        "p,A,B\n2024-01,1e999,1\n",
        "error",
        "a.csv, row 2, column 'A': must be a number below 1.8e308, but got '1e999'",
        ["B"],
    ),
    "one period is none": (
        "p,A\n2024-01,1\n2024-1x,2\n2024-03,3\n",
        "error",
        "a.csv, row 3: the period must be a month, a quarter or a year, but got '2024-1x';"
        " the row was left out",
        ["A"],
    ),
    "one row too long": (
        "p,A\n2024-01,1\n2024-02,2,3\n2024-03,3\n",
        "error",
        "a.csv, row 3: a row must have 2 cells as the header has, but got 3; the row was left out",
        ["A"],
    ),
    "one row too short": (
        "p,A,B\n2024-01,1,1\n2024-02,2,2\n2024-03,3\n",
        "warning",
        "a.csv, row 4: a row must have 3 cells as the header has, but got 2; the absent ones were"
        " read as no value",
        ["A", "B"],
    ),
    "no name": (
        "p,A,,\n2024-01,1,,2\n",
        "warning",
        "a.csv, row 1, column 'Column 4': a column must have a name, but column 4 has none; it is"
        " called 'Column 4' here",
        ["A", "Column 4"],
    ),
    "name stands twice beside its second name": (
        "p,A,A,A (2)\n2024-01,1,2,3\n",
        "warning",
        "a.csv, row 1, column 'A (3)': a name must stand once, but 'A' stands again; it is called"
        " 'A (3)' here",
        ["A", "A (3)", "A (2)"],
    ),
    "order": (
        "p,A\n2024-03,3\n2024-01,1\n2024-02,2\n",
        "warning",
        "a.csv, row 3: periods must stand in order, but Jan 2024 follows Mar 2024; they were put"
        " in order",
        ["A"],
    ),
    "gap": (
        "p,A\n2024-01,1\n2024-04,1\n2024-06,1\n",
        "warning",
        "a.csv, row 3: every month must have a row, but Feb 2024 (and 2 more months) has none;"
        " the gap is kept",
        ["A"],
    ),
    "negative index": (
        "p,Prices\n2024-01,100\n2024-02,-101\n2024-03,0\n",
        "warning",
        "a.csv, row 3, column 'Prices': an index must be positive to have a growth rate, but got"
        " '-101' (and 1 more such value)",
        ["Prices"],
    ),
    "long with a remark and a short row": (
        "period,series,value\n2024-01,A,1\n2024-02,A\n2024-03,A,2\nSource: office\n",
        "error",
        "a.csv, row 3: a row must have 3 cells as the header has, but got 2; the row was left out",
        ["A"],
    ),
    "one long series of two calendars": (
        "period,series,value\n2024-01,A,1\n2024,A,1\n2024-01,B,1\n",
        "error",
        "a.csv, row 3, column 'A': periods must keep to one calendar, but '2024' is annual among"
        " monthly ones",
        ["B"],
    ),
}


@pytest.mark.parametrize("case", PARTIAL)
def test_partial_trouble_loses_nothing_else(case: str) -> None:
    content, severity, sentence, names = PARTIAL[case]
    release = read_release("a.csv", content.encode())
    assert sentences(release, severity) == [sentence]
    assert [series.name for series in release.series] == names


def test_rows_that_repeat_a_period_and_agree_keep_the_value() -> None:
    release = read_release("a.csv", b"p,A,B\n2024-01,1,\n2024-01,1,5\n2024-02,2,6\n")
    assert [series.values.tolist() for series in release.series] == [[1, 2], [5, 6]]
    assert sentences(release, "error")[0].startswith("a.csv, row 3: a month must stand once")


@given(st.permutations(range(24)))
def test_order_of_rows_does_not_matter(order: list[int]) -> None:
    rows = [f"{2020 + n // 12}-{n % 12 + 1:02d},{100 + n}" for n in order]
    series = read_release("a.csv", "\n".join(["p,A", *rows]).encode()).series[0]
    assert series.values.tolist() == [100.0 + n for n in range(24)]


@pytest.mark.parametrize(
    ("name", "shown"),
    [
        ("prices.csv", "prices.csv"),
        ("/home/desk/prices.csv", "prices.csv"),
        ("..\\..\\prices.csv", "prices.csv"),
        ("pri\x00ces\x1b[31m.csv", "prices[31m.csv"),
        ("prices\u202evsc.exe", "pricesvsc.exe"),
        ("a\nb.csv", "a b.csv"),
        ("", "file"),
        ("..", "file"),
        ("/", "file"),
        ("x" * 500 + ".csv", "x" * 75 + "…" + ".csv"),
        ("\ud800.csv", ".csv"),
    ],
)
def test_display_names(name: str, shown: str) -> None:
    assert display_name(name) == shown and len(shown) <= 80
    with pytest.raises(IntakeError, match="the file is empty"):
        read_release(name, b"")


def test_quoted_text_is_short_and_visible() -> None:
    assert quoted("a\x1b\u202eb") == "'a??b'"
    assert len(quoted("x" * 1000)) == 42
