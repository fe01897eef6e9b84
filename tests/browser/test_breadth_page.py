"""The Breadth page in a real browser: what is drawn, clicked, sorted, left out and saved."""

import csv
import io
import json
import urllib.request

import numpy as np
import pytest
from selenium.webdriver.common.by import By

from app.breadth.bridge import breadth
from app.compute import Bridge
from app.demo import demo_releases
from app.state import ViewState
from app.workspace import Workspace
from tests.app.baskets import SHARES, basket, prices_of, series_of, weights_of
from tests.browser import driving
from tests.browser.driving import size, until

READY = (
    "window.pricewake && pricewake.plain && pricewake.plain.data && !pricewake.plain.busy()"
    " && document.querySelector('#breadth-strip .heatmaplayer image')"
    " && document.querySelector('#breadth-diffusion .lines path')"
)
DRAWN = READY + " && document.querySelector('#breadth-core .lines path')"


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


@pytest.fixture
def page(browser, address):
    browser.get_log("browser")
    browser.get(f"{address}/breadth")
    until(browser, DRAWN, 30)
    return browser


def traces(driver, view):
    """Return the traces of a view as plotly holds them."""
    return driver.execute_script(
        "return document.querySelector('#breadth-' + arguments[0] + ' .js-plotly-plot')"
        "._fullData.map("
        "t => ({name: t.name, x: [...t.x], y: [...t.y]}))",
        view,
    )


def texts(driver, selector):
    return [each.text for each in driver.find_elements(By.CSS_SELECTOR, selector)]


def state(driver):
    return driver.execute_script("return pricewake.plain.state")


def test_the_page_opens_with_an_empty_console_and_the_numbers_of_python(page, bridge):
    assert [e for e in page.get_log("browser") if e["level"] == "SEVERE"] == []
    shown = breadth(ViewState(), bridge)
    (bars,) = traces(page, "contributions")
    np.testing.assert_allclose(sorted(bars["x"]), sorted(shown.weighted.points[-1]), atol=1e-12)
    core = {each["name"]: each["y"] for each in traces(page, "core")}
    np.testing.assert_allclose(
        core["Weighted median"], shown.weighted.measures["Weighted median"][shown.drawn], atol=1e-9
    )
    headline = page.find_element(By.ID, "breadth-sentence").text
    assert headline.startswith("Prices of 11 of 12 components rose over the 12 months to Oct 2026")


def test_a_heading_orders_the_table_and_says_so(page):
    first = "#breadth-table tbody tr:first-child th"
    assert texts(page, first) == ["04 Housing and energy"]
    page.find_element(By.CSS_SELECTOR, "[data-value^='rank-']").click()
    until(page, f"document.querySelector('{first}').textContent === '01 Food and soft drinks'")
    assert state(page)["sort"] == "rank-down"
    marked = page.find_elements(By.CSS_SELECTOR, "[aria-sort='descending']")
    assert [each.text.strip(" ▼") for each in marked] == ["Rank in own history"]
    page.find_element(By.CSS_SELECTOR, "[data-value='rank-up']").click()
    until(page, f"document.querySelector('{first}').textContent === '07 Transport'")
    assert "sort=rank-up" in page.current_url
    until(page, "document.activeElement.dataset.value === 'rank-down'")  # the button, drawn anew


def test_a_component_is_left_out_with_the_keyboard(page, bridge):
    before = traces(page, "core")[-1]["name"]
    assert before == "Without food and energy"
    button = page.find_element(By.CSS_SELECTOR, "[aria-label='Leave out 07 Transport']")
    button.send_keys("\n")
    until(page, "pricewake.plain.state.excluded.includes('07 Transport')")
    until(
        page,
        "document.querySelector('[aria-label=\"07 Transport is left out\"][aria-pressed=true]')",
    )
    until(
        page,
        "document.querySelector('#breadth-core .js-plotly-plot').data.at(-1).name"
        " === 'Without 3 components'",
    )
    wanted = breadth(ViewState(excluded=state(page)["excluded"]), bridge)
    np.testing.assert_allclose(
        traces(page, "core")[-1]["y"],
        wanted.weighted.measures["Without 3 components"][wanted.drawn],
        atol=1e-9,
    )


def test_controls_change_the_address_and_the_address_the_page(page, address, bridge):
    page.execute_script(
        "const s = document.getElementById('field-span'); s.value = 'month';"
        "s.dispatchEvent(new Event('change', {bubbles: true}))"
    )
    until(page, "document.getElementById('breadth-sentence').textContent.includes('in Oct 2026')")
    assert "span=month" in page.current_url
    page.get(f"{address}/breadth?span=month&trim=24:31&newest=2001-05")
    until(page, DRAWN, 30)
    shown = breadth(ViewState(span="month", trim="24:31", newest="2001-05"), bridge)
    trimmed = next(each for each in traces(page, "core") if each["name"] == "Trimmed mean")
    np.testing.assert_allclose(
        trimmed["y"], shown.weighted.measures["Trimmed mean"][shown.drawn], atol=1e-9
    )


def test_a_refused_value_is_one_sentence(page, address):
    page.get(f"{address}/breadth?trim=70")
    until(
        page, "document.getElementById('breadth-message')?.textContent?.includes('Trim must cut')"
    )
    assert page.find_element(By.ID, "breadth-body").is_displayed() is False


def test_each_view_has_its_file_and_its_print(page):
    links = page.find_elements(By.CSS_SELECTOR, "a[data-csv]")
    assert len(links) == 8
    for link in links:
        with urllib.request.urlopen(link.get_attribute("href")) as answer:
            body = answer.read().decode()
        rows = [line for line in body.splitlines() if not line.startswith("#")]
        assert len(list(csv.reader(io.StringIO("\n".join(rows))))) > 3
    views = {
        b.get_attribute("data-view") for b in page.find_elements(By.CSS_SELECTOR, "[data-save]")
    }
    assert views == {"contributions", "history", "strip", "core", "diffusion", "weights"}
    for view in sorted(views):
        printed = page.execute_script(
            "const f = pricewake.printed(arguments[0], pricewake.plain, 'breadth');"
            "return JSON.stringify([f.layout.title.text, f.layout.width, f.layout.showlegend"
            " ?? false, f.layout.paper_bgcolor || ''])",
            view,
        )
        title, width, legend, _ = json.loads(printed)
        assert "components rose" in title
        assert width >= 900
        assert legend == (view in ("history", "core", "diffusion", "weights"))


APART = """[...document.querySelectorAll('.js-plotly-plot .xaxislayer-above')].every((axis) => {
  const labels = [...axis.querySelectorAll('.xtick text')].map((e) => e.getBoundingClientRect());
  labels.sort((one, other) => one.left - other.left);
  return labels.every((one, i) => i === 0 || one.left - labels[i - 1].right >= 4);
})"""


@pytest.mark.parametrize("width", [400, 1280, 1920])
def test_nothing_runs_off_the_side_or_together(page, width):
    size(page, width, 900)
    try:
        until(page, f"document.documentElement.scrollWidth <= {width}")
        until(page, APART)
    finally:
        size(page, 1280, 800)


def test_weights_that_do_not_sum_are_scaled_by_one_click(browser):
    shares = [SHARES[0], (380.0, 220.0, 290.0, 93.0), SHARES[2]]
    with driving.served(basket(series_of(prices_of()), weights_of(shares))) as url:
        browser.get(f"{url}/breadth")
        until(browser, READY, 30)
        assert (
            "must sum to 1000, but sum to 983" in browser.find_element(By.ID, "breadth-notes").text
        )
        place = browser.find_element(By.ID, "breadth-core-place")
        assert place.is_displayed() is False
        browser.find_element(By.CSS_SELECTOR, "[data-set='scale']").click()
        until(browser, DRAWN, 30)
        assert "they are scaled" in browser.find_element(By.ID, "breadth-notes").text
        assert browser.find_element(By.ID, "breadth-core-place").is_displayed()
