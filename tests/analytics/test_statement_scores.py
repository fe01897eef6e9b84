"""A stated path judged by what came."""

import numpy as np
import pytest

from analytics.intervals import error_fan
from analytics.statement_scores import running_coverage, statement_score


def fan(seed=1, horizons=6):
    errors = np.random.default_rng(seed).standard_normal((200, horizons))
    return error_fan(np.full(horizons, 2.0), errors)


def test_hits_misses_and_ranks():
    stated = fan()
    low, high = stated.band(0.8)
    outcomes = [2.0, low[1] - 0.01, high[2], np.nan]
    score = statement_score(stated, outcomes)
    np.testing.assert_array_equal(score.inside[1], [1, 0, 1, np.nan, np.nan, np.nan])
    np.testing.assert_array_equal(score.inside[0, :3], [1, 0, 0])
    assert score.rank[0] == pytest.approx(50.0)
    assert score.rank[2] == pytest.approx(90.0)
    assert score.error[1] == pytest.approx(low[1] - 2.01)
    assert score.known == 3


def test_outcomes_beyond_the_path_are_ignored():
    score = statement_score(fan(), np.full(40, 2.0))
    assert score.outcome.size == 6
    assert score.known == 6


def test_a_horizon_without_interval_is_neither_hit_nor_miss():
    few = error_fan([1.0], np.ones((5, 1)))
    score = statement_score(few, [1.0])
    assert np.isnan(score.inside).all()
    assert np.isnan(score.rank[0])


def test_coverage_runs_over_statements():
    scores = [statement_score(fan(seed), [2.0, 2.0, 99.0]) for seed in range(4)]
    every = running_coverage(scores)
    assert every.n.tolist() == [12, 12, 12]
    assert every.hits.tolist() == [8, 8, 8]
    third = running_coverage(scores, horizon=3)
    assert (third.hits.tolist(), third.n.tolist()) == ([0, 0, 0], [4, 4, 4])
    assert third.low[0] == 0.0
    assert 0.4 < third.high[0] < 0.6
    open_ended = running_coverage(scores, horizon=5)
    assert np.isnan(open_ended.share).all()


def test_ranks_of_outcomes_from_the_stated_law_are_even():
    rng = np.random.default_rng(8)
    ranks = [
        statement_score(fan(seed, 1), 2.0 + rng.standard_normal(1)).rank[0] for seed in range(300)
    ]
    counts = np.histogram(ranks, bins=5, range=(0, 100))[0]
    assert (np.abs(counts - 60) < 25).all()


def test_nothing_to_count_is_refused():
    with pytest.raises(ValueError, match="must have a statement to count, but got none"):
        running_coverage([])
    with pytest.raises(ValueError, match="must have the same levels"):
        running_coverage(
            [statement_score(fan(), [2.0]), statement_score(fan(), [2.0], levels=(0.9,))]
        )
