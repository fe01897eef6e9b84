import dataclasses

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analytics.series import (
    Series,
    align,
    frequency_of,
    period_code,
    period_label,
    read_only,
    series_from_periods,
)

NAN = float("nan")
CALENDARS = [("2024-11", "M", "monthly"), ("2024Q3", "Q", "quarterly"), ("2024", "Y", "annual")]


def month(text: str) -> pd.Period:
    return pd.Period(text, "M")


def prices(values, first="2024-01", **fields) -> Series:
    return Series("Prices", month(first), values, **fields)


finite = st.floats(-1e9, 1e9)
holed = st.lists(st.one_of(finite, st.just(NAN)), min_size=1, max_size=40).filter(
    lambda values: not np.isnan(values).all()
)
starts = st.sampled_from([pd.Period(text, freq) for text, freq, _ in CALENDARS])


# The calendar


@pytest.mark.parametrize(("text", "freq", "name"), CALENDARS)
def test_frequency_is_named_and_periods_follow_one_another(text, freq, name):
    series = Series("Prices", pd.Period(text, freq), [1.0, 2.0, 3.0, 4.0])
    assert series.frequency == frequency_of(series.first) == name
    assert list(series.periods) == [series.first + k for k in range(4)]
    assert series.last == series.first + 3


def test_calendar_crosses_the_year():
    assert prices([1.0, 2.0, 3.0], first="2023-12").last == month("2024-02")
    quarters = Series("Prices", pd.Period("2023Q4", "Q"), [1.0, 2.0])
    assert period_code(quarters.last) == "2024-Q1"


@pytest.mark.parametrize(
    ("period", "label", "code"),
    [
        (pd.Period("2024-03", "M"), "Mar 2024", "2024-03"),
        (pd.Period("2024Q1", "Q"), "2024 Q1", "2024-Q1"),
        (pd.Period("2024", "Y"), "2024", "2024"),
    ],
)
def test_periods_are_written_for_people_and_for_files(period, label, code):
    assert period_label(period) == label
    assert period_code(period) == code


@given(st.integers(1800 * 12, 2200 * 12), st.sampled_from(["M", "Q", "Y"]))
def test_period_code_reads_back_as_the_same_period(ordinal, freq):
    period = pd.Period(month("1970-01") + (ordinal - 1970 * 12), freq)
    assert pd.Period(period_code(period).replace("-Q", "Q"), freq) == period


@pytest.mark.parametrize("freq", ["D", "W", "h", "2M", "Q-NOV", "Y-JUN"])
def test_other_calendars_are_refused(freq):
    # A fiscal year shares its number, but not its months, with a calendar year.
    with pytest.raises(
        ValueError, match=f"months, quarters or years of the calendar, but .*{freq}"
    ):
        Series("Prices", pd.Period("2024-03-01", freq), [1.0])


# Values


def test_values_are_a_copy_that_cannot_be_written():
    given_values = np.array([1.0, 2.0, 3.0])
    series = prices(given_values)
    given_values[0] = 99.0
    assert series.values[0] == 1.0
    with pytest.raises(ValueError, match="read-only"):
        series.values[0] = 5.0
    with pytest.raises(dataclasses.FrozenInstanceError):
        series.name = "other"


def test_read_only_leaves_the_array_it_was_given_writable():
    given_values = np.array([1.0, 2.0])
    copy = read_only(given_values)
    given_values[0] = 7.0
    assert copy.tolist() == [1.0, 2.0]
    assert not copy.flags.writeable


def test_parts_of_a_series_are_read_only_too():
    series = prices([1.0, 2.0, 3.0])
    part = series.between(month("2024-02"))
    paired = align(series, part)
    for array in (part.values, paired.driver.values, paired.response.values):
        assert not array.flags.writeable


def test_missing_ends_are_cut_and_the_calendar_moves_with_them():
    series = prices([NAN, NAN, 3.0, NAN, 5.0, NAN])
    assert series.first == month("2024-03")
    assert series.last == month("2024-05")
    np.testing.assert_array_equal(series.values, [3.0, NAN, 5.0])
    assert list(series.gaps) == [month("2024-04")]


def test_a_series_without_gaps_has_none():
    assert prices([1.0, 2.0]).gaps.size == 0


def test_repr_says_what_the_series_is():
    text = repr(prices([1.0, 2.0, 3.0], kind="level"))
    assert text == "Series('Prices', monthly level, Jan 2024 to Mar 2024, 3 values)"


# Fingerprint


@given(starts, holed)
def test_fingerprint_ignores_everything_but_the_numbers(first, values):
    series = Series("Prices", first, values)
    again = Series("Other", first, list(values), unit="2015 = 100", adjustment="no", source="file")
    assert series.fingerprint == again.fingerprint
    assert len(series.fingerprint) == 16
    assert set(series.fingerprint) <= set("0123456789abcdef")


@given(starts, holed, st.data())
def test_fingerprint_changes_with_any_value_and_with_the_start(first, values, data):
    series = Series("Prices", first, values)
    place = data.draw(st.integers(0, series.values.size - 1))
    changed = series.values.copy()
    old = changed[place]
    changed[place] = 1.0 if np.isnan(old) else np.nextafter(old, np.inf)
    others = [
        dataclasses.replace(series, values=changed),
        dataclasses.replace(series, first=series.first + 1),
        dataclasses.replace(series, values=[*series.values, 0.0]),
    ]
    assert len({series.fingerprint, *(other.fingerprint for other in others)}) == 4


def test_fingerprint_tells_a_gap_from_a_value_and_one_gap_from_another():
    variants = [[1.0, NAN, 2.0, 3.0], [1.0, 2.0, NAN, 3.0], [1.0, 0.0, 2.0, 3.0]]
    assert len({prices(values).fingerprint for values in variants}) == 3


def test_fingerprint_tells_calendars_with_equal_ordinals_apart():
    same_place = [pd.Period(ordinal=100, freq=freq) for freq in ("M", "Q-DEC", "Y-DEC")]
    assert len({Series("Prices", first, [1.0, 2.0]).fingerprint for first in same_place}) == 3


def test_fingerprint_tells_kinds_apart_since_growth_rates_depend_on_them():
    assert prices([1.0, 2.0]).fingerprint != prices([1.0, 2.0], kind="rate").fingerprint
    assert prices([1.0, 2.0]).fingerprint != prices([1.0, 2.0], kind="level").fingerprint


def test_fingerprint_does_not_see_the_sign_of_zero_or_the_bits_of_a_missing_value():
    other_nan = np.frombuffer(np.uint64(0xFFF8000000000123).tobytes(), dtype=np.float64)[0]
    assert (
        prices([1.0, 0.0, NAN, 2.0]).fingerprint == prices([1.0, -0.0, other_nan, 2.0]).fingerprint
    )


def test_fingerprint_stays_what_it_was_when_this_test_was_written():
    # Workspaces keep fingerprints: a change of the recipe needs a migration.
    assert prices([100.0, NAN, 101.5]).fingerprint == "46bb5c6df1680dea"


# Round trips


@given(starts, holed)
def test_frame_and_back_is_the_same_series(first, values):
    series = Series("Prices", first, values)
    frame = series.to_frame()
    assert frame.columns.tolist() == ["Prices"]
    again = series_from_periods("Prices", frame.index, frame["Prices"])
    assert again.fingerprint == series.fingerprint
    known = frame["Prices"].dropna()
    assert series_from_periods("Prices", known.index, known).fingerprint == series.fingerprint


@given(holed, st.integers(-5, 45), st.integers(-5, 45))
def test_between_keeps_exactly_the_periods_inside(values, low, high):
    series = prices(values)
    first, last = series.first + low, series.first + high
    expected = {
        period: value
        for period, value in zip(series.periods, series.values, strict=True)
        if first <= period <= last and not np.isnan(value)
    }
    if not expected:
        with pytest.raises(ValueError, match="has no value in the sample chosen; it runs from"):
            series.between(first, last)
        return
    part = series.between(first, last).to_frame()["Prices"].dropna()
    assert dict(zip(part.index, part, strict=True)) == expected


@pytest.mark.parametrize(
    ("first", "last"), [(None, "2023-10"), ("2024-04", None), ("2024-03", "2024-01")]
)
def test_between_refuses_a_stretch_with_no_value(first, last):
    ends = [None if end is None else month(end) for end in (first, last)]
    with pytest.raises(
        ValueError, match="no value in the sample chosen; it runs from Jan 2024 to Mar 2024"
    ):
        prices([1.0, 2.0, 3.0]).between(*ends)


def test_between_with_open_ends_is_the_series_itself():
    series = prices([1.0, NAN, 3.0], kind="level", unit="crowns", adjustment="yes", source="file")
    whole = series.between()
    assert whole.fingerprint == series.fingerprint
    for field in ("name", "kind", "unit", "adjustment", "source"):
        assert getattr(whole, field) == getattr(series, field)


def test_between_refuses_an_end_of_another_calendar():
    with pytest.raises(ValueError, match=r"'Prices' must be given in months, but got 2024$"):
        prices([1.0, 2.0]).between(pd.Period("2024", "Y"))
    with pytest.raises(ValueError, match="must be given in months, but got 2024-Q1"):
        prices([1.0, 2.0]).between(None, pd.Period("2024Q1", "Q"))


def test_series_from_periods_fills_the_calendar_and_passes_the_attributes_on():
    quarters = [pd.Period(text, "Q") for text in ("2023Q3", "2024Q2")]
    series = series_from_periods("Money", quarters, [1.0, 2.0], kind="level", unit="crowns")
    np.testing.assert_array_equal(series.values, [1.0, NAN, NAN, 2.0])
    assert (series.kind, series.unit, series.frequency) == ("level", "crowns", "quarterly")


# Alignment


@pytest.mark.parametrize(("text", "freq", "name"), CALENDARS)
def test_align_cuts_to_the_common_stretch_and_counts_what_is_lost(text, freq, name):
    start = pd.Period(text, freq)
    money = Series("Money", start, np.arange(10.0))
    response = Series("Prices", start + 3, np.arange(100.0, 112.0))
    pair = align(money, response)
    assert (pair.n, pair.lost_driver, pair.lost_response) == (7, 3, 5)
    np.testing.assert_array_equal(pair.driver.values, np.arange(3.0, 10.0))
    np.testing.assert_array_equal(pair.response.values, np.arange(100.0, 107.0))
    assert pair.periods[0] == pair.driver.first == pair.response.first == start + 3
    assert pair.driver.last == pair.response.last == start + 9


@given(st.integers(-30, 30), st.integers(1, 25), st.integers(1, 25))
def test_align_pairs_values_of_the_same_month(offset, n_driver, n_response):
    def dated(first: pd.Period, n: int) -> Series:
        periods = pd.period_range(first, periods=n)
        return Series("Month number", first, [float(period.ordinal) for period in periods])

    driver, response = (
        dated(month("2000-01"), n_driver),
        dated(month("2000-01") + offset, n_response),
    )
    common = set(driver.periods) & set(response.periods)
    if not common:
        with pytest.raises(ValueError, match="must overlap in time"):
            align(driver, response)
        return
    pair = align(driver, response)
    assert set(pair.periods) == common
    np.testing.assert_array_equal(pair.driver.values, pair.response.values)
    assert (pair.lost_driver, pair.lost_response) == (n_driver - pair.n, n_response - pair.n)


def test_align_ignores_gaps_outside_the_common_stretch():
    money = prices([1.0, NAN, 3.0, 4.0, 5.0])
    pair = align(money, prices([7.0, 8.0], first="2024-04"))
    assert (pair.n, pair.lost_driver, pair.lost_response) == (2, 3, 0)


def test_align_names_the_missing_month_and_the_longest_stretch():
    money = Series("Money", month("2024-01"), [1.0, 2.0, NAN, 4.0, 5.0, 6.0, NAN, 8.0])
    with pytest.raises(
        ValueError,
        match=r"'Money' must have a value in every month of the sample, but Mar 2024 is missing;"
        r" the longest stretch without gaps is Apr 2024 to Jun 2024$",
    ):
        align(money, prices(np.arange(8.0)))


def test_align_takes_the_earliest_of_equally_long_stretches():
    money = prices([1.0, 2.0, NAN, 4.0, 5.0, NAN, 7.0, 8.0])
    with pytest.raises(ValueError, match=r"is Jan 2024 to Feb 2024$"):
        align(money, prices(np.arange(8.0)))


@pytest.mark.parametrize(
    ("driver", "missing"),
    [([1.0, NAN, 3.0, 4.0], "Feb 2024"), ([1.0, 2.0, NAN, 4.0], "Mar 2024")],
)
def test_align_sees_a_gap_at_an_end_of_the_common_stretch(driver, missing):
    with pytest.raises(ValueError, match=f"'Prices' must .* but {missing} is missing"):
        align(prices(driver), Series("Money", month("2024-02"), [1.0, 2.0]))


def test_align_says_so_where_no_month_has_both():
    driver = prices([1.0, NAN, 1.0])
    response = Series("Money", month("2024-02"), [1.0, NAN, 1.0])
    with pytest.raises(ValueError, match=r"Feb 2024 is missing; no month has both$"):
        align(driver, response)


def test_align_refuses_two_calendars():
    quarterly = Series("Money", pd.Period("2024Q1", "Q"), [1.0, 2.0])
    with pytest.raises(
        ValueError,
        match="must have the same frequency, but 'Money' is quarterly and 'Prices' is monthly",
    ):
        align(quarterly, prices([1.0, 2.0]))


def test_align_says_where_two_series_lie_that_do_not_meet():
    with pytest.raises(
        ValueError,
        match="must overlap in time, but 'Prices' runs from Jan 2024 to Feb 2024"
        " and 'Prices' runs from Mar 2024 to Mar 2024",
    ):
        align(prices([1.0, 2.0]), prices([3.0], first="2024-03"))


# Errors


@pytest.mark.parametrize(
    ("values", "sentence"),
    [
        ([1.0, np.inf], "values of 'Prices' must be finite, but got an infinite one"),
        ([-np.inf], "values of 'Prices' must be finite"),
        ([NAN, NAN], "'Prices' must have at least one value, but got none"),
        ([], "'Prices' must have at least one value, but got none"),
        ([[1.0, 2.0]], r"values must be one-dimensional, but got shape \(1, 2\)"),
        (3.0, r"values must be one-dimensional, but got shape \(\)"),
    ],
)
def test_values_that_make_no_series(values, sentence):
    with pytest.raises(ValueError, match=sentence):
        prices(values)


def test_kind_and_adjustment_outside_their_lists():
    with pytest.raises(ValueError, match="kind must be one of index, level, rate, but got 'flow'"):
        prices([1.0], kind="flow")
    with pytest.raises(
        ValueError, match="adjustment must be one of yes, no, unknown, but got 'maybe'"
    ):
        prices([1.0], adjustment="maybe")


@pytest.mark.parametrize(
    ("periods", "values", "sentence"),
    [
        ([month("2024-02"), month("2024-01")], [1, 2], "but Jan 2024 follows Feb 2024"),
        ([month("2024-01"), month("2024-01")], [1, 2], "but Jan 2024 follows Jan 2024"),
        ([month("2024-01"), pd.Period("2024Q2", "Q")], [1, 2], "keep to one calendar, but mixes"),
        ([month("2024-01")], [1, 2], r"must have a value a period, but got \(2,\) values"),
        ([month("2024-01")], [[1]], r"must have a value a period, but got \(1, 1\) values"),
        ([], [], "must have at least one value, but got none"),
        ([month("2024-01")], [NAN], "must have at least one value, but got none"),
    ],
)
def test_periods_that_make_no_series(periods, values, sentence):
    with pytest.raises(ValueError, match=sentence):
        series_from_periods("Prices", periods, values)
