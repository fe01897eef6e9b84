import numpy as np
import pandas as pd
import pytest

from analytics.base_effect import base_effects, drop_outs
from analytics.rates import growth_rate
from analytics.series import Series


def walk(n=80, seed=3, freq="M"):
    rng = np.random.default_rng(seed)
    values = 100 * np.exp(np.cumsum(rng.normal(0.003, 0.02, n)))
    return Series("Prices", pd.Period("2015-01", freq), values)


@pytest.mark.parametrize("formula", ["percent", "log"])
@pytest.mark.parametrize(("freq", "year"), [("M", 12), ("Q", 4), ("Y", 1)])
def test_the_two_parts_add_up_to_the_change_without_remainder(formula, freq, year):
    series = walk(freq=freq)
    found = base_effects(series, periods=40, formula=formula)
    yearly = growth_rate(series, span=year, formula=formula)
    np.testing.assert_allclose(found.new + found.base, found.change, rtol=0, atol=1e-11)
    np.testing.assert_allclose(found.yearly, yearly.values[-40:], rtol=0, atol=0)
    np.testing.assert_allclose(found.change, np.diff(yearly.values)[-40:], rtol=0, atol=1e-11)
    assert found.periods[-1] == series.last


def test_the_change_has_the_closed_form():
    # (100 + y_(t-1)) ((1 + m/100) / (1 + b/100) - 1), own algebra.
    found = base_effects(walk(), periods=60)
    before = found.yearly - found.change
    ratio = (1 + found.rate_new / 100) / (1 + found.rate_dropped / 100)
    np.testing.assert_allclose(found.change, (100 + before) * (ratio - 1), rtol=0, atol=1e-11)


def test_a_step_comes_in_and_drops_out_a_year_later():
    values = np.full(40, 100.0)
    values[20:] = 105.0
    found = base_effects(Series("Prices", pd.Period("2015-01", "M"), values), periods=24)
    place = {str(period): i for i, period in enumerate(found.periods)}
    came, went = place["2016-09"], place["2017-09"]  # places 20 and 32
    assert found.new[came] == pytest.approx(5.0)
    assert found.base[went] == pytest.approx(-5.0)
    others = np.setdiff1d(np.arange(24), [came, went])
    assert not found.new[others].any()
    assert not found.base[others].any()
    assert not found.change[others].any()


def test_drop_outs_are_the_rates_of_the_last_year_in_order():
    series = walk(freq="M")
    found = drop_outs(series)
    rates = growth_rate(series, formula="percent").values
    np.testing.assert_array_equal(found.rate, rates[-12:])
    assert found.periods[0] == series.last + 1
    assert found.periods.size == 12


def test_usual_is_the_median_of_the_same_month_of_the_years_before():
    series = walk(n=61)
    found = drop_outs(series)
    rates = growth_rate(series, formula="percent")
    for i, period in enumerate(found.periods):
        same = [
            rate
            for month, rate in zip(rates.periods, rates.values, strict=True)
            if month.month == period.month and month < period - 12
        ]
        assert found.usual[i] == pytest.approx(np.median(same), abs=1e-12)


def test_pull_is_exact_for_the_next_period():
    series = walk()
    found = drop_outs(series)
    longer = Series(
        "Prices",
        series.first,
        np.append(series.values, series.values[-1] * (1 + found.usual[0] / 100)),
    )
    assert base_effects(longer, periods=1).change[0] == pytest.approx(found.pull[0], abs=1e-11)


def test_a_gap_leaves_its_own_entries_empty():
    values = walk().values.copy()
    values[-3] = np.nan
    found = base_effects(Series("Prices", pd.Period("2015-01", "M"), values), periods=6)
    assert np.isnan(found.change).tolist() == [False, False, False, True, True, False]


@pytest.mark.parametrize(
    ("call", "match"),
    [
        (lambda: base_effects(walk(13)), "14 months"),
        (lambda: drop_outs(walk(12)), "13 months"),
        (
            lambda: base_effects(Series("R", pd.Period("2020", "M"), [1.0] * 30, kind="rate")),
            "rate",
        ),
    ],
)
def test_refusals(call, match):
    with pytest.raises(ValueError, match=match):
        call()
