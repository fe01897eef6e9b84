"""Files of the evidence: their rows are the results, and the same state makes the same bytes."""

from dataclasses import replace

import numpy as np
import pytest

from analytics.series import period_code
from app import exports
from app.cli import VIEW_NAMES
from app.export_rows import SEARCHED, VIEWS
from app.lag.cells import (
    episode_code,
    inference,
    influence,
    map_hac,
    map_inference,
    without_episode,
)
from app.lag.evidence import completed, directions_work, opinions_work, search_work, stability_work
from app.pages.lag import view
from tests.app.economies import LAG, planted
from tests.app.evidence_cases import SMALL, case, fresh, noise, rates
from tests.exported import head_of, rows_of

QUARTERS = replace(SMALL, shift=-3, pinned="2:3", peaks="0.5", other_responses="Prices")


def exported(name, state=SMALL, bridge=None):
    text = exports.csv_export(name, state.to_query(), bridge or fresh())[1]
    return head_of(text), rows_of(text)


def column(rows, name, where=None):
    """A column as numbers, nan where a field is empty; `where` keeps rows of one part."""
    place = rows[0].index(name)
    chosen = [row for row in rows[1:] if where is None or row[0] == where]
    return np.array([float(row[place]) if row[place] else np.nan for row in chosen])


def texts(rows, name):
    place = rows[0].index(name)
    return [row[place] for row in rows[1:]]


def with_episode(bridge, state):
    """The state that leaves out the second episode of its cell."""
    episode = influence(state, bridge).episodes[1]
    return replace(state, without=episode_code(episode, bridge.pair(state), state))


# Shape ---------------------------------------------------------------------------------------


ALWAYS = [name for name in VIEWS if name != "season"]  # that one is there where it is asked for


def test_the_command_offers_every_view():
    assert set(VIEW_NAMES) == set(VIEWS)
    assert set(SEARCHED) <= set(VIEWS)


@pytest.mark.parametrize("calendar", ["2000-01", "1980Q1"])
@pytest.mark.parametrize("name", ALWAYS)
def test_every_row_has_the_columns_of_the_first(name, calendar):
    bridge = fresh(n=160, first=calendar, lag=-3)
    state = with_episode(bridge, QUARTERS)
    head, rows = exported(name, state, bridge)
    assert {len(row) for row in rows} == {len(rows[0])}
    assert len(set(rows[0])) == len(rows[0])
    assert len(rows) > 3
    for row in rows[1:]:
        assert any(field for field in row)
        assert not {"nan", "None", "inf", "-inf"} & set(row)
    if calendar == "1980Q1" and name in ("episodes", "stability", "without"):
        assert any("-Q" in field for row in rows for field in row)
    assert head["view"].startswith("Money; 3-")


@pytest.mark.parametrize("name", ALWAYS)
def test_the_same_state_makes_the_same_bytes(name):
    """Twice from memory, and once more by a program that has computed nothing yet."""
    bridge = fresh()
    query = with_episode(bridge, SMALL).to_query()
    first = exports.csv_export(name, query, bridge)
    assert exports.csv_export(name, query, bridge) == first
    assert exports.csv_export(name, query, fresh()) == first


@pytest.mark.parametrize("name", ["surface", "profile", "stability"])
def test_another_seed_makes_another_file(name):
    driver, rest = noise()
    bridge = fresh(*rates(driver, rest + 0.4 * np.roll(driver, LAG)))
    one = exported(name, SMALL, bridge)
    two = exported(name, replace(SMALL, seed=2), bridge)
    assert one[0]["search"] != two[0]["search"]
    assert one[1] != two[1]


def test_the_order_of_what_was_asked_changes_nothing():
    """Chunks done by a page, from another cell of the same map, then the file."""
    bridge = fresh()
    completed(replace(SMALL, window=5, shift=1), bridge)
    for name in ("profile", "surface"):
        asked = exports.csv_export(name, SMALL.to_query(), bridge)
        assert asked == exports.csv_export(name, SMALL.to_query(), fresh())


# Numbers -------------------------------------------------------------------------------------


@pytest.mark.parametrize("months", ["own", "same"])
def test_the_surface_carries_every_p_of_every_cell(months):
    bridge, state = fresh(), replace(SMALL, months=months)
    _, rows = exported("surface", state, bridge)
    found, judged = completed(state, bridge).search, map_inference(state, bridge)
    for name, values in (
        ("per_cell_p", judged.p),
        ("effective_months", judged.effective_months),
        ("naive_p", judged.p_naive),
        ("hac_p", map_hac(state, bridge).p),
        ("search_adjusted_p", found.p_cell),
    ):
        np.testing.assert_array_equal(column(rows, name), values.ravel())
    assert column(rows, "search_adjusted_p").min() == found.p


@pytest.mark.parametrize("name", ["short", "identical"])
def test_the_surface_of_a_pair_that_cannot_be_searched_has_no_searched_p(name):
    state, bridge, _ = case(name)
    head, rows = exported("surface", state, bridge)
    assert np.isnan(column(rows, "search_adjusted_p")).all()
    assert np.isfinite(column(rows, "per_cell_p")).any()
    assert head["search"].startswith("none: ")


def test_the_profile_is_the_shift_set():
    bridge = fresh()
    _, rows = exported("profile", SMALL, bridge)
    chosen = completed(SMALL, bridge).shift_set
    np.testing.assert_array_equal(column(rows, "shift"), chosen.candidates)
    np.testing.assert_array_equal(column(rows, "correlation"), chosen.correlation)
    np.testing.assert_array_equal(column(rows, "p_as_true_shift"), chosen.p_by_shift)
    for name, kept in (("in_set", chosen.shifts), ("in_preview", chosen.preview)):
        assert column(rows, "shift")[column(rows, name) == 1].tolist() == kept.tolist()
        assert set(column(rows, name)) == {0.0, 1.0}


@pytest.mark.parametrize("name", ["unrelated", "short", "exact copy"])
def test_the_profile_has_no_rows_where_there_is_no_set(name):
    state, bridge, _ = case(name)
    head, rows = exported("profile", state, bridge)
    assert rows == [["shift", "correlation", "p_as_true_shift", "in_set", "in_preview"]]
    if name == "exact copy":
        assert head["shift set"].startswith("none: the response must not follow the driver")
    else:
        assert not [key for key in head if key.startswith("shift set")]


def test_the_plane_is_both_regions_and_the_estimate():
    bridge = fresh()
    _, rows = exported("plane", SMALL, bridge)
    plane = inference(SMALL, bridge).plane
    for part, points in (
        ("estimate", plane.estimate[None]),
        ("robust region", plane.robust),
        ("naive region", plane.naive),
    ):
        np.testing.assert_array_equal(column(rows, "intercept", part), points[:, 0])
        np.testing.assert_array_equal(column(rows, "slope", part), points[:, 1])


@pytest.mark.parametrize("shift", [LAG, 0, -4])
def test_the_episodes_are_those_of_the_influence(shift):
    bridge, state = fresh(), replace(SMALL, shift=shift)
    _, rows = exported("episodes", state, bridge)
    parts, pair = influence(state, bridge).episodes, bridge.pair(state)
    assert [f"{a}:{b}" for a, b in zip(texts(rows, "first"), texts(rows, "last"), strict=True)] == [
        episode_code(episode, pair, state) for episode in parts
    ]
    assert texts(rows, "driver") == ["high" if e.high else "low" for e in parts]
    for name, field in (
        ("covariance_share", "share"),
        ("slope_without", "slope_without"),
        ("slope_change", "change"),
        ("correlation_without", "correlation_without"),
        ("p_without", "p_without"),
        ("effective_months_without", "effective_without"),
    ):
        np.testing.assert_array_equal(column(rows, name), [getattr(e, field) for e in parts])
    assert column(rows, "covariance_share").sum() == pytest.approx(1.0, abs=1e-9)


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize("shift", [LAG, -4])
def test_the_cell_without_an_episode_holds_pairs_and_both_lines(shift, months):
    bridge = fresh()
    state = with_episode(bridge, replace(SMALL, shift=shift, months=months))
    _, rows = exported("without", state, bridge)
    episode, rest = without_episode(state, bridge)
    np.testing.assert_array_equal(column(rows, "driver", "pair"), rest.driver)
    np.testing.assert_array_equal(column(rows, "response", "pair"), rest.response)
    np.testing.assert_array_equal(column(rows, "kept", "pair"), rest.kept)
    left_out = [row[1] for row in rows[1:] if row[0] == "pair" and row[4] == "0"]
    assert [left_out[0], left_out[-1]] == state.without.split(":")
    assert len(left_out) == episode.stop - episode.start
    names = [period_code(period) for period in bridge.pair(state).periods]
    start = view(state, bridge).start
    assert [row[1] for row in rows[1:] if row[0] == "pair"] == names[start : start + rest.kept.size]
    # The lines: both fitted to the pairs listed, so that a reader can check them.
    x, y = column(rows, "driver", "pair"), column(rows, "response", "pair")
    for part, kept in (("line, all", rest.kept | True), ("line, without", rest.kept)):
        ends, heights = column(rows, "driver", part), column(rows, "response", part)
        slope, intercept = np.polyfit(x[kept], y[kept], 1)
        assert ends.tolist() == [x.min(), x.max()]
        np.testing.assert_allclose(heights, intercept + slope * ends, atol=1e-9)


def test_the_line_of_all_pairs_fits_the_pairs_of_a_seasonal_economy():
    """Pairs are listed without their seasonal means, and so is the line through them."""
    season = 2.0 * np.sin(2.0 * np.pi * np.arange(240) / 12.0)
    money, prices = planted()
    bridge = fresh(*rates(money.values + season, prices.values - season))
    state = with_episode(bridge, SMALL)
    _, rows = exported("without", state, bridge)
    x, y = column(rows, "driver", "pair"), column(rows, "response", "pair")
    ends, heights = column(rows, "driver", "line, all"), column(rows, "response", "line, all")
    slope, intercept = np.polyfit(x, y, 1)
    np.testing.assert_allclose(heights, intercept + slope * ends, atol=1e-9)
    episode = without_episode(state, bridge)[0]
    without = np.diff(column(rows, "response", "line, without")) / np.diff(ends)
    np.testing.assert_allclose(without / slope - 1.0, episode.change, atol=1e-9)
    assert abs(bridge.cell(state).slope - slope) > 0.05, "the raw cell is another one here"


def test_nothing_is_listed_where_no_episode_is_left_out():
    _, rows = exported("without")
    assert rows == [["part", "driver_period", "driver", "response", "kept"]]


def test_the_opinions_are_those_of_the_methods():
    bridge = fresh()
    _, rows = exported("opinions", SMALL, bridge)
    found = bridge.jobs.complete(opinions_work(SMALL, bridge))
    for part, profile in (
        ("distributed lag", found.distributed.averaged),
        ("local projection", found.projected.averaged),
    ):
        for name in ("estimate", "low", "high"):
            np.testing.assert_array_equal(column(rows, name, part), getattr(profile, name))
        np.testing.assert_array_equal(column(rows, "shift", part), profile.shifts)
    white = found.prewhitened
    np.testing.assert_array_equal(
        column(rows, "estimate", "prewhitened correlation"), white.averaged
    )
    assert set(column(rows, "high", "prewhitened correlation")) == {white.averaged_bound}
    assert set(column(rows, "low", "prewhitened correlation")) == {-white.averaged_bound}
    for opinion in found.opinions:
        (row,) = [row for row in rows if row[0] == f"{opinion.method}: strongest"]
        assert row[1:] == [
            str(opinion.shift), repr(opinion.estimate), repr(opinion.low), repr(opinion.high)
        ]  # fmt: skip
    samples = dict(found.variants) | {
        "first half": found.halves.first, "second half": found.halves.second
    }  # fmt: skip
    for name, best in samples.items():
        (row,) = [row for row in rows if row[0] == f"{name}: strongest"]
        assert row[1:3] == [str(best.best_shift), repr(best.best_slope)]
        (row,) = [row for row in rows if row[0] == f"{name}: chosen cell"]
        assert row[1:3] == [str(LAG), repr(best.slope)]
    both = bridge.jobs.complete(directions_work(SMALL, bridge))
    for name, one in (("driver", both.forward), ("response", both.backward)):
        (row,) = [row for row in rows if row[0] == f"{name} first: search p"]
        assert row[1:3] == [str(one.best_shift), repr(one.p)]


def test_the_opinions_of_a_pair_that_cannot_be_searched_leave_the_directions_out():
    state, bridge, _ = case("short")
    _, rows = exported("opinions", state, bridge)
    assert len(rows) > 1
    assert not [row for row in rows if "search p" in row[0]]


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize("shift", [LAG, -4])
def test_stability_is_dated_by_the_last_month_of_the_driver(shift, months):
    bridge, state = fresh(), replace(SMALL, shift=shift, months=months)
    _, rows = exported("stability", state, bridge)
    stable = bridge.jobs.complete(stability_work(state, bridge))
    for name, values in (
        ("rolling_slope", stable.rolling_slope.estimate),
        ("band_low", stable.rolling_slope.low),
        ("band_high", stable.rolling_slope.high),
        ("growing_slope", stable.growing_slope.estimate),
        ("rolling_correlation", stable.rolling_correlation.estimate),
    ):
        np.testing.assert_array_equal(column(rows, name), values)
    shown = view(state, bridge)
    last = shown.pair.periods[shown.start + shown.cell.n - 1]
    assert texts(rows, "last_driver_period")[-1] == period_code(last)
    assert texts(rows, "last_driver_period")[0] == period_code(last - (shown.cell.n - stable.span))
    # The first sample by hand, from the pairs of the cell; no season is in these series.
    assert len(rows) - 1 == shown.cell.n - stable.span + 1


def test_opinions_that_are_refused_are_refused_in_a_sentence():
    bridge = fresh(lag=-4)
    state = replace(SMALL, shift=-4, shifts="-12:0")
    with pytest.raises(ValueError, match="the map has no shift above 0"):
        exports.csv_export("opinions", state.to_query(), bridge)
    assert len(exported("profile", state, bridge)[1]) == 14


# The header ----------------------------------------------------------------------------------


@pytest.mark.parametrize("name", SEARCHED)
def test_the_header_names_what_the_search_was_and_gave(name):
    bridge, state = fresh(), replace(SMALL, seed=7, surrogates=260)
    head, _ = exported(name, state, bridge)
    known, pair = completed(state, bridge), bridge.pair(state)
    found = known.search
    for said in (
        f"p {found.p!r};",
        f"one-sided {found.p_one_sided!r};",
        f"Monte Carlo standard error of p {found.p_error!r};",
        f"best cell window {found.best_window} shift {found.best_shift};",
        "surrogates 260;",
        "seed 7;",
        "level shifts removed no",
    ):
        assert said in head["search"]
    assert head["null hypothesis"] == found.method.replace(",", ";")
    assert head["shift set 95 %"] == " ".join(str(s) for s in known.shift_set.shifts)
    for said in (
        f"effective months {known.inference.effective_months!r}",
        f"p {known.inference.p!r}",
        f"slope {known.inference.se_robust!r}",
        f"fragility {known.influence.fragility!r}",
    ):
        assert said in head["cell by effective months"]
    for role in ("driver", "response"):
        assert f"as used: fingerprint {getattr(pair, role).fingerprint}" in head[role]
    assert head["state"] == f"/lag?{state.to_query()}"
    assert "not a cause and not advice" in head["note"]


def test_level_shifts_removed_are_named_in_the_header():
    state, bridge, known = case("both shifted")
    head, _ = exported("surface", state, bridge)
    assert "level shifts removed yes" in head["search"]
    assert f"p with them {known.search.p_with_level_shifts!r}" in head["search"]
    assert "freed of their level shifts" in head["null hypothesis"]


@pytest.mark.parametrize("name", ["scatter", "overlay"])
def test_a_view_that_needs_no_search_does_none(name):
    bridge = fresh()
    head, _ = exported(name, SMALL, bridge)
    assert "search" not in head
    assert bridge.jobs._jobs == {}
    assert bridge.jobs.remembered(search_work(SMALL, bridge)) is None


# What a spreadsheet would run ----------------------------------------------------------------


@pytest.mark.parametrize("name", ALWAYS)
def test_names_that_a_spreadsheet_would_run_stay_in_the_header(name):
    money, prices = planted()
    side = replace(money, name="=1+1", unit="@SUM(A1)", source="+cmd|' /C calc'!A0")
    bridge = fresh(side, prices)
    state = with_episode(bridge, replace(SMALL, driver="=1+1"))
    text = exports.csv_export(name, state.to_query(), bridge)[1]
    head, rows = head_of(text), rows_of(text)
    assert head["driver"].startswith("=1+1; @SUM(A1); source +cmd")
    for row in rows:
        for field in row:
            assert not field.startswith(("=", "+", "@", "\t"))
            if field.startswith("-"):
                float(field)
    for line in text.split("\r\n"):
        assert not line.startswith(("=", "+", "@"))


def test_a_view_that_there_is_not_is_refused_with_those_that_there_are():
    with pytest.raises(ValueError, match="view must be one of surface, scatter, overlay, profile"):
        exports.csv_export("../profile", SMALL.to_query(), fresh())
