"""Errors of the path at past dates against the same forecast made date by date."""

import numpy as np
import pytest

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
