"""The tools of the Lag page as a person uses them, in a real browser; they assert numbers."""

import time

import numpy as np
import pytest
from selenium.webdriver.common.action_chains import ActionChains
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from analytics.slices import pair_counts, slice_path
from app.compute import Bridge
from app.demo import demo_releases
from app.lag.tools import peaks_of, two_cells
from app.state import ViewState
from app.words import plain, shift_words, signed
from app.workspace import Workspace
from tests.browser.driving import open_lag, until

CALM = "!pricewake.lag.busy()"
HOLE = "1974-01:1977-06"


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


def state(driver, name):
    return driver.execute_script("return pricewake.lag.state[arguments[0]]", name)


def mouse(driver, kind, x, y):
    driver.execute_cdp_cmd(
        "Input.dispatchMouseEvent",
        {"type": kind, "x": x, "y": y, "button": "left", "buttons": 1, "clickCount": 1},
    )


def press(driver, *keys):
    chain = ActionChains(driver)
    for key in keys:
        chain.send_keys(key)
    chain.perform()


def choose(driver, field, value):
    driver.find_element(By.CSS_SELECTOR, f"#field-{field} option[value='{value}']").click()


def table(driver, fold):
    """The rows of a fold's table, read at one moment: the words are made anew with each answer."""
    return driver.execute_script(
        "return [...document.querySelectorAll(`#lag-${arguments[0]}-words tbody tr`)]"
        ".map((row) => [...row.children].map((cell) => cell.textContent))",
        fold,
    )


def unfold(driver, name):
    driver.execute_script("document.getElementById(arguments[0]).open = true", name)


def test_numbers_of_slice_counts_and_months_left_out_equal_pythons(browser, address, bridge):
    """One truth: assets/numbers.js and analytics agree to 1e-9, months left out included."""
    open_lag(browser, address, f"?left_out={HOLE},1999:2000-03&months=same")
    rng = np.random.default_rng(5)
    for window, shift in zip(rng.integers(1, 61, 6), rng.integers(-36, 61, 6), strict=True):
        shown = ViewState(
            window=int(window), shift=int(shift), left_out=f"{HOLE},1999:2000-03", months="same"
        )
        cell = bridge.cell(shown)
        found = browser.execute_script(
            "pricewake.lag.move({window: arguments[0], shift: arguments[1]});"
            "pricewake.lag.settle(); const c = pricewake.lag.cell, n = pricewake.numbers;"
            "return {months: c.months, driver: [...c.driver], slope: c.slope, r: c.correlation,"
            " path: n.slicePath(c.driver, c.response, 0.13), counts: n.pairCounts(c.driver,"
            " c.response)}",
            int(window),
            int(shift),
        )
        offset = found["months"][0] - cell.months[0]
        np.testing.assert_array_equal(np.array(found["months"]) - offset, cell.months)
        np.testing.assert_allclose(found["driver"], cell.driver, rtol=0, atol=1e-9)
        np.testing.assert_allclose(
            [found["slope"], found["r"]], [cell.slope, cell.correlation], rtol=0, atol=1e-9
        )
        path = slice_path(cell.driver, cell.response, width=0.13)
        mean = [np.nan if m is None else m for m in found["path"]["mean"]]
        np.testing.assert_allclose(mean, path.mean, rtol=0, atol=1e-9)
        np.testing.assert_array_equal(found["path"]["count"], path.count)
        np.testing.assert_allclose(found["path"]["low"], path.low, rtol=0, atol=1e-9)
        counts = pair_counts(cell.driver, cell.response)
        np.testing.assert_array_equal(found["counts"]["both"], counts.both)
        np.testing.assert_array_equal(found["counts"]["driver"], counts.driver)
        np.testing.assert_allclose(found["counts"]["responseEdges"], counts.response_edges)
    shown = "without Jan 1974 to Jun 1977 and Jan 1999 to Mar 2000."
    assert browser.find_element(By.ID, "lag-sentence").text.endswith(shown)


def test_the_slice_moves_by_key_and_by_hand_and_says_its_mean(lag, bridge):
    unfold(lag, "tool-scatter")
    choose(lag, "band", "driver")
    until(lag, "!document.getElementById('lag-band').hidden && " + CALM)
    for _ in range(3):
        lag.find_element(By.ID, "field-band_place").send_keys(Keys.ARROW_RIGHT)
    until(lag, CALM)
    assert state(lag, "band_place") == 53
    cell = bridge.cell(ViewState())
    path = slice_path(cell.driver, cell.response, width=0.1)
    words = lag.find_element(By.ID, "lag-slice-words").text
    assert f"from {plain(path.low[53])} to {plain(path.high[53])}" in words
    assert f"mean response {plain(path.mean[53])}, against {plain(path.overall)} over all" in words
    drawn = lag.execute_script(
        "const c = pricewake.ghost.chartOf('lag-scatter');"
        "return {held: c.data[5].x.length, path: [...c.data[6].y]}"
    )
    assert drawn["held"] == path.count[53]
    np.testing.assert_allclose(drawn["path"], path.mean, atol=1e-9)
    box = lag.execute_script(
        "const b = document.getElementById('lag-band').getBoundingClientRect();"
        "return [b.left + b.width / 2, b.top + b.height / 2]"
    )
    mouse(lag, "mousePressed", *box)
    for step in (10, 25, 40):
        mouse(lag, "mouseMoved", box[0] + step, box[1])
    mouse(lag, "mouseReleased", box[0] + 40, box[1])
    until(lag, "pricewake.lag.state.band_place > 55 && " + CALM)
    place = state(lag, "band_place")
    assert f"band_place={place}" in lag.current_url
    wanted = f"mean response {plain(path.mean[place])}"
    assert wanted in lag.find_element(By.ID, "lag-slice-words").text


def test_counts_are_drawn_at_the_sides_and_in_squares(lag, bridge):
    unfold(lag, "tool-scatter")
    choose(lag, "points", "counts")
    until(lag, "pricewake.ghost.chartOf('lag-scatter').data.length === 10 && " + CALM)
    cell = bridge.cell(ViewState())
    counts = pair_counts(cell.driver, cell.response)
    drawn = lag.execute_script(
        "const d = pricewake.ghost.chartOf('lag-scatter').data;"
        "return {points: d[0].visible, left: d[7].y, right: d[8].x, both: d[9].z}"
    )
    assert drawn["points"] is False
    np.testing.assert_array_equal(drawn["left"], counts.driver)
    np.testing.assert_array_equal(drawn["right"], counts.response)
    both = [[n or 0 for n in row] for row in drawn["both"]]
    np.testing.assert_array_equal(both, counts.both)


def test_the_player_sweeps_turns_at_the_end_and_rests_where_it_is_stopped(lag):
    unfold(lag, "tool-player")
    lag.find_element(By.CSS_SELECTOR, "#play-speed option[value='30']").click()
    scrub = lag.find_element(By.ID, "field-scrub")
    lag.execute_script(
        "arguments[0].value = 58; arguments[0].dispatchEvent(new Event('input', {bubbles: true}))",
        scrub,
    )
    until(lag, "pricewake.lag.state.shift === 58 && " + CALM)
    lag.execute_script("document.activeElement.blur()")
    press(lag, Keys.SPACE)
    until(lag, "pricewake.player.state.on && pricewake.player.state.moved > 6")
    assert lag.find_element(By.ID, "play").text == "Pause"
    press(lag, Keys.SPACE)
    until(lag, "!pricewake.player.state.on && " + CALM)
    moved = lag.execute_script("return pricewake.player.state.moved")
    assert state(lag, "shift") == 60 - (moved - 2)  # two to the end, then back
    assert f"{state(lag, 'shift')} months later" in lag.find_element(By.ID, "lag-sentence").text
    assert f"shift={state(lag, 'shift')}" in lag.current_url
    assert scrub.get_attribute("value") == str(state(lag, "shift"))


def test_who_wants_less_motion_gets_single_steps(lag):
    media = {"features": [{"name": "prefers-reduced-motion", "value": "reduce"}]}
    lag.execute_cdp_cmd("Emulation.setEmulatedMedia", media)
    try:
        unfold(lag, "tool-player")
        until(lag, "document.getElementById('play').textContent === 'Step'")
        lag.find_element(By.ID, "play").click()
        until(lag, "pricewake.lag.state.shift !== 24 && " + CALM)
        assert abs(state(lag, "shift") - 24) == 1
        assert lag.execute_script("return pricewake.player.state.on") is False
    finally:
        lag.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": []})


def test_undo_redo_and_the_browsers_back_go_by_places_of_rest(lag):
    lag.execute_script(
        "pricewake.pushed = 0; const push = history.pushState;"
        " history.pushState = function (...given)"
        " { pricewake.pushed += 1; return push.apply(history, given); };"
    )
    assert not lag.find_element(By.ID, "undo").is_enabled()
    lag.execute_script(
        "const f = document.getElementById('field-shift'); for (let k = 25; k <= 30; k++)"
        " { f.value = k; f.dispatchEvent(new Event('input', {bubbles: true})); }"
    )
    until(lag, "!document.getElementById('undo').disabled")
    assert lag.execute_script("return pricewake.pushed") == 1  # six steps, one entry
    lag.find_element(By.ID, "field-window").send_keys(Keys.ARROW_UP)
    until(lag, "pricewake.trail.state.index === 2")
    lag.find_element(By.ID, "undo").click()
    until(lag, "pricewake.lag.state.window === 12 && " + CALM)
    assert state(lag, "shift") == 30
    lag.back()
    until(lag, "pricewake.lag.state.shift === 24 && " + CALM)
    assert lag.find_element(By.ID, "field-shift").get_attribute("value") == "24"
    assert not lag.find_element(By.ID, "undo").is_enabled()
    ActionChains(lag).key_down(Keys.CONTROL).key_down(Keys.SHIFT).send_keys("z").perform()
    ActionChains(lag).key_up(Keys.SHIFT).key_up(Keys.CONTROL).perform()
    until(lag, "pricewake.lag.state.shift === 30 && " + CALM)
    choose(lag, "driver", "Narrow money")  # a change that the server answers
    until(lag, "pricewake.lag.data.driver.name === 'Narrow money' && " + CALM)
    until(lag, "!pricewake.trail.state.timer")
    lag.execute_script("document.activeElement.blur()")
    ActionChains(lag).key_down(Keys.CONTROL).send_keys("z").key_up(Keys.CONTROL).perform()
    until(lag, "pricewake.lag.data.driver.name === 'Broad money' && " + CALM)
    assert state(lag, "shift") == 30
    assert lag.find_element(By.ID, "field-driver").get_attribute("value") == "Broad money"


def test_months_chosen_on_the_chart_are_left_out_and_numbers_follow(lag, bridge):
    ends = lag.execute_script(
        "const c = pricewake.ghost.chartOf('lag-overlay'), f = c._fullLayout.xaxis,"
        " b = c.getBoundingClientRect(); c.scrollIntoView({block: 'center'});"
        "const t = c.getBoundingClientRect();"
        "return ['1974-01-10', '1977-06-20'].map((d) => t.left + f._offset + f.d2p(d))"
        ".concat([t.top + t.height / 2])"
    )
    for kind, x in (
        ("mouseMoved", ends[0]),
        ("mousePressed", ends[0]),
        ("mouseMoved", (ends[0] + ends[1]) / 2),
        ("mouseMoved", ends[1]),
        ("mouseReleased", ends[1]),
    ):
        mouse(lag, kind, x, ends[2])
        time.sleep(0.05)
    until(lag, "!document.getElementById('range-choice').hidden")
    said = lag.find_element(By.ID, "range-words").text
    first, last = (time.strptime(part, "%b %Y") for part in said.split(" to "))
    assert (first.tm_year, last.tm_year) == (1974, 1977)
    lag.find_element(By.ID, "range-without").click()
    until(lag, "pricewake.lag.data.leftOut.length === 1 && " + CALM)
    left_out = state(lag, "left_out")
    cell = bridge.cell(ViewState(left_out=left_out))
    assert 600 < cell.n < 766
    assert f"over {cell.n} months" in lag.find_element(By.ID, "lag-readout").text
    assert signed(cell.correlation) in lag.find_element(By.ID, "lag-readout").text
    for value, digits in ((-0.0004, 3), (-0.004, 2), (0.004, 2), (-0.006, 2)):
        twin = lag.execute_script("return pricewake.words.signed(...arguments)", value, digits)
        assert twin == signed(value, digits)
    assert f"without {said}." in lag.find_element(By.ID, "lag-sentence").text
    assert lag.find_element(By.ID, "field-left_out").get_attribute("value") == left_out
    until(lag, "document.getElementById('lag-verdict').textContent.includes('Without the months')"
               " || document.getElementById('lag-verdict').textContent.includes('Not searched')",
          60)  # fmt: skip


def test_peaks_are_marked_and_joined(lag, bridge):
    unfold(lag, "tool-overlay")
    choose(lag, "peaks", "1")
    until(lag, "pricewake.ghost.chartOf('lag-overlay').data.length === 5", 60)
    found = peaks_of(ViewState(peaks="1"), bridge).found
    drawn = lag.execute_script(
        "return [...pricewake.ghost.chartOf('lag-overlay').calcdata[3]].map((p) => p.y)"
    )
    np.testing.assert_allclose(drawn, found.height[:, 0])
    unfold(lag, "fold-peaks")
    until(lag, "document.querySelector('#lag-peaks-words table')", 60)
    rows = table(lag, "peaks")
    assert len(rows) == found.pairs.shape[0] > 2
    assert [row[2] for row in rows] == [shift_words(int(d), "month") for d in found.distance]


def test_a_pinned_cell_is_compared_and_can_be_swapped(lag, bridge):
    press(lag, "p")
    until(lag, "pricewake.lag.state.pinned === '12:24'")
    field = lag.find_element(By.ID, "field-shift")
    field.send_keys(Keys.ARROW_LEFT)
    until(lag, CALM)
    unfold(lag, "fold-compare")
    until(lag, "document.querySelector('#lag-compare-words table')"
               " && document.querySelector('#lag-compare .points path')", 60)  # fmt: skip
    both = two_cells(ViewState(shift=23, pinned="12:24"), bridge)
    cells = {name: values for name, *values in table(lag, "compare")}
    assert cells["Shift"] == ["+24 months", "+23 months"]
    assert cells["Slope"] == [plain(one.cell.slope, 3) for one in both]
    lag.execute_script("document.querySelector('[data-pin=swap]').click()")
    until(lag, "pricewake.lag.state.shift === 24 && pricewake.lag.state.pinned === '12:23'")


def test_numbers_and_link_are_copied_with_all_digits(lag, address, bridge):
    lag.execute_cdp_cmd(
        "Browser.grantPermissions",
        {"origin": address, "permissions": ["clipboardReadWrite", "clipboardSanitizedWrite"]},
    )
    slope = bridge.cell(ViewState()).slope
    lag.find_element(By.CSS_SELECTOR, "[data-copy-number=slope]").click()
    until(lag, "document.getElementById('toast').textContent.startsWith('Copied the slope')")
    lag.set_script_timeout(30)
    copied = lag.execute_async_script(
        "navigator.clipboard.readText().then(arguments[0], (e) => arguments[0](String(e)))"
    )
    assert float(copied) == pytest.approx(slope, abs=1e-12)
    lag.execute_script(  # a browser without a clipboard
        "window.kept = null; Object.defineProperty(navigator, 'clipboard', {value: undefined,"
        " configurable: true}); document.addEventListener('copy', () => { window.kept ="
        " document.activeElement.value; }, {once: true})"
    )
    lag.find_element(By.ID, "copy-link").click()
    until(lag, "document.getElementById('toast').textContent.includes('link')")
    assert lag.execute_script("return window.kept") == lag.current_url


def test_the_list_of_keys_opens_holds_the_focus_and_gives_it_back(lag):
    lag.execute_script("document.getElementById('lag-map').focus()")
    press(lag, "?")
    until(lag, "document.getElementById('keys').open")
    for _ in range(4):
        press(lag, Keys.TAB)
        inside = lag.execute_script(
            "const a = document.activeElement;"
            "return a === document.body || document.getElementById('keys').contains(a)"
        )
        assert inside
    assert "Page Up" in lag.find_element(By.ID, "keys").text
    press(lag, Keys.ESCAPE)
    until(lag, "!document.getElementById('keys').open")
    assert lag.switch_to.active_element.get_attribute("id") == "lag-map"


def test_keys_on_the_map_move_the_cell(lag):
    lag.execute_script("document.getElementById('lag-map').focus()")
    for key, wanted in (
        (Keys.ARROW_RIGHT, (12, 25)),
        (Keys.ARROW_UP, (13, 25)),
        (Keys.PAGE_UP, (25, 25)),
        (Keys.PAGE_DOWN, (13, 25)),
        (Keys.HOME, (13, -36)),
        (Keys.END, (13, 60)),
        (Keys.ARROW_RIGHT, (13, 60)),
    ):
        press(lag, key)
        until(lag, CALM)
        assert (state(lag, "window"), state(lag, "shift")) == wanted


def test_the_driver_is_held_against_a_response_that_is_chosen(lag):
    unfold(lag, "fold-responses")
    button = "#lag-responses-words [data-response='Consumer prices']"
    until(lag, f'document.querySelector("{button}")', 60)
    lag.execute_script("document.querySelector(arguments[0]).click()", button)
    until(lag, "document.querySelector('#lag-responses-words table tbody td')", 120)
    until(lag, "document.querySelector('#lag-responses .lines path')")
    (row,) = table(lag, "responses")
    assert row[:3] == ["Consumer prices", "window 10, shift +22 months", "+0.79"]
    assert row[3:] == ["below .001", "below .001"]


def test_nothing_on_the_page_shifts_once_it_is_there(browser, address):
    open_lag(browser, address)
    browser.execute_script(
        "window.shifts = 0; new PerformanceObserver((list) => { for (const e of list.getEntries())"
        " if (!e.hadRecentInput) window.shifts += e.value; }).observe({type: 'layout-shift'})"
    )
    until(browser, "document.getElementById('lag-verdict').textContent.includes('shift set')", 90)
    browser.execute_script(
        "for (let s = -36; s <= 60; s++)"
        " setTimeout(() => pricewake.lag.move({shift: s}), 8 * (s + 36))"
    )
    until(browser, "pricewake.lag.state.shift === 60 && " + CALM)
    assert browser.execute_script("return window.shifts") == 0
    rooms = browser.execute_script(
        "return [...document.querySelectorAll('.strip-item:not(.worth) dd')]"
        ".map(each => each.getBoundingClientRect().width)"
    )
    assert len(rooms) == 3
    assert len(set(rooms)) == 1, "every p has the same room, whatever it is"
