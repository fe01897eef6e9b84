"""Exports: CSV by RFC 4180, every digit of the result, nothing that a spreadsheet would run."""

import csv
import io
import re
from dataclasses import replace
from functools import cache
from urllib.parse import parse_qs, urlsplit

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from analytics.series import period_code
from app import exports
from app.compute import Bridge
from app.intake.reading import inspection, read_release
from app.pages.lag import CAUTION, view
from app.places import software_version
from app.state import StateError, ViewState
from tests.app.economies import LAG, levels, planted, workspace
from tests.exported import head_of, rows_of

STATE = ViewState(driver="Money", response="Prices", window=3, shift=LAG, surrogates=39)
CHARTS = ("surface", "scatter", "overlay")
SHIFTS = [LAG, 0, -4]


def bridge(*series, **options):
    return Bridge(workspace(*(series or planted(**options))))


@cache
def shared():
    """One bridge over the planted pair, so that a search is done once."""
    return bridge()


def shown(state=STATE, here=None):
    return view(state, here or shared())


def export(name, state=STATE, here=None):
    file, text = exports.csv_export(name, state.to_query(), here or shared())
    assert text.endswith("\r\n")
    assert text.count("\n") == text.count("\r\n")
    return file, text, head_of(text), rows_of(text)


def numbers(rows, column):
    place = rows[0].index(column)
    return np.array([float(row[place]) if row[place] else np.nan for row in rows[1:]])


# The shape -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "shift"),
    [*((name, LAG) for name in exports.VIEWS), *((name, -4) for name in CHARTS), ("scatter", 0)],
)
def test_an_export_is_text_by_rfc_4180_under_comment_lines(name, shift):
    _, text, _, rows = export(name, replace(STATE, shift=shift))
    assert text.count("\n") == text.count("\r\n") == text.count("\r")
    assert {len(row) for row in rows} == {len(rows[0])}
    assert len(set(rows[0])) == len(rows[0])
    assert len(rows) > (24 if name in CHARTS else 0)
    assert not {"nan", "None", "inf"} & {field for row in rows for field in row}
    head = text.split("\r\n# note", 1)[0]
    assert "," not in head  # so that no reader takes a comment for several columns
    assert '"' not in head


@pytest.mark.parametrize("name", CHARTS)
def test_an_export_ends_in_csv_and_says_what_it_is(name):
    file, _, _, _ = export(name)
    assert file == f"{name}-money-prices-window-3-shift-6.csv"


# The numbers ---------------------------------------------------------------------------------


@pytest.mark.parametrize("months", ["own", "same"])
def test_the_surface_is_every_cell_of_the_map_to_the_last_digit(months):
    here, state = bridge(n=80), replace(STATE, months=months, windows="1:9", shifts="-6:40")
    _, _, _, rows = export("surface", state, here)
    surface = here.surface(state)
    assert len(rows) - 1 == surface.correlation.size
    for column, array in (
        ("window", np.repeat(surface.windows, surface.shifts.size)),
        ("shift", np.tile(surface.shifts, surface.windows.size)),
        ("pairs", surface.pairs.ravel()),
        ("correlation", surface.correlation.ravel()),
        ("slope", surface.slope.ravel()),
    ):
        np.testing.assert_array_equal(numbers(rows, column), array)


def test_an_undefined_cell_is_an_empty_field():
    here, state = bridge(n=60), replace(STATE, windows="1:30", shifts="0:30")
    _, _, _, rows = export("surface", state, here)
    few = numbers(rows, "pairs") < 24
    assert few.any()
    assert np.isnan(numbers(rows, "correlation")[few]).all()
    assert np.isfinite(numbers(rows, "correlation")[~few]).all()


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize("shift", SHIFTS)
def test_the_scatter_holds_pairs_line_slices_and_ellipse(shift, months):
    here, state = shared(), replace(STATE, shift=shift, months=months)
    _, _, _, rows = export("scatter", state, here)
    result = shown(state, here)
    cell, periods = result.cell, result.pair.periods
    parts = np.array([row[0] for row in rows[1:]])
    assert list(dict.fromkeys(parts)) == ["pair", "driver slice", "response slice", "ellipse"]

    pairs = parts == "pair"
    assert pairs.sum() == cell.n
    np.testing.assert_array_equal(numbers(rows, "driver")[pairs], cell.driver)
    np.testing.assert_array_equal(numbers(rows, "response")[pairs], cell.response)
    np.testing.assert_array_equal(numbers(rows, "residual")[pairs], cell.residuals)
    np.testing.assert_allclose(
        numbers(rows, "fitted")[pairs] + cell.residuals, cell.response, rtol=0, atol=1e-12
    )
    # The first pair, by hand: its driver month, and the response read `shift` months later.
    first = rows[1]
    place = periods.get_loc(first[1])
    assert first[1] == period_code(periods[place])
    assert first[2] == period_code(periods[place] + shift)
    mean = result.pair.driver.values[place - 2 : place + 1].mean()
    assert float(first[3]) == pytest.approx(mean, abs=1e-12)
    mean = result.pair.response.values[place + shift - 2 : place + shift + 1].mean()
    assert float(first[4]) == pytest.approx(mean, abs=1e-12)

    for part, slices, along, across in (
        ("driver slice", cell.driver_slices, "driver", "response"),
        ("response slice", cell.response_slices, "response", "driver"),
    ):
        here_only = parts == part
        np.testing.assert_array_equal(numbers(rows, along)[here_only], slices.centre)
        np.testing.assert_array_equal(numbers(rows, across)[here_only], slices.mean)
        np.testing.assert_array_equal(numbers(rows, "slice_low")[here_only], slices.edges[:-1])
        np.testing.assert_array_equal(numbers(rows, "slice_high")[here_only], slices.edges[1:])
        np.testing.assert_array_equal(numbers(rows, "count")[here_only], slices.count)
    outline = parts == "ellipse"
    np.testing.assert_array_equal(numbers(rows, "driver")[outline], cell.ellipse[:, 0])
    np.testing.assert_array_equal(numbers(rows, "response")[outline], cell.ellipse[:, 1])


@pytest.mark.parametrize("shift", SHIFTS)
def test_the_overlay_holds_both_lines(shift):
    here, state = bridge(), replace(STATE, shift=shift)
    _, _, _, rows = export("overlay", state, here)
    overlay = here.overlay(state)
    assert [row[0] for row in rows[1:]] == [period_code(month) for month in overlay.periods]
    np.testing.assert_array_equal(numbers(rows, "driver"), overlay.driver)
    np.testing.assert_array_equal(numbers(rows, "response_moved_back"), overlay.response)


@pytest.mark.parametrize("first", ["1980-01", "1980Q1", "1900"])
def test_the_overlay_can_be_read_back_by_our_own_reader(first):
    here = bridge(n=100, first=first)
    state = here.fitted(replace(STATE, window=2, shift=3))
    file, text, _, _ = export("overlay", state, here)
    release = read_release(file, text.encode())
    overlay = here.overlay(state)
    assert [series.name for series in release.series] == ["driver", "response_moved_back"]
    assert [problem for problem in release.problems if problem.severity == "error"] == []
    for series, line in zip(release.series, (overlay.driver, overlay.response), strict=True):
        there = np.isfinite(line)
        np.testing.assert_array_equal(series.values, line[there])
        assert series.first == overlay.periods[there][0]
        assert series.last == overlay.periods[there][-1]


# The header ----------------------------------------------------------------------------------


def test_the_header_names_series_fingerprints_state_cell_and_version():
    money, prices = planted()
    here = bridge(levels(money), prices)
    _, _, head, _ = export("surface", here=here)
    result = shown(here=here)
    assert head["Pricewake"] == software_version()
    assert head["view"].startswith("Money; 3-month window; leading Prices by 6 months; Jan 2000")
    inspected = {s["name"]: s for s in inspection(here.workspace.releases)["series"]}
    for role, name in (("driver", "Money"), ("response", "Prices")):
        used = getattr(result.pair, role)
        assert head[role].startswith(f"{name}; ")
        assert f"as read: fingerprint {inspected[name]['fingerprint']}" in head[role]
        assert f"as used: fingerprint {used.fingerprint}" in head[role]
        assert f"source {used.source}" in head[role]
    assert inspected["Money"]["fingerprint"] not in head["response"]
    assert "index as read" in head["driver"]
    assert "rate as read" in head["response"]
    cell = result.cell
    for said in (f"n {cell.n}", f"slope {cell.slope!r}", f"correlation {cell.correlation!r}"):
        assert said in head["cell"]
    assert "naive standard error" in head["cell"]  # a p of one cell is never without its caution
    assert "naive p" in head["cell"]
    assert "not a cause and not advice" in head["note"]
    assert "not a cause" in CAUTION


@settings(max_examples=25)
@given(
    st.builds(
        ViewState,
        driver=st.just("Money"),
        response=st.just("Prices"),
        window=st.integers(1, 24),
        shift=st.integers(-24, 24),
        growth=st.sampled_from(["log", "percent"]),
        months=st.sampled_from(["own", "same"]),
        first=st.sampled_from(["", "2001", "2000-Q3", "2002-05"]),
        quantity=st.sampled_from(["correlation", "slope"]),
    )
)
def test_the_state_in_the_header_makes_the_same_file_again(state):
    here = shared()
    file, text, head, _ = export("scatter", state, here)
    address = urlsplit(head["state"])
    assert address.path == "/lag"
    assert exports.csv_export("scatter", address.query, here) == (file, text)


def test_months_left_out_are_counted_in_the_header():
    money, prices = planted()
    here = bridge(money, replace(prices, values=prices.values[:-5]))
    _, _, head, _ = export("surface", here=here)
    assert head["left out"].startswith("5 months of the driver and 0 of the response")


def test_an_export_asked_for_outside_the_map_names_the_state_it_shows():
    here = bridge(n=120, first="1990Q1")
    _, _, head, rows = export("surface", replace(STATE, window=40, shift=50), here)
    query = parse_qs(urlsplit(head["state"]).query)
    assert (query["window"], query["shift"]) == (["4"], ["8"])
    assert "4-quarter window" in head["view"]
    assert rows[0][0] == "window"


# Names ---------------------------------------------------------------------------------------

HOSTILE = [
    '=HYPERLINK("http://x","y")',
    "+1+1",
    "-2+3|cmd",
    "@SUM(A1)",
    'quote " and, comma; semicolon',
    "# Pricewake: 9.9",
    "../../etc/passwd",
    "C:\\windows\\system32",
    "con",
    "<script>alert(1)</script>",
    "Geldmenge für alle – Größe",
    "Деньги",
    "\u202egpj.exe",
    "a" * 200,
    "名前",
]


@pytest.mark.parametrize("name", HOSTILE)
@pytest.mark.parametrize("view_name", ["scatter", "overlay"])
def test_a_hostile_name_stays_in_its_line(name, view_name):
    money, prices = planted()
    here = bridge(replace(money, name=name, source=f"x\r\n{name},1", unit='p"c\n=1'), prices)
    file, text, head, rows = export(view_name, replace(STATE, driver=name), here)
    assert list(head) == ["Pricewake", "view", "driver", "response", "state", *list(head)[5:]]
    assert head["Pricewake"] == software_version()
    assert {len(row) for row in rows} == {len(rows[0])}
    assert re.fullmatch(r"[a-z0-9][a-z0-9-]{0,119}\.csv", file)
    assert not [row for row in rows for field in row if field.startswith(("=", "+", "@"))]
    query = parse_qs(urlsplit(head["state"]).query)
    assert query["driver"] == [name]
    assert text.count("\n") == text.count("\r\n") == text.count("\r")


@given(st.text(max_size=300), st.text(max_size=300), st.integers(1, 60), st.integers(-36, 60))
def test_a_file_name_has_letters_digits_and_hyphens_only(driver, response, window, shift):
    try:
        state = ViewState(driver=driver, response=response, window=window, shift=shift)
    except StateError:
        return
    assert re.fullmatch(r"surface-[a-z0-9-]{1,112}", exports.file_stem("surface", state))


def test_file_names_tell_shifts_apart():
    stems = {exports.file_stem("scatter", replace(STATE, shift=s)) for s in (-5, 5, 0)}
    assert stems == {f"scatter-money-prices-window-3-shift-{s}" for s in ("minus-5", "5", "0")}


# What a spreadsheet would run ----------------------------------------------------------------


@pytest.mark.parametrize(
    "text", ["=1+1", "+1+1", "-1+1", "@SUM(1)", "\t=1", "\r=1", "\n=1", "=", "-", "+cmd|' /C'!A0",
             "＝1+1", "＋1", "－1+2", "＠A1", "-1 1", "+1e", "--1"],
)  # fmt: skip
def test_text_that_a_spreadsheet_would_run_is_defused(text):
    rows = rows_of(exports.csv_text([("a", "b")], [["name"], [text]]))
    assert rows == [["name"], ["'" + text]]


@pytest.mark.parametrize(
    "text", ["-1", "+1", "-1.5", "-.5", "1e-5", "-1E+300", "Money", "1=1", "a-b", "'=1", "2024-Q1",
             "e-mail@x", ""],
)  # fmt: skip
def test_text_that_it_would_not_run_is_left_alone(text):
    rows = rows_of(exports.csv_text([("a", "b")], [["name", "x"], [text, "y"]]))
    assert rows == [["name", "x"], [text, "y"]]


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1))
def test_numbers_come_back_to_the_last_digit_and_are_never_quoted(values):
    text = exports.csv_text([], [["value", "place"], *([v, i] for i, v in enumerate(values))])
    rows = rows_of(text)
    assert [float(row[0]) for row in rows[1:]] == values
    assert [int(row[1]) for row in rows[1:]] == list(range(len(values)))
    assert "'" not in text
    assert '"' not in text


def test_numbers_of_numpy_are_written_like_others():
    rows = [["a", "b", "c", "d"], [np.float64(-0.1), np.int64(-3), np.float64("nan"), None]]
    assert exports.csv_text([], rows) == "a,b,c,d\r\n-0.1,-3,,\r\n"


@given(st.text(), st.text())
def test_any_text_comes_back_as_it_was_or_defused(key, value):
    text = exports.csv_text([(key, value)], [["first", "second"], [value, key]])
    line, _, body = text.partition("\r\n")
    assert line.startswith("# ")
    assert not set(line) & set('\r\n,"')
    assert len(line.splitlines()) == 1
    rows = list(csv.reader(io.StringIO(body, newline=""), strict=True))
    assert rows[0] == ["first", "second"]
    assert len(rows) == 2
    for got, given_text in zip(rows[1], (value, key), strict=True):
        assert got in (given_text, "'" + given_text)


# Refusals ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "query", "said"),
    [
        ("nope", "", "view must be one of surface, scatter, overlay, .*but got 'nope'"),
        ("surface", "window=abc", "Window must be a whole number"),
        ("surface", "driver=Nope&response=Prices", "no loaded series is named 'Nope'"),
        ("scatter", "driver=Money&response=Money", "must be two series"),
        ("overlay", "driver=Money&response=Prices&first=2050", "no value in the sample"),
    ],
)
def test_what_cannot_be_exported_is_said_in_one_sentence(name, query, said):
    with pytest.raises(ValueError, match=said) as caught:
        exports.csv_export(name, query, shared())
    assert "\n" not in str(caught.value)
