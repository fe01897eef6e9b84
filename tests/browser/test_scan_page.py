"""The Scan page in a real browser: painted maps, progress that can be stopped, order, links."""

from dataclasses import replace

import numpy as np
import pytest
from selenium.webdriver.common.by import By

from analytics.panel import panel_surface
from app.compute import Bridge
from app.figures.theme import colours
from app.scan.bridge import scan, scan_work
from app.scan.league import league
from app.scan.result_file import panel_text
from app.state import ViewState
from tests.app.panels import SMALL, panel_workspace
from tests.browser import driving
from tests.browser.driving import severe, size, until

SLOPES = {"Ardenquay": 1.0, "Belmorrow": 0.0, "Corvessa": 0.6, "Dunmarrel": 0.0, "Elquire": 0.8}
STATE = replace(ViewState(), **SMALL)
ANSWERED = "window.pricewake && pricewake.plain && pricewake.plain.data && !pricewake.plain.busy()"
READY = (
    ANSWERED + " && document.querySelector('.league')"
    " && document.querySelector('.small-maps')?.dataset.painted"
    " && document.querySelector('#scan-shifts .barlayer path')"
    " && document.querySelector('#scan-averages .scatterlayer path')"
)


@pytest.fixture(scope="module")
def scan_address():
    with driving.served(panel_workspace(SLOPES)) as url:
        yield url


@pytest.fixture(scope="module")
def known():
    bridge = Bridge(panel_workspace(SLOPES))
    bridge.jobs.complete(scan_work(STATE, bridge))
    return scan(STATE, bridge)


@pytest.fixture
def page(browser, scan_address):
    browser.get_log("browser")
    browser.get(f"{scan_address}/scan?{STATE.to_query()}")
    until(browser, READY, 60)
    return browser


def names(driver):
    return [cell.text for cell in driver.find_elements(By.CSS_SELECTOR, ".league tbody th")]


def pixel(driver, place, column, row, height):
    """Colour of one cell of a small map; rows count up from the shortest window."""
    return driver.execute_script(
        "return [...document.querySelector(`canvas[data-map='${arguments[0]}']`).getContext('2d')"
        ".getImageData(arguments[1], arguments[2], 1, 1).data]",
        place,
        column,
        height - 1 - row,
    )


def scale(theme):
    """Colours from -1 to 1 in hundredths, as the tokens give them."""
    names = ("low-3", "low-2", "low-1", "zero", "high-1", "high-2", "high-3")
    steps = np.array(
        [[int(colours()[theme][n][i : i + 2], 16) for i in (1, 3, 5)] for n in names], float
    )
    at = np.linspace(0, 6, 201)
    return np.array([np.interp(at, range(7), steps[:, k]) for k in range(3)]).T


def test_the_maps_are_painted_from_the_numbers_of_python_in_both_themes(page, known):
    assert severe(page) == []
    pairs = {pair.names: pair for pair in known.question.pairs}
    for theme in ("light", "dark"):
        if theme == "dark":
            page.find_element(By.ID, "theme").click()
            until(page, "document.querySelector('.small-maps').dataset.painted.endsWith('dark')")
        for place, row in enumerate(league(known)):
            correlation = panel_surface(pairs[row.scan.names]).correlation
            height, width = correlation.shape
            for i, j in ((0, 0), (height - 1, width - 1), (1, 7)):
                wanted = scale(theme)[round(100 * float(correlation[i, j])) + 100]
                assert pixel(page, place, j, i, height)[:3] == pytest.approx(wanted, abs=2)
    page.find_element(By.ID, "theme").click()


def test_a_heading_orders_the_table_and_the_address_keeps_it(page, known):
    assert names(page) == [row.scan.economy for row in league(known)]
    page.find_element(By.CSS_SELECTOR, "[data-value^='economy']").click()
    until(page, ANSWERED + " && location.search.includes('league=economy-up')")
    until(page, "document.querySelector('.league tbody th').textContent === 'Ardenquay'")
    assert names(page) == sorted(SLOPES)
    held = page.find_elements(By.CSS_SELECTOR, "[aria-sort='ascending']")
    assert len(held) == 1


def test_a_small_map_opens_its_pair_on_the_lag_page_with_the_same_p(page, known):
    first = league(known)[0].scan
    page.find_element(By.CSS_SELECTOR, ".small-maps a").click()
    until(page, driving.READY, 60)
    until(page, "document.querySelector('#lag-strip').textContent.includes('.01')", 60)
    shown = page.execute_script("return pricewake.lag.data.state || {}")
    assert f"window={first.window}&shift={first.shift}" in page.current_url
    assert f"seed={first.seed}" in page.current_url
    assert shown.get("driver", f"{first.economy}: Broad money") == f"{first.economy}: Broad money"


def test_the_search_can_be_stopped_and_goes_on(browser, scan_address):
    slow = replace(STATE, surrogates=2000, seed=5)
    browser.get(f"{scan_address}/scan?{slow.to_query()}")
    until(browser, "window.pricewake && document.getElementById('scan-work')?.hidden === false", 30)
    browser.execute_script("document.getElementById('scan-cancel').click()")
    until(browser, "!document.getElementById('scan-resume').hidden")
    assert "Stopped" in browser.find_element(By.ID, "scan-progress-words").text
    assert browser.find_elements(By.CSS_SELECTOR, ".league") == []
    browser.find_element(By.ID, "scan-resume").click()
    until(browser, READY, 60)
    assert len(names(browser)) == 5


def test_the_axes_turn_logarithmic_and_every_view_can_be_saved(page):
    page.execute_script(
        "const field = document.getElementById('field-axes'); field.value = 'log';"
        "field.dispatchEvent(new Event('change', {bubbles: true}))"
    )
    until(page, ANSWERED + " && pricewake.plain.data.state.axes === 'log'", 30)
    words = page.find_element(By.ID, "scan-averages-words").text
    assert "elasticity" in words or "above zero" in words
    for view in ("surfaces", "shifts"):
        figure = page.execute_script(
            "return pricewake.printed(arguments[0], pricewake.plain, 'scan').layout", view
        )
        assert "5 pairs of 5 economies" in figure["title"]["text"].replace("<br>", " ")
        assert figure["width"] >= 800
    links = page.find_elements(By.CSS_SELECTOR, "[data-csv]")
    assert {link.get_attribute("data-csv") for link in links} >= {
        "pairs",
        "surfaces",
        "shifts",
        "averages",
    }


@pytest.mark.parametrize("width", [400, 1280, 1920])
def test_nothing_runs_over_the_side(page, width):
    size(page, width, 900)
    until(page, f"innerWidth === {width}")
    until(page, "document.documentElement.scrollWidth <= innerWidth")  # once charts have followed
    size(page, 1280, 800)


def test_a_result_file_is_opened_and_left_again(page, known, tmp_path):
    path = tmp_path / "result.csv"
    path.write_text(panel_text(known.panel, known.question.settings), encoding="utf-8", newline="")
    page.execute_script("HTMLInputElement.prototype.click = () => {}")  # no dialog of the system
    page.find_element(By.ID, "scan-open").click()
    page.find_element(By.ID, "scan-file").send_keys(str(path))
    until(page, ANSWERED + " && pricewake.plain.data.state.result", 30)
    until(page, "document.getElementById('scan-sentence').textContent.endsWith('result.csv.')")
    assert names(page) == [row.scan.economy for row in league(known)]
    assert "result=" in page.current_url
    path.write_text("a,b\r\n", encoding="utf-8")
    page.find_element(By.ID, "scan-open").click()
    page.find_element(By.ID, "scan-file").send_keys(str(path))
    until(page, "document.getElementById('scan-message').textContent.includes('something else')")
    assert len(names(page)) == 5  # what was there stays
    page.find_element(By.ID, "scan-back").click()
    until(page, ANSWERED + " && !location.search.includes('result=')", 30)
    until(page, "document.getElementById('scan-back').hidden")
