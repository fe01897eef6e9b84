"""SDMX-JSON: both layouts, groups, words in several languages; and what is refused."""

import copy
import json
from typing import Any

import numpy as np
import pytest

from app.intake.reading import IntakeError, Release, read_release


def component(name: str, *codes: str, **more: Any) -> dict[str, Any]:
    return {"id": name, "values": [{"id": c, "name": f"{c} words"} for c in codes], **more}


TIME = component("TIME_PERIOD", "2024-01", "2024-02", "2024-03")
MESSAGE: dict[str, Any] = {
    "meta": {},
    "data": {
        "structures": [
            {
                "dimensions": {
                    "dataSet": [component("FREQ", "M")],
                    "series": [component("ITEM", "CPI", "PPI")],
                    "observation": [TIME],
                },
                "attributes": {"series": [component("UNIT_MULT", "6")], "observation": []},
            }
        ],
        "dataSets": [
            {
                "structure": 0,
                "series": {
                    "0": {"attributes": [0], "observations": {"0": [1.5], "2": [2.5]}},
                    "1": {"attributes": [None], "observations": {"1": ["3.5"]}},
                },
            }
        ],
    },
}


def read(message: Any) -> Release:
    content = message if isinstance(message, bytes) else json.dumps(message).encode()
    return read_release("a.json", content)


def changed(*path: Any, to: Any) -> dict[str, Any]:
    """The message with one part replaced."""
    message = copy.deepcopy(MESSAGE)
    part = message
    for key in path[:-1]:
        part = part[key]
    part[path[-1]] = to
    return message


SETS = ("data", "dataSets", 0)
FORM = ("data", "structures", 0)


def test_series_and_observations_are_places_in_lists() -> None:
    release = read(MESSAGE)
    prices, producers = release.series
    assert (prices.name, producers.name) == ("CPI words", "PPI words")
    np.testing.assert_array_equal(prices.values, [1.5, np.nan, 2.5])
    assert str(producers.first) == "2024-02" and producers.values.tolist() == [3.5]
    assert (prices.unit, producers.unit) == ("millions", "")


@pytest.mark.parametrize(
    ("values", "expected"),
    [
        ([{"id": "A", "name": "Alpha"}, {"id": "B", "name": "Beta"}], ["Alpha", "Beta"]),
        ([{"id": "A", "names": {"fr": "Un", "en": "One"}}, {"id": "B"}], ["One", "B"]),
        ([{"id": "A", "name": {"fr": "Un"}}, {"id": "B", "names": {}}], ["Un", "B"]),
        ([{"value": 7}, {"value": "8"}], ["7", "8"]),
        (["A", "B"], ["A", "B"]),
        ([{"id": "A", "name": "x\ud800\u202ey"}, {"id": "B", "name": "\n"}], ["xy", "B"]),
    ],
)
def test_words_for_codes(values: list[Any], expected: list[str]) -> None:
    message = changed(*FORM, "dimensions", "series", 0, "values", to=values)
    assert [one.name for one in read(message).series] == expected


@pytest.mark.parametrize(
    ("key", "expected"),
    [
        (":0:", ["thousands", ""]),  # a slot for every dimension, also for that of the data set
        ("0:0:", ["thousands", ""]),
        ("0:", ["thousands", ""]),
        ("::", ["thousands", "thousands"]),
        (":0:1", ["", ""]),  # of one period alone
    ],
)
def test_attributes_of_groups(key: str, expected: list[str]) -> None:
    message = changed(*FORM, "attributes", to={"dimensionGroup": [component("UNIT_MULT", "3")]})
    message["data"]["dataSets"][0]["dimensionGroupAttributes"] = {key: [0]}
    assert [one.unit for one in read(message).series] == expected


def test_values_given_as_they_are_and_not_as_places() -> None:
    message = changed(*FORM, "attributes", "series", to=[{"id": "UNIT_MEASURE"}])
    message["data"]["dataSets"][0]["series"]["0"]["attributes"] = ["crowns"]
    assert [one.unit for one in read(message).series] == ["crowns", ""]


def test_measures_may_be_places_too() -> None:
    message = changed(*FORM, "measures", to={"observation": [component("OBS_VALUE", "7.5", "8")]})
    message["data"]["dataSets"][0]["series"] = {"0": {"observations": {"0": [0], "1": [1]}}}
    assert read(message).series[0].values.tolist() == [7.5, 8.0]


@pytest.mark.parametrize("text", ["0.1", "1e-7", "123456789012345678", "-0.0025", "1E5"])
def test_numbers_come_back_exactly(text: str) -> None:
    content = json.dumps(changed(*SETS, "series", "0", "observations", "0", to=["@"])).encode()
    series = read(content.replace(b'"@"', text.encode())).series[0]
    assert series.values[0] == float(text)


@pytest.mark.parametrize("value", [None, "NaN", "#N/A", ""])
def test_missing(value: Any) -> None:
    message = changed(*SETS, "series", "0", "observations", "1", to=[value])
    np.testing.assert_array_equal(read(message).series[0].values, [1.5, np.nan, 2.5])


@pytest.mark.parametrize("value", [True, [1], {"a": 1}, "1,5", "x\ny", "\ud800"])
def test_what_is_no_number(value: Any) -> None:
    release = read(changed(*SETS, "series", "0", "observations", "1", to=[value]))
    assert [one.name for one in release.series] == ["PPI words"]
    (problem,) = release.problems
    assert problem.severity == "error" and problem.row is None
    assert str(problem).startswith("a.json, column 'CPI words': must be a number, but got")
    assert "\n" not in str(problem) and str(problem).encode()


def test_a_data_set_to_delete_is_not_read() -> None:
    message = copy.deepcopy(MESSAGE)
    message["data"]["dataSets"].append({"action": "Delete", "series": {"0": {}}})
    release = read(message)
    assert len(release.series) == 2
    assert str(release.problems[0]) == "a.json: a data set to delete was not read"


REFUSED: dict[str, tuple[Any, str]] = {
    "broken": (b'{"data": {', "must be well-formed JSON, but is not"),
    "other": ({"a": 1}, "but this is JSON of another kind"),
    "no structure": ({"data": {"dataSets": []}}, "but this is JSON of another kind"),
    "no sets": (changed(*SETS[:2], to=[]), "must hold observations, but holds none"),
    "no dimensions": (changed(*FORM, to={}), "a part of it does not fit ('dimensions')"),
    "far place": (
        changed(*SETS, "series", "0", "observations", to={"9": [1]}),
        "does not fit (TIME_PERIOD has no value number 9)",
    ),
    "place below": (changed(*SETS, "series", to={"-1": {"observations": {"0": [1]}}}), "does not"),
    "long key": (changed(*SETS, "series", to={"0:0": {}}), "has 2 parts for 1 dimensions"),
    "other structure": (changed(*SETS, "structure", to=5), "does not fit (list index"),
    "structure in words": (changed(*SETS, "structure", to="x"), "does not fit (invalid literal"),
    "list for object": (changed(*SETS, "series", to=[1]), "a part of it does not fit"),
    "number for list": (changed(*SETS, "series", "0", "observations", to={"0": 5}), "does not fit"),
    "deep": (b'{"data":' * 100_000, "JSON must not nest deeply, but this does"),
    "long number": (b'{"data":' + b"9" * 5_000_000 + b"}", "but this is JSON of another kind"),
    "many dimensions": (
        changed(*FORM, "dimensions", "series", to=[component(f"A{n}", "x") for n in range(300)]),
        "more than 200 dimensions or attributes",
    ),
    "weeks": (
        changed(*FORM, "dimensions", "observation", to=[component("TIME_PERIOD", "2024-W01")] * 1),
        "does not fit (TIME_PERIOD has no value number 2)",
    ),
}


@pytest.mark.parametrize("case", REFUSED)
def test_refused_in_one_sentence(case: str) -> None:
    message, sentence = REFUSED[case]
    with pytest.raises(IntakeError) as caught:
        read(message)
    assert sentence in str(caught.value)
    assert str(caught.value).startswith("a.json") and "\n" not in str(caught.value)


def test_much_of_anything_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("app.intake.sdmx_json._MAX_OPENED", 10)
    with pytest.raises(IntakeError, match="JSON must not hold more than"):
        read(MESSAGE)
    monkeypatch.undo()
    monkeypatch.setattr("app.intake.sdmx.MAX_ROWS", 2)
    with pytest.raises(IntakeError, match="must not have more than 2 observations"):
        read(MESSAGE)
