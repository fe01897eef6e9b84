"""Figures of the Lag page: what is drawn is the result, axes carry units, names are harmless."""

import json
import re
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.series import period_label
from app.compute import Bridge
from app.figures import lag as figures
from app.figures import theme
from app.pages.lag import view
from app.places import bundled
from app.state import ViewState
from tests.app.economies import LAG, levels, planted, workspace

STATE = ViewState(driver="Money", response="Prices", window=3, shift=LAG)


def shown(state=STATE, *series, **options):
    return view(state, Bridge(workspace(*(series or planted(**options)))))


def surface_of(result):
    return figures.surface_heatmap(result.surface, result.pair, result.state)


def scatter_of(result):
    return figures.cell_scatter(result.cell, result.pair, result.state, result.start)


def overlay_of(result):
    return figures.overlay_lines(result.overlay, result.pair, result.state)


def drawn(result):
    return {
        "surface": surface_of(result),
        "scatter": scatter_of(result),
        "overlay": overlay_of(result),
    }


# What is drawn is the result -----------------------------------------------------------------


@pytest.mark.parametrize("quantity", ["correlation", "slope"])
def test_the_map_shows_every_cell(quantity):
    result = shown(replace(STATE, quantity=quantity))
    (trace,) = surface_of(result).data
    np.testing.assert_array_equal(trace.x, result.surface.shifts)
    np.testing.assert_array_equal(trace.y, result.surface.windows)
    np.testing.assert_array_equal(trace.z, getattr(result.surface, quantity))
    np.testing.assert_array_equal(trace.customdata, result.surface.pairs)
    assert trace.zmin == -trace.zmax  # so that the middle of the colours is zero
    if quantity == "correlation":
        assert trace.zmax == 1.0
    else:
        assert trace.zmax == np.nanmax(np.abs(result.surface.slope))
    assert trace.colorbar.title.text == quantity


def test_the_map_leaves_cells_without_a_correlation_empty():
    result = shown(replace(STATE, windows="1:40", shifts="-30:30"), n=80)
    (trace,) = surface_of(result).data
    assert np.isnan(trace.z[result.surface.pairs < 24]).all()
    assert (result.surface.pairs < 24).any()
    top = surface_of(shown(replace(result.state, quantity="slope"), n=80)).data[0].zmax
    assert np.isfinite(top)


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize("shift", [LAG, 0, -4])
def test_the_scatter_shows_pairs_line_ellipse_and_slices(shift, months):
    result = shown(replace(STATE, shift=shift, months=months))
    cell = result.cell
    points, line, ellipse, across, along = scatter_of(result).data[:5]
    np.testing.assert_array_equal(points.x, cell.driver)
    np.testing.assert_array_equal(points.y, cell.response)
    assert len(points.text) == cell.n
    first = result.pair.periods[result.start]
    assert points.text[0] == f"{period_label(first)} → {period_label(first + shift)}"
    last = first + cell.n - 1
    assert points.text[-1] == f"{period_label(last)} → {period_label(last + shift)}"
    np.testing.assert_allclose(
        np.asarray(line.y), cell.intercept + cell.slope * np.asarray(line.x), rtol=0, atol=1e-12
    )
    assert list(line.x) == [cell.driver.min(), cell.driver.max()]
    np.testing.assert_array_equal(np.column_stack((ellipse.x, ellipse.y)), cell.ellipse)
    np.testing.assert_array_equal(across.x, cell.driver_slices.centre)
    np.testing.assert_array_equal(across.y, cell.driver_slices.mean)
    np.testing.assert_array_equal(across.customdata, cell.driver_slices.count)
    np.testing.assert_array_equal(along.x, cell.response_slices.mean)
    np.testing.assert_array_equal(along.y, cell.response_slices.centre)
    np.testing.assert_array_equal(along.customdata, cell.response_slices.count)


@pytest.mark.parametrize("first", ["1990-01", "1990Q1", "1900"])
def test_points_are_coloured_by_the_driver_month(first):
    result = shown(replace(STATE, window=2, shift=3), n=100, first=first)
    colours = np.asarray(scatter_of(result).data[0].marker.color)
    per_year = {"M": 12, "Q": 4, "Y": 1}[result.pair.periods.freqstr[0]]
    period = result.pair.periods[result.start]
    place = {12: period.month, 4: period.quarter, 1: 1}[per_year]
    assert colours[0] == pytest.approx(period.year + (place - 0.5) / per_year, abs=1e-9)
    np.testing.assert_allclose(np.diff(colours), 1 / per_year, rtol=0, atol=1e-9)
    marker = scatter_of(result).data[0].marker
    assert marker.cmin <= colours.min() <= colours.max() <= marker.cmax


def test_a_year_has_its_middle_at_a_half():
    periods = pd.PeriodIndex(["1970", "2000"], freq="Y")
    np.testing.assert_allclose(figures.decimal_years(periods), [1970.5, 2000.5])
    np.testing.assert_allclose(
        figures.decimal_years(pd.PeriodIndex(["1969-12"], freq="M")), [1969 + 23 / 24]
    )


@pytest.mark.parametrize("shift", [LAG, 0, -4])
def test_the_overlay_shows_both_lines(shift):
    result = shown(replace(STATE, shift=shift))
    for trace, values in zip(
        overlay_of(result).data, (result.overlay.driver, result.overlay.response), strict=True
    ):
        np.testing.assert_array_equal(trace.y, values)
        assert list(pd.PeriodIndex(pd.to_datetime(trace.x), freq="M")) == list(
            result.overlay.periods
        )
        assert list(trace.text) == [str(period) for period in result.overlay.periods]


# The contract with the browser ---------------------------------------------------------------


def test_traces_stand_in_the_order_that_the_browser_relies_on():
    assert figures.SCATTER_TRACES == (
        "points",
        "line",
        "ellipse",
        "driver_slices",
        "response_slices",
        "in_band",
        "path",
        "driver_counts",
        "response_counts",
        "squares",
    )
    assert figures.OVERLAY_TRACES == ("driver", "response")
    result = shown()
    assert len(scatter_of(result).data) == len(figures.SCATTER_TRACES)
    assert [trace.name for trace in scatter_of(result).data] == [
        "months",
        "least squares",
        "2-sigma ellipse",
        "mean response in slices of the driver",
        "mean driver in slices",
        "in the slice",
        "mean of the slice as it sweeps",
        "counts of the driver",
        "counts of the response",
        "counts in squares",
    ]
    assert [trace.name for trace in overlay_of(result).data] == list(figures.OVERLAY_TRACES)
    script = (bundled("assets") / "lag-scatter.js").read_text(encoding="utf-8")
    assert (
        "const [points, line, ellipse, across, along, held, path, left, right, both] = made.data;"
        in script
    )


@pytest.mark.parametrize("name", ["surface", "scatter", "overlay"])
def test_figures_are_json_without_nan(name):
    text = drawn(shown(replace(STATE, shift=-4)))[name].to_json()
    json.loads(text, parse_constant=lambda found: pytest.fail(found))


def test_the_bounds_of_the_map_are_whole_cells():
    result = shown()
    figure = surface_of(result)
    assert list(figure.layout.xaxis.range) == [
        result.surface.shifts[0] - 0.5,
        result.surface.shifts[-1] + 0.5,
    ]
    assert list(figure.layout.yaxis.range) == [0.5, result.surface.windows[-1] + 0.5]


def test_the_line_at_shift_0_is_drawn_only_where_there_is_one():
    assert len(surface_of(shown()).layout.shapes) == 1
    assert len(surface_of(shown(replace(STATE, shifts="3:9"))).layout.shapes) == 0


# Units ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("first", "unit"), [("2000-01", "month"), ("1960Q1", "quarter"), ("1900", "year")]
)
def test_axes_carry_units(first, unit):
    result = shown(replace(STATE, window=3, shift=2), n=120, first=first)
    surface, scatter, overlay = drawn(result).values()
    assert surface.layout.xaxis.title.text == f"shift ({unit}s; above 0 the driver leads)"
    assert surface.layout.yaxis.title.text == f"window ({unit}s averaged)"
    assert scatter.layout.xaxis.title.text == f"Money, 3-{unit} mean, percent"
    assert scatter.layout.yaxis.title.text == f"Prices<br>3-{unit} mean, percent"
    assert overlay.layout.yaxis.title.text == "percent"


def test_a_growth_rate_names_its_period():
    money, prices = planted()
    result = shown(STATE, levels(money), levels(prices))
    assert result.pair.driver.unit
    assert scatter_of(result).layout.xaxis.title.text == (
        f"Money, 3-month mean, {result.pair.driver.unit}"
    )
    assert overlay_of(result).layout.yaxis.title.text == result.pair.driver.unit


def test_one_month_is_not_called_a_mean():
    figure = scatter_of(shown(replace(STATE, window=1)))
    assert figure.layout.xaxis.title.text == "Money, percent"


def test_two_units_are_not_put_under_one_name():
    money, prices = planted()
    result = shown(STATE, money, replace(prices, unit="points"))
    assert overlay_of(result).layout.yaxis.title.text == "percent"
    assert scatter_of(result).layout.yaxis.title.text.endswith("points")


# Names ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "name",
    [
        "<b>bold</b>",
        "<script>alert(1)</script>",
        '<a href="javascript:alert(1)">x</a>',
        "a & b",
        "%{x}",
        "x" * 200,
        "<" * 40,
    ],
)
def test_hostile_names_and_units_are_escaped(name):
    money, prices = planted()
    result = shown(
        replace(STATE, driver=name), replace(money, name=name, unit=f"{name[:20]} unit"), prices
    )
    for figure in drawn(result).values():
        plain = figure.to_plotly_json()
        for text in texts(plain):
            assert re.sub(r"<(br|extra|/extra)>", "", text).count("<") == 0
    title = scatter_of(result).layout.xaxis.title.text
    assert len(title) < 300
    for trace in scatter_of(result).data:
        # templates hold no words of a file; %{x} is a word of theirs
        assert name == "%{x}" or name not in (trace.hovertemplate or "")


def texts(node):
    if isinstance(node, str):
        return [node]
    if isinstance(node, dict):
        return [text for child in node.values() for text in texts(child)]
    if isinstance(node, (list, tuple)):
        return [text for child in node for text in texts(child)]
    return []


# Colours -------------------------------------------------------------------------------------


def test_both_themes_have_the_same_tokens():
    light, dark = theme.colours()["light"], theme.colours()["dark"]
    assert light
    assert set(dark) <= set(light)
    assert all(
        re.fullmatch(r"#[0-9A-Fa-f]{6}", value) for value in (*light.values(), *dark.values())
    )


def luminance(colour):
    """Relative luminance of sRGB (WCAG 2.2, definition of relative luminance)."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def test_luminance_of_black_and_white():
    assert luminance("#000000") == 0.0
    assert luminance("#ffffff") == pytest.approx(1.0)


def test_the_time_scale_gets_darker_so_that_it_reads_in_grey():
    falling = [luminance(str(colour)) for _, colour in theme.time_scale()]
    assert falling == sorted(falling, reverse=True)
    assert (falling[0] + 0.05) / (falling[-1] + 0.05) >= 3  # WCAG 2.2, 1.4.11


def test_the_diverging_scale_has_its_lightest_colour_at_zero():
    scale = theme.diverging()
    levels_of_grey = [luminance(str(colour)) for _, colour in scale]
    assert [place for place, _ in scale] == pytest.approx([i / 6 for i in range(7)])
    assert max(levels_of_grey) == levels_of_grey[3]


def test_words_on_paper_have_enough_contrast():
    for tokens in theme.colours().values():
        if {"ink", "paper"} <= set(tokens):
            low, high = sorted((luminance(tokens["ink"]), luminance(tokens["paper"])))
            assert (high + 0.05) / (low + 0.05) >= 7  # WCAG 2.2, 1.4.6, level AAA


def test_charts_ask_no_other_host():
    assert theme.CONFIG["plotlyServerURL"] == ""
    for figure in drawn(shown()).values():
        assert "http" not in figure.to_json()
