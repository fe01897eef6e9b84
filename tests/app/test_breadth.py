"""From loaded files to contributions: the weights rule, the published total, what is refused."""

import dataclasses

import numpy as np
import pandas as pd
import pytest

from analytics.breadth import change
from analytics.series import Series
from app.breadth.answer import breadth_answer
from app.breadth.bridge import breadth
from app.breadth.core import MEDIAN, TOTAL, TRIMMED, short_name
from app.breadth.words import sentence, verdict
from app.compute import Bridge
from app.demo import demo_releases
from app.state import StateError, ViewState
from app.workspace import Workspace
from tests.app.baskets import NAMES, SHARES, basket, prices_of, series_of, usual, weights_of
from tests.references.plain_breadth import plain_contributions, plain_median, plain_trimmed


@pytest.fixture(scope="module")
def demo():
    return Bridge(Workspace(placeholder=demo_releases()))


def of(workspace, **state):
    return breadth(ViewState(**state), Bridge(workspace))


# The invented economy ------------------------------------------------------------------------


def test_contributions_add_up_to_the_published_rate_to_rounding(demo):
    shown = breadth(ViewState(), demo)
    assert shown.total.name == "Consumer prices"
    # Published with three digits; in the 1960s the index is near 8, so rounding weighs more there.
    assert np.nanmax(np.abs(shown.residual)) < 0.02
    assert np.nanmax(np.abs(shown.residual[-300:])) < 0.002
    chained = change(shown.weighted.basket.total, 12)
    gap = shown.weighted.points.sum(axis=1) - chained
    assert np.nanmax(np.abs(gap)) < 1e-9


def test_one_month_contributions_add_up_too(demo):
    shown = breadth(ViewState(span="month"), demo)
    assert shown.span == 1
    assert np.nanmax(np.abs(shown.residual)) < 0.015
    np.testing.assert_array_equal(shown.weighted.points, shown.weighted.points_1)


def test_the_chain_follows_the_weights_rule_of_the_invented_office(demo):
    # The README of the sample data states the rule and that the published index follows it.
    shown = breadth(ViewState(), demo)
    total = demo.workspace.named("Consumer prices").values
    ratio = shown.weighted.basket.total / total
    np.testing.assert_allclose(ratio, np.median(ratio), rtol=1e-4)
    assert shown.notes == ()


def test_another_total_leaves_its_distance_as_residual(demo):
    shown = breadth(ViewState(aggregate="Consumer prices, adjusted", span="month"), demo)
    expected = shown.rate - shown.weighted.points.sum(axis=1)
    np.testing.assert_array_equal(shown.residual, expected)
    assert np.nanmax(np.abs(shown.residual)) > 0.1


def test_core_measures_are_those_of_the_plain_twins(demo):
    shown = breadth(ViewState(trim="10:20"), demo)
    basket_ = shown.weighted.basket
    rates, t = shown.rates[-1], len(shown.periods) - 1
    row, link = basket_.row[t], basket_.links[basket_.row[t]]
    weights = basket_.shares[row] * basket_.prices[t - 12] / basket_.prices[link]
    measures = shown.weighted.measures
    assert measures[MEDIAN][-1] == pytest.approx(plain_median(rates, weights))
    assert measures[TRIMMED][-1] == pytest.approx(plain_trimmed(rates, weights, 10, 20))
    assert measures[TOTAL][-1] == shown.rate[-1]


def test_compounded_months_are_another_measure(demo):
    by_year, by_month = (breadth(ViewState(core=core), demo) for core in ("year", "month"))
    assert by_year.weighted.measures[MEDIAN][-1] != by_month.weighted.measures[MEDIAN][-1]
    np.testing.assert_array_equal(
        by_year.weighted.measures[TOTAL], by_month.weighted.measures[TOTAL]
    )


def test_food_and_energy_are_left_out_unless_others_are_named(demo):
    shown = breadth(ViewState(), demo)
    out = [n for n, left in zip(shown.names, shown.left_out, strict=True) if left]
    assert out == ["01 Food and soft drinks", "04 Housing and energy"]
    other = breadth(ViewState(excluded="07 Transport|nothing"), demo)
    assert "Without Transport" in other.weighted.measures
    assert any("'nothing' is not; it is passed over" in note for note in other.notes)
    none = breadth(ViewState(excluded="none"), demo)
    assert set(none.weighted.measures) == {TOTAL, MEDIAN, TRIMMED}
    everything = breadth(ViewState(excluded="|".join(shown.names)), demo)
    assert set(everything.weighted.measures) == {TOTAL, MEDIAN, TRIMMED}
    assert "Something must be kept, but everything is left out." in everything.notes


def test_an_earlier_print_reads_as_it_would_have_read_then(demo):
    then = breadth(ViewState(newest="2001-05"), demo)
    assert str(then.periods[-1]) == "2001-05"
    now = breadth(ViewState(), demo)
    place = len(then.periods) - 1
    np.testing.assert_allclose(then.weighted.points[-1], now.weighted.points[place], atol=1e-12)
    assert len(then.ranks) == len(then.periods)
    with pytest.raises(StateError, match="the print must be from Jan 1960 to Oct 2026, but got"):
        breadth(ViewState(newest="2031-01"), demo)


def test_the_sample_cuts_ranks_and_not_the_chain(demo):
    whole, late = breadth(ViewState(), demo), breadth(ViewState(first="2010-01"), demo)
    np.testing.assert_array_equal(whole.weighted.points[-1], late.weighted.points[-1])
    assert (whole.ranks[-1] != late.ranks[-1]).any()


def test_a_result_is_computed_once_and_drawn_in_many_ways(demo):
    one = breadth(ViewState(years=3), demo)
    two = breadth(ViewState(sort="name-up", years=20), demo)
    assert one.weighted is two.weighted
    assert (one.drawn.start, two.drawn.start) == (802 - 36, 802 - 240)
    assert breadth(ViewState(trim="5"), demo).weighted is not one.weighted


def test_the_answer_has_the_keys_of_the_design(demo):
    answer = breadth_answer(breadth(ViewState(), demo))
    keys = {"rate_12m", "contributions", "diffusion", "trimmed_mean", "weighted_median"}
    assert keys | {"period", "frequency", "rate_1m", "residual"} <= set(answer)
    total = sum(answer["contributions"].values())
    assert total + answer["residual"] == pytest.approx(answer["rate_12m"], abs=1e-12)
    assert list(answer["contributions"]) == list(breadth(ViewState(), demo).names)


# The weights rule ----------------------------------------------------------------------------


@pytest.mark.parametrize(("link", "places"), [(12, [0, 12, 24]), (1, [1, 13, 25]), (6, [6, 18])])
def test_any_month_can_be_the_link(link, places):
    shown = of(usual(), link=link)
    assert list(shown.weighted.basket.links) == places
    _, parts = plain_contributions(prices_of().tolist(), SHARES[: len(places)], places, 12)
    np.testing.assert_allclose(shown.weighted.points[-1], parts[-1], atol=1e-10)


def test_weights_of_years_before_the_prices_give_way_to_the_one_in_force():
    early = weights_of([SHARES[2], SHARES[1], *SHARES], first=2018)
    shown = of(basket(series_of(prices_of()), early))
    assert shown.weighted.basket.links == (0, 12, 24)
    np.testing.assert_allclose(shown.weighted.basket.shares[0], np.array(SHARES[0]) / 1000)


def test_prices_that_begin_within_a_year_are_linked_where_they_begin():
    shown = of(basket(series_of(prices_of(), first="2020-03"), weights_of()))
    assert shown.weighted.basket.links == (0, 9, 21)


def test_weights_at_mean_prices_are_carried_to_the_link():
    prices = prices_of(40)
    series = series_of(prices, first="2018-12")
    shown = of(basket(series, weights_of()), valued="year")
    december = 12  # December 2019
    means = prices[1:13].mean(axis=0)
    moved = np.array(SHARES[0]) * prices[december] / means
    np.testing.assert_allclose(shown.weighted.basket.shares[0], moved / moved.sum(), rtol=1e-12)


def test_quarters_and_years_count_in_their_own_periods():
    quarters = of(basket(series_of(prices_of(12), first="2019Q4"), weights_of()))
    assert (quarters.per_year, quarters.span, quarters.noun) == (4, 4, "quarter")
    assert quarters.weighted.basket.links == (0, 4, 8)
    assert "over the 4 quarters to 2022 Q3" in sentence(quarters)
    years = of(basket(series_of(prices_of(4), first="2019"), weights_of()))
    assert (years.per_year, years.span) == (1, 1)
    assert years.weighted.basket.links == (0, 1, 2)
    assert breadth_answer(years)["frequency"] == "annual"


# The published total -------------------------------------------------------------------------


def total_series(values, name="Consumer prices", first="2019-12"):
    return Series(name, pd.Period(first, "M"), values, source="total.csv")


def test_the_total_is_the_loaded_index_that_the_weights_chain_to():
    chained = of(usual()).weighted.basket.total
    here = basket(series_of(prices_of()), weights_of(), total_series(np.round(chained, 1)))
    shown = of(here)
    assert shown.total.name == "Consumer prices"
    assert abs(shown.residual[-1]) < 0.15
    other = basket(series_of(prices_of()), weights_of(), total_series(100 * 1.02 ** np.arange(30)))
    assert of(other).total is None
    assert any("No published total" in note for note in of(other).notes)
    assert of(other, aggregate="Consumer prices").total.name == "Consumer prices"


def test_a_total_that_ends_earlier_ends_the_print():
    chained = of(usual()).weighted.basket.total[:-2]
    shown = of(basket(series_of(prices_of()), weights_of(), total_series(chained)))
    assert str(shown.periods[-1]) == "2022-03"
    assert any("ends in Mar 2022, before the components" in note for note in shown.notes)


def test_a_total_of_another_kind_is_refused():
    rate = dataclasses.replace(total_series(np.ones(30)), kind="rate")
    with pytest.raises(StateError, match="all items must be a monthly index"):
        of(basket(series_of(prices_of()), weights_of(), rate), aggregate="Consumer prices")


# What is wrong with the files ----------------------------------------------------------------


def test_weights_that_do_not_sum_are_named_and_can_be_scaled():
    shares = [SHARES[0], (380.0, 220.0, 290.0, 93.0), SHARES[2]]
    here = basket(series_of(prices_of()), weights_of(shares))
    shown = of(here)
    assert shown.weighted is None
    assert shown.refusal == "weights of 2021 must sum to 1000, but sum to 983"
    assert shown.diffusion[-1] >= 0  # the rest keeps working
    assert np.isfinite(shown.ranks[-1]).all()
    assert "Without weights that can be used" in verdict(shown)
    assert breadth_answer(shown)["contributions"] is None
    scaled = of(here, scale="yes")
    assert scaled.weighted.basket.shares.sum(axis=1) == pytest.approx(1)
    assert "Weights of 2021 must sum to 1000, but sum to 983; they are scaled." in scaled.notes


def test_rounding_in_weights_is_no_matter():
    shares = [SHARES[0], (380.2, 220.0, 290.0, 110.1), SHARES[2]]
    assert of(basket(series_of(prices_of()), weights_of(shares))).refusal == ""


def test_a_component_without_weight_is_left_out():
    series = [*series_of(prices_of()), *series_of(prices_of(), names=("05 Health",))]
    shown = of(basket(series, weights_of()))
    assert shown.names == NAMES
    assert "'05 Health' has no weight and is left out." in shown.notes


def test_a_weight_without_component_goes_to_the_others():
    shown = of(basket(series_of(prices_of())[:3], weights_of()))
    assert shown.names == NAMES[:3]
    (note,) = [note for note in shown.notes if "must be loaded as series" in note]
    assert "'04 Travel' of weights.csv" in note
    assert "11.0 % of the weight of 2022" in note
    assert shown.weighted.basket.shares.sum(axis=1) == pytest.approx(1)


def test_a_component_that_starts_late_enters_at_a_link():
    prices = prices_of()
    prices[:15, 3] = np.nan
    shown = of(basket(series_of(prices), weights_of()))
    assert any(
        note.startswith("'04 Travel' starts late: Mar 2021; in the basket from the link of Dec")
        for note in shown.notes
    )
    assert np.nansum(shown.weighted.points[-1]) == pytest.approx(shown.rate[-1], abs=1e-9)


@pytest.mark.parametrize("value", [0.0, -3.0])
def test_a_zero_or_negative_index_is_left_out(value):
    prices = prices_of()
    prices[5, 1] = value
    shown = of(basket(series_of(prices), weights_of()))
    assert "02 Energy" not in shown.names
    assert any(
        f"'02 Energy' must be positive, but May 2020 is {value:g}" in note for note in shown.notes
    )


def test_equal_months_are_no_change():
    prices = np.full((30, 4), 100.0)
    shown = of(basket(series_of(prices), weights_of()))
    assert (shown.rate[-1], shown.diffusion[-1]) == (0, 50)
    assert sentence(shown).startswith("Prices of 0 of 4 components rose over the 12 months")
    assert "unchanged" in sentence(shown)
    assert any("has the same value in every month" in note for note in shown.notes)
    assert verdict(shown)


def test_eleven_months_show_one_month_rates():
    shown = of(usual(11))
    assert shown.span == 1
    assert any("A rate over 12 months needs 13 months, but there are 11" in n for n in shown.notes)
    assert np.isfinite(shown.weighted.points[-1]).all()
    assert "in Oct 2020" in sentence(shown)


def test_a_gap_is_moved_with_the_others():
    prices = prices_of()
    prices[20, 2] = np.nan
    shown = of(basket(series_of(prices), weights_of()))
    assert any("'03 Rent' has no value in Aug 2021" in note for note in shown.notes)
    assert np.isnan(shown.rates[20, 2])


def test_stale_weights_are_kept_on_with_a_note():
    shown = of(basket(series_of(prices_of(40)), weights_of()))
    assert any("no weights of 2023 or later" in note for note in shown.notes)


def test_rates_and_other_calendars_are_left_out():
    series = series_of(prices_of())
    series[1] = dataclasses.replace(series[1], kind="rate")
    series[2] = Series("03 Rent", pd.Period("2019Q4"), prices_of()[:9, 2])
    shown = of(basket(series, weights_of()))
    assert shown.names == ("01 Food", "04 Travel")
    assert any("must be an index, but holds rates" in note for note in shown.notes)
    assert any("must be monthly as the others are" in note for note in shown.notes)


@pytest.mark.parametrize(
    ("here", "said"),
    [
        (Workspace(), "no weights are loaded"),
        (basket(series_of(prices_of(), names="abcd"), weights_of()), "no loaded series has a weig"),
        (basket(series_of(-prices_of()), weights_of()), "no component is left"),
        (basket(series_of(prices_of(1)), weights_of()), "a rate needs two months of prices"),
    ],
)
def test_nothing_to_show_is_one_sentence(here, said):
    with pytest.raises(StateError, match=said):
        of(here)


def test_weights_of_another_time_leave_what_needs_none():
    shown = of(basket(series_of(prices_of()), weights_of(first=2040)))
    assert shown.weighted is None
    assert "weights must be of the time of the prices, but begin in 2040" in shown.refusal


def test_a_trim_that_leaves_nothing_is_refused(demo):
    with pytest.raises(StateError, match="Trim must cut less than 100 percent"):
        breadth(ViewState(trim="60:40"), demo)


def test_names_are_matched_whatever_their_case():
    shown = of(basket(series_of(prices_of(), names=[n.upper() for n in NAMES]), weights_of()))
    assert shown.names == NAMES


def test_codes_before_names_are_not_said():
    assert short_name("04.5.1 Electricity") == "Electricity"
    assert short_name("7up") == "7up"


def test_rates_over_one_month_of_unadjusted_components_say_so():
    here = Bridge(Workspace(demo_releases()))
    monthly = breadth(ViewState(span="month"), here).notes
    assert any(
        "'01 Food and soft drinks' (and 11 more components) are said to be" in n for n in monthly
    )
    assert not any("unadjusted" in note for note in breadth(ViewState(), here).notes)
