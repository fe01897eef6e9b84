"""The tools of the Lag page: figures, words and files are the results of the same state."""

import json
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from analytics.cell import lag_cell
from analytics.peaks import matched_peaks
from analytics.rates import trailing_mean
from analytics.series import period_code
from analytics.several import holm
from analytics.slices import pair_counts, slice_path
from app import exports
from app.compute import Bridge
from app.figures.evidence import parameter_plane
from app.figures.lag import overlay_lines
from app.figures.lag_slices import density_surface
from app.figures.lag_tools import compare_scatters, peak_traces, response_profiles
from app.lag.answer import answer as lag_answer
from app.lag.cells import cell_of, every_month, inference, relation_left
from app.lag.evidence import completed, evidence, search_work
from app.lag.left_out import kept_months, left_out_spans, left_out_words
from app.lag.tools import density_of, peaks_of, responses_of, responses_work, two_cells
from app.lag.verdict import verdict
from app.lag.work import WORK
from app.pages.lag import payload, scatter, view
from app.pages.lag_evidence import FOLDS, answer
from app.pages.lag_tools import peak_words, response_words
from app.state import StateError, ViewState
from tests.app.economies import LAG, planted, workspace
from tests.app.evidence_cases import noise, rates
from tests.exported import records

STATE = ViewState(
    driver="Money", response="Prices", window=3, shift=LAG, windows="1:6", shifts="-6:12",
    surrogates=120,
)  # fmt: skip
HOLE = "2005-01:2006-06"


def three(n=240):
    """Money leads Prices; Noise is unrelated to both."""
    money, prices = planted(n)
    (noisy, _) = rates(*noise(n))
    return money, prices, replace(noisy, name="Noise")


@pytest.fixture(scope="module")
def bridge():
    return Bridge(workspace(*three()))


def exported(name, state, bridge):
    text = exports.csv_export(name, state.to_query(), bridge)[1]
    return text, records(text)


def numbers(rows, column, part):
    chosen = [row for row in rows if row["part"] == part]
    return np.array([float(row[column]) if row[column] else np.nan for row in chosen])


# Slice and counts ----------------------------------------------------------------------------


@pytest.mark.parametrize("band", ["driver", "response"])
def test_the_scatter_draws_and_saves_the_slice(bridge, band):
    state = replace(STATE, band=band, band_place=30, band_width=20)
    cell = bridge.cell(state)
    sides = (cell.driver, cell.response)
    along, other = sides if band == "driver" else sides[::-1]
    path = slice_path(along, other, width=0.2)
    held, line = scatter(view(state, bridge), bridge).data[5:7]
    inside = (along >= path.low[30]) & (along <= path.high[30])
    np.testing.assert_array_equal(held.x, cell.driver[inside])
    assert held.visible is True
    assert 0 < inside.sum() == path.count[30] < cell.n
    drawn = (line.x, line.y) if band == "driver" else (line.y, line.x)
    np.testing.assert_array_equal(drawn[0], path.centre)
    np.testing.assert_array_equal(drawn[1], path.mean)
    _, rows = exported("scatter", state, bridge)
    name = "driver" if band == "response" else "response"
    assert numbers(rows, name, "chosen slice") == pytest.approx([path.mean[30]], nan_ok=True)
    np.testing.assert_allclose(
        numbers(rows, name, "slice path"), np.delete(path.mean, 30), rtol=1e-12
    )
    assert "slice path" not in exported("scatter", STATE, bridge)[0]


def test_the_scatter_draws_and_saves_counts(bridge):
    state = replace(STATE, points="counts")
    cell = bridge.cell(state)
    counts = pair_counts(cell.driver, cell.response)
    figure = scatter(view(state, bridge), bridge)
    points, *_, left, right, squares = figure.data
    assert points.visible is False
    np.testing.assert_array_equal(left.y, counts.driver)
    np.testing.assert_array_equal(right.x, counts.response)
    np.testing.assert_array_equal(np.nan_to_num(squares.z), counts.both)
    assert squares.visible is True
    assert figure.layout.xaxis.domain[1] < figure.layout.xaxis2.domain[0]
    _, rows = exported("scatter", state, bridge)
    np.testing.assert_array_equal(numbers(rows, "count", "driver count"), counts.driver)
    np.testing.assert_array_equal(
        numbers(rows, "count", "square count"), counts.both[counts.both > 0]
    )
    assert numbers(rows, "count", "square count").sum() == cell.n
    assert [t.visible for t in scatter(view(STATE, bridge), bridge).data[5:]] == [False] * 5


# Months left out -----------------------------------------------------------------------------


def test_months_left_out_are_left_out_of_cell_map_words_and_files(bridge):
    state = replace(STATE, left_out=HOLE)
    shown = view(state, bridge)
    pair = shown.pair
    kept = kept_months(pair, state)
    months = pd.period_range("2005-01", "2006-06", freq="M")
    np.testing.assert_array_equal(~kept, pair.periods.isin(months))
    plain = lag_cell(pair.driver.values, pair.response.values, window=3, shift=LAG, kept=kept)
    assert shown.cell.slope == plain.slope
    touched = [
        t
        for t in bridge.cell(STATE).months
        if not (kept[t - 2 : t + 1].all() and kept[t + LAG - 2 : t + LAG + 1].all())
    ]
    assert shown.cell.n == bridge.cell(STATE).n - len(touched) == 234 - 2 - 26
    assert shown.surface.correlation[shown.surface.cell(3, LAG)] == pytest.approx(plain.correlation)
    assert ", without Jan 2005 to Jun 2006" in shown.sentence
    text, rows = exported("scatter", state, bridge)
    assert "without Jan 2005 to Jun 2006" in text.splitlines()[1]
    for row in [row for row in rows if row["part"] == "pair"]:
        for side in ("driver_period", "response_period"):
            last = pd.Period(row[side], freq="M")
            assert not pd.period_range(last - 2, last).isin(months).any()
    figure = scatter(shown, bridge)
    assert len(figure.data[0].x) == len(figure.data[0].text) == shown.cell.n
    assert figure.data[0].text[-1].startswith(period_words(pair, shown.cell.months[-1]))
    sent = payload(state, bridge)
    assert sent["leftOut"] == left_out_spans(pair, state) == [(60, 78)]
    assert sent["without"] == left_out_words(pair, state)


def period_words(pair, place):
    return pair.periods[place].strftime("%b %Y")


def test_the_overlay_bands_what_is_left_out(bridge):
    state = replace(STATE, left_out=HOLE)
    shown = view(state, bridge)
    figure = overlay_lines(shown.overlay, shown.pair, state, left_out_spans(shown.pair, state))
    (band,) = figure.layout.shapes
    assert str(band.x0).startswith("2005-01-01")
    assert str(band.x1).startswith("2006-06-30")
    assert band.label.text == "left out"


def test_per_cell_p_follows_and_the_search_does_not(bridge):
    state = replace(STATE, left_out=HOLE)
    bridge.jobs.complete(search_work(STATE, bridge))
    known, whole = evidence(state, bridge), evidence(STATE, bridge)
    assert known.search.p == whole.search.p
    assert search_work(state, bridge).key == search_work(STATE, bridge).key
    assert known.inference.p == whole.inference.p
    assert whole.rest is None
    rest = relation_left(state, bridge)
    assert known.rest.p == rest.p != whole.inference.p
    assert known.n == bridge.cell(state).n < whole.n
    said = " ".join(verdict(known, bridge.pair(state), state))
    assert "Without the months left out the cell has slope" in said
    assert "read every month of the sample" in said
    assert "Without the months" not in " ".join(verdict(whole, bridge.pair(STATE), STATE))
    found = lag_answer(view(state, bridge), known)
    assert found["left_out"]["slope"] == rest.slope
    assert lag_answer(view(STATE, bridge), whole)["left_out"] is None


def test_leaving_nothing_out_gives_the_p_of_the_whole_cell(bridge):
    """The relation without a hole is that of `cell_inference`: the two can be compared."""
    from analytics.partial_cell import PartialCell

    cell = PartialCell(**cell_of(STATE, bridge))
    assert cell.relation(cell.all_pairs).p == pytest.approx(inference(STATE, bridge).p, rel=1e-9)
    assert every_month(replace(STATE, left_out=HOLE)) == STATE


@pytest.mark.parametrize(
    ("left_out", "words"),
    [
        ("1950-01:1951-01", "must name months of Jan 2000 to Dec 2019"),
        ("2006-01:2005-01", "from old to new"),
        ("2000-01:2019-12", "some months must be kept"),
        ("2000-06:2019-06", "at least 24 pairs"),
    ],
)
def test_what_cannot_be_left_out_is_refused_in_one_sentence(bridge, left_out, words):
    sent = payload(replace(STATE, left_out=left_out), bridge)
    assert words in sent["error"]


def test_quarters_and_years_name_their_months():
    bridge = Bridge(workspace(*planted(160, first="1980Q1")))
    pair = bridge.pair(STATE)
    for text in ("1990:1991", "1990-Q1:1991-Q4", "1990-02:1991-10"):
        assert left_out_spans(pair, replace(STATE, left_out=text)) == [(40, 48)]


# What the search does not do -----------------------------------------------------------------


def test_the_page_says_what_the_search_does_not_heed(bridge):
    pair = bridge.pair(STATE)
    for change, words in (
        ({"months": "same"}, "The search lets each cell use all the months it has"),
        ({"quantity": "p_hac"}, "the search does not use them"),
    ):
        state = replace(STATE, **change)
        assert words in " ".join(verdict(evidence(state, bridge), pair, state))
        assert words not in " ".join(verdict(evidence(STATE, bridge), pair, STATE))


# Peaks ---------------------------------------------------------------------------------------


def test_peaks_are_drawn_said_and_saved(bridge):
    state = replace(STATE, peaks="0.5", window=6)
    pair, peaks = bridge.pair(state), peaks_of(state, bridge)
    smooth = [trailing_mean(s.values, 6) for s in (pair.driver, pair.response)]
    plain = matched_peaks(*smooth, shift=LAG, reach=6, prominence=0.5)
    np.testing.assert_array_equal(peaks.found.pairs, plain.pairs)
    assert plain.pairs.shape[0] > 3
    strokes, driver, response = peak_traces(peaks, pair)
    months = pair.periods[5:]
    assert [str(x)[:7] for x in driver.x] == [period_code(months[p]) for p in plain.pairs[:, 0]]
    assert [str(x)[:7] for x in response.x] == [
        period_code(months[p] - LAG) for p in plain.pairs[:, 1]
    ]
    assert len(strokes.x) == 3 * plain.pairs.shape[0]
    words = str(peak_words(peaks, pair, state))
    assert f"{100 * plain.by_chance:.0f} % of all months" in words
    assert "do not speak for this shift" in words
    _, rows = exported("peaks", state, bridge)
    matched = [row for row in rows if row["part"] == "matched"]
    assert [int(row["distance"]) for row in matched] == plain.distance.tolist()
    assert len(rows) == plain.driver.size + plain.response.size - plain.pairs.shape[0]
    assert peaks_of(STATE, bridge) is None


# The parameter plane -------------------------------------------------------------------------


def test_the_plane_has_its_density(bridge):
    density, inference = density_of(STATE, bridge), completed(STATE, bridge).inference
    bare = parameter_plane(inference, bridge.pair(STATE)).data
    drawn = answer(STATE, bridge, ("plane",))[-1]["figures"]["plane"]["data"]
    assert len(drawn) == len(bare) + 1
    trace = density_surface(density)
    np.testing.assert_allclose(trace.z, density.density / density.density.max())
    _, rows = exported("plane", STATE, bridge)
    np.testing.assert_array_equal(numbers(rows, "density", "density"), density.density.ravel())
    same = Bridge(workspace(*rates(noise()[0], noise()[0])))
    assert density_of(replace(STATE, shift=0), same) is None  # an exact line has no error


# Two cells -----------------------------------------------------------------------------------


def test_a_pinned_cell_stands_beside_the_chosen_one(bridge):
    state = replace(STATE, pinned="2:-3")
    pinned, chosen = two_cells(state, bridge)
    there = replace(STATE, window=2, shift=-3)
    assert pinned.cell is bridge.cell(pinned.state) or pinned.cell.slope == bridge.cell(there).slope
    assert pinned.inference.p == inference(there, bridge).p
    assert (chosen.state.window, chosen.state.shift) == (3, LAG)
    figure = compare_scatters(pinned, chosen, bridge.pair(state), "month")
    np.testing.assert_array_equal(figure.data[0].x, pinned.cell.driver)
    np.testing.assert_array_equal(figure.data[2].y, chosen.cell.response)
    assert figure.layout.xaxis.range == figure.layout.xaxis2.range
    assert figure.layout.yaxis.range == figure.layout.yaxis2.range
    _, rows = exported("compare", state, bridge)
    values = {row["part"]: (row["pinned"], row["chosen"]) for row in rows}
    assert values["slope"] == (repr(pinned.cell.slope), repr(chosen.cell.slope))
    known = completed(state, bridge)
    assert float(values["search_adjusted_p"][0]) == known.p_searched(2, -3)
    assert two_cells(STATE, bridge) is None


def test_a_pin_outside_the_map_is_said_and_breaks_nothing(bridge):
    state = replace(STATE, pinned="50:3")
    with pytest.raises(StateError, match="Pinned cell must lie on this map"):
        two_cells(state, bridge)
    _, _, *folds, data = answer(state, bridge, ("compare",))
    assert "must lie on this map" in str(folds[list(FOLDS).index("compare")])
    assert "compare" not in data["figures"]
    json.dumps(data, allow_nan=False)


# Several responses ---------------------------------------------------------------------------


def test_each_response_is_searched_as_if_it_stood_alone_and_paid_for_together(bridge):
    state = replace(STATE, other_responses="Noise|Prices")
    assert responses_of(state, bridge) == ("Prices", "Noise")
    work = WORK["responses"](state, bridge)
    assert work.plan().chunks == 2
    found = bridge.jobs.complete(work)
    alone = [
        bridge.jobs.complete(search_work(replace(STATE, response=name), bridge))
        for name in ("Prices", "Noise")
    ]
    assert [one.p for one in found] == [float(search.p) for search in alone]
    assert [one.best[:2] for one in found] == [(s.best_window, s.best_shift) for s in alone]
    np.testing.assert_allclose([one.p_all for one in found], holm([one.p for one in found]))
    assert found[0].p <= 0.05 < found[1].p
    figure = response_profiles(list(found))
    np.testing.assert_array_equal(figure.data[0].y, found[0].surface.correlation[2])
    words = str(response_words(found, state, bridge, ""))
    assert "asked 2 responses (Holm 1979)" in words
    _, rows = exported("responses", state, bridge)
    assert [float(row["search_adjusted_p"]) for row in rows if row["part"] == "best"] == [
        one.p for one in found
    ]


def test_responses_are_chosen_from_a_list_where_they_are_many():
    money, prices, _ = three()
    others = [replace(prices, name=f"Component {k}") for k in range(40)]
    bridge = Bridge(workspace(money, prices, *others))
    state = replace(STATE, other_responses="Component 7")
    drawn = str(response_words(None, state, bridge, ""))
    assert drawn.count("Button(") == 1  # the one chosen; it can be taken away
    assert "data-response='Component 7'" in drawn
    assert '["","add a response"]' in drawn and '["Component 8","Component 8"]' in drawn
    assert '["Component 7"' not in drawn


def test_a_response_that_cannot_be_searched_says_why_and_the_others_go_on():
    money, prices, noisy = three()
    flat = replace(noisy, name="Short", values=noisy.values[:30])
    bridge = Bridge(workspace(money, prices, flat))
    found = bridge.jobs.complete(
        responses_work(replace(STATE, other_responses="Prices|Short"), bridge)
    )
    assert found[0].best is not None
    assert found[1].best is None
    assert found[1].refusal
    assert found[0].p_all == found[0].p
    listed = replace(STATE, other_responses="Prices|Short")
    assert found[1].refusal in str(response_words(found, listed, bridge, ""))
    assert len(response_profiles(list(found)).data) == 2


@pytest.mark.parametrize(
    ("responses", "words"),
    [("Nothing", "must be loaded series"), ("Money", "must not hold the driver")],
)
def test_responses_that_are_none_are_refused(bridge, responses, words):
    state = replace(STATE, other_responses=responses)
    with pytest.raises(StateError, match=words):
        responses_of(state, bridge)
    _, _, *folds, data = answer(state, bridge, ("responses",))
    assert words in str(folds[list(FOLDS).index("responses")])
    assert "responses" not in data["jobs"]
