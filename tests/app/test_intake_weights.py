"""Weights files: wide and long, per mille, percent and shares; what is recognised and refused."""

from dataclasses import replace

import numpy as np
import pytest

from app.intake.problems import IntakeError, Problem
from app.intake.reading import read_release
from app.intake.weights import (
    PREFIX,
    canonical,
    is_weight,
    recognised,
    weight_series,
    weight_table,
)

WIDE = b"year,Food,Energy\n2023,600,400\n2024,590.5,409.5\n"


def series_of(content, name="basket.csv"):
    return read_release(name, content).series


def plain_series(content):
    """As read where nothing is recognised as weights."""
    return tuple(
        replace(one, name=one.name.removeprefix(PREFIX), unit="") for one in series_of(content)
    )


def table_of(content):
    return weight_table(weight_series("weights.csv", series_of(content)))


@pytest.mark.parametrize(
    "content",
    [
        WIDE,
        b"year;Food;Energy\n2023;600;400\n2024;590,5;409,5\n",
        b"period,series,value\n2023,Food,600\n2023,Energy,400\n2024,Food,590.5\n2024,Energy,409.5\n",
        b"Year,Component,Weight\n2023,Food,600\n2023,Energy,400\n2024,Food,590.5\n2024,Energy,409.5\n",
        b"# a remark\nweight;component;year\n600;Food;2023\n400;Energy;2023\n590,5;Food;2024\n"
        b"409,5;Energy;2024\n",
    ],
)
def test_wide_and_long_files_give_the_same_table(content):
    table = table_of(content)
    assert table.years == (2023, 2024)
    assert table.names == ("Food", "Energy")
    np.testing.assert_array_equal(table.values, [[600, 400], [590.5, 409.5]])
    assert table.total == 1000


@pytest.mark.parametrize(
    ("rows", "total"),
    [("2023,60,40", 100), ("2023,0.6,0.4", 1), ("2023,600,400", 1000), ("2023,60%,40%", 100)],
)
def test_percent_per_mille_and_shares_are_told_by_their_sum(rows, total):
    assert table_of(f"year,Food,Energy\n{rows}\n".encode()).total == total


def test_a_cell_without_weight_is_no_weight():
    table = table_of(b"year,Food,Energy,Rent\n2023,600,400,\n2024,500,300,200\n2025,500,,500\n")
    assert np.isnan(table.values).tolist() == [
        [False, False, True],
        [False] * 3,
        [False, True, False],
    ]


def test_a_year_left_out_has_no_row():
    assert table_of(b"year,Food,Energy\n2020,600,400\n2023,500,500\n").years == (2020, 2023)


# Recognised ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "content", "so"),
    [
        ("weights_2024.csv", WIDE, True),
        ("basket.csv", WIDE, True),
        ("basket.csv", b"year,Food,Energy\n2023,600,383\n", False),
        ("weights.csv", b"year,Food,Energy\n2023,600,383\n", True),
        ("weights.csv", b"month,Food,Energy\n2023-01,600,400\n2023-02,600,400\n", False),
        ("weights.csv", b"year,Food\n2023,1000\n", False),
        ("output.csv", b"year,Gold,Silver\n2023,61,39\n2024,61,42\n", False),
    ],
)
def test_weights_are_told_by_name_or_sums(name, content, so):
    found = read_release(name, content).series
    assert all(map(is_weight, found)) == so
    assert recognised(name, found) == found


def test_weights_are_level_series_named_after_their_component():
    first, _ = series_of(WIDE)
    assert (first.name, first.kind, first.unit) == ("Weight of Food", "level", "weight")
    assert weight_table(plain_series(WIDE)) is None
    assert weight_table([]) is None


def test_another_header_stays_as_it_is():
    for text in (WIDE.decode(), "", "a\nb\n", "economy,period,series,value\n"):
        assert canonical(text) == text


# Refused -------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (
            b"month,Food,Energy\n2023-01,600,400\n2023-02,600,400\n",
            "w.csv, column 'Food': a row of weights must begin with its year, such as 2024, but the"
            " file is monthly",
        ),
        (
            b"year,Food,Energy\n2023,600,400\n2024,600,-1\n",
            "w.csv, column 'Energy': a weight must not be negative, but that of 2024 is -1",
        ),
        (
            b"year,Food,Energy\n2023,600,400\n2024,0,0\n2025,600,400\n",
            "w.csv: the weights of a year must sum to more than 0, but those of 2024 do not",
        ),
    ],
)
def test_a_file_that_must_be_weights_and_is_not_gives_one_sentence(content, said):
    with pytest.raises(IntakeError) as caught:
        weight_series("w.csv", series_of(content, "w.csv"))
    assert str(caught.value) == said


def test_an_error_in_the_file_is_handed_on():
    problem = Problem("error", "w.csv", 3, "Food", "must be a number, but got 'x'")
    with pytest.raises(IntakeError, match=r"row 3, column 'Food': weights must all be read, but"):
        weight_series("w.csv", (), [problem])
    with pytest.raises(IntakeError, match="must hold weights, but holds no series"):
        weight_series("w.csv", ())


def test_a_negative_weight_refuses_its_file_and_hides_no_component():
    """As series of their own, they would take the place of the components in view."""
    content = b"year,Food,Energy\n2023,60,40\n2024,140,-40\n"
    with pytest.raises(IntakeError) as caught:
        read_release("weights.csv", content)
    assert str(caught.value) == (
        "weights.csv, column 'Energy': a weight must not be negative, but that of 2024 is -40"
    )
    assert [one.unit for one in read_release("shares.csv", content).series] == ["", ""]
