"""An outlook gathered from a state: path, fan, backtest, vintages, drivers, bad input."""

import re
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from scipy.stats import percentileofscore

from analytics.backtest import backtest
from analytics.backtest_scores import backtest_scores
from analytics.forecasts import AUTOREGRESSION, NO_CHANGE, RELATION
from analytics.outlook import implied_path
from analytics.outlook_target import outlook_target
from analytics.path_intervals import path_fan
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_releases
from app.intake.reading import Release
from app.outlook.answer import outlook_answer
from app.outlook.bridge import EQUAL, WEIGHED, completed_outlook, fans, outlook, waiting_kinds
from app.outlook.exports import VIEWS, csv_export, view_text
from app.outlook.fields import OUTLOOK_VIEWS
from app.outlook.inputs import inputs, past_views, vintages_of
from app.outlook.saying import say
from app.outlook.words import held_words, sentence, verdict
from app.outlook.work import backtest_work
from app.state import ViewState
from app.workspace import Workspace
from tests.app.outlooks import QUICK, economy, release, released
from tests.exported import rows_of


def state_of(query="", **changes):
    state = ViewState.from_query(f"driver=Money&response=Prices&{QUICK}&{query}")
    return replace(state, **changes)


@pytest.fixture(scope="module")
def bridge():
    return Bridge(released(150))


@pytest.fixture(scope="module")
def known(bridge):
    return completed_outlook(state_of(), bridge)


# Numbers -------------------------------------------------------------------------------------


def test_path_and_fan_are_those_of_the_analytics(bridge, known):
    x, y = known.found.driver, known.found.response
    wanted = implied_path(x, y, window=3, shift=6, compounding="log")
    np.testing.assert_array_equal(known.path.yearly, wanted.yearly)
    target = outlook_target("yearly", window=3)
    fan = path_fan(x, y, window=3, shift=6, target=target)
    np.testing.assert_allclose(known.fan.centre, fan.centre, atol=1e-12)
    for level in known.levels:
        np.testing.assert_allclose(known.fan.band(level), fan.band(level), atol=1e-12)
    every = fans(known.found)
    np.testing.assert_allclose(every["window"].centre, wanted.window_mean, atol=1e-12)
    np.testing.assert_allclose(every["single"].centre, wanted.single, atol=1e-12)


def test_the_backtest_in_chunks_is_the_backtest_at_once(known):
    x, y = known.found.driver, known.found.response
    done = backtest(x, y, window=3, shift=6, target=outlook_target("yearly", window=3))
    np.testing.assert_array_equal(known.backtest.forecasts, done.forecasts)
    scores = backtest_scores(done, RELATION)
    np.testing.assert_array_equal(known.scores.ratio, scores.ratio)
    errors = [done.errors(name)[:, 11] for name in (NO_CHANGE, RELATION)]
    both = ~np.isnan(errors[0]) & ~np.isnan(errors[1])
    gain = np.cumsum(errors[0][both] ** 2 - errors[1][both] ** 2)
    np.testing.assert_allclose(known.gain[1], gain, atol=1e-9)


def test_the_planted_lag_is_found_again_at_each_date_and_beats_the_benchmarks(bridge):
    found = completed_outlook(state_of(cells="remade"), bridge)
    assert found.backtest.rechosen
    assert set(found.backtest.shifts.tolist()) <= {5, 6, 7}
    half = found.scores.benchmarks.index(AUTOREGRESSION)
    assert found.scores.ratio[half, 5] < 0.8
    assert verdict(found)[0].startswith("In past forecasts the relation")


def test_moving_the_cell_asks_for_nothing_new_where_the_backtest_chooses_it(bridge):
    remade = state_of(cells="remade")
    keys = [
        backtest_work(replace(remade, window=w, shift=s), bridge).key for w, s in ((3, 6), (5, 9))
    ]
    assert keys[0] == keys[1]
    kept = state_of(cells="kept")
    changed = [
        kept,
        replace(kept, window=5),
        replace(kept, shift=9),
        replace(kept, scheme="rolling"),
        replace(kept, target="single"),
        replace(kept, growth="percent"),
        replace(kept, last="2019-06"),
        remade,
        replace(remade, target="window"),
        replace(remade, target="window", window=5),
        replace(remade, shifts="1:9"),
    ]
    assert len({backtest_work(each, bridge).key for each in changed}) == len(changed)
    same = [kept, replace(kept, against="autoregression"), replace(kept, ahead="half")]
    assert len({backtest_work(each, bridge).key for each in same}) == 1


def test_rates_of_the_percent_formula_compound(bridge):
    state = state_of(growth="percent")
    known = outlook(state, bridge)
    path = known.path
    prices = bridge.workspace.named("Prices").values
    level = prices[-1] * np.cumprod(1 + path.single / 100)
    assert path.yearly[2] == pytest.approx(100 * (level[2] / prices[-10] - 1), abs=1e-9)
    assert "100 × log" not in str(sentence(known))


def test_money_published_a_month_earlier_lengthens_the_path():
    money, prices = economy(150)
    shorter = replace(prices, values=prices.values[:-1])
    later = Bridge(Workspace((Release("a.csv", (money, shorter), ()),)))
    known = outlook(state_of(), later)
    assert (known.found.pair.lead, known.reach) == (1, 7)
    answer = outlook_answer(known, fans(known.found))
    assert [row["period"] for row in answer["path"]][::6] == ["2020-06", "2020-12"]


# Vintages ------------------------------------------------------------------------------------


def test_a_past_date_is_answered_from_the_vintage_of_that_date():
    desk = Workspace()
    for place, (n, revised) in enumerate(((146, 0.01), (147, 0.005), (149, 0.0))):
        desk.add(release(n, revised=revised), f"2020-{place + 3:02d}-12")
    bridge = Bridge(desk)
    found = inputs(state_of(), bridge)
    views = past_views(found, bridge)
    first = found.pair.response.first
    by_period = {str(first + place): day for place, day in views.days.items()}
    assert by_period == {
        "2020-02": "2020-03-12",
        "2020-03": "2020-04-12",
        "2020-04": "2020-05-12",
        "2020-05": "2020-05-12",
    }
    then = vintages_of(found, views, bridge)
    place = pd.Period("2020-03", "M").ordinal - first.ordinal
    driver, response = then(place)
    levels = release(147, revised=0.005).series[1].values
    np.testing.assert_allclose(response, 100 * np.diff(np.log(levels)), atol=1e-9)
    assert response.size == place + 1
    assert driver.size == place + 1
    np.testing.assert_array_equal(then(50)[1], found.response[:51])  # nobody kept that one
    known = completed_outlook(state_of(), bridge)
    assert known.dated == 4
    plain = completed_outlook(state_of(), Bridge(released(149)))
    rows = known.backtest.forecasts[0] != plain.backtest.forecasts[0]
    assert np.flatnonzero(rows.any(axis=1)).tolist() == [
        int(place - known.backtest.origins[0]) for place in sorted(views.days)[:2]
    ]


def test_a_new_vintage_asks_for_a_new_backtest():
    desk = released(140, 141)
    bridge = Bridge(desk)
    key = backtest_work(state_of(), bridge).key
    desk.add(release(141, revised=0.01), "2020-01-20")  # between the two: today's data stay
    assert backtest_work(state_of(), bridge).key != key


# Several drivers -----------------------------------------------------------------------------


def test_drivers_stand_beside_each_other_and_combined():
    money, prices = economy(150)
    rng = np.random.default_rng(9)
    noise = Series("Noise", money.first, 100 * np.exp(rng.standard_normal(150).cumsum() / 100))
    flat = replace(noise, name="Flat", values=np.full(150, 5.0))
    desk = Workspace((Release("a.csv", (money, prices, noise, flat), ()),))
    bridge = Bridge(desk)
    state = state_of(others="Noise|Nothing")
    assert waiting_kinds(outlook(state, bridge), bridge) == ["backtest", "drivers"]
    known = completed_outlook(state, bridge)
    assert waiting_kinds(known, bridge) == []
    lines = {line.name: line for line in known.lines}
    assert list(lines) == ["Money", "Noise", EQUAL, WEIGHED]
    assert "no loaded series is named 'Nothing'" in known.refused["driver Nothing"]
    both = lines["Money"].path + lines["Noise"].path
    np.testing.assert_allclose(lines[EQUAL].path, both / 2, atol=1e-12)
    assert lines["Money"].weight + lines["Noise"].weight == pytest.approx(1.0)
    assert lines["Money"].weight > lines["Noise"].weight
    nearer = lines["Money"].scores.rmse[5], lines["Noise"].scores.rmse[5]
    assert nearer[0] < lines[WEIGHED].scores.rmse[5] < nearer[1]


# What cannot be said -------------------------------------------------------------------------


def desk_of(money, prices):
    return Bridge(Workspace((Release("a.csv", (money, prices), ()),)))


def test_without_a_lead_there_is_no_path_and_the_gap_stands(bridge):
    for shift in (0, -4):
        known = completed_outlook(state_of(shift=shift), bridge, asked={"shift"})
        assert known.path is None
        assert verdict(known) == [
            f"No path: shift must be 1 or more to imply a path, but got {shift}: where the driver"
            " does not lead, its observed periods say nothing about coming ones."
        ]
        assert known.gap is not None
        assert waiting_kinds(known, bridge) == []


def test_a_driver_that_ends_early_shortens_the_path_and_says_so():
    money, prices = economy(150)
    known = outlook(state_of(), desk_of(replace(money, values=money.values[:-2]), prices))
    assert known.reach == 4
    assert "ends in Apr 2020, 2 months before 'Prices'" in known.found.notes[0]
    early = outlook(state_of(), desk_of(replace(money, values=money.values[:-8]), prices))
    assert "must be known to within 5 periods" in early.refused["path"]


def test_an_all_equal_driver_is_refused_in_a_sentence():
    money, prices = economy(150)
    known = outlook(state_of(), desk_of(replace(money, values=np.full(150, 7.0)), prices))
    assert known.path is None
    assert "Money" in known.refused["path"] or "driver" in known.refused["path"]


def test_too_little_history_leaves_the_path_without_intervals_or_backtest():
    desk = Bridge(Workspace((release(45),)))
    known = completed_outlook(state_of(), desk)
    assert known.path is not None
    assert "a backtest must have at least" in known.refused["backtest"]
    assert "Not backtested" in verdict(known)[0]
    assert "no interval" in verdict(known)[-1]


def test_a_break_under_the_path_is_said():
    desk = Workspace((release(150),))
    desk.mark("Money", "2020-02", "before")
    known = outlook(state_of(), Bridge(desk))
    said = " ".join(known.found.notes)
    assert "across the break marked at Feb 2020" in said
    assert "break treated at Feb 2020" in said
    desk.unmark("Money", "2020-02")
    desk.mark("Money", "2012-02", "before")
    assert "across the break" not in " ".join(outlook(state_of(), Bridge(desk)).found.notes)


def test_intervals_that_did_not_hold_carry_what_was_measured(known):
    off = np.full_like(known.fan.measured, 0.1)
    bad = replace(known, fan=replace(known.fan, measured=off))
    assert [held_words(bad, row) for row in range(3)] == [
        "50 %, held 10 %",
        "80 %, held 10 %",
        "95 %, held 10 %",
    ]
    good = np.array(known.levels)[:, None] * np.ones(known.reach)
    fine = replace(known, fan=replace(known.fan, measured=good))
    assert [held_words(fine, row) for row in range(3)] == ["50 %", "80 %", "95 %"]


# The verdict ---------------------------------------------------------------------------------


def test_the_verdict_says_first_where_no_benchmark_is_beaten(known):
    text = verdict(known)
    failed = [
        h
        for h in (3, 6, 12, 24, 36)
        if not known.scores.beats(
            known.scores.benchmarks[int(np.argmin(known.scores.benchmark_rmse[:, h - 1]))], h
        )
    ]
    assert failed
    assert re.search("did not (clearly )?beat its best benchmark at", text[0])
    for h in failed:
        assert f"{h}" in text[0]


def test_a_statement_is_only_made_from_the_newest_print(bridge):
    for past in (state_of(last="2019-06"), state_of(as_of="2020-02-01")):
        with pytest.raises(ValueError, match="must start from the newest print, Jun 2020"):
            say(past, "We knew.", "", bridge)
    with pytest.raises(ValueError, match="by its number, but got 'one'"):
        say(state_of(), "Up.", "one", bridge)


def test_the_invented_economy_has_an_outlook():
    known = outlook(ViewState(), Bridge(Workspace(demo_releases())))
    assert known.reach == 24
    assert sentence(known).endswith("percent in Oct 2027.")


# Files ---------------------------------------------------------------------------------------


def test_every_view_is_a_file_with_its_header_and_numbers(known):
    assert tuple(VIEWS) == OUTLOOK_VIEWS
    for name in VIEWS:
        text = view_text(name, known)
        assert "# state: /outlook?" in text
        assert len({len(row) for row in rows_of(text)}) == 1
    fan = [row for row in rows_of(view_text("fan", known)) if row[0] == "implied"]
    assert float(fan[0][3]) == known.fan.centre[0]
    assert float(fan[5][6]) == known.fan.band(0.8)[0][5]
    table = rows_of(view_text("backtest", known))
    assert float(table[12][2]) == known.scores.rmse[11]
    assert float(table[12][10]) == known.scores.dm[0][11].p_better
    gaps = rows_of(view_text("gap", known))
    wanted = percentileofscore(known.gap.gap, known.gap.gap[-1], kind="weak")
    assert float(gaps[-1][4]) == pytest.approx(wanted)
    with pytest.raises(ValueError, match="view must be one of"):
        view_text("nothing", known)


def test_an_export_does_the_long_work_that_it_needs(bridge):
    query = f"driver=Money&response=Prices&{QUICK}"
    name, text = csv_export("through", query, bridge)
    assert name == "outlook-through-money-prices-2020-06.csv"
    assert len(rows_of(text)) > 50
