"""The implied path: closed forms, the sign of the lag, and what it refuses."""

import numpy as np
import pandas as pd
import pytest

from analytics.cell import lag_cell
from analytics.outlook import implied_path, relation_gap
from analytics.outlook_pair import break_in_path, outlook_pair
from analytics.outlook_target import outlook_target
from analytics.rates import trailing_mean
from analytics.series import Series
from analytics.simulate import planted_pair


def pair(lag=9, n=300, noise=0.3, seed=1, slope=0.4):
    return planted_pair(np.random.default_rng(seed), n, lag=lag, slope=slope, noise=noise)


def test_a_noiseless_planted_lag_is_continued_exactly():
    """The driver's last nine periods, times the slope, in the order in which they will arrive."""
    planted = pair(noise=0.0)
    path = implied_path(planted.driver, planted.response, window=1, shift=9)
    np.testing.assert_allclose(path.single, 0.1 + 0.4 * planted.driver[-9:], atol=1e-10)
    assert path.ahead.tolist() == list(range(1, 10))


def test_the_path_uses_the_line_of_the_cell():
    planted = pair()
    path = implied_path(planted.driver, planted.response, window=6, shift=9)
    cell = lag_cell(planted.driver, planted.response, window=6, shift=9)
    assert (path.intercept, path.slope, path.pairs) == (cell.intercept, cell.slope, cell.n)
    means = trailing_mean(planted.driver, 6)
    np.testing.assert_allclose(path.window_mean, cell.intercept + cell.slope * means[-9:])


def test_single_rates_average_to_the_window_mean_once_all_are_ahead():
    planted = pair()
    path = implied_path(planted.driver, planted.response, window=4, shift=9)
    np.testing.assert_allclose(trailing_mean(path.single, 4), path.window_mean[3:], atol=1e-12)


def test_the_yearly_rate_keeps_the_observed_months():
    planted = pair()
    path = implied_path(planted.driver, planted.response, window=6, shift=9)
    np.testing.assert_allclose(path.yearly[0], planted.response[-11:].sum() + path.single[0])
    np.testing.assert_allclose(path.yearly[8], planted.response[-3:].sum() + path.single.sum())


def test_percent_rates_are_compounded():
    planted = pair()
    path = implied_path(planted.driver, planted.response, window=6, shift=9, compounding="percent")
    months = np.concatenate((planted.response[-3:], path.single))
    np.testing.assert_allclose(path.yearly[8], 100 * (np.prod(1 + months / 100) - 1))


def test_a_driver_known_later_reaches_farther_and_one_known_earlier_less():
    planted = pair(noise=0.0)
    longer = implied_path(planted.driver, planted.response[:-2], window=1, shift=9)
    np.testing.assert_allclose(longer.single[:2], planted.response[-2:], atol=1e-10)
    assert (longer.ahead.size, longer.lead) == (11, 2)
    shorter = implied_path(planted.driver[:-4], planted.response, window=1, shift=9)
    np.testing.assert_allclose(shorter.single, 0.1 + 0.4 * planted.driver[-9:-4], atol=1e-10)


def test_gaps_are_the_residuals_of_the_cell():
    planted = pair()
    cell = lag_cell(planted.driver, planted.response, window=6, shift=9)
    gap = relation_gap(planted.driver, planted.response, window=6, shift=9)
    np.testing.assert_allclose(gap.gap, cell.residuals, atol=1e-12)
    assert gap.place[0] == cell.start + 9
    assert gap.place[-1] == planted.response.size - 1


def test_both_ways_to_a_target_agree_where_periods_ahead_are_alike():
    rng = np.random.default_rng(3)
    response = rng.normal(0.2, 0.5, 60)
    for kind in ("yearly", "window", "single"):
        for compounding in ("log", "percent", "mean"):
            target = outlook_target(kind, window=5, compounding=compounding)
            np.testing.assert_allclose(
                target.from_path(response, np.full(20, 0.3)),
                target.from_means(response, np.full(20, 0.3)),
                rtol=1e-12,
            )


@pytest.mark.parametrize(
    ("shift", "cut", "sentence"),
    [
        (0, 0, "shift must be 1 or more to imply a path, but got 0"),
        (-3, 0, "shift must be 1 or more to imply a path, but got -3"),
        (9, 9, "known to within 8 periods of the response's end .* but ends 9 before it"),
    ],
)
def test_no_path_says_why(shift, cut, sentence):
    planted = pair()
    with pytest.raises(ValueError, match=sentence):
        implied_path(
            planted.driver[: planted.driver.size - cut], planted.response, window=3, shift=shift
        )


def test_a_constant_driver_and_a_short_sample_are_refused():
    response = pair().response
    with pytest.raises(ValueError, match="driver must vary within the cell"):
        implied_path(np.ones(300), response, window=3, shift=9)
    with pytest.raises(ValueError, match="window must leave at least 24 pairs"):
        implied_path(response[:30], response[:30], window=12, shift=9)
    with pytest.raises(ValueError, match="driver must be finite, but got nan at position 4"):
        implied_path(np.where(np.arange(300) == 4, np.nan, response), response, window=3, shift=9)


def series(name, first, n):
    return Series(name, pd.Period(first, "M"), np.arange(n, dtype=float), kind="rate")


def test_a_pair_keeps_each_end_and_says_which_is_shorter():
    found = outlook_pair(series("Money", "2000-01", 50), series("Prices", "1999-06", 60))
    assert found.driver.first == found.response.first == pd.Period("2000-01", "M")
    assert (found.lead, found.origin) == (-3, pd.Period("2004-05", "M"))
    assert found.note == (
        "'Money' ends in Feb 2004, 3 months before 'Prices', so the path is 3 months shorter than"
        " the shift"
    )
    assert str(found.ahead(2)[0]) == "2004-06"


def test_a_gap_after_the_common_end_is_refused():
    values = np.arange(60.0)
    values[55] = np.nan
    late = Series("Money", pd.Period("2000-01", "M"), values, kind="rate")
    with pytest.raises(ValueError, match="'Money' must have a value in every month to its end"):
        outlook_pair(late, series("Prices", "2000-01", 50))


def test_the_newest_break_under_the_path_is_named():
    found = outlook_pair(series("Money", "2000-01", 60), series("Prices", "2000-01", 60))
    months = [pd.Period("2003-11", "M"), pd.Period("2003-12", "M")]
    # Shift 12 and window 3: the path's windows begin 13 months before Dec 2004.
    assert break_in_path(found, window=3, shift=12, breaks=months) == months[1]
    assert break_in_path(found, window=3, shift=12, breaks=months[:1]) == months[0]
    assert break_in_path(found, window=3, shift=12, breaks=[months[0] - 1]) is None
