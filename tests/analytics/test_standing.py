import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import percentileofscore

from analytics.series import Series
from analytics.standing import rank_through_time, standing

KINDS = ("mean", "weak", "strict")
values_with_ties = st.lists(st.integers(-5, 5).map(float), min_size=1, max_size=60)


@given(values_with_ties, st.integers(-6, 6).map(float), st.sampled_from(KINDS))
def test_ranks_are_scipys(values, value, kind):
    found = standing(values, value, kind=kind)
    assert found.rank == pytest.approx(percentileofscore(values, value, kind=kind), abs=1e-10)
    assert found.below + found.equal + found.above == found.n == len(values)


@given(values_with_ties, st.integers(-6, 6).map(float))
def test_mean_is_between_strict_and_weak_and_mirrors(values, value):
    strict, mean, weak = (standing(values, value, kind=k).rank for k in ("strict", "mean", "weak"))
    assert strict <= mean <= weak
    mirrored = standing([-v for v in values], -value).rank
    assert mean + mirrored == pytest.approx(100.0, abs=1e-9)


def test_missing_values_are_left_out():
    assert standing([1.0, np.nan, 3.0], 2.0).rank == 50.0


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("window", [None, 30])
def test_rank_through_time_knows_nothing_of_what_comes_later(kind, window):
    values = np.random.default_rng(4).integers(0, 9, 120).astype(float)
    values[50] = np.nan
    rate = Series("Prices", pd.Period("2000-01", "M"), values, kind="rate")
    found = rank_through_time(rate, kind=kind, window=window)
    for place, period in enumerate(rate.periods):
        start = 0 if window is None else max(0, place + 1 - window)
        known = values[start : place + 1]
        known = known[~np.isnan(known)]
        if np.isnan(values[place]) or known.size < 24:
            continue
        slow = percentileofscore(known, values[place], kind=kind)
        got = found.between(period, period).values[0]
        assert got == pytest.approx(slow, abs=1e-10)
    assert found.first == pd.Period("2001-12", "M")


@pytest.mark.parametrize(
    ("call", "match"),
    [
        (lambda: standing([], 1.0), "at least one number"),
        (lambda: standing([1.0], np.nan), "must be a number"),
        (lambda: standing([1.0], 1.0, kind="odd"), "mean, weak, strict"),
        (
            lambda: rank_through_time(
                Series("P", pd.Period("2000-01", "M"), np.ones(10), kind="rate")
            ),
            "24 readings",
        ),
        (
            lambda: rank_through_time(
                Series("P", pd.Period("2000-01", "M"), np.ones(40), kind="rate"), window=5
            ),
            "24 or more",
        ),
    ],
)
def test_refusals(call, match):
    with pytest.raises(ValueError, match=match):
        call()
