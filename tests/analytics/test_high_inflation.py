import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analytics.high_inflation import cagan_episodes, run_code, runs_beyond, three_year_change
from analytics.series import Series
from tests.references.plain_reading import plain_runs

START = pd.Period("2000-01", "M")


def rate(values, first=START):
    return Series("Prices", first, values, kind="rate")


@given(
    st.lists(st.integers(0, 9).map(float), min_size=1, max_size=60),
    st.integers(1, 5),
    st.integers(0, 4),
)
def test_runs_are_those_of_the_loop(values, shortest, gap):
    found = runs_beyond(rate(values), 4.0, shortest=shortest, gap=gap)
    places = [
        (run.first.ordinal - START.ordinal, run.last.ordinal - START.ordinal) for run in found
    ]
    assert places == plain_runs(values, 4.0, shortest, gap)
    for run, (start, stop) in zip(found, places, strict=True):
        part = values[start : stop + 1]
        assert run.length == len(part)
        assert run.peak == max(part)
        assert run.peak_period == START + start + part.index(run.peak)
        assert run.mean == pytest.approx(sum(part) / len(part))
        assert run.open == (stop == len(values) - 1)


@given(st.lists(st.integers(-9, 9).map(float), min_size=1, max_size=60))
def test_below_is_above_mirrored(values):
    low = runs_beyond(rate(values), 0.0, below=True)
    high = runs_beyond(rate([-v for v in values]), 0.0)
    assert [(r.first, r.last, r.peak) for r in low] == [(r.first, r.last, -r.peak) for r in high]


def test_the_level_itself_and_a_missing_reading_end_a_run():
    found = runs_beyond(rate([6.0, 5.0, 6.0, np.nan, 6.0]), 5.0)
    assert [run_code(run) for run in found] == [
        "2000-01:2000-01",
        "2000-03:2000-03",
        "2000-05:2000-05",
    ]


def test_three_years_double_at_the_mark():
    monthly = 100 * 2 ** (np.arange(60) / 36)
    found = three_year_change(Series("Prices", START, monthly))
    np.testing.assert_allclose(found.values, 100.0, atol=1e-9)
    quarterly = 100 * 2 ** (np.arange(20) / 12)
    found = three_year_change(Series("Prices", pd.Period("2000Q1", "Q"), quarterly))
    np.testing.assert_allclose(found.values, 100.0, atol=1e-9)


def test_a_year_of_quiet_ends_a_hyperinflation_and_eleven_months_do_not():
    eleven = cagan_episodes(rate([60.0] + [5.0] * 11 + [60.0] + [5.0] * 12))
    assert [run_code(run) for run in eleven] == ["2000-01:2001-01"]
    twelve = cagan_episodes(rate([60.0] + [5.0] * 12 + [60.0] + [5.0] * 12))
    assert [run_code(run) for run in twelve] == ["2000-01:2000-01", "2001-02:2001-02"]
    assert not any(run.open for run in twelve)
    assert cagan_episodes(rate([60.0] + [5.0] * 11))[0].open


@pytest.mark.parametrize(
    ("call", "match"),
    [
        (lambda: runs_beyond(rate([1.0]), 0.0, shortest=0), "shortest must be 1"),
        (lambda: runs_beyond(rate([1.0]), 0.0, gap=-1), "gap must be 0"),
        (lambda: three_year_change(Series("P", START, np.ones(36))), "37 months"),
        (lambda: cagan_episodes(rate([1.0], pd.Period("2000Q1", "Q"))), "monthly rates"),
        (lambda: cagan_episodes(rate([1.0]), quiet=0), "quiet must be 1"),
    ],
)
def test_refusals(call, match):
    with pytest.raises(ValueError, match=match):
        call()
