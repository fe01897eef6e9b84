"""Benchmarks: closed forms."""

import numpy as np
import pytest

from analytics.benchmarks import autoregressive, chosen_autoregression, no_change, past_mean
from analytics.outlook_target import outlook_target

YEARLY = outlook_target("yearly", window=6)
WINDOW = outlook_target("window", window=6)
RATES = np.random.default_rng(1).normal(0.2, 0.3, 40)


def test_no_change_repeats_the_last_year():
    np.testing.assert_allclose(no_change(RATES, horizon=3, target=YEARLY), RATES[-12:].sum())
    np.testing.assert_allclose(no_change(RATES, horizon=3, target=WINDOW), RATES[-12:].mean())


def test_no_change_of_a_compounded_rate_is_the_published_one():
    percent = outlook_target("yearly", window=6, compounding="percent")
    last = 100 * (np.prod(1 + RATES[-12:] / 100) - 1)
    np.testing.assert_allclose(no_change(RATES, horizon=2, target=percent), last)


def test_no_change_needs_a_year():
    with pytest.raises(ValueError, match="response must have a year, 12 periods, but got 11"):
        no_change(RATES[:11], horizon=1, target=YEARLY)


def test_the_mean_so_far_fills_the_months_ahead():
    found = past_mean(RATES, horizon=14, target=YEARLY)
    assert found[0] == pytest.approx(RATES[-11:].sum() + RATES.mean())
    np.testing.assert_allclose(found[11:], 12 * RATES.mean())


def test_a_first_order_process_decays_geometrically():
    walk = np.zeros(400)
    noise = np.random.default_rng(2).standard_normal(400)
    for t in range(1, 400):
        walk[t] = 0.7 * walk[t - 1] + noise[t]
    model = chosen_autoregression(walk, max_order=1)
    found = autoregressive(walk, model, horizon=3, target=outlook_target("single", window=1))
    away = (walk[-1] - walk.mean()) * model.coefficients[0] ** np.arange(1, 4)
    np.testing.assert_allclose(found, walk.mean() + away)


def test_a_constant_series_goes_on():
    model = chosen_autoregression(np.full(30, 0.2), max_order=12)
    assert model.order == 0
    np.testing.assert_allclose(
        autoregressive(np.full(30, 0.2), model, horizon=2, target=YEARLY), 2.4
    )
