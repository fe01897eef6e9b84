"""Many pairs at once: adjusted p-values, each pair as if it were alone, and what is refused."""

import math
import pickle
from dataclasses import asdict, replace

import numpy as np
import pandas as pd
import pytest

from analytics.influence import episodes
from analytics.panel import (
    PairScan,
    PanelPair,
    adjusted_p,
    pair_fingerprint,
    pair_scan,
    pair_seed,
    panel_result,
    panel_scan,
    panel_surface,
    refused_scan,
    unrelated_pairs,
)
from analytics.search import lag_search
from analytics.series import Series, align
from analytics.shiftset import shift_set
from tests.app.panels import LAG, panel_pairs
from tests.references.plain_panel import plain_benjamini_hochberg, plain_holm

# Benjamini and Hochberg (1995), J. R. Statist. Soc. B 57, section 4.1: fifteen ordered p-values of
# a trial of two treatments after heart attacks; at .05 the step-up rule rejects four of them, and
# Bonferroni's three (the digits from memory).
THROMBOLYSIS = [
    *(0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459),
    *(0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1.0000),
]


def same(one, other):
    """Whether two pairs are equal to the bit, nan equal to nan."""
    return repr(asdict(one)) == repr(asdict(other))


# Published values ----------------------------------------------------------------------------


def test_benjamini_and_hochberg_reject_four_of_their_fifteen():
    adjusted = adjusted_p(THROMBOLYSIS, "fdr_bh")
    assert np.count_nonzero(adjusted <= 0.05) == 4
    # Their rule by hand: the fourth, .0095, is below 4/15 of .05 = .0133.
    assert adjusted[3] == pytest.approx(0.0095 * 15 / 4)
    assert adjusted[4] > 0.05


def test_holm_rejects_three_of_them_as_bonferroni_does():
    adjusted = adjusted_p(THROMBOLYSIS, "holm")
    assert np.count_nonzero(adjusted <= 0.05) == 3
    assert adjusted[:3] == pytest.approx([0.0001 * 15, 0.0004 * 14, 0.0019 * 13])


# Closed forms and the plain twins ------------------------------------------------------------


def test_holm_by_hand():
    # Steps 4, 3, 2, 1 times the ordered p, never falling: .02, .03, .06 and again .06.
    assert adjusted_p([0.01, 0.04, 0.03, 0.005], "holm") == pytest.approx([0.03, 0.06, 0.06, 0.02])


@pytest.mark.parametrize("seed", range(5))
def test_adjusted_p_is_that_of_the_plain_rules(seed):
    rng = np.random.default_rng(seed)
    p = np.round(rng.uniform(size=rng.integers(1, 30)) ** 3, 2)  # ties as a finite search has them
    assert adjusted_p(p, "fdr_bh") == pytest.approx(plain_benjamini_hochberg(list(p)))
    assert adjusted_p(p, "holm") == pytest.approx(plain_holm(list(p)))


def test_a_missing_p_is_neither_adjusted_nor_counted():
    adjusted = adjusted_p([0.01, math.nan, 0.04], "holm")
    assert adjusted[[0, 2]] == pytest.approx([0.02, 0.04])
    assert math.isnan(adjusted[1])
    assert not adjusted.flags.writeable


# One pair ------------------------------------------------------------------------------------


def test_a_pair_has_the_numbers_of_the_search_the_set_and_the_episodes():
    (pair,) = panel_pairs({"Ardenquay": 1.0})
    found = pair_scan(pair, surrogates=199, seed=7)
    seed = pair_seed(7, *pair.names)
    sides = pair.pair.driver.values, pair.pair.response.values
    search = lag_search(*sides, windows=pair.windows, shifts=pair.shifts, surrogates=199, seed=seed)
    assert (found.window, found.shift) == (search.best_window, search.best_shift)
    assert (found.p_search, found.p_one_sided) == (search.p, search.p_one_sided)
    fits = shift_set(*sides, window=found.window, shifts=pair.shifts, seed=seed)
    assert list(found.shift_set) == fits.shifts.tolist()
    assert LAG in found.shift_set
    carried = episodes(*sides, window=found.window, shift=found.shift)
    assert found.share == max(episode.share for episode in carried.episodes)
    assert found.fragility == carried.fragility
    surface = panel_surface(pair)
    place = surface.cell(found.window, found.shift)
    assert (found.correlation, found.slope) == (surface.correlation[place], surface.slope[place])
    assert (found.first, found.last, found.months) == ("2001-02", "2011-01", 120)


def test_the_shift_is_the_planted_one_and_positive_where_the_driver_leads():
    (pair,) = panel_pairs({"Ardenquay": 1.0})
    assert pair_scan(pair, surrogates=99).shift == LAG
    turned = align(pair.pair.response, pair.pair.driver)
    back = replace(pair, pair=turned, shifts=range(-8, 3))
    assert pair_scan(back, surrogates=99).shift == -LAG


def test_a_negative_relation_is_found_unless_only_positive_ones_are_looked_for():
    (pair,) = panel_pairs({"Ardenquay": -1.0})
    either = pair_scan(pair, surrogates=199)
    assert (either.shift, either.p) == (LAG, either.p_search)
    assert either.correlation < -0.8
    assert either.p == 0.005
    positive = pair_scan(pair, surrogates=199, sign="positive")
    assert positive.correlation > 0
    assert positive.p == positive.p_one_sided > 0.05
    assert positive.shift_set == ()


def test_unrelated_pairs_have_no_shift_set():
    found = pair_scan(panel_pairs({"Belmorrow": 0.0}, seed=3)[0], surrogates=99)
    assert found.p_search > 0.05
    assert (found.shift_set, found.identified) == ((), False)


def test_order_neighbours_and_threads_change_nothing():
    pairs = panel_pairs({"Ardenquay": 0.3, "Belmorrow": 0.0, "Corvessa": 0.5})
    whole = panel_scan(pairs, surrogates=99, seed=4)
    turned = panel_scan(pairs[::-1], surrogates=99, seed=4, threads=1)
    assert all(same(a, b) for a, b in zip(whole.pairs, turned.pairs[::-1], strict=True))
    assert whole.p_scan.tolist() == turned.p_scan[::-1].tolist()
    alone = pair_scan(pickle.loads(pickle.dumps(pairs[1])), surrogates=99, seed=4)  # noqa: S301
    assert same(alone, whole.pairs[1])


def test_every_pair_has_a_seed_of_its_own():
    seeds = {pair_seed(s, *n) for s in (1, 2) for n in (("a", "b", "c"), ("ab", "", "c"))}
    assert len(seeds) == 4
    assert all(0 <= seed < 2**31 for seed in seeds)
    # Never to change: a result file that is gone on from would mix two draws.
    assert pair_seed(1, "Uldrevay", "Broad money", "Consumer prices") == 1460573125


def test_the_fingerprint_tells_data_and_grid_apart():
    one, other = panel_pairs({"Ardenquay": 1.0, "Belmorrow": 1.0})
    wider = replace(one, shifts=range(-2, 10))
    marks = {pair_fingerprint(pair) for pair in (one, other, wider)}
    assert len(marks) == 3
    assert pair_fingerprint(replace(one, economy="Other")) == pair_fingerprint(one)


# A panel -------------------------------------------------------------------------------------


def test_a_panel_finds_the_related_economies_and_no_other():
    slopes = {"Ardenquay": 1.0, "Belmorrow": 0.0, "Corvessa": 0.6, "Dunmarrel": 0.0}
    found = panel_scan(panel_pairs(slopes), surrogates=199)
    for p in (found.p_scan, found.p_holm):
        named = [scan.economy for scan, each in zip(found.pairs, p, strict=True) if each <= 0.05]
        assert named == ["Ardenquay", "Corvessa"]
    assert repr(found) == (
        "PanelScan(4 of 4 pairs searched, found at 5 %: 2 by Benjamini-Hochberg, 2 by Holm)"
    )
    frame = found.to_frame()
    assert list(frame["economy"]) == list(slopes)
    assert frame["p_scan"].tolist() == found.p_scan.tolist()


def test_an_economy_that_is_too_short_has_a_row_that_says_so_and_the_others_go_on():
    (short,), (whole,) = panel_pairs({"Ardenquay": 1.0}, months=40), panel_pairs({"Belmorrow": 1.0})
    found = panel_scan([short, whole], surrogates=99)
    assert "at least 60 periods, but got 40" in found.pairs[0].refused
    assert math.isnan(found.pairs[0].p_search)
    assert math.isnan(found.p_scan[0])
    assert found.pairs[1].refused == ""
    assert found.p_scan[1] == found.pairs[1].p_search  # one pair is searched, and one is paid for


@pytest.mark.parametrize(
    ("values", "what"),
    [(np.zeros(120), "driver must vary"), (None, "must differ, but they are the same series")],
)
def test_a_pair_that_cannot_be_searched_is_refused_in_its_row(values, what):
    (pair,) = panel_pairs({"Ardenquay": 1.0})
    response = pair.pair.response
    driver = replace(response, name="money") if values is None else replace(response, values=values)
    found = pair_scan(replace(pair, pair=align(driver, response)), surrogates=99)
    assert what in found.refused
    assert found.seed == pair_seed(1, *pair.names)
    assert same(found, refused_scan(replace(pair, pair=align(driver, response)), 1, found.refused))


def test_quarters_are_searched_in_whole_years_of_four():
    period = pd.Period("2001-Q2", "Q")
    rng = np.random.default_rng(5)
    money = rng.standard_normal(83)
    prices = np.roll(money, 2) + 0.5 * rng.standard_normal(83)
    both = align(Series("m", period, money, "rate"), Series("p", period, prices, "rate"))
    pair = PanelPair("Ardenquay", "m", "p", both, range(1, 5), range(-2, 6))
    found = pair_scan(pair, surrogates=99)
    assert (found.shift, found.first) == (2, "2001-Q2")


@pytest.mark.parametrize(
    ("call", "what"),
    [
        (lambda pair: pair_scan(pair, surrogates=0), "surrogates must be 1 or more"),
        (lambda pair: pair_scan(pair, seed=-1), "seed must be 0 or more"),
        (lambda pair: pair_scan(pair, sign="up"), "sign must be any or positive, but got 'up'"),
        (lambda _pair: panel_result([]), "must have at least one pair"),
        (
            lambda _pair: panel_result([PairScan(economy="a", driver="b", response="c")] * 2),
            "must have different names",
        ),
        (lambda _pair: adjusted_p([1.2], "holm"), "p must be from 0 to 1, but got 1.2"),
        (lambda _pair: adjusted_p([0.2], "sidak"), "method must be fdr_bh or holm"),
    ],
)
def test_errors(call, what):
    with pytest.raises(ValueError, match=what):
        call(panel_pairs({"Ardenquay": 1.0})[0])


def test_unrelated_pairs_are_counted_from_large_p_values():
    assert unrelated_pairs([0.001, 0.002, 0.01, 0.4, 0.6]) == 2 / 0.5
    assert unrelated_pairs([0.9, np.nan, 0.8]) == 2.0  # at most the pairs that have a p
    assert unrelated_pairs([0.1, 0.9], above=0.2) == 2.0
    # A planted truth: 600 of 1,000 unrelated, whose p is uniform; 400 far below.
    rng = np.random.default_rng(2)
    guesses = [
        unrelated_pairs(np.concatenate([rng.uniform(size=600), rng.beta(0.2, 20.0, 400)]))
        for _ in range(200)
    ]
    assert np.mean(guesses) == pytest.approx(602, abs=5)  # (1 + 300) / .5
    with pytest.raises(ValueError, match="above must lie within 0 and 1, but got 1"):
        unrelated_pairs([0.5], above=1)
