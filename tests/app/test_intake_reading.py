"""The door of intake: exact numbers, metadata, inspection, and whatever else may come."""

import csv
import dataclasses
import io
import json
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.intake.reading import (
    IntakeError,
    demo_metadata,
    inspection,
    read_path,
    read_release,
)

DATA = Path(__file__).parent.parent / "data"
PLAIN = "month,Prices,Money\n2024-01,100.5,1200\n2024-02,101,1234.5\n2024-03,101.25,1300\n"


# Outside: the quarterly macroeconomic data set that statsmodels ships, and pandas' own reader.


def test_statsmodels_macrodata_comes_back_exactly() -> None:
    from statsmodels.datasets import macrodata

    frame = macrodata.load_pandas().data
    quarters = [f"{int(y)}-Q{int(q)}" for y, q in zip(frame.year, frame.quarter, strict=True)]
    table = frame[["cpi", "m1", "tbilrate"]].set_index(pd.Index(quarters, name="quarter"))
    semicolons = table.to_csv(sep=";", decimal=",", encoding="latin-1")
    for content in (table.to_csv(), semicolons):
        release = read_release("macro.csv", content.encode())
        assert release.problems == () and len(release.series) == 3
        for series in release.series:
            # 203 quarters from 1959 Q1 to 2009 Q3: the data set's own description
            assert (str(series.first), str(series.last)) == ("1959Q1", "2009Q3")
            np.testing.assert_array_equal(series.values, frame[series.name].to_numpy())


@given(
    st.lists(
        st.lists(st.floats(1e-300, 1e300) | st.none(), min_size=3, max_size=3),
        min_size=2,
        max_size=12,
    ).filter(lambda rows: all(row[0] is not None for row in rows))
)
def test_numbers_agree_with_the_pandas_reader(rows: list[list[float | None]]) -> None:
    months = pd.period_range("2001-05", periods=len(rows), freq="M")
    text = pd.DataFrame(rows, index=months, columns=["A", "B", "C"]).to_csv()
    judge = pd.read_csv(io.StringIO(text), index_col=0)
    for series in read_release("a.csv", text.encode()).series:
        ours = pd.Series(series.values, index=series.periods.astype(str))
        np.testing.assert_array_equal(
            ours.reindex(judge.index).to_numpy(), judge[series.name].to_numpy(dtype=float)
        )


def test_metadata_replaces_what_is_inferred() -> None:
    given = {"Prices": {"kind": "rate", "unit": "percent a month", "adjustment": "yes"}}
    prices, money = read_release("a.csv", PLAIN.encode(), given).series
    assert (prices.kind, prices.unit, prices.adjustment) == ("rate", "percent a month", "yes")
    assert (prices.source, money.kind) == ("a.csv", "level")
    long = b"economy,period,series,value\nAbrisund,2024-01,Prices,1\nBelquoy,2024-01,Prices,1\n"
    assert [one.kind for one in read_release("a.csv", long, given).series] == ["rate", "rate"]


def test_demo_metadata() -> None:
    text = (
        "file,name,kind,unit,adjustment,source,note\n"
        'a.csv,"Prices, all",index,2015 = 100,no,Office (invented),\n'
        "b.csv,Money,,,,,\n"
    )
    found = demo_metadata("\ufeff" + text)
    assert found["a.csv"]["Prices, all"] == {
        "kind": "index",
        "unit": "2015 = 100",
        "adjustment": "no",
        "source": "Office (invented)",
        "note": "",
    }
    series = read_release("b.csv", b"p,Money\n2024-01,7\n", found["b.csv"]).series[0]
    assert (series.kind, series.source) == ("level", "b.csv")
    with pytest.raises(IntakeError, match="row 2, column 'kind': must be one of index, level"):
        demo_metadata(text.replace(",index,", ",indices,"))
    with pytest.raises(IntakeError, match="must have a column 'note', but has none"):
        demo_metadata(text.replace(",note", ""))


def test_inspection_is_json_with_the_promised_keys() -> None:
    release = read_path(DATA / "faults.csv")
    found = json.loads(json.dumps(inspection([release, release]), allow_nan=False))
    assert set(found) == {"series", "problems"} and len(found["series"]) == 8
    prices = found["series"][0]
    assert prices == {
        "name": "Consumer prices",
        "kind": "index",
        "frequency": "monthly",
        "first": "2024-01",
        "last": "2024-06",
        "n": 3,
        "gaps": ["2024-03", "2024-04", "2024-05"],
        "fingerprint": release.series[0].fingerprint,
        "unit": "",
        "adjustment": "unknown",
        "file": "faults.csv",
    }
    assert found["problems"][1] == {
        "severity": "error",
        "file": "faults.csv",
        "row": 3,
        "column": "Broad money",
        "message": "must be a number, but got 'n.a. '",
    }


def test_release_is_frozen() -> None:
    release = read_release("a.csv", PLAIN.encode())
    with pytest.raises(dataclasses.FrozenInstanceError):
        release.name = "b"  # type: ignore[misc]
    assert not release.series[0].values.flags.writeable


def test_paths(tmp_path: Path) -> None:
    (tmp_path / "prices.csv").write_text(PLAIN)
    assert read_path(str(tmp_path / "prices.csv")).name == "prices.csv"
    with pytest.raises(IntakeError, match=r"^none\.csv: must be a file, but there is none"):
        read_path(tmp_path / "none.csv")
    with pytest.raises(IntakeError, match="but this is a folder or a device"):
        read_path(tmp_path)
    with pytest.raises(IntakeError):
        read_path("a\x00b.csv")
    with pytest.raises(IntakeError, match="folder or a device"):
        read_path("/dev/zero")


# Whatever comes, a release or a sentence.


def _reads_or_says(content: bytes) -> None:
    try:
        release = read_release("a.csv", content)
    except IntakeError as error:
        assert str(error).startswith("a.csv") and "\n" not in str(error)
    else:
        json.dumps(inspection([release]), allow_nan=False)
        assert release.series or any(found.severity == "error" for found in release.problems)


@given(st.binary(max_size=400))
@settings(max_examples=200)
def test_any_bytes(content: bytes) -> None:
    _reads_or_says(content)


@given(
    st.sampled_from([path.read_bytes() for path in sorted(DATA.glob("*.csv"))] + [PLAIN.encode()]),
    st.lists(st.tuples(st.integers(0, 600), st.integers(0, 3), st.binary(max_size=6)), max_size=8),
)
@settings(max_examples=200)
def test_any_mutation_of_a_good_file(content: bytes, changes: list[tuple[int, int, bytes]]) -> None:
    for place, cut, put in changes:
        at = place % (len(content) + 1)
        content = content[:at] + put + content[at + cut :]
    _reads_or_says(content)


LIKELY = (
    "2024-01 2024-02 2024-Q1 2024 2024-W1 Mar-2024 01/02/2024 2010-11 1,5 1.5 1.234,5 1e999 -1 0"
    " x .. n/a % 5% # #a period series value economy Prices"
)
CELLS = st.sampled_from(LIKELY.split()) | st.sampled_from(
    ["", " ", '"', "\n", "\u202e", "\x85", "\u2028", "a,b", "sep=;"]
)


@given(st.lists(st.lists(CELLS, max_size=5), max_size=8), st.sampled_from([",", ";", "\t"]))
@settings(max_examples=200)
def test_any_table_of_likely_cells(rows: list[list[str]], separator: str) -> None:
    stream = io.StringIO()
    csv.writer(stream, delimiter=separator).writerows(rows)
    _reads_or_says(stream.getvalue().encode())
    _reads_or_says(("period,series,value\n" + stream.getvalue()).encode())
