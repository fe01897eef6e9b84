"""Shifts of persistence: a plain twin, planted regimes, false alarms, errors."""

import numpy as np
import pytest

from analytics.persistence import STRONG, persistence_shift
from tests.bench.calibration_series import one_series


def plain(values):
    """The same by a loop over splits, each part from its own mean."""
    best = (0.0, 0, 0.0, 0.0)
    n = len(values)
    for at in range(int(0.15 * n), n - int(0.15 * n)):
        r = []
        for part in (values[:at], values[at:]):
            d = part - part.mean()
            r.append(float((d[1:] * d[:-1]).sum() / (d * d).sum()))
        error = np.sqrt((1 - r[0] ** 2) / at + (1 - r[1] ** 2) / (n - at))
        best = max(best, (abs(r[0] - r[1]) / error, at, *r))
    return best


@pytest.mark.parametrize("seed", range(4))
def test_the_split_is_the_plain_one(seed):
    values = one_series("AR .5", np.random.default_rng(seed), 120) + 3.0
    found, (strength, position, before, after) = persistence_shift(values), plain(values)
    assert found.position == position
    np.testing.assert_allclose(
        (found.strength, found.before, found.after), (strength, before, after), atol=1e-9
    )


def test_planted_regimes_are_found_and_steady_series_are_not():
    def share(shape, months):
        found = [
            persistence_shift(one_series(shape, np.random.default_rng([7, i]), months)).strong
            for i in range(60)
        ]
        return np.mean(found)

    assert share("two-regime persistence", 760) > 0.95
    assert share("two-regime persistence", 240) > 0.7
    for steady in ("iid", "AR .5", "AR .9", "AR .98"):
        assert share(steady, 240) <= 2 / 60


def test_level_and_scale_do_not_matter():
    values = one_series("two-regime persistence", np.random.default_rng(5), 300)
    one, other = persistence_shift(values), persistence_shift(40.0 - 7.0 * values)
    assert one.position == other.position
    assert other.strength == pytest.approx(one.strength, rel=1e-9)
    assert one.strength > STRONG


def test_errors_are_one_sentence():
    with pytest.raises(ValueError, match="at least 60, but got 59"):
        persistence_shift(np.arange(59.0))
    with pytest.raises(ValueError, match="constant in one"):
        persistence_shift(np.r_[np.ones(200), np.random.default_rng(1).standard_normal(100)])
    with pytest.raises(ValueError, match="finite"):
        persistence_shift(np.full(80, np.nan))
