"""Charts of the Data page: what is drawn is the result; the small line of every series."""

from urllib.parse import unquote

import numpy as np

from app.compute import Bridge
from app.desk import bridge as desk
from app.figures.data import revisions_chart, sparkline
from app.state import ViewState
from tests.app.test_desk import vintages

STATE = ViewState(series="Prices")


def test_the_chart_draws_the_result_and_nothing_else():
    found = desk.revised(STATE, Bridge(vintages()))
    chart = revisions_chart(found.result, found.start, found.unit)
    latest, printed, change = chart.data
    shown = slice(found.start, None)
    np.testing.assert_array_equal(latest.y, found.result.latest[shown])
    expected = np.where(found.result.first_print, found.result.first, np.nan)[shown]
    np.testing.assert_array_equal(printed.y, expected)
    np.testing.assert_array_equal(change.y[:-1], found.result.revision[shown][:-1])
    assert np.isnan(change.y[-1])  # the newest print cannot have been revised
    assert latest.text[-1] == "Apr 2023"
    assert chart.layout.yaxis.title.text == "percent a month"
    assert {trace.name for trace in chart.data} == {"latest", "first print", "revision"}


def path_of(values):
    svg = unquote(sparkline(np.array(values, float)).removeprefix("data:image/svg+xml,"))
    assert svg.startswith('<svg xmlns="http://www.w3.org/2000/svg"')
    return svg.split(' d="')[1].split('"')[0]


def test_the_small_line_runs_from_low_to_high_and_breaks_at_a_gap():
    assert path_of([0, 1]) == "M2.0 26.0L118.0 2.0"
    assert path_of([1, 0, 1]) == "M2.0 2.0L60.0 26.0L118.0 2.0"
    assert path_of([0, 1, np.nan, 1, 0]).count("M") == 2
    assert path_of([5, 5, 5]) == "M2.0 14.0L60.0 14.0L118.0 14.0"
    assert path_of([7.0]) == "M2.0 14.0h.01"
    assert "nan" not in path_of([1e308, -1e308, 0])


def test_no_jump_of_a_long_series_is_lost_in_the_small_line():
    values = np.ones(5000)
    values[1234] = 10.0
    path = path_of(values)
    assert " 2.0L" in path
    assert path.count("L") < 200
    values[3000] = np.nan
    assert path_of(values).count("M") == 2
