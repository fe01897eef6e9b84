"""Evidence: the parts are what analytics says of the pair, and keys hold what they depend on."""

from dataclasses import replace

import numpy as np
import pytest

from analytics.influence import episodes
from analytics.opinions import second_opinions
from analytics.robust import cell_inference
from analytics.search import lag_search
from analytics.shiftset import shift_set
from analytics.stability import rolling_stability
from app.cli import LAG_FIELDS
from app.compute import cell_span
from app.lag import evidence as ev
from app.lag.work import WORK
from tests.app.economies import LAG, planted
from tests.app.evidence_cases import SMALL, STATE, case, fresh, noise, rates, same

TOOLS = {  # of the chosen cell alone: all long work reads every month, and no tool
    "left_out": "2005-01:2005-12",
    "pinned": "2:2",
    "points": "counts",
    "band": "driver",
    "band_place": 40,
    "band_width": 20,
    "peaks": "1",
    "other_responses": "Other",
}
EVERY_CHANGE = {
    "response": "Other",
    "window": 5,
    "shift": 2,
    "growth": "percent",
    "first": "2001-05",
    "last": "2018-02",
    "months": "same",
    "windows": "1:5",
    "shifts": "-5:12",
    "surrogates": 300,
    "seed": 2,
    "without": "2000-03:2001-03",
    "quantity": "slope",
    "as_of": "2100-01-01",
    "season": "stl",
    "meet": "last",
    **TOOLS,
}


# Parts ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize("shift", [LAG, 0, -4])
@pytest.mark.parametrize("first", ["2000-01", "1990Q1"])
def test_the_chosen_cell_is_judged_by_analytics_on_the_values_of_the_pair(shift, months, first):
    bridge = fresh(*planted(first=first))
    state = replace(SMALL, shift=shift, months=months)
    pair, year = bridge.pair(state), 12 if first == "2000-01" else 4
    start, stop = (0, pair.n) if months == "own" else _months_every_cell_has(pair.n, 3, shift)
    sides = pair.driver.values[start:stop], pair.response.values[start:stop]
    options = {"window": 3, "shift": shift, "periods_per_year": year}
    known = ev.evidence(state, bridge)
    same(known.inference, cell_inference(*sides, **options))
    same(known.influence, episodes(*sides, **options))
    assert known.naive_p == bridge.cell(state).p_naive
    assert known.inference.n == bridge.cell(state).n
    assert (known.search, known.shift_set, known.refusal, known.set_refusal) == (None, None, "", "")
    assert known.found is False


def _months_every_cell_has(n, window, shift):
    """By hand, for windows to 6 and shifts -6 to 12: driver months 11 .. n - 13 end a window."""
    first, last = 5 + 6, n - 1 - 12
    used = [t - k for t in (first, last) for k in (0, window - 1)]
    used += [month + shift for month in used]
    return min(used), max(used) + 1


@pytest.mark.parametrize("first", ["2000-01", "1990Q1"])
def test_the_search_and_the_set_are_those_of_analytics(first):
    bridge, state = fresh(*planted(first=first)), replace(SMALL, seed=9)
    known, pair = ev.completed(state, bridge), bridge.pair(state)
    sides = pair.driver.values, pair.response.values
    same(
        known.search,
        lag_search(
            *sides, windows=range(1, 7), shifts=range(-6, 13), surrogates=250, seed=9,
            periods_per_year=12 if first == "2000-01" else 4,
        ),
    )  # fmt: skip
    same(known.shift_set, shift_set(*sides, window=3, shifts=range(-6, 13), seed=9))
    assert known.found
    same(ev.evidence(state, bridge), known)


def test_both_directions_are_two_searches_over_shifts_above_zero():
    bridge = fresh(*planted(lag=-4))
    found, pair = (
        bridge.jobs.complete(ev.directions_work(SMALL, bridge)),
        bridge.pair(SMALL),
    )
    options = {"windows": range(1, 7), "shifts": range(1, 13), "surrogates": 250, "seed": 1}
    driver, response = pair.driver.values, pair.response.values
    same(found.forward, lag_search(driver, response, **options))
    same(found.backward, lag_search(response, driver, **options))
    assert found.backward.best_shift == 4, "the response leads by what was planted"
    assert found.backward.p <= 0.05


def test_other_methods_are_asked_about_the_pair_and_the_other_formula():
    bridge = fresh()
    found, pair = bridge.jobs.complete(ev.opinions_work(SMALL, bridge)), bridge.pair(SMALL)
    sides = pair.driver.values, pair.response.values
    same(
        found,
        second_opinions(
            *sides, window=3, shift=LAG, max_shift=12, periods_per_year=12,
            variants={"percent growth": sides},  # a rate is used as it is, whatever the formula
        ),
    )  # fmt: skip


@pytest.mark.parametrize("months", ["own", "same"])
def test_the_slope_is_followed_over_ten_years(months):
    bridge, state = fresh(), replace(SMALL, months=months, seed=3)
    found, pair = bridge.jobs.complete(ev.stability_work(state, bridge)), bridge.pair(state)
    start, stop = cell_span(pair, state)
    whole = rolling_stability(
        pair.driver.values[start:stop], pair.response.values[start:stop],
        window=3, shift=LAG, span=120, rng=np.random.default_rng(3), periods_per_year=12,
    )  # fmt: skip
    same(found, whole)


@pytest.mark.parametrize(
    ("n", "first", "window", "span"),
    [
        (129, "2000-01", 3, 120),  # 121 pairs
        (128, "2000-01", 3, 60),  # 120 pairs: no ten years that could move
        (80, "2000-01", 3, 36),
        (45, "2000-01", 3, 24),  # 37 pairs
        (240, "2000-01", 70 // 2, 120),
        (130, "2000-01", 30, 60),  # 95 pairs, two windows
        (160, "1980Q1", 3, 40),
    ],
)
def test_the_slope_of_a_short_sample_is_followed_over_half_of_it(n, first, window, span):
    bridge, state = fresh(*planted(n, first=first)), replace(SMALL, window=window)
    state = replace(state, windows="1:1", shifts="0:6")
    assert bridge.jobs.complete(ev.stability_work(state, bridge)).span == span


def test_a_slope_that_cannot_be_followed_is_refused_in_a_sentence():
    bridge, state = fresh(*planted(32)), replace(SMALL, windows="1:3", shifts="0:6")
    with pytest.raises(ValueError, match="must have more than 24 pairs for its"):
        bridge.jobs.complete(ev.stability_work(state, bridge))


def test_an_unrelated_pair_gets_no_shift_set():
    state, bridge, known = case("unrelated")
    assert not known.found
    assert known.search.p > ev.SIGNIFICANT
    assert known.shift_set is None
    assert bridge.jobs.remembered(ev.shift_set_work(state, bridge)) is None


def test_p_after_the_search_is_that_of_the_cell():
    _, _, known = case("leads")
    found = known.search
    for window, shift in ((1, -12), (3, 9), (12, 24), (7, 0)):
        there = found.p_cell[window - 1, shift + 12]
        assert known.p_searched(window, shift) == there
    assert known.p_searched(found.best_window, found.best_shift) == found.p == found.p_cell.min()
    for window, shift in ((13, 9), (0, 9), (3, 25), (3, -13)):
        assert known.p_searched(window, shift) is None
    assert replace(known, search=None).p_searched(3, 9) is None


def test_p_of_an_undefined_cell_is_nan():
    bridge, state = fresh(*planted(70)), replace(STATE, windows="1:12", shifts="-12:40")
    known = ev.completed(state, bridge)
    assert bridge.surface(state).pairs[11, 52] < 24
    assert np.isnan(known.p_searched(12, 40))


@pytest.mark.parametrize(("p", "held"), [(0.05, True), (0.0501, False), (0.001, True), (1, False)])
def test_a_search_holds_up_to_5_percent(p, held):
    known = case("leads")[2]
    assert replace(known, search=replace(known.search, p=p)).found is held


# Refusals ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "why"),
    [
        ("short", "a search must have at least 60 periods, but got 50"),
        ("identical", "driver and response must differ, but they are the same series (r = 1)"),
    ],
)
def test_a_pair_that_cannot_be_searched_is_still_judged_cell_by_cell(name, why):
    state, bridge, known = case(name)
    assert known.refusal == why
    assert (known.search, known.shift_set, known.found) == (None, None, False)
    assert np.isfinite(known.inference.p)
    same(ev.evidence(state, bridge), known)
    with pytest.raises(ValueError, match=why[:30]):
        ev.search_plan_or_refuse(state, bridge)
    with pytest.raises(ValueError, match=why[:30]):
        bridge.jobs.step(ev.search_work(state, bridge))


@pytest.mark.parametrize("n", [59, 60])
def test_sixty_months_are_enough(n):
    bridge = fresh(*planted(n))
    assert bool(ev.evidence(SMALL, bridge).refusal) is (n < 60)


@pytest.mark.parametrize("constant", ["driver", "response"])
def test_a_constant_series_is_refused_in_one_sentence(constant):
    x, _ = noise()
    sides = (np.ones(240), x) if constant == "driver" else (x, np.ones(240))
    bridge = fresh(*rates(*sides))
    for ask in (ev.evidence, ev.completed):
        with pytest.raises(ValueError, match=f"{constant} must vary"):
            ask(SMALL, bridge)
    with pytest.raises(ValueError, match=f"{constant} must vary, but is 1 in every period"):
        bridge.jobs.step(ev.search_work(SMALL, bridge))


def test_a_refused_shift_set_takes_nothing_else_down():
    state, bridge, known = case("exact copy")
    assert known.found
    assert known.shift_set is None
    assert known.set_refusal == "the response must not follow the driver exactly, but r is 1"
    assert known.refusal == ""
    same(ev.evidence(state, bridge), known)


@pytest.mark.parametrize("kind", ["directions", "opinions"])
def test_what_needs_shifts_above_zero_is_refused_without_them(kind):
    bridge, state = fresh(*planted(lag=-4)), replace(SMALL, shift=-4, shifts="-12:0")
    work = WORK[kind](state, bridge)
    assert bridge.jobs.refusal(work) == ""
    with pytest.raises(ValueError, match="the map has no shift above 0"):
        bridge.jobs.complete(work)
    assert bridge.jobs.refusal(work).startswith("the map has no shift above 0")
    assert ev.completed(state, bridge).search.best_shift == -4


# Keys ----------------------------------------------------------------------------------------


def keys(kind, bridge, **changes):
    return WORK[kind](replace(SMALL, **changes), bridge).key


@pytest.mark.parametrize(
    ("kind", "free"),
    [
        ("search", {"window", "shift", "without", "quantity"}),
        ("directions", {"window", "shift", "without", "quantity"}),
        ("shift_set", {"shift", "without", "quantity"}),
        ("opinions", {"without", "quantity"}),
        ("stability", {"without", "quantity"}),
    ],
)
def test_a_key_changes_with_everything_its_work_depends_on(kind, free):
    money, prices = planted()
    bridge = fresh(money, prices, replace(prices, name="Other"))
    whole = keys(kind, bridge)
    assert set(EVERY_CHANGE) | {"driver"} == {*LAG_FIELDS, "quantity"}
    for name, value in EVERY_CHANGE.items():
        assert (keys(kind, bridge, **{name: value}) == whole) is (name in {*free, *TOOLS}), name
    assert keys(kind, bridge, driver="Other") != whole
    other = fresh(*planted(seed=12), replace(prices, name="Other"))
    assert keys(kind, other) != whole, "other data"
    assert keys(kind, fresh(money, prices)) == whole, "equal data and state give an equal key"


def test_kinds_of_work_have_keys_of_their_own():
    money, prices = planted()
    bridge = fresh(money, prices, replace(prices, name="Other"))
    assert len({keys(kind, bridge, other_responses="Prices") for kind in WORK}) == len(WORK) == 6
    one = keys("responses", bridge, other_responses="Prices")
    assert keys("responses", bridge, other_responses="Prices", response="Other", shift=2) == one
    for change in ({"other_responses": "Prices|Other"}, {"window": 5}, {"seed": 2}):
        assert keys("responses", bridge, **{"other_responses": "Prices"} | change) != one


def test_the_cell_chosen_does_not_change_the_search_and_the_window_changes_the_set():
    bridge = fresh()
    first = ev.completed(SMALL, bridge)
    second = ev.completed(replace(SMALL, window=5, shift=2), bridge)
    third = ev.completed(replace(SMALL, shift=2), bridge)
    assert second.search is first.search is third.search
    assert third.shift_set is first.shift_set
    assert (first.shift_set.window, second.shift_set.window) == (3, 5)
