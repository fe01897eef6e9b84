"""Surrogates keep what they must keep, and nothing of the order of the months."""

import numpy as np
import pytest
from scipy.signal import lfilter

from analytics.autoregression import autoregression
from analytics.surrogates import autoregressive_surrogates, phase_surrogates


@pytest.mark.parametrize("n", [2, 3, 60, 61, 240, 757])
def test_phase_surrogates_keep_mean_and_periodogram(n):
    rng = np.random.default_rng(n)
    values = 3.0 + rng.standard_normal(n).cumsum()
    copies = phase_surrogates(values, 7, rng)
    assert copies.shape == (7, n)
    assert copies.dtype == np.float64
    np.testing.assert_allclose(copies.mean(axis=1), values.mean(), rtol=1e-10, atol=1e-12)
    power = np.abs(np.fft.rfft(values)) ** 2
    np.testing.assert_allclose(
        np.abs(np.fft.rfft(copies, axis=1)) ** 2,
        np.tile(power, (7, 1)),
        rtol=1e-9,
        atol=1e-9 * power.max(),
    )


def test_phase_surrogates_keep_the_circular_autocorrelation():
    values = lfilter([1.0], [1.0, -0.9], np.random.default_rng(1).standard_normal(200))

    def circular(series):  # by its definition, not through a transform
        centred = series - series.mean()
        return np.array([centred @ np.roll(centred, k) for k in range(40)])

    for copy in phase_surrogates(values, 5, np.random.default_rng(2)):
        np.testing.assert_allclose(circular(copy), circular(values), rtol=1e-9, atol=1e-8)


def test_phase_surrogates_have_uniform_phases_and_no_link_to_the_series():
    values = np.random.default_rng(3).standard_normal(120)
    copies = phase_surrogates(values, 2000, np.random.default_rng(4))
    turned = np.fft.rfft(copies, axis=1)[:, 1:60] / np.fft.rfft(values)[1:60]
    # Mean of 2000 x 59 points on the unit circle: standard error 1 / sqrt(118000) = .003.
    assert abs(turned.mean()) < 0.012
    assert abs((turned[:, :-1] * turned[:, 1:].conj()).mean()) < 0.012
    r = np.array([np.corrcoef(values, copy)[0, 1] for copy in copies])
    assert abs(r.mean()) < 4 / np.sqrt(2000 * 119)
    # r is the mean of cos(angle), weighted with the periodogram; the last term has cos = +-1.
    power = np.abs(np.fft.rfft(values)[1:]) ** 2 * np.r_[np.full(59, 2.0), 1.0]
    variance = (0.5 * power[:59] @ power[:59] + power[59] ** 2) / power.sum() ** 2
    assert r.std() == pytest.approx(np.sqrt(variance), rel=0.08)


def test_a_season_survives_over_whole_years():
    months = np.arange(240)
    season = np.sin(2 * np.pi * months / 12) + 0.5 * np.cos(2 * np.pi * months / 4)
    for copy in phase_surrogates(season, 5, np.random.default_rng(5)):
        np.testing.assert_allclose(copy[12:], copy[:-12], atol=1e-9)


def test_autoregressive_surrogates_keep_mean_and_autocorrelation():
    rng = np.random.default_rng(6)
    values = 2.0 + lfilter([1.0], [1.0, -0.8], rng.standard_normal(400))
    copies = autoregressive_surrogates(values, 4000, rng)
    assert copies.shape == (4000, 400)
    model = autoregression(values)
    # Autocovariances of the fitted process from its moving-average form, 2000 terms.
    effect = lfilter([1.0], np.r_[1.0, -model.coefficients], np.r_[1.0, np.zeros(2000)])
    surprises = np.convolve(values - values.mean(), np.r_[1.0, -model.coefficients])[
        model.order : 400
    ]
    theory = np.array([effect[: effect.size - k] @ effect[k:] for k in range(6)]) * surprises.var()
    centred = copies - values.mean()
    assert abs(centred.mean()) < 5 * effect.sum() * surprises.std() / np.sqrt(4000 * 400)
    for k in range(6):
        # The first pair of months alone: stationary from the start, or this fails.
        early = (centred[:, 0] * centred[:, k]).mean()
        late = (centred[:, 399 - k] * centred[:, 399]).mean()
        all_months = (centred[:, : 400 - k] * centred[:, k:]).mean()
        assert all_months == pytest.approx(theory[k], rel=0.03)
        assert early == pytest.approx(theory[k], abs=6 * theory[0] / np.sqrt(4000) * 1.5)
        assert late == pytest.approx(theory[k], abs=6 * theory[0] / np.sqrt(4000) * 1.5)


def test_ends_of_autoregressive_surrogates_have_forgotten_each_other():
    values = lfilter([1.0], [1.0, -0.95], np.random.default_rng(7).standard_normal(300))
    copies = autoregressive_surrogates(values, 3000, np.random.default_rng(8))
    assert abs(np.corrcoef(copies[:, 0], copies[:, -1])[0, 1]) < 5 / np.sqrt(3000)


def test_white_noise_is_resampled():
    values = np.array([1.0, -1.0] * 20 + [5.0, -5.0])
    model = autoregression(values, order=0)
    copies = autoregressive_surrogates(values, 10, np.random.default_rng(9), model=model)
    assert set(np.round(np.unique(copies), 9)) <= {1.0, -1.0, 5.0, -5.0}


@pytest.mark.parametrize("surrogates", [phase_surrogates, autoregressive_surrogates])
def test_seeds_and_errors(surrogates):
    values = np.random.default_rng(10).standard_normal(80)
    first, again, other = (surrogates(values, 3, np.random.default_rng(s)) for s in (1, 1, 2))
    np.testing.assert_array_equal(first, again)
    assert np.abs(first - other).max() > 0.1
    with pytest.raises(ValueError, match="draws must be 1 or more, but got 0"):
        surrogates(values, 0, np.random.default_rng(1))
    with pytest.raises(ValueError, match="values must be one finite series"):
        surrogates([1.0, np.nan, 2.0], 1, np.random.default_rng(1))
