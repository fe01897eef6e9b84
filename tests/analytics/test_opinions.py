"""Second opinions: planted lags and signs, chance, halves, short samples, errors."""

import numpy as np
import pytest

from analytics.distributed_lag import distributed_lag
from analytics.effective import without_season
from analytics.opinions import sample_halves, second_opinions
from analytics.robust import cell_inference
from analytics.simulate import ar_process, planted_pair


def pair(seed, n=760, lag=18, noise=0.25):
    return planted_pair(
        np.random.default_rng(seed), n, lag=lag, slope=0.4, noise=noise, noise_ar=0.5, spread=13
    )


def asked(planted, **options):
    settings = {"window": 12, "shift": 18, "max_shift": 48} | options
    return second_opinions(planted.driver, planted.response, **settings)


@pytest.mark.parametrize("lag", [8, 18, 36])
def test_every_method_finds_the_planted_lag(lag):
    misses = []
    for seed in range(8):
        found = asked(pair(seed, lag=lag), shift=lag)
        assert [opinion.method for opinion in found.opinions] == [
            "prewhitened",
            "distributed lag",
            "local projection",
        ]
        assert all(opinion.clear and opinion.low > 0.0 for opinion in found.opinions)
        misses.append([abs(opinion.shift - lag) for opinion in found.opinions])
    assert (np.median(misses, axis=0) <= 1).all()
    assert np.max(misses) <= 6


def test_swapped_series_answer_for_the_other_direction():
    """With the response in the driver's place nothing is found; a planted lead of it is."""
    clear = 0
    for seed in range(6):
        planted = pair(seed)
        back = second_opinions(planted.response, planted.driver, window=12, shift=0, max_shift=48)
        clear += sum(opinion.clear for opinion in back.opinions)
    assert clear <= 2
    leading = pair(3, lag=-18)
    back = second_opinions(leading.response, leading.driver, window=12, shift=18, max_shift=48)
    assert all(abs(opinion.shift - 18) <= 3 for opinion in back.opinions)


def test_unrelated_pairs_are_seldom_called_clear():
    """Own measurement, tests/bench/second_opinions: .00 to .03 at 760 months."""
    clear = np.zeros(3)
    for seed in range(60):
        rng = np.random.default_rng(seed)
        driver, response = (ar_process(rng, 500, ar=0.5, sd=1.0) for _ in range(2))
        found = second_opinions(driver, response, window=12, shift=12, max_shift=36)
        clear += [opinion.clear for opinion in found.opinions]
    assert (clear / 60 < 0.12).all()


def test_opinion_is_the_method_at_its_peak():
    planted = pair(1)
    found = asked(planted)
    x, y = without_season(planted.driver), without_season(planted.response)
    each = 0.95 ** (1 / 49)
    alone = distributed_lag(x, y, max_shift=48, window=12, level=each)
    opinion = found.opinions[1]
    assert opinion.shift == alone.peak
    assert (opinion.estimate, opinion.low, opinion.high) == alone.averaged.at(alone.peak)
    first = found.opinions[0]
    assert first.clear == (found.prewhitened.p_peak < 0.05)
    assert first.estimate == found.prewhitened.averaged[first.shift]
    assert found.projected.monthly.level == pytest.approx(each)


def test_summary_shows_every_answer():
    planted = pair(2)
    found = asked(planted, variants={"percent growth": (planted.driver, planted.response)})
    one, two, three = (opinion.shift for opinion in found.opinions)
    halves = found.halves
    assert found.summary == (
        f"prewhitened: {one} months; distributed lag: {two}; local projection: {three};"
        f" first half {halves.first.best_shift}, second half {halves.second.best_shift};"
        f" percent growth {found.variants['percent growth'].best_shift}"
    )
    rng = np.random.default_rng(1)
    noise = rng.standard_normal((2, 300))
    doubtful = second_opinions(*noise, window=4, shift=3, max_shift=12, periods_per_year=4)
    assert doubtful.summary.count("(not told from chance)") == 3
    assert " quarter" in doubtful.summary


def test_a_fixed_season_is_no_lead():
    """Unrelated series with the same yearly pattern, five months apart."""
    rng = np.random.default_rng(5)
    driver, response = rng.standard_normal((2, 480))
    season = 3.0 * np.sin(2 * np.pi * np.arange(480) / 12)
    found = second_opinions(
        driver + season, response + np.roll(season, 5), window=1, shift=5, max_shift=24
    )
    assert not any(opinion.clear for opinion in found.opinions)
    naive = second_opinions(
        driver + season,
        response + np.roll(season, 5),
        window=1,
        shift=5,
        max_shift=24,
        periods_per_year=1,
    )
    assert abs(naive.halves.first.correlation) > 0.7 > abs(found.halves.first.correlation)


def test_halves_are_judged_by_themselves():
    """Lag 6 in the older half, 20 in the newer one."""
    old, new = pair(3, n=380, lag=6), pair(4, n=380, lag=20)
    driver = np.concatenate([old.driver, new.driver])
    response = np.concatenate([old.response, new.response])
    found = sample_halves(driver, response, window=12, shift=6, shifts=range(37))
    assert (found.first.start, found.first.stop) == (0, 380)
    assert (found.second.start, found.second.stop) == (380, 760)
    assert abs(found.first.best_shift - 6) <= 2
    assert abs(found.second.best_shift - 20) <= 2
    for half, planted in ((found.first, old), (found.second, new)):
        cell = cell_inference(planted.driver, planted.response, window=12, shift=6)
        assert (half.pairs, half.slope) == (cell.n, pytest.approx(cell.slope))
        assert (half.correlation, half.p) == pytest.approx((cell.correlation, cell.p))
    assert found.first.p < 0.001


def test_the_chosen_shift_need_not_be_among_those_searched():
    planted = pair(5, n=400)
    found = sample_halves(
        planted.driver, planted.response, window=12, shift=-3, shifts=range(12, 25)
    )
    assert 12 <= found.first.best_shift <= 24
    cell = cell_inference(planted.driver[:200], planted.response[:200], window=12, shift=-3)
    assert found.first.correlation == pytest.approx(cell.correlation)


def test_what_a_short_sample_cannot_give_is_named():
    planted = pair(6, n=110)
    found = asked(planted)
    assert [opinion.method for opinion in found.opinions] == ["prewhitened"]
    assert set(found.missing) == {"distributed lag", "local projection"}
    assert "at least 110 months for 55 lags" in found.missing["distributed lag"]
    assert found.distributed is None
    shortest = second_opinions(
        planted.driver[:40], planted.response[:40], window=12, shift=3, max_shift=39
    )
    assert shortest.summary == "the sample is too short for a second opinion"
    assert set(shortest.missing) == {
        "prewhitened",
        "distributed lag",
        "local projection",
        "halves",
    }


def test_errors():
    planted = pair(7, n=300)
    with pytest.raises(ValueError, match="but got -1, 12"):
        asked(planted, max_shift=-1)
    with pytest.raises(ValueError, match="level must be between 0 and 1, but got 95"):
        asked(planted, level=95)
    with pytest.raises(ValueError, match="same length"):
        second_opinions(planted.driver, planted.response[1:], window=12, shift=18, max_shift=24)
    with pytest.raises(ValueError, match="periods_per_year must be 1 or more"):
        asked(planted, periods_per_year=0)
    with pytest.raises(ValueError, match="at least 24 pairs"):
        sample_halves(
            planted.driver[:50], planted.response[:50], window=12, shift=0, shifts=range(5)
        )
