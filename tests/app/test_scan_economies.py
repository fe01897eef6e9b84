"""Which economy a series belongs to, which pairs there are, and what is said of the rest."""

import json
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.panel import pair_scan
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_panel, demo_releases
from app.intake.reading import Release
from app.lag.answer import answer as lag_answer
from app.lag.evidence import completed
from app.pages.lag import view
from app.scan.answer import scan_answer
from app.scan.bridge import draws, question, scan, scan_work
from app.scan.economies import economy_of, roles, series_name
from app.scan.league import lag_address, league, named_economies, shift_bins
from app.scan.words import enough_draws, notes, pair_words, sentence, verdict
from app.state import StateError, ViewState
from app.workspace import Workspace
from tests.app.panels import SMALL, panel_series, panel_workspace

STATE = replace(ViewState(), **SMALL)
SLOPES = {"Ardenquay": 1.0, "Belmorrow": 0.0, "Corvessa": 0.6, "Dunmarrel": 0.0, "Elquire": 0.8}


def scanned(state, bridge):
    bridge.jobs.complete(scan_work(state, bridge))
    return scan(state, bridge)


@pytest.fixture(scope="module")
def bridge():
    return Bridge(panel_workspace(SLOPES))


@pytest.fixture(scope="module")
def known(bridge):
    return scanned(STATE, bridge)


# The rule ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "parts"),
    [
        ("Abrisund: Broad money", ("Abrisund", "Broad money")),
        ("Broad money", ("", "Broad money")),
        ("Abrisund: Money: M2", ("Abrisund", "Money: M2")),
        ("Ratio 3:1 of money", ("", "Ratio 3:1 of money")),
        (": money", ("", ": money")),
        ("Abrisund: ", ("", "Abrisund: ")),
    ],
)
def test_the_economy_stands_before_the_first_colon_and_space(name, parts):
    assert economy_of(name) == parts
    assert series_name(*parts) == name


def test_each_driver_meets_each_response_of_its_own_economy():
    names = ["A: M2", "A: Broad money", "A: CPI", "B: CPI", "B: M2", "C: CPI", "Broad money"]
    found = roles(names)
    assert found.pairs == (
        ("A", "M2", "CPI"),
        ("A", "Broad money", "CPI"),
        ("B", "M2", "CPI"),
    )
    assert (found.economies, found.lacking) == (2, ("C", ""))


def test_named_roles_are_taken_whatever_they_sound_like():
    names = ["A: Credit", "A: Wages", "B: credit", "B: Wages"]
    with pytest.raises(StateError, match="no economy in the files has both"):
        roles(names)
    assert roles(names, "Credit", "wages").pairs == (
        ("A", "Credit", "Wages"),
        ("B", "credit", "Wages"),
    )
    with pytest.raises(StateError, match=r"Drivers must be names of series .* but got 'Debt'"):
        roles(names, "Debt", "Wages")


def test_the_bundled_panel_has_one_pair_an_economy():
    asked = question(STATE, Bridge(Workspace((demo_panel(),))))
    assert len(asked.pairs) == asked.roles.economies == 30
    assert asked.roles.drivers == ("Broad money",)
    assert {one.first for one in asked.averages} == {"1986-12"}


def test_the_invented_economy_alone_has_a_few_pairs():
    asked = question(STATE, Bridge(Workspace(placeholder=demo_releases())))
    assert [pair.names[1:] for pair in asked.pairs] == [
        ("Broad money", "Consumer prices"),
        ("Broad money", "Consumer prices, adjusted"),
        ("Narrow money", "Consumer prices"),
        ("Narrow money", "Consumer prices, adjusted"),
    ]
    assert pair_words(asked.pairs[0], asked) == "Broad money → Consumer prices"


# What comes of it ----------------------------------------------------------------------------


def test_a_scan_is_its_pairs_one_by_one(known):
    for pair, found in zip(known.question.pairs, known.panel.pairs, strict=True):
        assert repr(pair_scan(pair, **draws(STATE))) == repr(found)


def test_the_lag_page_gives_the_same_p_at_the_address_of_the_row(known, bridge):
    found = known.panel.pairs[2]
    state = ViewState.from_query(lag_address(found, STATE).partition("?")[2])
    shown = view(state, bridge, asked=set())
    alone = lag_answer(shown, completed(shown.state, bridge))
    assert alone["search"]["p"] == found.p_search
    assert alone["best"]["window"] == alone["cell"]["window"] == found.window
    assert alone["best"]["shift"] == alone["cell"]["shift"] == found.shift
    assert alone["cell"]["correlation"] == pytest.approx(found.correlation, abs=1e-12)
    assert alone["shift_set"]["shifts"] == list(found.shift_set)


def test_the_words_have_the_numbers_of_the_result(known):
    assert verdict(known).startswith(
        "3 of 5 pairs hold at 5 % once all of them are paid for (Benjamini-Hochberg):"
        " Ardenquay +5, Corvessa +5, Elquire +5."
    )
    assert "5 pairs of 5 economies, windows 1 to 4 and shifts −2 to +8 months" in sentence(
        known.question
    )
    assert notes(known) == []
    few = replace(known.question, state=replace(STATE, surrogates=19))
    assert "held against 5 pairs, Holm can find none" in notes(replace(known, question=few))[0]


@pytest.mark.parametrize("pairs", [1, 2, 30, 1200])
def test_from_enough_draws_on_one_pair_alone_can_hold(pairs):
    draws = enough_draws(pairs)
    assert pairs / (draws + 1) <= 0.05 < pairs / draws


def test_an_economy_that_is_too_short_says_so_and_the_scan_goes_on():
    series = (*panel_series({"Ardenquay": 1.0}), *panel_series({"Belmorrow": 1.0}, months=9))
    bridge = Bridge(Workspace((Release("p.csv", series, ()),)))
    known = scanned(replace(STATE, windows=""), bridge)
    whole, short = known.panel.pairs
    assert whole.p_search == 0.01
    assert "the sample must have at least 24 months" in short.refused
    assert "1 pair could not be searched" in verdict(known)
    answer = scan_answer(known)["pairs"][1]
    assert (answer["p_search"], answer["p_scan"], answer["window"]) == (None, None, None)
    json.dumps(scan_answer(known), allow_nan=False)
    assert [one.economy for one in known.question.averages] == ["Ardenquay"]


def test_a_series_with_a_gap_is_refused_in_its_row():
    money, prices = panel_series({"Ardenquay": 1.0})
    values = np.array(prices.values)
    values[50] = np.nan
    series = (money, replace(prices, values=values), *panel_series({"Belmorrow": 1.0}))
    known = scanned(STATE, Bridge(Workspace((Release("p.csv", series, ()),))))
    assert "Mar 2005 is missing" in known.panel.pairs[0].refused
    assert not known.panel.pairs[1].refused


def test_a_rate_is_averaged_as_it_is():
    period = pd.Period("2001-01", "M")
    rate = Series("Ardenquay: Inflation rate", period, np.linspace(2, 4, 121), kind="rate")
    money, _ = panel_series({"Ardenquay": 1.0})
    state = replace(STATE, responses="Inflation rate")
    asked = question(state, Bridge(Workspace((Release("p.csv", (money, rate), ()),))))
    (average,) = asked.averages
    # The common periods are the 120 from the second on.
    assert average.response == pytest.approx(np.linspace(2, 4, 121)[1:].mean())
    whole = 100 * np.log(money.values[-1] / money.values[0]) / 10
    assert average.driver == pytest.approx(whole)


# The table -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("order", "value", "turned"),
    [
        ("economy-down", lambda row: row.scan.economy, True),
        ("correlation-up", lambda row: row.scan.correlation, False),
        ("p_search-up", lambda row: row.scan.p_search, False),
        ("p_holm-down", lambda row: row.p_holm, True),
        ("share-up", lambda row: row.scan.share, False),
        ("shift-up", lambda row: row.scan.shift, False),
    ],
)
def test_the_table_is_ordered_as_asked(known, order, value, turned):
    state = replace(known.question.state, league=order)
    rows = league(replace(known, question=replace(known.question, state=state)))
    found = [value(row) for row in rows]
    assert found == sorted(found, reverse=turned)
    assert len(found) == 5


def test_among_equal_p_the_strongest_stands_first(known):
    first, second, third, *_ = league(known)
    assert first.scan.p_search == second.scan.p_search == third.scan.p_search == 0.01
    strength = [abs(row.scan.correlation) for row in (first, second, third)]
    assert strength == sorted(strength, reverse=True)


def test_bins_count_every_searched_pair_once(known):
    width, bins, span = shift_bins(known)
    assert (width, span) == (3, (-2, 8))
    assert sum(held for _, held, _ in bins) == 3
    assert sum(held + other for _, held, other in bins) == 5
    assert [middle for middle, held, _ in bins if held] == [6.0]  # shift 5 lies in 5, 6 and 7


def test_few_economies_are_all_named_and_of_many_the_outer_ones(known):
    assert named_economies(known.averages) == tuple(SLOPES)
