"""The verdict: every number is a result's, and the sentences read as sentences."""

import re
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.persistence import STRONG, persistence_shift
from analytics.series import Series, period_label
from app.compute import Bridge, noun
from app.intake.reading import Release
from app.lag.evidence import completed, evidence
from app.lag.verdict import effective_words, fragility, verdict
from app.state import ViewState
from app.words import MINUS, p_words, percent, plain, runs_words, shift_words, signed
from app.workspace import Workspace
from tests.app.evidence_cases import CASES, STEP, case
from tests.bench.calibration_series import one_series


def said(name, known=None, **changes):
    state, bridge, found = case(name, **changes)
    return " ".join(verdict(known or found, bridge.pair(state), state))


def numbers_of(known, pair, state):
    """Every number that the results have, as it may be written."""
    found, chosen, judged = known.search, known.shift_set, known.inference
    cause = known.influence.episodes[known.influence.cause]
    start = 0  # of the sample, where each cell has all its months
    written = [
        f"window {state.window}",
        f"Window {state.window}",
        runs_words([state.shift]),
        p_words(known.naive_p),
        p_words(judged.p),
        plain(judged.slope),
        *(plain(end) for end in judged.slope_interval),
        percent(cause.change),
        p_words(known.influence.p),
        p_words(cause.p_without),
        period_label(pair.periods[start + cause.first_month]),
        period_label(pair.periods[start + cause.stop_month - 1]),
    ]
    if found is not None:
        written += [
            f"windows {found.windows[0]} to {found.windows[-1]}",
            f"shifts {runs_words([found.shifts[0]])} to {runs_words([found.shifts[-1]])}",
            f"window {found.best_window}",
            f"shift {runs_words([found.best_shift])}",
            signed(found.best_correlation),
            p_words(found.p),
            p_words(known.p_searched(state.window, state.shift)),
            *(period_label(pair.periods[k]) for k in found.driver_steps + found.response_steps),
        ]
        if found.p_with_level_shifts is not None:
            written.append(p_words(found.p_with_level_shifts))
    if chosen is not None:
        written += [runs_words(chosen.shifts.tolist()), f"{100 * chosen.level:.0f} %"]
    return [*written, known.refusal, known.set_refusal]


# How it reads --------------------------------------------------------------------------------


@pytest.mark.parametrize("name", list(CASES))
def test_it_reads_as_sentences(name):
    state, bridge, known = case(name)
    sentences = verdict(known, bridge.pair(state), state)
    assert 2 <= len(sentences) <= 6
    for sentence in sentences:
        assert re.match(r"[A-Z]", sentence)
        assert sentence.endswith(".")
        assert not sentence.endswith("..")
        assert "  " not in sentence
        assert "\n" not in sentence
        assert not re.search(r" [.,:;](?!\d)|-\d", sentence), "a space too many or no true minus"
        assert sentence.count("(") == sentence.count(")")
        for word in ("nan", "None", "undefined", "inf", "array", "+0 month"):
            assert not re.search(rf"(?<!\w){re.escape(word)}(?!\w)", sentence)


@pytest.mark.parametrize("name", list(CASES))
def test_every_number_in_it_is_one_of_the_results(name):
    state, bridge, known = case(name)
    text = " ".join(verdict(known, bridge.pair(state), state))
    for written in sorted(numbers_of(known, bridge.pair(state), state), key=len, reverse=True):
        if written:
            text = re.sub(rf"(?<![\d.]){re.escape(written)}(?![\d])", "", text)
    assert not re.search(r"\d", text), text


@pytest.mark.parametrize("name", list(CASES))
def test_nothing_is_called_significant_and_p_says_against_what(name):
    text = said(name)
    assert "significant" not in text
    assert "*" not in text
    known = case(name)[2]
    if known.search is not None:
        first = text.split(". ")[0]
        assert "search-adjusted" in first
        assert "unrelated driver" in first
    if known.found:
        assert "not a cause" in text


# What it says --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("leads", ["Money has led Prices: ", "shift +9 months stands out most"]),
        ("follows", ["Money has followed Prices: ", f"shift {MINUS}7 months stands out most"]),
        ("moves with", ["Money has moved with Prices: ", "shift 0 months stands out most"]),
        ("opposite", ["Money has led Prices, in the opposite direction: ", f"correlation {MINUS}"]),
        ("quarterly", ["has led", "shift +6 quarters", f"shifts {MINUS}12 to +24 quarters"]),
        ("quarterly, follows", ["has followed", f"shift {MINUS}3 quarters"]),
        ("annual", ["has led", "shift +2 years", "to +5 years"]),
    ],
)
def test_a_planted_lag_is_said_with_its_direction_and_calendar(name, words):
    text = said(name)
    for each in words:
        assert each in text
    unit = noun(case(name)[1].pair(case(name)[0]))
    for other in {"month", "quarter", "year"} - {unit}:
        assert other not in text


@pytest.mark.parametrize(("lag", "name"), [(9, "leads"), (-7, "follows"), (0, "moves with")])
def test_the_shift_set_of_a_strong_lag_is_said_to_be_one_shift(lag, name):
    assert case(name)[2].shift_set.shifts.tolist() == [lag]
    assert (
        f"At window 3 the data tell a shift of {shift_words(lag, 'month')} apart from every other"
        " (95 % shift set)."
    ) in said(name)


def test_the_shift_set_of_a_faint_lag_is_said_in_full():
    known = case("faint")[2]
    assert known.shift_set.identified
    assert len(known.shift_set.shifts) > 1
    runs = runs_words(known.shift_set.shifts.tolist())
    assert f"At window 3 the data cannot tell shifts {runs} months apart" in said("faint")


def test_no_relation_is_said_to_be_none():
    known = case("unrelated")[2]
    text = said("unrelated")
    assert text.startswith("The search found nothing that an unrelated driver would not: ")
    assert f"its search-adjusted p is {p_words(known.search.p)}." in text
    for word in ("led", "followed", "moved with", "shift set", "one-episode", "cause"):
        assert word not in text
    assert "is not supported" in text
    assert text.endswith(f"where the naive p is {p_words(known.naive_p)}.")


def test_shifts_of_level_are_named_with_their_month_and_the_p_with_them():
    known = case("both shifted")[2]
    assert known.search.driver_steps == known.search.response_steps == (STEP,)
    text = said("both shifted")
    assert text.startswith("The search found nothing")
    assert "level shifts removed, the cell at window" in text
    assert "Both series have shifts of level (driver from Jan 2010; response from Jan 2010)" in text
    assert f"with them left in, p would be {p_words(known.search.p_with_level_shifts)}." in text
    assert known.search.p_with_level_shifts <= 0.05 < known.search.p


def test_evened_spreads_are_said():
    state, bridge, known = case("both shifted")
    other = replace(known, search=replace(known.search, spreads_evened=True))
    text = " ".join(verdict(other, bridge.pair(state), state))
    assert "Both series have shifts of level or of spread (driver" in text


def test_a_chosen_cell_that_the_search_does_not_support_is_said_to_be_so():
    state, _, known = case("chosen elsewhere")
    assert known.found
    place = known.p_searched(state.window, state.shift)
    assert place > 0.05
    assert (
        f"The chosen cell, window 3 and shift {MINUS}5 months, is not supported: after the search"
        f" its p is {p_words(place)}, where the naive p is {p_words(known.naive_p)}."
    ) in said("chosen elsewhere")
    assert "not supported" not in said("leads")


def test_a_chosen_cell_outside_the_cells_searched_is_said_to_be_so():
    text = said("unrelated", window=20)
    assert "The chosen cell, window 20 and shift +6 months, lies outside the cells" in text


@pytest.mark.parametrize(
    ("name", "why"),
    [
        ("short", "a search must have at least 60 periods, but got 50"),
        ("identical", "driver and response must differ, but they are the same series (r = 1)"),
    ],
)
def test_a_refused_search_is_said_with_what_is_left(name, why):
    state, _, known = case(name)
    judged = known.inference
    low, high = judged.slope_interval
    assert said(name) == (
        f"There is no search here: {why}. Window {state.window}, shift +6 months, as if it were"
        f" the only cell looked at: slope {plain(judged.slope)} ({plain(low)} to {plain(high)}),"
        f" p {p_words(judged.p)}."
    )


def test_a_refused_shift_set_leaves_the_rest_standing():
    known = case("exact copy")[2]
    assert known.found
    assert known.shift_set is None
    text = said("exact copy")
    assert text.startswith("Money has led Prices: ")
    assert "There is no shift set at window 3: the response must not follow the driver" in text


def test_before_the_search_it_says_so():
    state, bridge, _ = case("leads", seed=77)
    from app.compute import Bridge
    from tests.app.economies import planted, workspace

    fresh = Bridge(workspace(*planted(lag=9)))
    text = " ".join(verdict(evidence(state, fresh), fresh.pair(state), state))
    assert text.startswith("Not searched yet: ")
    assert "as if it were the only cell looked at" in text
    assert bridge is not fresh
    assert "led" not in text


def test_while_the_set_is_worked_out_it_says_so():
    state, bridge, known = case("leads")
    text = " ".join(verdict(replace(known, shift_set=None), bridge.pair(state), state))
    assert "Which shifts fit as well at window 3 is being worked out." in text


def test_a_set_over_more_than_half_of_the_range_is_not_identified():
    state, bridge, known = case("faint")
    wide = replace(known.shift_set, shifts=np.array([-10, 5, 6, 20]), identified=False)
    text = " ".join(verdict(replace(known, shift_set=wide), bridge.pair(state), state))
    assert (
        f"At window 3 the lag is not identified: the 95 % shift set is {MINUS}10, +5 to +6, +20"
        " months, which reaches over more than half of the range."
    ) in text


# What it rests on ----------------------------------------------------------------------------


def test_a_one_episode_result_is_called_one_with_its_months():
    state, bridge, known = case("one event")
    influence = known.influence
    cause, periods = influence.episodes[influence.cause], bridge.pair(state).periods
    assert influence.band == "one-episode result"
    first, last = cause.first_month, cause.stop_month - 1
    assert first <= 90 <= last, "the event that was planted"
    assert fragility(known, bridge.pair(state), state) == (
        f"The chosen cell is a one-episode result: removing {period_label(periods[first])} to"
        f" {period_label(periods[last])} changes the slope by {percent(cause.change)}"
        f" (per-cell p {p_words(influence.p)} to {p_words(cause.p_without)})."
    )


def test_too_few_months_left_are_said_instead_of_a_change():
    state, bridge, known = case("few left")
    cause = known.influence.episodes[known.influence.cause]
    assert cause.too_few_left
    text = fragility(known, bridge.pair(state), state)
    assert text.endswith("too few months are left to fit a line to.")
    assert "%" not in text


@pytest.mark.parametrize(
    ("band", "words"),
    [
        ("spread over history", "The chosen cell is spread over history: "),
        ("leans on one episode", "The chosen cell leans on one episode: "),
        ("one-episode result", "The chosen cell is a one-episode result: "),
    ],
)
def test_each_band_has_its_words(band, words):
    state, bridge, known = case("leads")
    other = replace(known, influence=replace(known.influence, band=band))
    assert fragility(other, bridge.pair(state), state).startswith(words)


def test_episodes_are_dated_by_the_calendar_of_the_same_months():
    """The cut sample starts later; dates must count from its start."""
    state, bridge, known = case("one event", months="same")
    pair = bridge.pair(state)
    text = fragility(known, pair, state)
    cause = known.influence.episodes[known.influence.cause]
    found = re.search(r"removing (\w{3} \d{4}) to (\w{3} \d{4})", text)
    labels = [period_label(p) for p in pair.periods]
    first, last = labels.index(found[1]), labels.index(found[2])
    assert last - first == cause.stop_month - cause.first_month - 1
    assert first <= 90 <= last, "the event that was planted"
    cell = bridge.cell(state)
    driver = pair.driver.values
    mean = driver[first - 11 : first + 1].mean()
    assert np.min(np.abs(cell.driver - mean)) < 1e-12, "its first month is a month of the cell"


# Numbers follow the result -------------------------------------------------------------------


def test_each_number_of_the_search_is_taken_from_the_result():
    state, bridge, known = case("leads")
    pair = bridge.pair(state)
    before = verdict(known, pair, state)[0]
    for changes, words in (
        ({"p": 0.0321}, "with probability .03 ("),
        ({"best_window": 11}, "window 11 and shift"),
        ({"best_shift": 17}, "shift +17 months stands"),
        ({"best_shift": -17}, f"followed Prices: of windows 1 to 12 and shifts {MINUS}12"),
        ({"best_correlation": -0.456}, f"correlation {MINUS}0.46"),
        ({"windows": np.arange(2, 34)}, "of windows 2 to 33 and"),
        ({"shifts": np.arange(-8, 44)}, f"shifts {MINUS}8 to +43 months"),
        ({"p": 0.21}, "search-adjusted p is .21."),
    ):
        assert words not in before
        other = replace(known, search=replace(known.search, **changes))
        assert words in verdict(other, pair, state)[0]


def test_each_number_of_the_chosen_cell_is_taken_from_the_result():
    state, bridge, known = case("one event")
    pair, cause = bridge.pair(state), known.influence.cause
    before = fragility(known, pair, state)
    for changes, words in (({"change": 0.27}, "+27 %"), ({"p_without": 0.431}, "to .43)")):
        assert words not in before
        parts = list(known.influence.episodes)
        parts[cause] = replace(parts[cause], **changes)
        other = replace(known, influence=replace(known.influence, episodes=tuple(parts)))
        assert words in fragility(other, pair, state)
    other = replace(known, influence=replace(known.influence, p=0.0673))
    assert "(per-cell p .07 to" in fragility(other, pair, state)
    text = " ".join(verdict(replace(known, naive_p=0.0333), pair, state))
    assert "where the naive p is .03." in text


def test_the_search_of_another_seed_gives_its_own_p():
    given = set()
    for seed in (1, 2, 3):
        known = case("unrelated", seed=seed)[2]
        assert f"search-adjusted p is {p_words(known.search.p)}." in said("unrelated", seed=seed)
        given.add(known.search.p)
    assert len(given) > 1


def test_the_verdict_of_the_command_and_of_the_page_is_one():
    state, bridge, known = case("leads")
    again = completed(state, bridge)
    assert verdict(again, bridge.pair(state), state) == verdict(known, bridge.pair(state), state)


@pytest.mark.parametrize(
    ("n", "effective", "unit", "words"),
    [
        (766, 22.7, "month", "766 months behave like 23 independent ones"),
        (60, 3.1, "quarter", "60 quarters behave like 3 independent ones"),
        (30, 2.2, "year", "30 years behave like 3 independent ones"),
    ],
)
def test_effective_months_in_words(n, effective, unit, words):
    assert effective_words(n, effective, unit) == words


def test_series_of_two_regimes_are_warned_of_and_steady_ones_are_not():
    months = pd.Period("1960-01", "M")
    for shape, warned in (("two-regime persistence", True), ("AR .5", False)):
        values = [one_series(shape, np.random.default_rng(seed), 760) for seed in (11, 12)]
        pair = [
            Series(name, months, side, kind="rate")
            for name, side in zip(("Money", "Prices"), values, strict=True)
        ]
        here = Bridge(Workspace((Release("pair.csv", tuple(pair), ()),)))
        state = ViewState(driver="Money", response="Prices", surrogates=39)
        text = " ".join(verdict(completed(state, here), here.pair(state), state))
        assert ("Take this p with care" in text) is warned
        if warned:
            assert min(persistence_shift(side).strength for side in values) > STRONG
            found = completed(state, here).regimes
            assert found is not None
            for shift in found:
                assert f"{shift.before:.2f} to {shift.after:.2f}".replace("-", "−") in text
