"""The Lag page as a person uses it, in a real browser; numbers, not only presence."""

import json
import math
import struct
import time

import numpy as np
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from analytics.cell import lag_cell
from app.compute import Bridge
from app.demo import demo_releases
from app.pages import lag as page
from app.state import ViewState
from app.workspace import Workspace
from tests.browser.driving import READY, open_lag, served, severe, until
from tests.exported import records


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


def drawn(driver, graph, trace):
    """Return the arrays of a trace as plotly holds them."""
    return driver.execute_script(
        "const t = pricewake.ghost.chartOf(arguments[0]).data[arguments[1]];"
        "return {x: [...t.x], y: [...t.y], text: t.text}",
        graph,
        trace,
    )


def state(driver):
    return driver.execute_script("return pricewake.lag.state")


def key(driver, field, *keys):
    element = driver.find_element(By.ID, f"field-{field}")
    for each in keys:
        element.send_keys(each)
    until(driver, "!pricewake.lag.busy()")


def check_cell(driver, bridge, shown):
    """Hold what is drawn against what Python computes for the same state."""
    view = page.view(shown, bridge)
    points, line = drawn(driver, "lag-scatter", 0), drawn(driver, "lag-scatter", 1)
    np.testing.assert_allclose(points["x"], view.cell.driver, atol=1e-9)
    np.testing.assert_allclose(points["y"], view.cell.response, atol=1e-9)
    slope = (line["y"][1] - line["y"][0]) / (line["x"][1] - line["x"][0])
    assert math.isclose(slope, view.cell.slope, abs_tol=1e-9)


def test_page_opens_with_an_empty_console_and_asks_no_other_host(lag, address):
    assert severe(lag) == []
    urls = [
        json.loads(entry["message"])["message"]["params"]["request"]["url"]
        for entry in lag.get_log("performance")
        if "Network.requestWillBeSent" in entry["message"]
        and "request" in json.loads(entry["message"])["message"]["params"]
    ]
    assert len(urls) > 10
    strange = [u for u in urls if not u.startswith((address, "data:", "blob:"))]
    assert strange == []


def test_sentence_reads_as_the_state_says(lag):
    sentence = lag.find_element(By.ID, "lag-sentence").text
    assert sentence == (
        "Broad money, averaged over 12 months, against Consumer prices 24 months later."
    )
    lag.find_element(By.CSS_SELECTOR, "#lag-sentence .number").click()
    assert lag.switch_to.active_element.get_attribute("id") == "field-window"


def test_arrow_keys_step_by_one_and_redraw(lag, bridge):
    key(lag, "shift", Keys.ARROW_RIGHT, Keys.ARROW_RIGHT, Keys.ARROW_LEFT)
    key(lag, "window", Keys.ARROW_UP)
    assert (state(lag)["window"], state(lag)["shift"]) == (13, 25)
    check_cell(lag, bridge, ViewState(window=13, shift=25))
    assert "13 months" in lag.find_element(By.ID, "lag-sentence").text
    assert "25 months later" in lag.find_element(By.ID, "lag-sentence").text


def test_home_and_end_reach_the_bounds(lag):
    key(lag, "shift", Keys.HOME)
    assert state(lag)["shift"] == -36
    assert "36 months earlier" in lag.find_element(By.ID, "lag-sentence").text
    key(lag, "shift", Keys.END)
    assert state(lag)["shift"] == 60


def test_click_on_the_map_moves_the_sliders(lag, bridge):
    place = lag.execute_script(
        "const c = pricewake.ghost.chartOf('lag-surface'), f = c._fullLayout,"
        " b = c.getBoundingClientRect();"
        "return [b.left + f.xaxis._offset + f.xaxis.c2p(-7), b.top + f.yaxis._offset +"
        " f.yaxis.c2p(30)]"
    )
    for kind in ("mouseMoved", "mouseMoved", "mousePressed", "mouseReleased"):
        time.sleep(0.15)  # plotly takes a click only where it has seen the pointer rest
        lag.execute_cdp_cmd(
            "Input.dispatchMouseEvent",
            {"type": kind, "x": place[0], "y": place[1], "button": "left", "clickCount": 1},
        )
    until(lag, "pricewake.lag.state.shift === -7 && !pricewake.lag.busy()")
    assert state(lag)["window"] == 30
    assert lag.find_element(By.ID, "field-window").get_attribute("value") == "30"
    assert lag.find_element(By.ID, "field-shift").get_attribute("value") == "-7"
    check_cell(lag, bridge, ViewState(window=30, shift=-7))


def test_slider_move_moves_the_crosshair_to_the_cell(lag):
    key(lag, "shift", Keys.HOME)
    offset = lag.execute_script(
        "const c = pricewake.ghost.chartOf('lag-surface'), f = c._fullLayout,"
        " b = c.getBoundingClientRect(), m = document.getElementById('lag-cross'),"
        " line = new DOMMatrix(getComputedStyle(m, '::after').transform),"
        " t = document.getElementById('field-shift').getBoundingClientRect();"
        "return [m.getBoundingClientRect().left + line.m41 - b.left - f.xaxis._offset"
        " - f.xaxis.c2p(-36),"
        " t.left + 8 - b.left - f.xaxis._offset - f.xaxis.c2p(-36)]"
    )
    assert abs(offset[0]) < 0.6, "crosshair stands on the cell"
    assert abs(offset[1]) < 0.6, "so does the middle of the thumb"


def test_address_reproduces_the_view(lag, address, bridge):
    key(lag, "shift", *[Keys.ARROW_LEFT] * 3)
    url = lag.current_url
    assert url.endswith("/lag?shift=21")
    lag.get(url)
    until(lag, READY)
    assert state(lag)["shift"] == 21
    check_cell(lag, bridge, ViewState(shift=21))


def test_browser_address_equals_pythons(lag, address):
    wanted = ViewState(
        driver="Narrow money", response="Consumer prices, adjusted", window=7, shift=-3,
        growth="percent", first="1970-01", last="2019-12", months="same", quantity="slope",
    )  # fmt: skip
    open_lag(lag, address, "?" + wanted.to_query())
    assert lag.current_url == f"{address}/lag?{wanted.to_query()}"
    assert state(lag)["first"] == "1970-01"


@pytest.mark.parametrize("months", ["own", pytest.param("same", marks=pytest.mark.long)])
def test_numbers_of_the_browser_equal_pythons_over_random_cells(lag, address, bridge, months):
    """One truth: assets/numbers.js and analytics agree to 1e-9."""
    open_lag(lag, address, "" if months == "own" else "?months=same")
    rng = np.random.default_rng(20261201)
    cells = np.column_stack((rng.integers(1, 61, 12), rng.integers(-36, 61, 12)))
    for window, shift in cells.tolist():
        lag.execute_script(
            "pricewake.lag.move({window: arguments[0], shift: arguments[1]});"
            "pricewake.lag.settle()",
            window,
            shift,
        )
        view = page.view(ViewState(window=window, shift=shift, months=months), bridge)
        found = lag.execute_script(
            "const c = pricewake.lag.cell; return {...c, driver: [...c.driver],"
            " response: [...c.response]}"
        )
        cell = view.cell
        assert found["n"] == cell.n
        assert found["start"] == view.start
        for ours, theirs in (
            (found["driver"], cell.driver),
            (found["response"], cell.response),
            (found["slope"], cell.slope),
            (found["intercept"], cell.intercept),
            (found["correlation"], cell.correlation),
            (found["seNaive"], cell.se_naive),
            (found["ellipse"]["x"], cell.ellipse[:, 0]),
            (found["ellipse"]["y"], cell.ellipse[:, 1]),
        ):
            np.testing.assert_allclose(ours, theirs, atol=1e-9, rtol=0)
        for name, slices in (
            ("driverSlices", cell.driver_slices),
            ("responseSlices", cell.response_slices),
        ):
            assert found[name]["count"] == slices.count.tolist()
            mean = [np.nan if m is None else m for m in found[name]["mean"]]
            np.testing.assert_allclose(mean, slices.mean, atol=1e-9)
            np.testing.assert_allclose(found[name]["centre"], slices.centre, atol=1e-9)
        row, column = view.surface.cell(window, shift)
        assert math.isclose(view.surface.correlation[row, column], cell.correlation, abs_tol=1e-9)


def test_overlay_equals_pythons(lag, bridge):
    key(lag, "shift", Keys.PAGE_DOWN)
    shown = ViewState(shift=state(lag)["shift"])
    overlay = page.view(shown, bridge).overlay
    for trace, values in ((0, overlay.driver), (1, overlay.response)):
        y = [np.nan if v is None else v for v in drawn(lag, "lag-overlay", trace)["y"]]
        np.testing.assert_allclose(y, values, atol=1e-9)
    labels = drawn(lag, "lag-overlay", 0)["text"]
    assert labels[0] == overlay.periods[0].strftime("%b %Y")
    assert len(labels) == overlay.periods.size


def test_another_driver_redraws_the_map(lag, bridge):
    lag.find_element(By.CSS_SELECTOR, "#field-driver option[value='Narrow money']").click()
    until(lag, "pricewake.lag.data.driver.name === 'Narrow money' && !pricewake.lag.busy()")
    shown = ViewState(driver="Narrow money")
    check_cell(lag, bridge, shown)
    z = lag.execute_script(
        "const z = pricewake.ghost.chartOf('lag-surface').calcdata[0][0].z;"
        "return z.map((row) => [...row])"
    )
    np.testing.assert_allclose(np.array(z, dtype=float), bridge.surface(shown).correlation)


def test_sample_and_formula_are_taken(lag, bridge):
    field = lag.find_element(By.ID, "field-first")
    field.send_keys("1975-01", Keys.ENTER)
    until(lag, "pricewake.lag.data.span.startsWith('Jan 1975') && !pricewake.lag.busy()")
    lag.find_element(By.CSS_SELECTOR, "#field-growth option[value='percent']").click()
    until(lag, "pricewake.lag.data.state.growth === 'percent' && !pricewake.lag.busy()")
    check_cell(lag, bridge, ViewState(first="1975-01", growth="percent"))


@pytest.mark.parametrize(
    ("query", "words"),
    [
        ("?driver=Nothing", "No loaded series is named 'Nothing'"),
        ("?driver=Consumer+prices", "must be two series"),
        ("?first=2026-01", "must have at least 24 months"),
        ("?first=2031-01", "has no value in the sample"),
        ("?driver=Real+output", "monthly values meet quarterly ones by the average"),
        ("?window=500", "Window must be a whole number from 1 to 60"),
        ("?shift=abc", "Shift must be a whole number"),
        ("?first=2023-01", "A shift of 24 months is outside this map"),
    ],
)
def test_bad_addresses_get_one_sentence_and_the_page_stays_usable(browser, address, query, words):
    browser.get(f"{address}/lag{query}")
    until(browser, "window.pricewake && pricewake.lag && pricewake.lag.data")
    until(browser, "document.getElementById('lag-message').textContent")
    assert words in browser.find_element(By.ID, "lag-message").text
    assert "Traceback" not in browser.page_source
    for name, value in (("driver", "Broad money"), ("response", "Consumer prices")):
        browser.find_element(By.CSS_SELECTOR, f"#field-{name} option[value='{value}']").click()
    browser.execute_script("const f = document.getElementById('field-first'); f.value = '';"
                       "f.dispatchEvent(new Event('change', {bubbles: true}))")  # fmt: skip
    browser.find_element(By.CSS_SELECTOR, "#field-growth option[value='percent']").click()
    until(browser, READY + " && pricewake.lag.data.state.growth === 'percent'")
    assert browser.execute_script("return pricewake.lag.data.driver.values.length") == 801
    assert browser.find_element(By.ID, "lag-message").text == ""


def test_csv_button_gives_the_numbers_on_screen(lag, address, bridge, downloads):
    key(lag, "shift", Keys.ARROW_LEFT)
    lag.find_element(By.ID, "csv-scatter").click()
    path = downloads / "scatter-broad-money-consumer-prices-window-12-shift-23.csv"
    wait_for(path)
    rows = [row for row in records(path.read_text()) if row["part"] == "pair"]
    points = drawn(lag, "lag-scatter", 0)
    np.testing.assert_allclose([float(row["driver"]) for row in rows], points["x"], atol=1e-9)
    np.testing.assert_allclose([float(row["response"]) for row in rows], points["y"], atol=1e-9)


def test_png_button_saves_each_view_at_twice_the_scale(lag, downloads):
    sizes = {"surface": (2200, 1520), "scatter": (1800, 1720), "overlay": (2400, 1120)}
    for view, size in sizes.items():
        lag.find_element(By.CSS_SELECTOR, f"[data-save=png][data-view={view}]").click()
        path = downloads / f"{view}-broad-money-consumer-prices-window-12-shift-24.png"
        wait_for(path)
        head = path.read_bytes()[:24]
        assert head[:8] == b"\x89PNG\r\n\x1a\n"
        assert struct.unpack(">II", head[16:24]) == size


def test_saved_chart_names_state_source_and_version(lag):
    layout = lag.execute_script("return pricewake.printed('scatter', pricewake.lag).layout")
    assert "Broad money, averaged over 12 months" in layout["title"]["text"]
    assert "response = " in layout["title"]["text"]
    foot = layout["annotations"][-1]["text"]
    assert foot.startswith("Source: ")
    assert "Pricewake" in foot


def test_dark_and_light_differ_and_saved_charts_stay_light(lag):
    before = lag.execute_script("return document.documentElement.dataset.theme")
    lag.find_element(By.ID, "theme").click()
    until(lag, f"document.documentElement.dataset.theme !== '{before}'")
    paper = lag.execute_script(
        "const c = pricewake.ghost.chartOf('lag-scatter');"
        "return [getComputedStyle(document.body).backgroundColor,"
        " pricewake.printed('scatter', pricewake.lag).layout.template.layout.paper_bgcolor]"
    )
    lag.find_element(By.ID, "theme").click()
    assert {"light": "rgb(23, 26, 32)", "dark": "rgb(251, 250, 246)"}[before] == paper[0]
    assert paper[1].upper() == "#FBFAF6"


def test_no_request_leaves_while_a_slider_moves(lag):
    lag.get_log("performance")
    lag.execute_script(
        "for (let s = -36; s <= 60; s++)"
        " setTimeout(() => pricewake.lag.move({shift: s}), 8 * (s + 36))"
    )
    until(lag, "pricewake.lag.state.shift === 60")
    sent = [
        message["params"]["request"]["url"]
        for message in (json.loads(e["message"])["message"] for e in lag.get_log("performance"))
        if message["method"] == "Network.requestWillBeSent"
        and not message["params"]["request"]["url"].startswith(("data:", "blob:"))
    ]
    assert sent == []


def test_quarterly_pair_opens_at_one_and_two_years(browser, tmp_path):
    from app.intake.reading import read_release

    rng = np.random.default_rng(7)
    growth = rng.standard_normal(160)  # response = driver six quarters earlier
    money = 100 * np.exp(np.cumsum(growth) / 100)
    prices = 100 * np.exp(np.cumsum(np.roll(growth, 6)) / 100)
    text = "period,Money,Prices\n" + "".join(
        f"{1980 + i // 4}-Q{i % 4 + 1},{float(money[i])!r},{float(prices[i])!r}\n"
        for i in range(160)
    )
    workspace = Workspace((read_release("quarterly.csv", text.encode()),))
    with served(workspace) as url:
        open_lag(browser, url)
        assert (state(browser)["window"], state(browser)["shift"]) == (4, 8)
        assert "4 quarters" in browser.find_element(By.ID, "lag-sentence").text
        bounds = browser.execute_script(
            "return [pricewake.lag.data.windows, pricewake.lag.data.shifts]"
        )
        assert bounds == [[1, 20], [-12, 20]]
        key(browser, "shift", Keys.ARROW_LEFT, Keys.ARROW_LEFT)
        cell = lag_cell(
            np.diff(np.log(money)) * 100, np.diff(np.log(prices)) * 100, window=4, shift=6
        )
        points = drawn(browser, "lag-scatter", 0)
        np.testing.assert_allclose(points["x"], cell.driver, atol=1e-9)


def wait_for(path, seconds=10):
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        if path.exists() and path.stat().st_size:
            return
        time.sleep(0.05)
    raise AssertionError(f"{path.name} was not saved")
