"""What is kept, on the Data page: found and corrected, out of view, on a date, as revised."""

import numpy as np
import pandas as pd
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from analytics.series import Series
from app.compute import Bridge
from app.desk import bridge as desk_bridge
from app.intake.reading import Release, read_release
from app.state import ViewState
from tests.browser.data_page import (
    DRAWN,
    choose,
    listed,
    opened,
    previewed,
    text_of,
    told,
)
from tests.browser.driving import READY, severe, size, until


def revised(here, months=30, first=200):
    """Load a level and a second series month by month, each first print revised once."""
    rng = np.random.default_rng(5)
    final = 100 * np.exp(np.cumsum(rng.normal(0.3, 0.4, first + months)) / 100)
    for k in range(months):
        values = final[: first + k + 1].copy()
        values[-1] *= np.exp(rng.normal(0.1, 0.1) / 100)
        day = f"{2020 + k // 12}-{k % 12 + 1:02d}-12"
        prices, money = (
            Series(name, pd.Period("2003-05", "M"), each, "level")
            for name, each in (("Shop prices", values), ("Money in hand", values[::-1]))
        )
        here.add(Release(f"release {day}.csv", (prices, money), ()), day)


def test_the_last_of_many_series_is_found_and_corrected(data):
    browser, url, here = data
    hostile = "<img src=x onerror=alert(1)> of 299"
    names = [f"Component {k}" for k in range(298)] + ["Bread", hostile]
    many = tuple(Series(name, pd.Period("2020-01", "M"), [1.0, 2.0, 3.0]) for name in names)
    here.add(Release("many.csv", many, ()))
    opened(browser, url)
    first = "document.querySelector('#data-series tbody strong')?.innerText"
    words = "document.querySelector('#data-series .page-words').innerText"
    until(browser, f"{first} === 'Component 0' && {words} === '1 to 60 of 300'")
    until(browser, "!document.getElementById('data-breaks').innerText.includes('not done yet')")
    foot = browser.find_element(By.CSS_SELECTOR, "#data-series [data-foot] [data-turn='1']")
    for k in range(1, 5):
        foot.click()
        until(browser, f"{first} === 'Component {60 * k}'")
    assert browser.execute_script(f"return {words}") == "241 to 300 of 300"
    assert foot.get_attribute("aria-disabled") == "true"
    assert hostile in text_of(browser, "data-series")
    unit = browser.find_element(By.CSS_SELECTOR, "#data-series [aria-label='Unit of Bread']")
    unit.send_keys("2015 = 100", Keys.TAB)
    anew = "document.querySelector('[data-entry][data-series=\"Bread\"]').dataset.value"
    until(browser, f"{anew} === '2015 = 100'")  # the answer keeps the page and the focus
    until(browser, "document.activeElement.dataset.correct === 'adjustment'")
    assert browser.execute_script("return document.activeElement.dataset.series") == "Bread"
    assert here.named("Bread").unit == "2015 = 100"
    find = browser.find_element(By.CSS_SELECTOR, "#data-series [data-find]")
    find.send_keys("onerror")
    until(browser, f"{first} === '{hostile}' && {words} === '1 to 1 of 1 found, 300 in all'")
    assert browser.execute_script("return document.activeElement.dataset.find") == ""
    browser.execute_script("dash_clientside.set_props('data-tick', {data: Date.now()})")
    until(browser, "!pricewake.plain.busy()")
    find.send_keys(Keys.CONTROL, "a", Keys.BACKSPACE)  # the very element, with its focus
    until(browser, f"{words} === '1 to 60 of 300'")
    assert (
        browser.execute_script("return document.querySelectorAll('#data-series img').length") == 0
    )
    assert severe(browser, "422") == []


def test_a_correction_is_kept_and_remembered(data):
    browser, url, here = data
    revised(here, 2)
    opened(browser, url)
    until(browser, "document.querySelector('input[aria-label=\"Unit of Shop prices\"]')")
    unit = browser.find_element(By.CSS_SELECTOR, "input[aria-label='Unit of Shop prices']")
    unit.send_keys("2015 = 100", Keys.TAB)
    told(browser, "intake-message", "2015 = 100")
    # The page was answered anew meanwhile: the focus is where it was, on what follows the unit.
    anew = "document.querySelector('[data-entry][data-series=\"Shop prices\"]').dataset.value"
    until(browser, f"{anew} === '2015 = 100'")
    until(browser, "document.activeElement.dataset.correct === 'adjustment'")
    browser.switch_to.active_element.send_keys(Keys.SHIFT, Keys.TAB, Keys.TAB)
    until(browser, "document.activeElement.dataset.correct === 'kind'")
    browser.switch_to.active_element.send_keys("index", Keys.SHIFT, Keys.TAB)
    told(browser, "intake-message", "kind is")
    one = here.named("Shop prices")
    assert (one.kind, one.unit) == ("index", "2015 = 100")
    here.add(Release("new.csv", (Series("Shop prices", pd.Period("2024-01", "M"), [1.0]),), ()))
    assert here.named("Shop prices").unit == "2015 = 100"
    opened(browser, url)
    until(browser, "document.querySelector('input[aria-label=\"Unit of Shop prices\"]')")
    shown = browser.execute_script(
        "return [...document.querySelectorAll('[data-series=\"Shop prices\"]')]"
        ".filter(e => e.value !== undefined).map(e => e.value)"
    )
    assert shown == ["index", "2015 = 100", "unknown"]
    assert severe(browser, "422") == []


def test_a_file_is_taken_out_of_view_and_brought_back(data):
    browser, url, here = data
    here.add(Release("a.csv", (Series("A", pd.Period("2024-01", "M"), [1.0, 2.0]),), ()))
    here.add(Release("b.csv", (Series("B", pd.Period("2024-01", "M"), [1.0, 2.0]),), ()))
    opened(browser, url)
    browser.find_element(By.CSS_SELECTOR, "[data-act=hide][data-file='a.csv']").click()
    listed(browser, 1)
    assert list(here.series) == ["B"]
    assert len(here.vintages("A")) == 1
    browser.find_element(By.XPATH, "//summary[starts-with(., 'Out of view')]").click()
    browser.find_element(By.CSS_SELECTOR, "[data-act=show]").click()
    listed(browser, 2)
    assert set(here.series) == {"A", "B"}
    assert severe(browser, "422") == []


def test_every_page_shows_what_stood_on_the_date_chosen(data):
    browser, url, here = data
    revised(here)
    opened(browser, url)
    browser.execute_script(
        "const f = document.getElementById('field-as_of'); f.value = '2020-06-20';"
        "f.dispatchEvent(new Event('change', { bubbles: true }));"
    )
    told(browser, "data-sentence", "20 Jun 2020")
    assert "as_of=2020-06-20" in browser.current_url
    spans = text_of(browser, "data-series")
    last = here.as_of("2020-06-20").named("Shop prices").last
    assert f"{last:%b %Y}" in spans
    assert browser.execute_script(
        "return [...document.querySelectorAll('[id^=nav-]')]"
        ".every(a => a.href.includes('as_of=2020-06-20'))"
    )
    browser.find_element(By.ID, "nav-lag").click()
    until(browser, READY)
    assert browser.execute_script("return pricewake.lag.state.as_of") == "2020-06-20"
    growth = browser.execute_script("return pricewake.lag.data.driver.values.length")
    assert growth == here.as_of("2020-06-20").named("Shop prices").values.size - 1
    line = browser.find_element(By.CSS_SELECTOR, ".lag-page .as-of")
    assert line.text.startswith("Everything here is as it stood on 20 Jun 2020.")
    line.find_element(By.TAG_NAME, "a").click()
    until(browser, DRAWN)
    until(browser, "document.getElementById('field-as_of')?.value === '2020-06-20'")
    browser.find_element(By.CSS_SELECTOR, "[data-set=as_of]").click()
    told(browser, "data-sentence", "stand now")
    assert browser.execute_script("return document.getElementById('field-as_of').value") == ""
    assert "as_of" not in browser.current_url
    assert browser.execute_script(
        "return [...document.querySelectorAll('[id^=nav-]')].every(a => !a.href.includes('as_of'))"
    )
    assert severe(browser, "422") == []


def test_revisions_are_drawn_and_said_as_they_are_computed(data):
    browser, url, here = data
    revised(here)
    opened(browser, url, "?series=Shop+prices")
    until(browser, "document.querySelector('#data-revisions .points path')")
    found = desk_bridge.revised(ViewState(series="Shop prices"), Bridge(here))
    drawn = browser.execute_script(
        "return pricewake.ghost.chartOf('data-revisions')._fullData.map(t => [...t.y])"
    )
    np.testing.assert_allclose(drawn[0], found.result.latest[found.start :])
    bars = np.array(drawn[2], dtype=float)
    np.testing.assert_allclose(bars[:-1], found.result.revision[found.start : -1])
    words = text_of(browser, "data-revisions-words")
    assert f"mean revision {found.result.mean:+.3f}".replace("-", "−") in words
    links = browser.execute_script("return document.getElementById('csv-revisions').href")
    assert links.endswith("/export/data/revisions.csv?series=Shop+prices")
    chosen = browser.find_element(By.ID, "field-revised")
    chosen.send_keys("values")
    until(browser, "location.search.includes('revised=values')")
    told(browser, "data-revisions-words", "not named")
    assert severe(browser, "422") == []


@pytest.mark.parametrize("theme", ["light", pytest.param("dark", marks=pytest.mark.long)])
@pytest.mark.parametrize("width", [1280, 400])
def test_nothing_runs_out_of_the_page(data, release, width, theme):
    browser, url, here = data
    revised(here, 4)
    here.add(
        read_release("faults.csv", b"month,A long name of a series,B\n2024-01,1,x\n2024-03,2,3\n")
    )
    try:
        size(browser, width, 800)
        opened(browser, url)
        if browser.execute_script("return document.documentElement.dataset.theme") != theme:
            browser.find_element(By.ID, "theme").click()
        choose(browser, release)
        previewed(browser)
        assert browser.execute_script("return document.documentElement.scrollWidth") <= width
        unnamed = browser.execute_script(
            "return [...document.querySelectorAll('input, select, button, progress')]"
            ".filter(e => !(e.closest('[hidden]') || e.getAttribute('aria-label')"
            " || e.labels?.length || e.textContent.trim())).map(e => e.outerHTML)"
        )
        assert unnamed == []
    finally:
        if browser.execute_script("return document.documentElement.dataset.theme") == "dark":
            browser.find_element(By.ID, "theme").click()
        size(browser, 1280, 800)
