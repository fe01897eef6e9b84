"""The steps that a guard takes out, against every pair of dates tried by hand."""

from itertools import combinations

import numpy as np
import pytest

from analytics.level_shifts import level_shifts, long_run_variance


def squares(values, steps):
    return sum(((part - part.mean()) ** 2).sum() for part in np.split(values, steps))


def plain_long_run_variance(residual):
    """Newey and West (1987, Econometrica 55, 703-708), the sum as printed there, all by hand."""
    n, bandwidth = residual.size, max(1, round(1.3 * residual.size**0.5))
    variance = sum(v * v for v in residual) / n
    for lag in range(1, bandwidth):
        products = sum(residual[t] * residual[t - lag] for t in range(lag, n)) / n
        variance += 2 * (1 - lag / bandwidth) * products
    return variance


@pytest.mark.parametrize("seed", range(4))
def test_no_other_dates_fit_better(seed):
    rng = np.random.default_rng(seed)
    values = rng.standard_normal(60).cumsum()
    found = level_shifts(values)
    shortest = 8  # the next whole month above 12 % of 60
    allowed = {
        1: [(k,) for k in range(shortest, 60 - shortest + 1)],
        2: [
            (a, b)
            for a, b in combinations(range(shortest, 60 - shortest + 1), 2)
            if b - a >= shortest
        ],
    }
    strengths = {}
    for count, critical in ((1, 8.85), (2, 7.6)):
        best = min(allowed[count], key=lambda steps: squares(values, steps))
        residual = np.concatenate([part - part.mean() for part in np.split(values, best)])
        fall = squares(values, ()) - squares(values, best)
        noise = plain_long_run_variance(residual)
        strengths[count, best] = fall / count / noise / critical
    strongest = max(strengths, key=strengths.get)
    assert found.steps == strongest[1]
    assert found.strength == pytest.approx(strengths[strongest], rel=1e-9)
    np.testing.assert_allclose(found.levels + found.residual, values, atol=1e-12)


@pytest.mark.parametrize("steps", [(70,), (60, 150)])
def test_planted_steps_are_found(steps):
    values = np.random.default_rng(1).standard_normal(240)
    for place, step in enumerate(steps):
        values[step:] += 4.0 * (-1) ** place
    found = level_shifts(values)
    assert len(found.steps) == len(steps)
    assert all(abs(a - b) <= 3 for a, b in zip(found.steps, steps, strict=True))
    assert found.strength > 10
    assert not found.levels.flags.writeable


def test_white_noise_is_rarely_strong():
    rng = np.random.default_rng(2)
    strong = sum(level_shifts(rng.standard_normal(240)).strength > 1.5 for _ in range(200))
    assert strong < 40  # 10 % expected in one series; both must be strong for the guard


def test_a_step_function_without_noise_is_endlessly_strong():
    assert level_shifts(np.repeat([0.0, 1.0], 30)).strength > 1e9


def test_long_run_variance_of_short_series():
    residual = np.array([1.0, -2.0, 3.0, -1.0, -1.0])
    assert long_run_variance(residual) == pytest.approx(plain_long_run_variance(residual))


def test_a_trend_takes_the_place_of_its_steps_when_asked():
    rng = np.random.default_rng(3)
    months = np.arange(600)
    values = 0.01 * months + rng.standard_normal(600)
    steps, line = level_shifts(values), level_shifts(values, trend=True)
    assert len(steps.steps) == 2
    assert line.steps == ()
    assert line.strength == steps.strength > 1.5
    slope, start = np.polyfit(months, values, 1)
    np.testing.assert_allclose(line.levels, start + slope * months, atol=1e-9)
    np.testing.assert_allclose(line.residual, values - line.levels, atol=1e-12)
    shifted = rng.standard_normal(600) + 3.0 * (months >= 250)
    assert level_shifts(shifted, trend=True).steps == level_shifts(shifted).steps == (250,)


def test_errors():
    with pytest.raises(ValueError, match="values must be at least 24 finite numbers"):
        level_shifts(np.arange(23.0))
    with pytest.raises(ValueError, match="values must be at least 24 finite numbers"):
        level_shifts([np.nan] * 30)
