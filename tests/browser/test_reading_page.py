"""The Reading page as a person uses it, in a real browser."""

import json
import time

import numpy as np
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

from app.compute import Bridge
from app.demo import demo_releases
from app.reading.bridge import reading
from app.reading.exports import VIEWS
from app.state import ViewState
from app.workspace import Workspace
from tests.browser.driving import severe, until
from tests.exported import rows_of

DRAWN = (
    "window.pricewake && pricewake.plain && pricewake.plain.data && pricewake.plain.state &&"
    " document.querySelector('.reading-page') && !pricewake.plain.busy() &&"
    " document.querySelector('#reading-episodes .main-svg')"
)


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


@pytest.fixture
def page(browser, address):
    browser.get_log("browser")
    browser.get_log("performance")
    browser.get(f"{address}/reading?draws=99")
    until(browser, DRAWN)
    return browser


def words(driver, place):
    return driver.find_element(By.ID, f"reading-{place}").text


def trace(driver, view, index):
    return driver.execute_script(
        "const t = pricewake.ghost.chartOf(arguments[0])._fullData[arguments[1]];"
        "return {y: [...t.y], name: t.name}",
        f"reading-{view}",
        index,
    )


def test_the_page_opens_once_with_an_empty_console_and_asks_no_other_host(page, address):
    assert severe(page) == []
    sent = [
        message["params"]["request"]["url"]
        for entry in page.get_log("performance")
        for message in [json.loads(entry["message"])["message"]]
        if message["method"] == "Network.requestWillBeSent"
    ]
    assert [url for url in sent if not url.startswith((address, "data:", "blob:"))] == []
    time.sleep(1.5)  # a page that asks itself again would do so now
    again = [
        entry
        for entry in page.get_log("performance")
        if "_dash-update-component" in entry["message"]
        and 'Network.requestWillBeSent"' in entry["message"]
    ]
    assert again == []


def test_what_is_drawn_are_the_numbers_of_the_results(page, bridge):
    known = reading(ViewState(draws=99), bridge)
    np.testing.assert_allclose(trace(page, "rates", 1)["y"], known.yearly.values, atol=1e-9)
    np.testing.assert_allclose(trace(page, "base", 0)["y"], known.base.new, atol=1e-9)
    assert words(page, "sentence").startswith("Consumer prices rose 0.07 percent in Oct 2026")


def test_the_slider_moves_the_path_and_the_address(page, bridge):
    slider = page.find_element(By.ID, "field-coming")
    slider.send_keys(Keys.ARROW_RIGHT, Keys.ARROW_RIGHT)
    until(page, "!pricewake.plain.busy() && pricewake.plain.state.coming === 0.3")
    until(page, "location.search.includes('coming=0.3')")
    until(page, "document.getElementById('reading-whatif-words').textContent.includes('+0.30')")
    known = reading(ViewState(draws=99, coming=0.3), bridge)
    np.testing.assert_allclose(trace(page, "whatif", 1)["y"][1:], known.path.yearly, atol=1e-9)


def test_another_series_is_read_and_views_that_it_has_not_are_hidden(page):
    Select(page.find_element(By.ID, "field-series")).select_by_visible_text("Policy rate")
    until(page, "document.getElementById('reading-base-place').hidden")
    until(page, DRAWN)
    assert "Policy rate stood at" in words(page, "sentence")
    assert "Not shown" in words(page, "base-words")
    assert not page.find_element(By.ID, "csv-base").is_displayed()
    assert page.find_element(By.ID, "csv-rank").is_displayed()


def test_an_answer_leaves_open_folds_and_the_focus_where_they_were(page):
    fold = "#reading-distribution-words details"
    page.execute_script(f"document.querySelector('{fold} summary').click()")
    family = Select(page.find_element(By.ID, "field-family"))
    family.select_by_value("normal")
    until(page, f"{DRAWN} && document.querySelector('{fold} .chosen').innerText.includes('normal')")
    until(page, f"document.querySelector('{fold}').open")
    until(page, "document.activeElement.id === 'field-family'")


def test_a_number_field_sets_the_episodes(page, bridge):
    Select(page.find_element(By.ID, "field-beyond")).select_by_value("level")
    until(page, "!pricewake.plain.busy() && pricewake.plain.state.beyond === 'level'")
    field = page.find_element(By.ID, "field-level")
    field.clear()
    field.send_keys("8.5", Keys.TAB)
    until(page, "!pricewake.plain.busy() && pricewake.plain.state.level === 8.5")
    until(page, "document.getElementById('reading-episodes-words').textContent.includes('8.5 p')")
    known = reading(ViewState(draws=99, beyond="level", level=8.5), bridge)
    assert f"{len(known.runs)} runs" in words(page, "episodes-words")


def test_the_long_test_shows_progress_and_can_be_stopped_and_gone_on_with(browser, address):
    browser.get(f"{address}/reading?draws=20000&family=student_t&seed=77")
    there = "document.getElementById('reading-work')"
    until(browser, f"window.pricewake && pricewake.plain && {there} && !{there}.hidden", 30)
    until(browser, "Number(document.getElementById('reading-progress').max) === 400", 30)
    browser.find_element(By.ID, "reading-cancel").click()
    until(browser, "!document.getElementById('reading-resume').hidden")
    assert "Stopped" in browser.find_element(By.ID, "reading-progress-words").text
    assert "is being tested" in words(browser, "distribution-words")
    browser.find_element(By.ID, "reading-resume").click()
    until(browser, "document.getElementById('reading-resume').hidden")
    browser.find_element(By.ID, "reading-cancel").click()


def test_a_refused_part_of_the_address_is_named(browser, address):
    browser.get(f"{address}/reading?newest=soon&draws=99")
    until(browser, DRAWN)
    said = browser.execute_script("return pricewake.plain.state.newest")
    assert said == ""


def test_every_view_saves_a_picture_and_a_file(page, downloads):
    for view in VIEWS:
        for kind in ("png", "svg"):
            page.find_element(By.CSS_SELECTOR, f"[data-save='{kind}'][data-view='{view}']").click()
            name = f"{view}-consumer-prices-2026-10.{kind}"
            path = downloads / name
            for _ in range(100):
                if path.exists() and path.stat().st_size > 3000:
                    break
                time.sleep(0.1)
            assert path.exists(), name
    text = page.execute_async_script(
        "const done = arguments[0];"
        "fetch(document.getElementById('csv-base').href).then(r => r.text()).then(done)"
    )
    rows = rows_of(text)
    assert rows[0][:3] == ["period", "part", "yearly_rate"]


@pytest.mark.parametrize("width", [400, 1280, 1920])
def test_nothing_is_wider_than_the_window(page, width):
    page.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride",
        {"width": width, "height": 800, "deviceScaleFactor": 1, "mobile": False},
    )
    time.sleep(0.5)
    try:
        wide = page.execute_script("return document.documentElement.scrollWidth")
        assert wide <= width
    finally:
        page.execute_cdp_cmd(
            "Emulation.setDeviceMetricsOverride",
            {"width": 1280, "height": 800, "deviceScaleFactor": 1, "mobile": False},
        )
