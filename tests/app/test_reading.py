"""A print gathered from a state: numbers, history, and what bad data leaves standing."""

from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from scipy.stats import percentileofscore

from analytics.goodness import goodness_of_fit
from analytics.rates import growth_rate
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_releases
from app.intake.reading import Release
from app.reading.answer import reading_answer
from app.reading.bridge import chosen_series, completed_reading, goodness_work, reading
from app.reading.words import of_hundred, quantities, sentence, verdict
from app.state import ViewState
from app.workspace import Workspace
from tests.app.economies import workspace

KEYS = {
    "period",
    "rate_1m",
    "rate_3m_annualised",
    "rate_6m_annualised",
    "rate_12m",
    "rank_percent",
    "rank_kind",
    "n",
    "laplace",
    "fits",
    "base_effect",
    "carry_over",
    "alerts",
    "frequency",
}


def walk(n=240, seed=1):
    return 100 * np.exp(np.cumsum(np.random.default_rng(seed).laplace(0.3, 0.3, n)) / 100)


def prices(values, name="Prices", first="2000-01", freq="M", **fields):
    return Series(name, pd.Period(first, freq), values, **fields)


def with_values(**changes):
    values = walk()
    for place, value in changes.items():
        values[int(place[1:])] = value
    return prices(values)


def known_of(series, **fields):
    bridge = Bridge(workspace(series))
    return reading(ViewState(series=series.name, draws=99, **fields), bridge)


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


# The print and its history -------------------------------------------------------------------


def test_the_price_index_is_read_where_none_is_named(bridge):
    known = reading(ViewState(), bridge)
    assert known.series.name == "Consumer prices"
    assert chosen_series(ViewState(series="Broad money"), bridge).name == "Broad money"


def test_a_print_of_the_past_knows_nothing_of_what_came_later(bridge):
    past = reading(ViewState(newest="1973-07"), bridge)
    whole = bridge.in_view(ViewState()).named("Consumer prices")
    cut = whole.between(None, pd.Period("1973-07", "M"))
    alone = known_of(replace(cut, name="Cut"))
    assert past.series.last == pd.Period("1973-07", "M")
    assert past.rates["percent"] == alone.rates["percent"]
    assert past.standing.rank == alone.standing.rank
    assert past.fits["laplace"].parameters == alone.fits["laplace"].parameters
    assert past.carried == alone.carried


@pytest.mark.parametrize(
    ("among", "pick"),
    [
        ("all", slice(None)),
        ("prior", slice(None, -1)),
        ("rolling", slice(-60, None)),
        ("since", slice(99, None)),
        ("season", slice(10, None, 12)),
    ],
)
def test_the_print_is_compared_with_the_history_chosen(among, pick):
    # 240 months from Jan 2000 to Dec 2019: rates from Feb 2000 on, so place 99 is May 2008 and
    # the Decembers begin at place 10.
    series = prices(walk())
    rates = growth_rate(series, formula="percent").values
    known = known_of(series, among=among, rank_window=60, since="2008-05")
    np.testing.assert_array_equal(known.sample, rates[pick])
    for kind in ("mean", "weak", "strict"):
        slow = percentileofscore(rates[pick], rates[-1], kind=kind)
        assert known.ranks[kind] == pytest.approx(slow, abs=1e-10)
    assert known.earlier.n == 238
    assert known.earlier.below == np.count_nonzero(rates[:-1] < rates[-1])


@pytest.mark.parametrize(
    ("measure", "span", "annualised"),
    [("1m", 1, False), ("3m", 3, True), ("6m", 6, True), ("12m", 12, False)],
)
def test_the_rate_chosen_is_ranked(measure, span, annualised):
    series = prices(walk())
    judged = growth_rate(series, span=span, formula="percent", annualised=annualised)
    assert known_of(series, measure=measure).print_value == judged.values[-1]


def test_quarters_count_as_three_months():
    series = prices(walk(120), first="1990Q1", freq="Q")
    answer = reading_answer(known_of(series), ())
    p = series.values
    assert answer["frequency"] == "quarterly"
    assert answer["rate_1m"] == pytest.approx(100 * (p[-1] / p[-2] - 1), abs=1e-12)
    assert answer["rate_3m_annualised"] == pytest.approx(100 * ((p[-1] / p[-2]) ** 4 - 1), abs=1e-9)
    assert answer["rate_12m"] == pytest.approx(100 * (p[-1] / p[-5] - 1), abs=1e-12)
    assert answer["period"] == "2019-Q4"


def test_cumulative_change_counts_from_the_month_chosen():
    series = prices(walk())
    known = known_of(series, since="2010-01")
    assert known.factor.values[-1] == pytest.approx(series.values[-1] / series.values[120])


def test_episodes_lie_above_a_rank_or_a_level():
    by_rank, by_level = (known_of(prices(walk()), beyond=b, level=5) for b in ("rank", "level"))
    assert by_rank.mark == pytest.approx(np.quantile(by_rank.yearly.values, 0.9))
    assert by_level.mark == 5.0
    assert by_rank.runs


# The test of the fit -------------------------------------------------------------------------


def test_the_test_of_the_fit_is_the_one_of_analytics(bridge):
    state = ViewState(draws=199, seed=3)
    known = completed_reading(state, bridge)
    judged = goodness_of_fit(known.sample, family="laplace", draws=199, seed=3)
    assert known.goodness.p_anderson_darling == judged.p_anderson_darling
    assert known.fitted is not None


def test_no_long_work_is_done_before_it_is_asked_for(bridge):
    state = ViewState(draws=101)
    assert reading(state, bridge).goodness is None
    work = goodness_work(state, bridge)
    steps = 0
    while (progress := bridge.jobs.step(work)).result is None:
        steps += 1
    assert (steps, progress.total) == (2, 3)  # 50, 50 and 1 draws
    assert reading(state, bridge).goodness is not None


@pytest.mark.parametrize(
    ("field", "value", "same"),
    [
        ("coming", 1, True),
        ("rank_kind", "weak", True),
        ("split", "1990", True),
        ("level", 7, True),
        ("driver", "Narrow money", True),
        ("family", "normal", False),
        ("draws", 300, False),
        ("seed", 2, False),
        ("among", "prior", False),
        ("measure", "12m", False),
        ("formula", "log", False),
        ("newest", "2001-05", False),
        ("series", "Broad money", False),
    ],
)
def test_the_test_is_done_again_exactly_where_it_would_differ(bridge, field, value, same):
    usual = goodness_work(ViewState(), bridge).key
    assert (goodness_work(ViewState(**{field: value}), bridge).key == usual) == same


# Bad data ------------------------------------------------------------------------------------


def test_values_at_or_below_zero_are_left_out_and_named():
    known = known_of(with_values(_50=0.0, _60=-3.0))
    assert "2 values of Prices at or below zero (the first in Mar 2004)" in known.notes[0]
    assert known.rates["percent"].year == pytest.approx(
        known_of(prices(walk())).rates["percent"].year
    )
    assert known.fits


def test_a_print_of_zero_gives_way_to_the_month_before():
    known = known_of(with_values(_239=0.0))
    assert known.series.last == pd.Period("2019-11", "M")
    assert any("Nov 2019 is read" in note for note in known.notes)


def test_a_series_without_any_value_above_zero_is_refused():
    with pytest.raises(ValueError, match="must have a value above zero"):
        known_of(prices(-walk()))


def test_equal_months_have_ranks_and_rates_and_no_distribution():
    known = known_of(prices(np.full(100, 100.0)))
    assert known.standing.rank == 50.0
    assert known.rates["percent"].year == 0.0
    assert not known.fits
    assert "values must vary" in known.refused["distribution"]
    assert (
        sentence(known)
        == "Prices did not change in Apr 2008, the same as in all 98 earlier months."
    )
    assert "−0.00" not in " ".join(verdict(known))


def test_eleven_months_have_a_one_month_rate_and_say_what_is_missing():
    known = completed_reading(ViewState(series="Prices"), Bridge(workspace(prices(walk(11)))))
    assert quantities(known)["rate_1m"] == pytest.approx(100 * (walk(11)[-1] / walk(11)[-2] - 1))
    assert known.standing is not None
    assert known.path is not None
    assert known.refused["12-month rate"] == (
        "a rate over 12 months needs 13 months, but 'Prices' has 11 up to the print"
    )
    for part in ("distribution", "base effect", "drop-outs", "rank through time"):
        assert part in known.refused


def test_a_gap_a_year_before_the_print_takes_the_yearly_rate_only():
    known = known_of(with_values(_227=np.nan))
    assert known.yearly is None
    assert "missing" in known.refused["12-month rate"]
    assert known.rates["percent"].half_annualised == pytest.approx(
        100 * ((walk()[-1] / walk()[-7]) ** 2 - 1)
    )
    assert known.fits


def test_a_rate_is_ranked_as_it_is():
    series = prices(np.random.default_rng(2).normal(size=60), kind="rate")
    known = known_of(series)
    answer = reading_answer(known, ())
    assert answer["rate_1m"] == series.values[-1]
    assert answer["rate_12m"] != answer["rate_12m"]  # nan, null in JSON
    assert answer["base_effect"] is answer["carry_over"] is answer["what_if"] is None
    assert known.fits


def test_a_month_asked_for_that_is_not_there_is_named(bridge):
    known = reading(ViewState(newest="2030-01"), bridge)
    assert known.notes == ("There is no value for Jan 2030; Oct 2026 is read.",)
    with pytest.raises(ValueError, match="no value in the sample"):
        reading(ViewState(newest="1950-01"), bridge)
    known = reading(ViewState(since="2030-01", among="since"), bridge)
    assert "must come before the print" in known.refused["rank"]
    assert known.base is not None


@pytest.mark.parametrize("n", [1, 2, 3, 13, 14, 25])
def test_any_length_is_answered(n):
    known = completed_reading(ViewState(series="Prices"), Bridge(workspace(prices(walk(n)))))
    answer = reading_answer(known, ())
    assert answer["period"]
    assert sentence(known).endswith(".")


# Words ---------------------------------------------------------------------------------------


def test_the_headline_counts_earlier_months_below(bridge):
    known = reading(ViewState(), bridge)
    share = round(100 * known.earlier.below / known.earlier.n)
    assert sentence(known) == (
        f"Consumer prices rose 0.07 percent in Oct 2026, higher than {share} of every 100 earlier"
        " months."
    )


def test_the_verdict_splits_the_change_exactly(bridge):
    known = reading(ViewState(), bridge)
    said = verdict(known)[0]
    assert f"{known.base.change[-1]:.2f}".lstrip("-") in said
    assert known.base.new[-1] + known.base.base[-1] == pytest.approx(known.base.change[-1])
    assert "(carry-over)" in verdict(known)[1]


def test_the_answer_has_the_keys_of_the_command(bridge):
    answer = reading_answer(completed_reading(ViewState(draws=99), bridge), ())
    assert set(answer) >= KEYS
    assert set(answer["laplace"]) == {"location", "scale"}
    assert all({"family", "loglik", "aic"} <= set(fit) for fit in answer["fits"])
    assert len(answer["base_effect"]["history"]) == 24
    assert len(answer["base_effect"]["coming"]) == 12
    assert len(answer["what_if"]["path"]) == 24


def test_all_equal_months_are_read_and_what_needs_variation_says_so():
    flat = Series("Prices", pd.Period("2010-01", "M"), np.full(60, 100.0), "index")
    known = completed_reading(ViewState(), Bridge(Workspace((Release("a.csv", (flat,), ()),))))
    assert "did not change" in sentence(known)
    assert "same as in all" in sentence(known)
    assert "must vary to have a distribution" in known.refused["distribution"]
    assert known.base is not None and known.standing is not None


@pytest.mark.parametrize(
    ("share", "words"),
    [(1.0, "100"), (0.999, "100"), (0.5, "50"), (0.0949, "9.5"), (0.0951, "10"), (2e-5, "0.002")],
)
def test_a_share_of_a_hundred_is_never_written_with_a_power(share, words):
    assert of_hundred(share) == words
