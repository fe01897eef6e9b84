"""Edges of the forecast tests; their published values stand in tests/outside."""

import numpy as np
import pytest

from analytics.forecast_tests import (
    christoffersen,
    diebold_mariano,
    interval_coverage,
    kupiec,
    theil_u2,
    wilson,
)

LOSSES = np.random.default_rng(1).random((2, 80))


def test_swapping_the_forecasts_turns_the_sign():
    there, back = diebold_mariano(*LOSSES, horizon=4), diebold_mariano(*LOSSES[::-1], horizon=4)
    assert there.statistic == pytest.approx(-back.statistic)
    assert there.p == pytest.approx(back.p)
    assert there.p_better + back.p_better == pytest.approx(1.0)


def test_a_better_forecast_is_below_zero():
    found = diebold_mariano(LOSSES[0], LOSSES[0] + 0.3 + 0.1 * LOSSES[1])
    assert found.statistic < 0
    assert found.p_better < 1e-6


@pytest.mark.parametrize("case", ["same", "short", "one"])
def test_no_verdict_where_there_is_none(case):
    if case == "same":
        found = diebold_mariano(LOSSES[0], LOSSES[0])
    elif case == "short":
        found = diebold_mariano(LOSSES[0, :5], LOSSES[1, :5], horizon=12)
    else:
        found = diebold_mariano(LOSSES[0, :1], LOSSES[1, :1])
    assert np.isnan([found.statistic, found.p, found.p_better]).all()


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (([1.0], [1.0, 2.0]), "losses must have one length"),
        (([np.nan, 1.0], [1.0, 2.0]), "losses must be finite"),
    ],
)
def test_wrong_losses_are_refused(arguments, sentence):
    with pytest.raises(ValueError, match=sentence):
        diebold_mariano(*arguments)


def test_wrong_horizons_are_refused():
    with pytest.raises(ValueError, match="horizon must be 1 and lags 0 or more"):
        diebold_mariano(*LOSSES, horizon=0)


def test_nothing_observed():
    found = interval_coverage([], 0.8)
    assert (found.n, found.hits) == (0, 0)
    assert np.isnan([found.share, found.low, found.p_kupiec, found.p_both]).all()
    assert np.isnan(wilson(0, 0)).all()
    assert np.isnan(theil_u2([], [], []))
    assert np.isnan(kupiec(0, 0, 0.1)[0])
    assert np.isnan(christoffersen(np.zeros((2, 2)))[0])


def test_misses_in_a_row_are_seen():
    inside = np.ones(200, dtype=bool)
    inside[90:110] = False
    assert interval_coverage(inside, 0.9).p_kupiec > 0.9
    assert interval_coverage(inside, 0.9).p_christoffersen < 1e-6


def test_counts_and_levels_are_checked():
    with pytest.raises(ValueError, match="misses must be from 0 to n"):
        kupiec(5, 4, 0.1)
    with pytest.raises(ValueError, match="counts must be a table of 2 by 2"):
        christoffersen([1, 2, 3])
    with pytest.raises(ValueError, match="level must be above 0 and below 1, but got 80"):
        interval_coverage([True], 80)
