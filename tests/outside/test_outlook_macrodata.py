"""An outlook on US money and prices 1959-2009 (statsmodels, macrodata), judged by statsmodels."""

import numpy as np
import pytest
from statsmodels.tsa.stattools import diebold_mariano_test

from analytics.backtest import backtest
from analytics.backtest_scores import backtest_scores
from analytics.forecast_tests import diebold_mariano
from analytics.forecasts import BENCHMARKS, DIRECT, NO_CHANGE, OWN_PAST, RELATION
from analytics.outlook import implied_path
from analytics.outlook_pair import outlook_pair
from analytics.outlook_target import outlook_target
from analytics.path_intervals import path_fan
from analytics.rates import growth_rate
from tests.outside.datasets import us_macro_1959
from tests.references.plain_backtest import plain_direct, plain_relation

CELL = {"window": 4, "shift": 8}


@pytest.fixture(scope="module")
def pair():
    return outlook_pair(*(growth_rate(us_macro_1959(name)) for name in ("m1", "cpi")))


@pytest.fixture(scope="module")
def done(pair):
    target = outlook_target("yearly", window=4, periods_per_year=4)
    return backtest(
        pair.driver.values, pair.response.values, target=target, periods_per_year=4, **CELL
    )


def test_the_path_is_the_line_of_statsmodels(pair):
    x, y = pair.driver.values, pair.response.values
    path = implied_path(x, y, periods_per_year=4, **CELL)
    expected = plain_relation(x, y, horizon=8, span=4, **CELL)
    np.testing.assert_allclose(path.yearly, expected, atol=1e-10)
    assert str(pair.ahead(8)[-1]) == "2011Q3"
    assert path.correlation == pytest.approx(0.383, abs=1e-3)


@pytest.mark.parametrize("row", [0, 60, 161])
def test_direct_forecasts_are_those_of_statsmodels(pair, done, row):
    known = int(done.origins[row]) + 1
    x, y = pair.driver.values[:known], pair.response.values[:known]
    for model, with_driver in ((DIRECT, True), (OWN_PAST, False)):
        expected = plain_direct(
            x,
            y,
            own_lags=int(done.own_lags[row]),
            horizon=12,
            span=4,
            with_driver=with_driver,
            **CELL,
        )
        np.testing.assert_allclose(done.forecasts[done.row(model), row], expected, atol=1e-8)


def test_money_does_not_beat_the_benchmarks_here(done):
    """Errors over those of no change: 1.48 at four quarters, 1.14 at eight (recomputed).

    With Bartlett weights on the same errors our test is that of statsmodels.
    """
    scores = backtest_scores(done, RELATION)
    np.testing.assert_allclose(scores.ratio[0, [3, 7]], [1.48, 1.14], atol=0.01)
    assert not any(scores.beats(name, h) for name in BENCHMARKS for h in (2, 4, 8, 12))
    h = 4
    rows = ~np.isnan(done.outcomes[:, h - 1])
    outcome = done.outcomes[rows, h - 1]
    first, second = (done.forecasts[done.row(name), rows, h - 1] for name in (RELATION, NO_CHANGE))
    theirs = diebold_mariano_test(outcome, first, second, lags=h - 1, harvey_adj=True, horizon=h)
    mine = diebold_mariano(
        (outcome - first) ** 2, (outcome - second) ** 2, horizon=h, kernel="bartlett"
    )
    assert (mine.statistic, mine.p) == pytest.approx((theirs.statistic, theirs.pvalue), abs=1e-9)
    assert scores.dm[0][h - 1].statistic > 0


def test_intervals_covered_most_of_the_past(pair):
    """80 % intervals held 85 to 88 % of past outcomes, 95 % ones 92 % or more (recomputed)."""
    target = outlook_target("yearly", window=4, periods_per_year=4)
    fan = path_fan(pair.driver.values, pair.response.values, target=target, **CELL)
    assert (np.abs(fan.measured[1, [1, 3, 7]] - 0.87) < 0.03).all()
    assert (fan.measured[2] > 0.92).all()
