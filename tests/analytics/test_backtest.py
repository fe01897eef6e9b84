"""The backtest against its plain twin, against the future, and against a planted lag."""

import numpy as np
import pytest

from analytics.autoregression import autoregression
from analytics.backtest import backtest, backtest_chunk, backtest_result
from analytics.backtest_plan import backtest_plan
from analytics.backtest_scores import backtest_scores, squared_error_gain
from analytics.forecasts import (
    AUTOREGRESSION,
    DIRECT,
    MODELS,
    NO_CHANGE,
    OWN_PAST,
    PAST_MEAN,
    RELATION,
    choice_at,
)
from analytics.outlook_target import outlook_target
from analytics.rates import trailing_mean
from analytics.simulate import planted_pair
from tests.references.plain_backtest import (
    plain_autoregression,
    plain_direct,
    plain_no_change,
    plain_past_mean,
    plain_relation,
)

YEARLY = outlook_target("yearly", window=12)
GRID = {"windows": [1, 3, 6, 12, 24], "shifts": range(-6, 31)}


def pair(seed=1, n=216, lag=18, noise=0.6, **more):
    return planted_pair(np.random.default_rng(seed), n, lag=lag, slope=0.6, noise=noise, **more)


def run(driver, response, **more):
    rules = {"window": 6, "shift": 18, "target": YEARLY, "horizon": 20} | more
    return backtest(driver, response, **rules)


@pytest.fixture(scope="module")
def done():
    planted = pair()
    return planted, run(planted.driver, planted.response, **GRID)


@pytest.mark.parametrize("lead", [0, 3, -2])
def test_every_model_equals_its_plain_twin(lead):
    planted = pair(noise_ar=0.4)
    end = planted.response.size
    driver = planted.driver[: end + min(0, lead)]
    response = planted.response[: end - max(0, lead)]
    found = run(driver, response)
    for row in (0, 13, 37):
        known = int(found.origins[row]) + 1
        x, y = driver[: known + lead], response[:known]
        cell = {"window": 6, "shift": 18, "horizon": 20}
        lags = int(found.own_lags[row])
        order = autoregression(y, max_order=12).coefficients
        assert order.size == found.orders[row]
        expected = {
            DIRECT: plain_direct(x, y, own_lags=lags, with_driver=True, **cell),
            OWN_PAST: plain_direct(x, y, own_lags=lags, with_driver=False, **cell),
            NO_CHANGE: plain_no_change(y, 20),
            AUTOREGRESSION: plain_autoregression(y, order, 20),
            PAST_MEAN: plain_past_mean(y, 20),
        }
        if lead >= 0:
            expected[RELATION] = plain_relation(x, y, **cell)
        for model, path in expected.items():
            np.testing.assert_allclose(
                found.forecasts[found.row(model), row], path, atol=1e-9, err_msg=model
            )


def test_outcomes_and_origins_meet(done):
    planted, found = done
    row, h = 20, 7
    origin = found.origins[row]
    rate = planted.response[origin + h - 11 : origin + h + 1].sum()
    assert found.outcomes[row, h - 1] == pytest.approx(rate)
    assert found.last_seen[row] == pytest.approx(planted.response[origin - 11 : origin + 1].sum())
    assert found.origins[-1] == planted.response.size - 1
    assert np.isnan(found.outcomes[-1]).all()
    assert np.isfinite(found.forecasts[:, -1]).all()


@pytest.mark.parametrize("scheme", ["expanding", "rolling"])
def test_a_date_never_sees_the_future(scheme):
    """Later months of both series replaced: earlier forecasts and choices are the same bits."""
    planted = pair()
    driver, response = planted.driver.copy(), planted.response.copy()
    before = run(driver, response, scheme=scheme, **GRID)
    cut = 180
    driver[cut:] += 50.0
    response[cut:] -= 70.0
    after = run(driver, response, scheme=scheme, **GRID)
    seen = before.origins < cut
    assert seen.any() and not seen.all()
    for name in ("windows", "shifts", "own_lags", "orders"):
        assert np.array_equal(getattr(before, name)[seen], getattr(after, name)[seen]), name
    assert np.array_equal(before.forecasts[:, seen], after.forecasts[:, seen])
    assert not np.array_equal(before.forecasts[:, ~seen], after.forecasts[:, ~seen])
    # Nor do the intervals: at a date they rest on outcomes that it knew.
    assert np.array_equal(before.scale[:, seen], after.scale[:, seen], equal_nan=True)
    assert np.array_equal(before.freedom[:, seen], after.freedom[:, seen], equal_nan=True)


def test_a_rolling_date_does_not_see_the_far_past():
    planted = pair()
    driver, response = planted.driver.copy(), planted.response.copy()
    before = run(driver, response, scheme="rolling", width=100)
    driver[:40] += 9.0
    response[:40] -= 9.0
    after = run(driver, response, scheme="rolling", width=100)
    late = before.origins >= 140 + 11  # own lags are chosen once a year
    assert np.array_equal(before.forecasts[:, late], after.forecasts[:, late])


def test_a_planted_lag_is_found_from_each_dates_own_data_and_helps():
    """Driver leads by 18: chosen with its sign, and better than every benchmark up to 18 ahead."""
    planted = pair(n=300, noise=0.3)
    found = run(planted.driver, planted.response, **GRID)
    assert np.median(found.shifts) == 18
    assert (np.abs(found.shifts - 18) <= 2).mean() > 0.9
    scores = backtest_scores(found, RELATION)
    assert (scores.ratio[:, 11:18] < 0.6).all()
    assert all(scores.beats(name, 12) for name in scores.benchmarks)
    # Beyond the reach of the driver the line has nothing but the mean left.
    assert scores.ratio[2, 19] > scores.ratio[2, 17]
    swapped = run(planted.response, planted.driver, **GRID)
    assert not backtest_scores(swapped, RELATION).beats(PAST_MEAN, 12)


def test_chunks_in_any_order_give_the_same_result():
    planted = pair()
    plan = backtest_plan(
        planted.driver, planted.response, window=6, shift=18, target=YEARLY, horizon=6, **GRID
    )
    chunks = {i: backtest_chunk(plan, i) for i in reversed(range(plan.chunks))}
    again = backtest_result(plan, [chunks[i] for i in range(plan.chunks)])
    straight = run(planted.driver, planted.response, horizon=6, **GRID)
    assert np.array_equal(again.forecasts, straight.forecasts)


def test_vintages_of_the_date_are_used_and_judged_by_the_newest():
    planted = pair()
    first_prints = planted.response + 0.5

    def stood(origin):
        return planted.driver[: origin + 1], first_prints[: origin + 1]

    found = run(planted.driver, planted.response, vintages=stood)
    plain = run(planted.driver, first_prints)
    assert np.array_equal(found.forecasts, plain.forecasts)
    np.testing.assert_allclose(found.outcomes, plain.outcomes - 6.0)
    # What was seen at the date is the rate of its vintage.
    np.testing.assert_allclose(found.last_seen, plain.last_seen)


def test_a_vintage_that_ends_elsewhere_is_refused():
    planted = pair()
    with pytest.raises(ValueError, match="a vintage must end with period 107 of the response"):
        run(
            planted.driver,
            planted.response,
            vintages=lambda origin: (planted.driver[:origin], planted.response[:origin]),
        )


def test_a_constant_driver_leaves_the_mean():
    planted = pair()
    found = run(np.full(216, 0.4), planted.response, **GRID)
    # The line of such a cell is the mean of its response, at every horizon a whole year away.
    known = planted.response[: found.origins[0] + 1]
    cell_mean = trailing_mean(known, 6)[18:].mean()
    np.testing.assert_allclose(found.forecasts[0, 0, 11:], 12 * cell_mean, atol=1e-9)
    np.testing.assert_allclose(
        found.forecasts[found.row(DIRECT)], found.forecasts[found.row(OWN_PAST)], atol=1e-9
    )


@pytest.mark.parametrize(
    ("more", "sentence"),
    [
        ({"shift": 0}, "shift must be 1 or more to imply a path"),
        ({"scheme": "sliding"}, "scheme must be expanding or rolling, but got 'sliding'"),
        ({"windows": [1, 2]}, "windows and shifts must be given together"),
        ({"windows": [1], "shifts": [-3, 0]}, "shifts must reach 1 or more, but end at 0"),
        ({"first": 210}, "at least 48 periods before its first date and 24 after it"),
        ({"horizon": 0}, "horizon must be 1 or more"),
        ({"width": 20, "scheme": "rolling"}, "width must be 48 periods or more"),
    ],
)
def test_what_cannot_be_backtested_says_why(more, sentence):
    planted = pair()
    with pytest.raises(ValueError, match=sentence):
        run(planted.driver, planted.response, **more)


def test_too_little_history_is_said():
    planted = pair(n=70)
    with pytest.raises(ValueError, match="but the response has 70"):
        run(planted.driver, planted.response)


def test_the_choice_keeps_the_cell_where_there_is_no_grid():
    planted = pair()
    rules = {"cell": (6, 18), "max_lags": 12, "periods_per_year": 12}
    kept = choice_at(planted.driver, planted.response, windows=None, shifts=None, **rules)
    assert (kept.window, kept.shift) == (6, 18)
    anew = choice_at(planted.driver, planted.response, windows=[1], shifts=range(1, 30), **rules)
    assert (anew.window, anew.shift) == (1, 18)


def test_scores_are_the_plain_ones(done):
    _, found = done
    scores = backtest_scores(found, RELATION)
    h = 12
    error = found.errors(RELATION)[:, h - 1]
    error = error[~np.isnan(error)]
    assert scores.n[h - 1] == error.size
    assert scores.rmse[h - 1] == pytest.approx(np.sqrt(np.mean(error**2)))
    assert scores.mae[h - 1] == pytest.approx(np.mean(np.abs(error)))
    assert scores.bias[h - 1] == pytest.approx(np.mean(error))
    other = found.errors(NO_CHANGE)[:, h - 1]
    other = other[~np.isnan(other)]
    assert scores.ratio[0, h - 1] == pytest.approx(np.sqrt(np.sum(error**2) / np.sum(other**2)))
    origins, gain = squared_error_gain(found, RELATION, NO_CHANGE, horizon=h)
    assert gain[-1] == pytest.approx(np.sum(other**2) - np.sum(error**2))
    assert origins.size == error.size
    low, high = found.band(RELATION, 0.8)
    outcome = found.outcomes[:, h - 1]
    judged = ~np.isnan(low[:, h - 1]) & ~np.isnan(outcome)
    inside = (low[:, h - 1] <= outcome) & (outcome <= high[:, h - 1])
    assert scores.share[1, h - 1] == pytest.approx(inside[judged].mean())
    assert scores.coverage[1][h - 1].n == -(-judged.sum() // h)
    with pytest.raises(ValueError, match="model must be one of relation"):
        found.errors("oracle")


def test_models_are_named_in_order(done):
    assert done[1].models == MODELS
    assert repr(done[1]).startswith("Backtest(yearly rate, 109 dates, expanding")


def test_units_and_levels_pass_through():
    """A driver in other units changes nothing; a response doubled or raised is forecast so."""
    planted = pair()
    x, y = planted.driver, planted.response
    rules = {"horizon": 6, "first": 120}
    plain = run(x, y, **rules).forecasts
    np.testing.assert_allclose(run(100.0 * x - 3.0, y, **rules).forecasts, plain, atol=1e-9)
    np.testing.assert_allclose(run(x, 2.0 * y, **rules).forecasts, 2.0 * plain, atol=1e-9)
    np.testing.assert_allclose(run(x, y + 0.5, **rules).forecasts, plain + 6.0, atol=1e-9)
