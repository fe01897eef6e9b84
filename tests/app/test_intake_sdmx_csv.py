"""SDMX-CSV: header rules, codes and names, actions, flags, units; and what is refused."""

import numpy as np
import pytest

from app.intake.reading import IntakeError, Release, read_release


def read(*lines: str) -> Release:
    return read_release("a.csv", "\n".join(lines).encode())


def shown(release: Release) -> list[tuple[str, str, list[float]]]:
    return [(one.name, str(one.first), one.values.tolist()) for one in release.series]


def said(release: Release) -> list[tuple[str, str]]:
    return [(problem.severity, str(problem)) for problem in release.problems]


# Outside: the examples of the SDMX-CSV field guides, version 1.0 (2017) and 2.0 (2021), of the
# SDMX technical working group, cut to the columns that matter.


def test_guide_1_0() -> None:
    release = read(
        "DATAFLOW,DIM_1,DIM_2,DIM_3,OBS_VALUE,ATTR_2,ATTR_3,ATTR_1,SERIESKEY",
        'ESTAT:NA_MAIN(1.6),A,B,2014-01,12.4,Y,"Normal, special and other values",N,A.B',
        'ESTAT:NA_MAIN(1.6),A,B,2014-02,10.8,Y,"Normal, special and other values",Y,A.B',
    )
    assert shown(release) == [("A, B", "2014-01", [12.4, 10.8])] and release.problems == ()


def test_guide_1_0_french() -> None:
    release = read(
        "DATAFLOW;DIM_1: Dimension 1;DIM_2: Dimension 2;DIM_3: Dimension 3;OBS_VALUE: Valeur",
        "ESTAT:NA_MAIN(1.6): Comptes: tous;A: Value A;B: Value B;2014-01: 2014-01;12,4",
        "ESTAT:NA_MAIN(1.6): Comptes: tous;A: Value A;B: Value B;2014-02: 2014-02;10,8",
    )
    assert shown(release) == [("Value A, Value B", "2014-01", [12.4, 10.8])]


def test_guide_2_0_names_in_columns_of_their_own() -> None:
    release = read(
        "STRUCTURE,STRUCTURE_ID,STRUCTURE_NAME,ACTION,DIM_1,Dimension 1,DIM_2,Dimension 2,DIM_3"
        ",Dimension 3,OBS_VALUE,Observation value,ATTR_1,Attribute 1",
        "dataflow,ESTAT:NA_MAIN(1.6.0),NA Main,I,A,Value A,B,Value B,2014-01,2014-01,12.4,,Y,Yes",
        "dataflow,ESTAT:NA_MAIN(1.6.0),NA Main,I,A,Value A,B,Value B,2014-02,2014-02,10.8,,Y,Yes",
    )
    assert shown(release) == [("Value A, Value B", "2014-01", [12.4, 10.8])]


def test_guide_2_0_any_order_and_brackets() -> None:
    release = read(
        "STRUCTURE[;],STRUCTURE_ID,ACTION,OBS_VALUE,ATTR_3,ATTR_1[],DIM_2,DIM_1,DIM_3",
        'dataflow,ESTAT:NA_MAIN(1.6.0),I,12.4,"Normal, special",X;Y,B,A,2014-01',
        'dataflow,ESTAT:NA_MAIN(1.6.0),I,10.8,"Normal, special",X;Z,B,A,2014-02',
    )
    assert [values for _, _, values in shown(release)] == [[12.4, 10.8]]


def test_guide_2_0_separators_and_keys() -> None:
    release = read(
        "STRUCTURE[|];STRUCTURE_ID;ACTION;SERIES_KEY;OBS_KEY;DIM_1: Dimension 1;DIM_2: Dimension 2"
        ";DIM_3: Dimension 3;OBS_VALUE: Observation value;ATTR_2: Attribut 2",
        "dataflow;E:NA(1.6.0): Agrégats;I;A.B;A.B.2014-01;A: Value A;B: Value B;2014-01: 2014-01"
        ";12,4;Y: Oui",
    )
    assert shown(release) == [("Value A, Value B", "2014-01", [12.4])]


def test_guide_2_0_actions() -> None:
    release = read(
        "STRUCTURE,STRUCTURE_ID,ACTION,DIM_1,DIM_2,DIM_3,OBS_VALUE,ATTR_1",
        "dataflow,ESTAT:NA_MAIN(1.6.0),A,A,B,2014-01,12.4,X",
        "dataflow,ESTAT:NA_MAIN(1.6.0),R,A,B,2014-02,10.8,Y",
        "dataflow,ESTAT:NA_MAIN(1.6.0),M,A,B,2014-03,10.9,Y",
        "dataflow,ESTAT:NA_MAIN(1.6.0),D,A,B,2014-04,-,",
        "dataflow,ESTAT:NA_MAIN(1.6.0),D,,B,,-,",
    )
    assert shown(release) == [("A, B", "2014-01", [12.4, 10.8, 10.9])]
    sentence = "a.csv, row 5: a row that deletes was not read (and 1 more such row)"
    assert said(release) == [("warning", sentence)]


def test_rows_for_attributes_of_partial_keys_are_no_observations() -> None:
    release = read(
        "STRUCTURE,STRUCTURE_ID,ACTION,DIM_1,DIM_2,TIME_PERIOD,OBS_VALUE,ATTR_1",
        "dataflow,A:DF(1.0.0),I,A,B,2014-01,12.4,N",
        "dataflow,A:DF(1.0.0),I,,B,,,Y",
    )
    assert shown(release) == [("A, B", "2014-01", [12.4])]


# Names ---------------------------------------------------------------------------------------

HEAD = "DATAFLOW,FREQ,AREA,ITEM,TIME_PERIOD,OBS_VALUE"


@pytest.mark.parametrize(
    ("keys", "names"),
    [
        (["M,U,CPI", "M,U,PPI"], ["CPI", "PPI"]),
        (["M,U,CPI", "M,B,CPI"], ["U", "B"]),
        (["M,U,CPI", "M,B,PPI"], ["U, CPI", "B, PPI"]),
        (["M,U,CPI"], ["U, CPI"]),
        (["M,U,A: Prices: all", "M,U,B: Food"], ["Prices: all", "Food"]),
        (["M,U,A: Prices", "M,U,B: Prices"], ["Prices (A)", "Prices (B)"]),
        (["M,,CPI", "M,U,CPI"], ["Series", "U"]),
    ],
)
def test_names_are_what_varies(keys: list[str], names: list[str]) -> None:
    release = read(HEAD, *(f"X:Y(1),{key},2024-01,1.5" for key in keys))
    assert [series.name for series in release.series] == names


def test_frequencies_of_one_item_are_told_apart() -> None:
    rows = ["M: Monthly,U,CPI,2024-01,1.5", "Q: Quarterly,U,CPI,2024-Q1,2.5"]
    release = read(HEAD, *(f"X:Y(1),{row}" for row in rows))
    assert [(one.name, one.frequency) for one in release.series] == [
        ("U, CPI, Monthly", "monthly"),
        ("U, CPI, Quarterly", "quarterly"),
    ]


# Calendar ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("frequency", "periods", "first", "count"),
    [
        ("M", ["2024-01", "2024-04", "2024-07"], "2024-01", 7),  # monthly as stated, with gaps
        ("Q", ["2024-01", "2024-04", "2024-07"], "2024Q1", 3),
        ("Q", ["2024-03-31", "2024-06-30"], "2024Q1", 2),
        ("A", ["2022-12", "2023-12"], "2022", 2),
        ("A", ["2022", "2023-A1"], "2022", 2),
        ("M", ["2024-M01", "2024-02Z"], "2024-01", 2),
        ("M", ["2024-01+02:00", "2024-02-01T00:00:00"], "2024-01", 2),
        ("Q", ["2024-Q1", "2024-04-01/P3M"], "2024Q1", 2),
    ],
)
def test_time(frequency: str, periods: list[str], first: str, count: int) -> None:
    release = read(HEAD, *(f"X:Y(1),{frequency},U,CPI,{period},1.5" for period in periods))
    (series,) = release.series
    assert (str(series.first), series.values.size) == (first, count)


@pytest.mark.parametrize(
    ("frequency", "period", "sentence"),
    [
        ("", "2024-S1", "but got '2024-S1', a half-year"),
        ("", "2024-T2", "but got '2024-T2', a term of four months"),
        ("", "2024-W05", "but got '2024-W05', a week"),
        ("", "2024-D010", "but got '2024-D010', a day of the year"),
        ("", "2024-01-01/P7D", "but got '2024-01-01/P7D', a start with a duration"),
        ("A", "2024-Q1", "periods must be annual as the file states, but '2024-Q1' is quarterly"),
    ],
)
def test_calendars_that_are_refused(frequency: str, period: str, sentence: str) -> None:
    with pytest.raises(IntakeError) as caught:
        read(HEAD, f"X:Y(1),{frequency},U,CPI,{period},1.5")
    assert sentence in str(caught.value)


@pytest.mark.parametrize("code", ["D", "W", "S", "H", "D: Daily"])
def test_frequencies_that_are_left_out(code: str) -> None:
    release = read(HEAD, f"X:Y(1),{code},U,CPI,2024-01-05,1", "X:Y(1),M,U,CPI,2024-01,2")
    assert [one.frequency for one in release.series] == ["monthly"]
    ((severity, sentence),) = said(release)
    assert severity == "error" and "must be monthly, quarterly or annual, but FREQ is" in sentence
    assert sentence.endswith("'D' (daily)") == code.endswith("Daily")


def test_a_reporting_year_of_its_own_is_left_out() -> None:
    head = f"{HEAD},REPORTING_YEAR_START_DAY"
    row = "X:Y(1),Q,U,{},2024-Q1,1,{}"
    release = read(head, row.format("CPI", "--07-01"), row.format("PPI", "--01-01"))
    assert [one.name for one in release.series] == ["PPI"]
    assert "must start on 1 January, but starts on '--07-01'" in said(release)[0][1]


# Values, flags, units ------------------------------------------------------------------------


def test_missing_on_purpose_and_omitted() -> None:
    rows = ["2024-01,1.5,A", "2024-02,NaN,M", "2024-03,#N/A,Q", "2024-04,,A", "2024-05,2,A"]
    release = read(f"{HEAD},OBS_STATUS", *(f"X:Y(1),M,U,CPI,{row}" for row in rows))
    np.testing.assert_array_equal(release.series[0].values, [1.5, np.nan, np.nan, np.nan, 2.0])
    assert ("note", "a.csv, row 3, column 'U, CPI': missing on purpose in Feb 2024 (and 1 more"
            " period)") in said(release)  # fmt: skip


@pytest.mark.parametrize(
    ("flags", "expected"),
    [
        (["B", "A"], [("warning", "break in Jan 2024")]),
        (["A", "B: Break"], [("warning", "break in Feb 2024")]),
        (["B", "B"], [("warning", "break in Jan 2024"), ("warning", "break in Feb 2024")]),
        (["E", "P"], [("note", "estimated in Jan 2024"), ("note", "provisional in Feb 2024")]),
        (["F", "F"], [("warning", "forecast, not observed, in Jan 2024 (and 1 more period)")]),
        (["I", "U"], [("note", "imputed in Jan 2024"), ("note", "of low reliability in Feb 2024")]),
        (["B,P", ""], [("warning", "break in Jan 2024"), ("note", "provisional in Jan 2024")]),
        (["A", "X"], []),
    ],
)
def test_flags(flags: list[str], expected: list[tuple[str, str]]) -> None:
    rows = [f'X:Y(1),M,U,CPI,2024-0{n},1.5,"{flag}"' for n, flag in enumerate(flags, 1)]
    release = read(f"{HEAD},OBS_STATUS", *rows)
    assert [(one.severity, one.message) for one in release.problems] == expected
    assert {one.column for one in release.problems} <= {"U, CPI"}


def test_small_letters_in_a_row_are_several_flags() -> None:
    row = "X:Y(1),m,U,CPI,2024-01,1.5,bp"
    release = read(f"{HEAD.replace('FREQ', 'freq')},OBS_FLAG", row.replace(",m,", ",M,"))
    assert [one.message for one in release.problems] == [
        "break in Jan 2024",
        "provisional in Jan 2024",
    ]


def test_many_breaks_are_counted() -> None:
    rows = [f"X:Y(1),M,U,CPI,20{n:02d}-01,1.5,B" for n in range(1, 21)]
    release = read(f"{HEAD},OBS_STATUS", *rows)
    breaks = [one.message for one in release.problems if one.message.startswith("break")]
    assert len(breaks) == 12 and breaks[-1] == "break in Jan 2012 (and 8 more breaks)"


@pytest.mark.parametrize(
    ("attributes", "unit", "kind"),
    [
        ({"UNIT_MEASURE": "CRO: Crowns", "UNIT_MULT": "6: Millions"}, "million crowns", "level"),
        ({"UNIT_MEASURE": "USD: US dollar", "UNIT_MULT": "9"}, "billion US dollar", "level"),
        ({"UNIT_MEASURE": "CRO", "UNIT_MULT": "3"}, "thousand CRO", "level"),
        ({"UNIT_MEASURE": "CRO", "UNIT_MULT": "0"}, "CRO", "level"),
        ({"UNIT_MULT": "6"}, "millions", "level"),
        ({"UNIT_MULT": "4"}, "10^4s", "level"),
        ({"UNIT_MEASURE": "PC"}, "percent", "rate"),
        ({"UNIT_MEASURE": "PT: Percent"}, "Percent", "rate"),
        ({"UNIT_MEASURE": "IX", "BASE_PER": "2015"}, "2015 = 100", "index"),
        ({"UNIT_MEASURE": "X: Index, 2015=100"}, "Index, 2015=100", "index"),
        ({}, "", "level"),
    ],
)
def test_units(attributes: dict[str, str], unit: str, kind: str) -> None:
    head = ",".join([HEAD, *attributes])
    cells = ",".join(f'"{text}"' for text in attributes.values())
    row = "X:Y(1),M,U,MON,2024-01,150" + ("," + cells if cells else "")
    (series,) = read(head, row).series
    assert (series.unit, series.kind) == (unit, kind)


def test_a_multiplier_that_changes_begins_another_series() -> None:
    rows = [("01", "1500", "3"), ("02", "1510", "3"), ("03", "1.52", "6")]
    release = read(f"{HEAD},UNIT_MULT", *(f"X:Y(1),M,U,MON,2024-{m},{v},{p}" for m, v, p in rows))
    assert shown(release) == [
        ("U, MON, thousands", "2024-01", [1500.0, 1510.0]),
        ("U, MON, millions", "2024-03", [1.52]),
    ]


@pytest.mark.parametrize(
    ("component", "cell", "expected"),
    [
        ("ADJUSTMENT", "Y", "yes"),
        ("SEASONAL_ADJUST", "S: Seasonally adjusted", "yes"),
        ("S_ADJ", "SCA", "yes"),
        ("SEASONAL_ADJUST", "N: Neither seasonally nor working day adjusted", "no"),
        ("SEASONAL_ADJUST", "W: Calendar adjusted", "no"),
        ("S_ADJ", "NSA", "no"),
        ("ADJUSTMENT", "9: Neither seasonally adjusted nor calendar adjusted data", "no"),
        ("ADJUSTMENT", "9: Seasonally adjusted", "yes"),
        ("ADJUSTMENT", "_Z", "unknown"),
    ],
)
def test_adjustment(component: str, cell: str, expected: str) -> None:
    dimension = read(HEAD.replace("AREA", component), f"X:Y(1),M,{cell},CPI,2024-01,1")
    attribute = read(f"{HEAD},{component}", f"X:Y(1),M,U,CPI,2024-01,1,{cell}")
    assert [r.series[0].adjustment for r in (dimension, attribute)] == [expected, expected]


def test_metadata_of_the_user_comes_first() -> None:
    given = {"U, CPI": {"kind": "rate", "unit": "percent"}}
    content = f"{HEAD},UNIT_MEASURE\nX:Y(1),M,U,CPI,2024-01,1,IX".encode()
    (series,) = read_release("a.csv", content, given).series
    assert (series.kind, series.unit) == ("rate", "percent")


# What is wrong -------------------------------------------------------------------------------


def test_one_row_of_another_width_is_left_out() -> None:
    row = "X:Y(1),M,U,CPI,2024-0{},1"
    release = read(HEAD, row.format(1), row.format(2) + ",9", row.format(3))
    assert release.series[0].values.size == 3
    assert said(release)[0] == (
        "error",
        "a.csv, row 3: a row must have 6 cells as the header has, but got 7; the row was left out",
    )


def test_a_cell_that_is_no_number_loses_its_series_alone() -> None:
    release = read(HEAD, "X:Y(1),M,U,CPI,2024-01,1", "X:Y(1),M,U,PPI,2024-01,x")
    assert [one.name for one in release.series] == ["CPI"]
    assert said(release) == [("error", "a.csv, row 3, column 'PPI': must be a number, but got 'x'")]


REFUSED = {
    "no value": ("DATAFLOW,A,TIME_PERIOD\nX,1,2024\n", "row 1: must have a column OBS_VALUE"),
    "no time": ("DATAFLOW,A,OBS_VALUE\nX,b,1\n", "row 1: must have a column TIME_PERIOD"),
    "twice": ("DATAFLOW,A,A,TIME_PERIOD,OBS_VALUE\n", "must stand once, but 'A' stands again"),
    "no rows": (f"{HEAD}\n", "row 1: must have rows with a value, but has none"),
    "only deletions": (
        "STRUCTURE,STRUCTURE_ID,ACTION,A,TIME_PERIOD,OBS_VALUE\ndataflow,X,D,a,2024,1\n",
        "must have rows with a value, but has none",
    ),
    "odd rows": (f"{HEAD}\na,b\nc,d\n", "row 2: a row must have 6 cells as the header has"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_refused_in_one_sentence(case: str) -> None:
    content, sentence = REFUSED[case]
    with pytest.raises(IntakeError) as caught:
        read_release("a.csv", content.encode())
    assert sentence in str(caught.value) and str(caught.value).startswith("a.csv")
