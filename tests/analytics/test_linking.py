"""Splices, links and re-referencing: identities, planted breaks, refusals."""

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analytics.linking import break_treated, linked, rereferenced
from analytics.rates import growth_rate
from analytics.series import Series

START = pd.Period("2000-01", "M")


def walk(n=60, seed=1, name="Money", first=START):
    steps = np.random.default_rng(seed).normal(0.4, 0.5, n)
    return Series(name, first, 100 * np.exp(np.cumsum(steps) / 100), "level")


def broken(whole, place, factor):
    values = np.array(whole.values)
    values[place:] *= factor
    return Series(whole.name, whole.first, values, "level")


@pytest.mark.parametrize("treatment", ["exclude", "before", "after"])
@pytest.mark.parametrize("factor", [1.3, 0.1, 1000.0])
def test_only_the_growth_of_the_break_changes(treatment, factor):
    before = broken(walk(), 30, factor)
    done = break_treated(before, START + 30, treatment)
    old, new = growth_rate(before).values, growth_rate(done.series).values
    others = np.arange(old.size) != 29
    assert np.abs(new - old)[others].max() < 1e-12 * 100
    wanted = {"before": old[28], "after": old[30], "exclude": (old[28] + old[30]) / 2}[treatment]
    assert new[29] == pytest.approx(wanted, abs=1e-12 * 100)
    assert (done.series.values[30:] == before.values[30:]).all()


def test_an_overlapping_series_brings_the_true_growth_back():
    whole = walk()
    now = broken(whole, 30, 1.3)
    old_definition = whole.between(START + 20, START + 40)
    done = break_treated(now, START + 30, "overlap", other=old_definition)
    assert done.factor == pytest.approx(1.3, rel=1e-13)
    np.testing.assert_allclose(done.series.values, 1.3 * whole.values, rtol=1e-13)


@given(st.integers(1, 58), st.floats(0.01, 100))
def test_splice_identity(place, ratio):
    # The linked series keeps every growth rate of each segment to 1e-12, in units of one.
    old = walk()
    new = Series("New", START + place, old.values[place:] * ratio, "level")
    shocked = np.array(new.values)
    shocked[1:] *= 1.01
    new = Series("New", new.first, shocked, "level")
    done = linked(old, new, START + place)
    rate = np.diff(np.log(done.series.values))
    np.testing.assert_allclose(rate[:place], np.diff(np.log(old.values))[:place], atol=1e-12)
    np.testing.assert_allclose(rate[place:], np.diff(np.log(shocked)), atol=1e-12)


def test_a_link_by_the_mean_of_an_overlap_takes_the_ratio_of_means():
    old, new = walk(seed=2), walk(36, seed=3, first=START + 24)
    done = linked(old, new, START + 24, START + 35)
    assert done.factor == pytest.approx(new.values[:12].mean() / old.values[24:36].mean())
    assert done.series.first == START and done.series.last == new.last
    np.testing.assert_allclose(done.series.values[:24], old.values[:24] * done.factor)
    assert (done.series.values[24:] == new.values).all()


@pytest.mark.parametrize("side", ["old definition carried on", "new one carried back"])
def test_a_splice_by_means_of_a_year_is_a_link_by_the_mean_of_an_overlap(side):
    """The judge is `linked`, which agrees with published links by twelve-month averages."""
    old, new, place = walk(seed=2), walk(seed=3), 30
    both = Series("Money", START, [*old.values[:place], *new.values[place:]])
    other = old if side.startswith("old") else new
    first = START + (place if other is old else place - 12)
    done = break_treated(both, START + place, "overlap_mean", other=other)
    assert done.factor == pytest.approx(linked(old, new, first, first + 11).factor, rel=1e-12)
    assert (done.series.values[place:] == new.values[place:]).all()
    np.testing.assert_allclose(done.series.values[:place], done.factor * old.values[:place])


def test_means_of_a_year_move_less_than_one_odd_month():
    old = walk(seed=2)
    noise = np.exp(np.random.default_rng(5).normal(0, 0.02, old.values.size))
    both = Series("Money", START, old.values * noise * np.where(np.arange(60) >= 30, 1.3, 1.0))
    errors = [
        abs(np.log(break_treated(both, START + 30, how, other=old).factor / 1.3))
        for how in ("overlap", "overlap_mean")
    ]
    assert errors[1] < errors[0]
    assert errors[1] < 3 * 0.02 * np.sqrt(2 / 12)


def test_the_mean_of_the_reference_period_is_a_hundred():
    done = rereferenced(walk(), START + 12, START + 23)
    assert done.series.values[12:24].mean() == pytest.approx(100, abs=1e-12)
    assert done.series.unit == "Jan 2001 to Dec 2001 = 100"
    back = rereferenced(done.series, START, to=walk().values[0]).series
    np.testing.assert_allclose(back.values, walk().values, rtol=1e-14)


def test_a_break_beside_a_break_does_not_lend_its_growth():
    with pytest.raises(ValueError, match="growth of Aug 2002 must stand without a break"):
        break_treated(walk(), START + 30, "exclude", marked=[START + 31])
    break_treated(walk(), START + 30, "before", marked=[START + 31])


GAP = Series("Money", START, [1.0, 2.0, np.nan, 3.0, 4.0, 5.0])


@pytest.mark.parametrize(
    ("ask", "match"),
    [
        (lambda: break_treated(walk(), START + 30, "mend"), "treatment must be one of"),
        (lambda: break_treated(walk(), START, "after"), "must have a value in Dec 1999"),
        (lambda: break_treated(walk(), START + 59, "after"), "must have a value in Jan 2005"),
        (lambda: break_treated(GAP, START + 1, "after"), "must have a value in Mar 2000"),
        (lambda: break_treated(walk(), START + 9, "overlap"), "overlapping series, but got none"),
        (
            lambda: break_treated(walk(), START + 9, "overlap_mean", other=walk()),
            "must have a value in Oct 1999",
        ),
        (
            lambda: break_treated(
                walk(), START + 30, "overlap_mean", other=walk(), marked=[START + 20]
            ),
            "must stand without a break, but one of 'Money' is marked in Sep 2001",
        ),
        (
            lambda: break_treated(Series("R", START, [1.0, 2.0, 3.0], "rate"), START + 1, "after"),
            "'R' is a rate already",
        ),
        (
            lambda: break_treated(Series("Z", START, [1.0, 0.0, 3.0, 1.0]), START + 2, "before"),
            "must be positive up to Mar 2000, but got 0",
        ),
        (lambda: break_treated(walk(), pd.Period("2001Q1", "Q")), "must be months, but got 2001Q1"),
        (lambda: linked(walk(), walk(), START + 5, START), "last must not be before first"),
        (
            lambda: linked(walk(), Series("Q", pd.Period("2000Q1", "Q"), [1.0]), START),
            "same frequency, but got monthly and quarterly",
        ),
        (lambda: rereferenced(walk(), START, to=0.0), "to must be positive, but got 0.0"),
        (
            lambda: rereferenced(Series("R", START, [1.0], "rate"), START),
            "must be of an index or a level, but 'R' is a rate",
        ),
        (
            lambda: rereferenced(Series("N", START, [-1.0, 2.0]), START),
            "over the overlap must be positive, but got -1",
        ),
    ],
)
def test_refusals(ask, match):
    with pytest.raises(ValueError, match=match):
        ask()
