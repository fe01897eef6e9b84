"""Checks of a series: each must find what was planted, and be quiet on clean simulated series."""

import numpy as np
import pandas as pd
import pytest
from scipy.stats import friedmanchisquare

from analytics import stable_season
from analytics.quality import findings, frequency_mix, rereferencing
from analytics.series import Series
from analytics.stable_season import season_test
from app.demo import demo_releases

START = pd.Period("1990-01", "M")


def clean(seed=1, n=240, rho=0.5, draw="normal", season=0.0, **attributes):
    """An index whose growth is autoregressive around 0.3 percent a month, spread 0.3."""
    rng = np.random.default_rng(seed)
    shocks = {"normal": rng.normal, "laplace": rng.laplace}[draw](size=n + 100)
    growth = np.zeros(n + 100)
    for t in range(1, n + 100):
        growth[t] = rho * growth[t - 1] + shocks[t]
    months = np.arange(n)
    log = np.cumsum(0.3 + 0.3 * growth[100:]) + season * np.sin(2 * np.pi * months / 12)
    attributes = {"kind": "index", "adjustment": "yes"} | attributes
    return Series("Prices", START, 100 * np.exp(log / 100), **attributes)


def changed(series, part, factor):
    values = np.array(series.values)
    values[part] *= factor
    return Series(series.name, series.first, values, series.kind, "", series.adjustment)


def checks(series, **options):
    return [(found.check, found.period) for found in findings(series, **options)]


# The invented economy ------------------------------------------------------------------------


def test_the_redefinition_of_narrow_money_is_found_and_nothing_in_money_and_prices():
    loaded = {one.name: one for release in demo_releases() for one in release.series}
    assert checks(loaded["Narrow money"]) == [("level shift", pd.Period("1987-07", "M"))]
    assert checks(loaded["Broad money"]) == []
    assert checks(loaded["Consumer prices"]) == []


# False alarms --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("draw", "rho", "most"),
    [
        ("normal", -0.4, 1),
        ("normal", 0.0, 1),
        ("normal", 0.9, 3),
        ("laplace", 0.0, 2),
        ("laplace", 0.9, 5),
    ],
)
def test_clean_series_raise_few_alarms(draw, rho, most):
    # 80 series of 10 to 70 years each. Own measurement over 2400 such, with Student's t as well: 17
    # alarms of a season, 16 with rho of 0.5 or more; level shifts 1 of 800 with Laplace shocks.
    alarms = []
    for seed in range(80):
        n = 120 + (seed * 97) % 600
        alarms += findings(clean(seed=1000 + seed, n=n, rho=rho, draw=draw))
    assert len(alarms) <= most, [str(alarm) for alarm in alarms]


# Planted -------------------------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(20))
@pytest.mark.parametrize("factor", [0.1, 10.0, 0.001, 1000.0])
def test_a_change_of_unit(seed, factor):
    place = 60 + 5 * seed
    found = findings(changed(clean(seed), slice(place, None), factor))
    assert [(one.check, one.period) for one in found] == [("unit jump", START + place)]
    assert "from there on" in found[0].message
    assert ("multiplied" in found[0].message) == (factor > 1)


@pytest.mark.parametrize("seed", range(20))
@pytest.mark.parametrize("factor", [0.1, 10.0, 1000.0])
def test_one_slipped_decimal_mark_is_one_finding(seed, factor):
    place = 60 + 5 * seed
    found = findings(changed(clean(seed), place, factor))
    assert [(one.check, one.period) for one in found] == [("unit jump", START + place)]
    assert "for a while" in found[0].message and "break" not in found[0].way


@pytest.mark.parametrize("factor", [0.8, 1.1, 1.3, 2.5])
def test_a_redefinition(factor):
    for seed in range(20):
        place = 60 + 5 * seed
        series = changed(clean(seed, season=0.5, adjustment="no"), slice(place, None), factor)
        assert checks(series) == [("level shift", START + place)]


def test_a_passing_spike_is_no_redefinition():
    assert checks(changed(clean(), slice(100, 102), 1.2)) == []


def test_two_redefinitions_are_two_findings():
    series = changed(changed(clean(), slice(80, None), 1.3), slice(160, None), 0.7)
    assert checks(series) == [("level shift", START + 80), ("level shift", START + 160)]


@pytest.mark.parametrize("factor", [0.8123, 1.25, 0.5])
def test_a_new_reference_period(factor):
    old = clean()
    stored = Series("Prices", START, old.values[:-1].round(1))
    new = Series("Prices", START, (old.values * factor).round(1))
    (found,) = rereferencing(new, stored)
    assert found.severity == "note"
    assert float(found.message.split(" is ")[1].split()[0]) == pytest.approx(factor, rel=1e-3)


def test_the_same_and_a_revised_vintage_are_not_re_referenced():
    old = clean()
    assert rereferencing(old, old) == ()
    rounded = Series("Prices", START, old.values.round(1))
    assert rereferencing(rounded, old) == ()
    assert rereferencing(changed(old, slice(200, None), 1.01), old) == ()


def test_a_stale_end():
    series = clean()
    values = np.array(series.values)
    values[-4:] = values[-4]
    found = findings(Series("Prices", START, values))
    assert [(one.check, one.period) for one in found] == [("stale end", series.last - 3)]
    values[50:54] = values[50]  # as long a stretch before: usual here
    assert checks(Series("Prices", START, values)) == []


def test_too_few_decimals():
    series = clean()
    (warning,) = findings(Series("Prices", START, series.values.round(0)))
    assert (warning.check, warning.severity) == ("rounding", "warning")
    (note,) = findings(Series("Prices", START, series.values.round(0) * 5 + 1e-9)) or (None,)
    assert note.check == "rounding"
    assert findings(Series("Prices", START, series.values.round(2))) == ()


def test_the_noise_of_rounding_that_is_told_is_the_noise_there_is():
    steps = np.random.default_rng(4).normal(0.0, 0.4, 720)
    flat = Series("Prices", START, 60 * np.exp(np.cumsum(steps) / 100))
    coarse = Series("Prices", START, flat.values.round(1))
    (found,) = [one for one in findings(coarse) if one.check == "rounding"]
    told = float(found.message.split("adds ")[1].split()[0])
    noise = 100 * np.diff(np.log(coarse.values)) - 100 * np.diff(np.log(flat.values))
    assert told == pytest.approx(noise.std(), rel=0.1)


def test_a_season_that_is_left():
    hit = sum(
        "residual season" in dict(checks(clean(seed, n=240, season=0.5))) for seed in range(40)
    )
    assert hit == 40
    assert checks(clean(season=0.5, adjustment="no")) == []


def test_too_short_for_the_window():
    series = clean(n=40)
    assert checks(series, window=12) == []  # 39 rates, 28 smoothed ones
    (found,) = findings(series, window=18)
    assert found.check == "too short" and "22 smoothed months are left" in found.message


def test_frequencies_mixed():
    quarters = Series("Output", pd.Period("2000Q1", "Q"), [1.0, 2.0])
    assert frequency_mix([clean(), clean(2)]) == ()
    (found,) = frequency_mix([clean(), clean(2), quarters])
    assert found.series == "Output" and "Output is quarterly, most series are monthly" in str(found)


def test_a_rate_has_no_level_to_jump():
    rate = Series("Policy rate", START, np.r_[np.ones(50), 50 * np.ones(50), 2.0], "rate")
    assert checks(rate) == []


# Friedman's statistic ------------------------------------------------------------------------


def test_friedman_with_ties_equals_scipy():
    table = np.random.default_rng(3).normal(size=(9, 12)).round(1)
    assert stable_season._friedman(table) == pytest.approx(friedmanchisquare(*table.T).statistic)


def test_the_season_test_on_a_planted_table():
    # Growth of one year, repeated: every month has the same rank each year, so the statistic is
    # years (months - 1), the largest there is.
    pattern = np.array([3.0, -1, 4, -2, 6, -5, 2, 0, 1, -3, 5, -4])
    rate = Series("Rate", START, np.tile(pattern, 9), "rate")
    found = season_test(rate)
    assert (found.years, found.places) == (8, 12)
    assert found.statistic == pytest.approx(8 * 11)


@pytest.mark.parametrize(
    ("series", "match"),
    [
        (Series("Y", pd.Period("2000", "Y"), np.arange(1.0, 40)), "'Y' is annual"),
        (clean(n=60), "at least 5 whole years, but 'Prices' leaves 3"),
        (Series("Short", START, [1.0, 2.0]), "leaves 0"),
        (Series("Z", START, np.arange(100.0)), "has a value of zero or below"),
    ],
)
def test_refusals(series, match):
    with pytest.raises(ValueError, match=match):
        season_test(series)
