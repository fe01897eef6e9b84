"""Charts of the evidence: what is drawn is the result, axes carry units, names are harmless."""

import json
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.series import period_label
from app.compute import cell_span
from app.figures import evidence as figures
from app.lag.cells import episode_code, inference, influence, without_episode
from app.lag.evidence import completed, opinions_work, stability_work
from app.pages.lag import view
from tests.app.economies import LAG, planted
from tests.app.evidence_cases import SMALL, case, fresh

CELLS = [("own", LAG, "2000-01"), ("same", LAG, "2000-01"), ("own", -4, "2000-01"),
         ("same", -4, "1980Q1")]  # fmt: skip


def at(months, shift, first):
    """Bridge, state and pair of one of the `CELLS`."""
    bridge, state = fresh(first=first), replace(SMALL, months=months, shift=shift)
    return bridge, state, bridge.pair(state), cell_span(bridge.pair(state), state)[0]


def day(period):
    return period.to_timestamp()


def titles(figure):
    layout = figure.to_plotly_json()["layout"]
    return {name: axis["title"]["text"] for name, axis in layout.items()
            if name[1:5] == "axis" and axis.get("title")}  # fmt: skip


def every_figure(bridge, state):
    """All charts of one state, by name."""
    pair = bridge.pair(state)
    start, known = cell_span(pair, state)[0], completed(state, bridge)
    code = episode_code(known.influence.episodes[1], pair, state)
    left_out = without_episode(replace(state, without=code), bridge)
    return {
        "profile": figures.shift_profile(known.shift_set, pair),
        "plane": figures.parameter_plane(known.inference, pair),
        "episodes": figures.episode_shares(known.influence, pair, start),
        "without": figures.scatter_without(known.inference, *left_out, pair, state, start),
        "opinions": figures.opinion_profiles(
            bridge.jobs.complete(opinions_work(state, bridge)), pair
        ),
        "stability": figures.stability_courses(
            bridge.jobs.complete(stability_work(state, bridge)), pair, start
        ),
    }


# What is drawn is the result -----------------------------------------------------------------


def test_the_profile_marks_the_set_and_the_preview():
    bridge = fresh()
    chosen = completed(SMALL, bridge).shift_set
    line, near, kept = figures.shift_profile(chosen, bridge.pair(SMALL)).data
    np.testing.assert_array_equal(line.x, chosen.candidates)
    np.testing.assert_array_equal(line.y, chosen.correlation)
    np.testing.assert_array_equal(near.x, chosen.preview)
    np.testing.assert_array_equal(kept.x, chosen.shifts)
    by_shift = dict(zip(chosen.candidates, chosen.correlation, strict=True))
    for trace in (near, kept):
        np.testing.assert_array_equal(trace.y, [by_shift[s] for s in trace.x])
    p_of = dict(zip(chosen.candidates, chosen.p_by_shift, strict=True))
    assert list(kept.text) == [f"p as the true shift {p_of[s]:.3f}" for s in chosen.shifts]
    assert kept.name == "95 % shift set"


def test_the_plane_draws_both_regions_and_no_slope():
    bridge = fresh()
    found = inference(SMALL, bridge)
    figure = figures.parameter_plane(found, bridge.pair(SMALL))
    robust, naive, estimate = figure.data
    np.testing.assert_array_equal(np.column_stack((robust.x, robust.y)), found.plane.robust)
    np.testing.assert_array_equal(np.column_stack((naive.x, naive.y)), found.plane.naive)
    assert (estimate.x, estimate.y) == ((found.intercept,), (found.slope,))
    (zero,) = figure.layout.shapes
    assert (zero.y0, zero.y1) == (0, 0)
    assert robust.line.dash != naive.line.dash, "told apart without colour"


@pytest.mark.parametrize(("months", "shift", "first"), CELLS)
def test_episodes_stand_over_their_months(months, shift, first):
    bridge, state, pair, start = at(months, shift, first)
    found = influence(state, bridge)
    figure = figures.episode_shares(found, pair, start)
    drawn = {}
    for high, trace in zip((True, False), figure.data, strict=True):
        for x, y, width, texts in zip(trace.x, trace.y, trace.width, trace.customdata, strict=True):
            end = pd.Timestamp(x) + pd.Timedelta(milliseconds=int(width))
            drawn[(pd.Timestamp(x), end)] = (high, y, texts[0], texts[1])
    assert figure.data[0].marker.pattern.shape != figure.data[1].marker.pattern.shape
    periods, offset = pair.periods, view(state, bridge).start
    wanted = {
        (day(periods[offset + e.start]), day(periods[offset + e.stop - 1])): (
            e.high,
            100 * e.share,
            f"{period_label(periods[offset + e.start])} to"
            f" {period_label(periods[offset + e.stop - 1])}",
            100 * e.change,
        )
        for e in found.episodes
    }
    assert drawn == wanted


@pytest.mark.parametrize(("months", "shift", "first"), CELLS)
def test_the_cell_without_an_episode_is_drawn_with_both_lines(months, shift, first):
    bridge, state, pair, start = at(months, shift, first)
    whole = inference(state, bridge)
    state = replace(state, without=episode_code(influence(state, bridge).episodes[1], pair, state))
    episode, rest = without_episode(state, bridge)
    kept, gone, line, other = figures.scatter_without(whole, episode, rest, pair, state, start).data
    np.testing.assert_array_equal(kept.x, rest.driver[rest.kept])
    np.testing.assert_array_equal(kept.y, rest.response[rest.kept])
    np.testing.assert_array_equal(gone.x, rest.driver[~rest.kept])
    np.testing.assert_array_equal(gone.y, rest.response[~rest.kept])
    first_code, last_code = state.without.split(":")
    labels = [period_label(pd.Period(code.replace("-Q", "Q"))) for code in (first_code, last_code)]
    assert gone.name == f"left out: {' to '.join(labels)}"
    for drawn, slope, intercept in (
        (line, whole.slope, whole.intercept),
        (other, rest.slope, rest.intercept),
    ):
        np.testing.assert_allclose(drawn.y, intercept + slope * np.array(drawn.x), atol=1e-12)
        assert f"slope {slope:.3f}" in drawn.name
    slope = np.polyfit(np.append(kept.x, gone.x), np.append(kept.y, gone.y), 1)[0]
    assert whole.slope == pytest.approx(slope, abs=1e-9), "the line of the points that are shown"
    assert kept.marker.symbol != gone.marker.symbol


def test_each_method_has_its_row_with_its_band():
    bridge = fresh()
    found = bridge.jobs.complete(opinions_work(SMALL, bridge))
    data = figures.opinion_profiles(found, bridge.pair(SMALL)).data
    white = found.prewhitened
    bound = np.full(white.averaged.shape, white.averaged_bound)
    rows = [("prewhitened correlation", white.shifts, white.averaged, -bound, bound)]
    for name, result in (
        ("distributed lag", found.distributed.averaged),
        ("local projection", found.projected.averaged),
    ):
        rows.append((name, result.shifts, result.estimate, result.low, result.high))
    assert len(data) == 2 * len(rows)
    for (name, shifts, estimate, low, high), band, line in zip(
        rows, data[::2], data[1::2], strict=True
    ):
        assert line.name == name
        np.testing.assert_array_equal(line.x, shifts)
        np.testing.assert_array_equal(line.y, estimate)
        size = len(shifts)
        np.testing.assert_array_equal(band.x[:size], shifts)
        np.testing.assert_array_equal(band.y[:size], high)
        np.testing.assert_array_equal(band.x[size:][::-1], shifts)
        np.testing.assert_array_equal(band.y[size:][::-1], low)
        assert band.yaxis == line.yaxis
    assert len({line.yaxis for line in data[1::2]}) == 3


def test_methods_that_are_missing_leave_no_row():
    bridge = fresh()
    found = bridge.jobs.complete(opinions_work(SMALL, bridge))
    pair = bridge.pair(SMALL)
    fewer = figures.opinion_profiles(replace(found, distributed=None), pair)
    assert [t.name for t in fewer.data[1::2]] == ["prewhitened correlation", "local projection"]
    none = replace(found, distributed=None, prewhitened=None, projected=None)
    assert figures.opinion_profiles(none, pair).data == ()


@pytest.mark.parametrize(("months", "shift", "first"), CELLS)
def test_the_slope_through_time_ends_with_the_last_month_of_the_cell(months, shift, first):
    bridge, state, pair, start = at(months, shift, first)
    stable = bridge.jobs.complete(stability_work(state, bridge))
    band, rolling, growing = figures.stability_courses(stable, pair, start).data
    np.testing.assert_array_equal(rolling.y, stable.rolling_slope.estimate)
    np.testing.assert_array_equal(growing.y, stable.growing_slope.estimate)
    size = len(rolling.y)
    np.testing.assert_array_equal(band.y[:size], stable.rolling_slope.high)
    np.testing.assert_array_equal(band.y[size:][::-1], stable.rolling_slope.low)
    shown = view(state, bridge)
    assert pd.Timestamp(rolling.x[-1]) == day(pair.periods[shown.start + shown.cell.n - 1])
    assert list(rolling.x) == list(growing.x) == list(band.x[:size])
    assert f"slope over {stable.span}" in rolling.name
    assert rolling.line.dash != growing.line.dash


def test_what_lies_over_the_map_is_the_p_of_the_search():
    found = case("leads")[2].search
    veil, line = figures.support_traces(found)
    for trace in (veil, line):
        np.testing.assert_array_equal(trace.x, found.shifts)
        np.testing.assert_array_equal(trace.y, found.windows)
    np.testing.assert_array_equal(line.z, found.p_cell)
    assert (line.contours.start, line.contours.end) == (0.05, 0.05)
    held = found.p_cell <= 0.05
    assert held.any()
    assert not held.all()
    assert np.isnan(np.array(veil.z)[held]).all(), "supported cells keep their colour"
    assert (np.array(veil.z)[~held] == 1.0).all()
    for trace in (veil, line):
        assert trace.hoverinfo == "skip", "the map below answers the pointer"


def test_the_veil_lies_over_everything_where_nothing_holds():
    veil, _ = figures.support_traces(case("unrelated")[2].search)
    assert np.isfinite(np.array(veil.z)).all()


# Axes ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(("first", "noun"), [("2000-01", "month"), ("1980Q1", "quarter")])
def test_titles_carry_units(first, noun):
    drawn = every_figure(fresh(first=first), SMALL)
    assert titles(drawn["profile"]) == {
        "xaxis": f"shift ({noun}s)", "yaxis": "correlation, window 3"
    }  # fmt: skip
    assert titles(drawn["plane"]) == {
        "xaxis": "intercept (percent)", "yaxis": "slope (response per unit of driver)"
    }  # fmt: skip
    assert titles(drawn["episodes"]) == {"yaxis": "share of the covariance (%)"}
    assert titles(drawn["stability"]) == {"yaxis": "slope"}
    assert titles(drawn["opinions"])["xaxis"] == f"{noun}s after the driver"
    for axis in titles(drawn["without"]).values():
        assert f"3-{noun} mean" in axis
        assert "percent" in axis


@pytest.mark.parametrize("name", ["profile", "plane", "episodes", "without", "opinions"])
def test_charts_are_json_without_nan(name):
    figure = every_figure(fresh(), SMALL)[name]
    json.loads(figure.to_json(), parse_constant=pytest.fail)


def test_what_lies_over_the_map_is_json_without_nan():
    for trace in figures.support_traces(case("leads")[2].search):
        json.loads(trace.to_json(), parse_constant=pytest.fail)


# Names ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "name", ["<script>alert(1)</script>", '<a href="javascript:alert(1)">x</a>', "A & <b>B</b>"]
)
def test_hostile_names_are_harmless(name):
    money, prices = planted()
    bridge = fresh(
        replace(money, name=name, unit=name, source=name),
        replace(prices, name=f"{name} 2", unit=name),
    )
    state = replace(SMALL, driver=name, response=f"{name} 2")
    for chart, figure in every_figure(bridge, state).items():
        text = json.dumps(json.loads(figure.to_json()))  # plotly writes < as a code
        for bad in ("<script", "<a ", "<b>", "</b>", "</a>"):
            assert bad not in text, (chart, bad)
        if chart in ("plane", "without"):
            assert "&lt;" in text
