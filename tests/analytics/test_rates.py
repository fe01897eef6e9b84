import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analytics.rates import growth_rate, trailing_mean
from analytics.series import Series

NAN = float("nan")
CALENDARS = [("2024-01", "M", 12), ("2024Q1", "Q", 4), ("2024", "Y", 1)]


def prices(values, first="2024-01", **fields) -> Series:
    return Series("Prices", pd.Period(first, "M"), values, **fields)


def percent_growth(series: Series, **options) -> np.ndarray:
    return growth_rate(series, formula="percent", **options).values


levels = st.lists(st.floats(1e-3, 1e6), min_size=14, max_size=60)
finite_lists = st.lists(st.floats(-1e6, 1e6), min_size=1, max_size=80)


# Closed forms


def test_rates_of_a_doubling():
    doubled = prices([50.0, 100.0])
    assert growth_rate(doubled).values.tolist() == [100.0 * np.log(2.0)]
    assert percent_growth(doubled).tolist() == [100.0]


def test_a_rate_stands_at_the_later_of_its_two_months():
    steps = prices([1.0] * 5 + [2.0] * 5)
    one_month = growth_rate(steps)
    assert one_month.first == pd.Period("2024-02", "M")
    assert one_month.periods[one_month.values > 0].tolist() == [pd.Period("2024-06", "M")]
    three_months = growth_rate(steps, span=3)
    assert three_months.first == pd.Period("2024-04", "M")
    months = [pd.Period(text, "M") for text in ("2024-06", "2024-07", "2024-08")]
    assert three_months.periods[three_months.values > 0].tolist() == months
    assert one_month.last == three_months.last == steps.last


@pytest.mark.parametrize(("first", "freq", "per_year"), CALENDARS)
@pytest.mark.parametrize("span", [1, 2, 3, 6, 12, 17])
def test_steady_growth_is_annualised_to_the_same_yearly_rate_over_any_span(
    first, freq, per_year, span
):
    yearly = 7.3
    index = 100.0 * (1.0 + yearly / 100.0) ** (np.arange(30) / per_year)
    series = Series("Prices", pd.Period(first, freq), index)
    compounded = percent_growth(series, span=span, annualised=True)
    scaled = growth_rate(series, span=span, annualised=True).values
    np.testing.assert_allclose(compounded, yearly, rtol=0, atol=1e-10)
    np.testing.assert_allclose(scaled, 100.0 * np.log1p(yearly / 100.0), rtol=0, atol=1e-10)


def test_a_whole_year_annualised_is_the_12_month_rate():
    series = prices(np.exp(np.random.default_rng(1).normal(size=40).cumsum()))
    for formula in ("log", "percent"):
        plain = growth_rate(series, span=12, formula=formula)
        annual = growth_rate(series, span=12, formula=formula, annualised=True)
        np.testing.assert_allclose(annual.values, plain.values, rtol=1e-14)


def test_constant_prices_grow_by_exactly_nothing():
    flat = prices(np.full(30, 0.1 + 0.2))
    for span in (1, 12):
        for annualised in (False, True):
            assert not growth_rate(flat, span=span, annualised=annualised).values.any()
            assert not percent_growth(flat, span=span, annualised=annualised).any()


def test_a_rate_comes_back_as_it_is_negative_values_and_all():
    rate = prices([-1.0, 0.0, 2.0], kind="rate", unit="percent a month")
    for options in ({}, {"span": 12}, {"formula": "percent"}, {"annualised": True}):
        assert growth_rate(rate, **options) is rate


@pytest.mark.parametrize(
    ("options", "unit"),
    [
        ({}, "percent a month"),
        ({"span": 12}, "percent over 12 months"),
        ({"annualised": True}, "percent a year"),
        ({"span": 3, "annualised": True}, "percent a year"),
    ],
)
def test_unit_says_over_what_the_rate_runs(options, unit):
    rate = growth_rate(prices(np.arange(1.0, 20.0)), **options)
    assert (rate.kind, rate.unit) == ("rate", unit)


def test_everything_else_of_the_series_is_kept():
    series = prices([1.0, 2.0, 3.0], kind="level", adjustment="no", source="file")
    rate = growth_rate(series)
    for field in ("name", "adjustment", "source"):
        assert getattr(rate, field) == getattr(series, field)
    assert not rate.values.flags.writeable


# Properties of growth rates


@given(levels, st.integers(1, 13), st.booleans())
def test_log_and_percent_rates_are_two_ways_to_write_one_ratio(values, span, annualised):
    series = prices(values)
    log = growth_rate(series, span=span, annualised=annualised).values / 100.0
    bounded = np.abs(log) < 200.0
    percent = percent_growth(series, span=span, annualised=annualised)
    np.testing.assert_allclose(
        percent[bounded], 100.0 * np.expm1(log[bounded]), rtol=1e-10, atol=1e-10
    )
    assert (percent >= 100.0 * log - 1e-9).all()


@given(st.lists(st.floats(0.5, 2.0), min_size=14, max_size=60), st.integers(1, 13))
def test_rates_compound_from_one_month_to_many(values, span):
    series = prices(values)
    log_months, log_span = growth_rate(series).values, growth_rate(series, span=span).values
    monthly, over_span = percent_growth(series), percent_growth(series, span=span)
    for place in range(log_span.size):
        months = slice(place, place + span)
        assert log_months[months].sum() == pytest.approx(log_span[place], abs=1e-11)
        factor = np.prod(1.0 + monthly[months] / 100.0)
        assert factor == pytest.approx(1.0 + over_span[place] / 100.0, rel=1e-12)


@given(levels, st.sampled_from([1e-3, 0.25, 3.0, 1e4]), st.integers(1, 13))
def test_rescaling_or_rebasing_leaves_every_rate_alone(values, factor, span):
    series = prices(values)
    rescaled = prices(np.array(values) * factor)
    np.testing.assert_allclose(
        growth_rate(rescaled, span=span).values, growth_rate(series, span=span).values, atol=1e-10
    )


@given(levels)
def test_log_rates_read_backwards_change_only_their_sign(values):
    forwards = growth_rate(prices(values)).values
    backwards = growth_rate(prices(values[::-1])).values
    np.testing.assert_allclose(forwards, -backwards[::-1], atol=1e-10)


# Gaps and short samples of growth rates


def test_a_rate_is_missing_where_either_of_its_values_is():
    series = prices([1.0, 2.0, NAN, 8.0, 16.0, 32.0])
    np.testing.assert_allclose(percent_growth(series), [100.0, NAN, NAN, 100.0, 100.0])
    np.testing.assert_allclose(percent_growth(series, span=2), [300.0, NAN, 300.0])
    assert growth_rate(series, span=2).first == pd.Period("2024-04", "M")


def test_the_shortest_sample_has_one_rate():
    assert growth_rate(prices([1.0, 2.0])).values.size == 1
    assert growth_rate(prices(np.arange(1.0, 14.0)), span=12).values.size == 1


def test_gaps_that_leave_no_rate_are_named_as_the_reason():
    with pytest.raises(
        ValueError, match="'Prices' must have two values one month apart, but its gaps leave none"
    ):
        growth_rate(prices([1.0, NAN, 2.0]))
    with pytest.raises(ValueError, match="two values 3 months apart"):
        growth_rate(prices([1.0, NAN, NAN, NAN, 2.0]), span=3)


# Errors of growth rates


@pytest.mark.parametrize(("value", "text"), [(0.0, "0"), (-2.5, "-2.5")])
def test_growth_needs_positive_values(value, text):
    with pytest.raises(
        ValueError, match=f"'Prices' must be positive to .*, but Feb 2024 is {text}$"
    ):
        growth_rate(prices([1.0, value, 2.0]))


@pytest.mark.parametrize("span", [0, -1, 3, 12])
def test_span_must_leave_a_pair(span):
    with pytest.raises(
        ValueError,
        match=f"span must be at least 1 and below the 3 months of 'Prices', but got {span}",
    ):
        growth_rate(prices([1.0, 2.0, 3.0]), span=span)


def test_one_value_has_no_rate():
    with pytest.raises(ValueError, match="below the 1 months of 'Prices', but got 1"):
        growth_rate(prices([1.0]))


def test_formula_is_log_or_percent():
    with pytest.raises(ValueError, match="formula must be log or percent, but got 'simple'"):
        growth_rate(prices([1.0, 2.0]), formula="simple")


# Trailing means


def plain_trailing_mean(values, window):
    means = []
    for end in range(window, len(values) + 1):
        total = 0.0
        for value in values[end - window : end]:
            total += value
        means.append(total / window)
    return means


@given(finite_lists, st.data())
def test_trailing_mean_is_the_plain_loop(values, data):
    window = data.draw(st.integers(1, len(values)))
    means = trailing_mean(values, window)
    expected = plain_trailing_mean(values, window)
    assert means.shape == (len(values) - window + 1,)
    scale = max(1.0, max(abs(value) for value in values))
    np.testing.assert_allclose(means, expected, rtol=0, atol=1e-13 * scale)


@pytest.mark.parametrize("window", [1, 2, 3, 7, 12, 13, 60, 128, 129])
@pytest.mark.parametrize("value", [0.1, 1 / 3, -2.7182818, 1e-12, 1e15])
def test_a_constant_stays_constant_without_any_dust(value, window):
    # Running sums leave dust here, and dust against dust can correlate.
    means = trailing_mean(np.full(700, value), window)
    assert np.ptp(means) == 0.0
    assert means[0] == pytest.approx(value, rel=1e-15)


def test_a_constant_stretch_stays_constant_next_to_large_values():
    values = np.full(400, 0.1)
    values[:100] = 1e9 * np.random.default_rng(2).normal(size=100)
    means = trailing_mean(values, 12)
    assert np.ptp(means[100:]) == 0.0
    assert means[-1] == pytest.approx(0.1, rel=1e-15)


def test_a_window_of_one_is_the_series_and_of_n_its_mean():
    values = np.random.default_rng(3).normal(size=50)
    np.testing.assert_array_equal(trailing_mean(values, 1), values)
    np.testing.assert_allclose(trailing_mean(values, 50), [values.mean()], rtol=0, atol=1e-15)


def test_mean_of_a_ramp_is_its_middle():
    np.testing.assert_array_equal(trailing_mean(np.arange(10.0), 5), np.arange(2.0, 8.0))


@given(finite_lists, st.floats(-100.0, 100.0), st.floats(-100.0, 100.0), st.data())
def test_trailing_mean_is_linear(values, factor, shift, data):
    window = data.draw(st.integers(1, len(values)))
    moved = trailing_mean(factor * np.array(values) + shift, window)
    expected = factor * trailing_mean(values, window) + shift
    np.testing.assert_allclose(moved, expected, rtol=0, atol=1e-6)


@given(levels, st.integers(1, 13))
def test_mean_of_log_rates_is_the_log_rate_over_the_window(values, window):
    series = prices(values)
    means = trailing_mean(growth_rate(series).values, window)
    np.testing.assert_allclose(
        means, growth_rate(series, span=window).values / window, rtol=0, atol=1e-9
    )


def test_a_mean_is_missing_wherever_one_of_its_values_is():
    values = [1.0, 2.0, NAN, 4.0, 5.0, 6.0]
    np.testing.assert_array_equal(trailing_mean(values, 2), [1.5, NAN, NAN, 4.5, 5.5])


@pytest.mark.parametrize("window", [0, -1, 4])
def test_window_must_fit(window):
    with pytest.raises(ValueError, match=f"window must be from 1 to 3, but got {window}"):
        trailing_mean([1.0, 2.0, 3.0], window)


def test_values_must_be_one_dimensional():
    with pytest.raises(ValueError, match=r"values must be one-dimensional, but got shape \(2, 2\)"):
        trailing_mean(np.ones((2, 2)), 1)
