"""Errors of the path at past dates against the same forecast made date by date."""

import numpy as np
import pytest

from analytics.intervals import error_scale, half_width
from analytics.outlook import implied_path
from analytics.outlook_target import outlook_target
from analytics.path_intervals import path_fan, relation_errors
from analytics.relation import relation_forecasts
from analytics.simulate import planted_pair


def pair(seed=1, n=160, lag=9):
    return planted_pair(np.random.default_rng(seed), n, lag=lag, slope=0.4, noise=0.5)


@pytest.mark.parametrize("kind", ["yearly", "window", "single"])
@pytest.mark.parametrize("lead", [0, 2, -3])
@pytest.mark.parametrize("compounding", ["log", "percent"])
def test_errors_equal_the_forecasts_made_date_by_date(kind, lead, compounding):
    planted = pair()
    end = planted.response.size
    driver = planted.driver[: end + min(0, lead)]
    response = planted.response[: end - max(0, lead)]
    target = outlook_target(kind, window=5, compounding=compounding)
    errors = relation_errors(driver, response, window=5, shift=9, target=target)
    observed = target.observed(response)
    first = response.size - errors.shape[0]
    for row in (0, 1, 40, errors.shape[0] - 1):
        known = first + row
        forecast = relation_forecasts(
            driver[: known + lead],
            response[:known],
            window=5,
            shift=9,
            horizon=9 + lead,
            target=target,
        )
        outcome = np.full(9 + lead, np.nan)
        seen = observed[known : known + 9 + lead]
        outcome[: seen.size] = seen
        np.testing.assert_allclose(errors[row], outcome - forecast, atol=1e-10)


def test_the_fan_is_centred_on_the_path():
    planted = pair()
    path = implied_path(planted.driver, planted.response, window=5, shift=9)
    for kind, line in (
        ("yearly", path.yearly),
        ("window", path.window_mean),
        ("single", path.single),
    ):
        target = outlook_target(kind, window=5)
        fan = path_fan(planted.driver, planted.response, window=5, shift=9, target=target)
        np.testing.assert_allclose(fan.centre, line, atol=1e-12)


def test_planted_paths_lie_inside_as_often_as_stated():
    """200 economies whose path is known: outcomes at the stated rate, the path itself more often.

    The bounds are 3.3 binomial standard errors of 200 seeds around 77 to 83 and 92.5 to 97 %.
    """
    target = outlook_target("yearly", window=12)
    hits = {(level, name): 0 for level in (0.8, 0.95) for name in ("outcome", "path")}
    known, lag = 240, 12
    for seed in range(200):
        planted = planted_pair(
            np.random.default_rng(seed),
            known + lag,
            lag=lag,
            slope=0.4,
            noise=0.5,
            noise_ar=0.5,
            law="laplace",
        )
        errors = relation_errors(
            planted.driver, planted.response, window=6, shift=lag, target=target
        )[: -2 * lag + 1, lag - 1 :]
        # One horizon alone is judged, twelve months ahead: the errors known at `known`.
        centre = relation_forecasts(
            planted.driver[:known],
            planted.response[:known],
            window=6,
            shift=lag,
            horizon=lag,
            target=target,
        )[-1:]
        scale, freedom, _ = error_scale(errors[:, 0], lag)
        outcome = planted.response[known:].sum()
        path = (planted.response - planted.noise)[known:].sum()
        for level in (0.8, 0.95):
            half = half_width(scale[-1], freedom[-1], level)
            hits[level, "outcome"] += abs(outcome - centre[0]) <= half
            hits[level, "path"] += abs(path - centre[0]) <= half
    assert 0.77 - 0.098 < hits[0.8, "outcome"] / 200 < 0.83 + 0.088
    assert hits[0.95, "outcome"] / 200 > 0.925 - 0.062
    assert hits[0.8, "path"] / 200 >= 0.8
    assert hits[0.95, "path"] / 200 >= 0.95


def test_a_sample_too_short_to_look_back_says_so():
    planted = pair(n=36)
    target = outlook_target("yearly", window=5)
    with pytest.raises(ValueError, match="at least 38 periods to look back on, but the response"):
        relation_errors(planted.driver, planted.response, window=5, shift=9, target=target)
