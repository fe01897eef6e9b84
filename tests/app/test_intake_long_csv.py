import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.intake import csv_files
from app.intake.csv_files import split_rows
from app.intake.long_csv import plain_long_blocks
from app.intake.problems import IntakeError
from app.intake.reading import read_release
from app.intake.tables import blocks_of

CELLS = st.sampled_from(
    [
        "1",
        "01",
        "1.0",
        "2024-01",
        "2024-02",
        " 2024-03 ",
        "nan",
        "",
        "..",
        "-",
        "é",
        "a b",
        "a  b",
        "E",
    ]
)


def same(text: str) -> bool:
    """Tell whether the fast way was taken; it must then give what the way over rows gives."""
    found = plain_long_blocks("f.csv", text)
    if found is None:
        return False
    blocks, separator = found
    sheet = split_rows("f.csv", text)
    assert separator == sheet.separator
    slow = blocks_of(sheet)
    assert [(b.lines, b.periods, b.columns, b.problems) for b in blocks] == [
        (list(b.lines), list(b.periods), b.columns, b.problems) for b in slow
    ]
    return True


@given(
    st.lists(st.tuples(CELLS, CELLS, CELLS, CELLS), min_size=1, max_size=12),
    st.permutations(["economy", "period", "series", "value"]),
    st.sampled_from([",", ";", "\t"]),
    st.sampled_from(["\n", "\r\n"]),
    st.booleans(),
)
@settings(max_examples=150, deadline=None)
def test_columns_at_once_give_what_rows_give(rows, header, separator, end, closed):
    text = end.join(separator.join(row) for row in [header, *rows]) + (end if closed else "")
    try:
        same(text)
    except IntakeError as error:  # a series without a name is the other way's to refuse
        assert "must name its series" in str(error)


def test_codes_of_a_series_stay_text():
    rows = [f"2024-{m:02d},{name},{m}" for name in ("01", "1", "1.0", "nan") for m in (1, 2)]
    text = "\n".join(["# a remark", "Period,Series,Value", *rows])
    assert same(text)
    assert [one.name for one in read_release("f.csv", text.encode()).series] == [
        "01", "1", "1.0", "nan",
    ]  # fmt: skip


@pytest.mark.parametrize(
    "text",
    [
        'period,series,value\n2024-01,"A",1\n2024-02,A,2',  # quotes
        "period,series,value\n2024-01,A,1\n\n2024-02,A,2",  # a blank row
        "period,series,value\n2024-01,A,1,\n2024-02,A",  # uneven rows, as many cells in all
        "period,series,value\r2024-01,A,1\r2024-02,A,2",  # ends of lines of another time
        "period,series,value\n2024-01,,1",
        "period,series,value\n",
        "month,A\n2024-01,1",
        "a title\nperiod,series,value\n2024-01,A,1",
    ],
)
def test_anything_else_goes_over_rows(text):
    assert plain_long_blocks("f.csv", text) is None


def test_values_and_problems_carry_their_rows():
    rows = [f"2024-{m:02d},{name},{v}" for m in (1, 2, 3) for name, v in (("A", m), ("B", "x"))]
    release = read_release("f.csv", "\n".join(["period,series,value", *rows]).encode())
    assert release.series[0].values.tolist() == [1.0, 2.0, 3.0]
    (problem,) = release.problems
    assert (problem.row, problem.column) == (3, "B")
    assert type(problem.row) is int


def test_a_calendar_with_problems_is_not_lent_to_the_next_series():
    text = "period,series,value\n" + "\n".join(
        f"{when},{name},1" for name in "AB" for when in ("2024-01", "2024-02", "2024-02")
    )
    found = read_release("f.csv", text.encode()).problems
    assert [(one.column, one.row) for one in found if one.severity == "error"] == [
        ("A", 4), ("B", 7),
    ]  # fmt: skip


def test_what_is_beyond_the_limit_and_not_plain_is_refused_at_once(monkeypatch):
    monkeypatch.setattr(csv_files, "MAX_ODD_ROWS", 3)
    rows = [f"2024-{m:02d},A,{m}" for m in range(1, 8)]
    plain = "\n".join(["period,series,value", *rows])
    assert len(read_release("f.csv", plain.encode()).series[0].values) == 7
    with pytest.raises(IntakeError, match="more than 3 lines must be a row a value"):
        read_release("f.csv", plain.replace(",A,", ',"A",').encode())


def test_too_many_series_are_refused_with_their_row(monkeypatch):
    monkeypatch.setattr("app.intake.long_csv.MAX_COLUMNS", 2)
    text = "period,series,value\n" + "\n".join(f"2024-01,{name},1" for name in "AABCD")
    with pytest.raises(IntakeError, match="row 5: a file must not have more than 2 series"):
        read_release("f.csv", text.encode())
