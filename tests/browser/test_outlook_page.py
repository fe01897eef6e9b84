"""The Outlook page as a person uses it: a path, the past gone through, a statement and its fate."""

import time

import numpy as np
import pandas as pd
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

from analytics.series import Series
from app.compute import Bridge
from app.intake.reading import Release
from app.outlook.bridge import completed_outlook
from app.state import ViewState
from tests.app.outlooks import QUICK, release, released
from tests.browser.driving import served, severe, size, until
from tests.exported import rows_of

QUERY = f"driver=Money&response=Prices&{QUICK}"
READY = (
    "window.pricewake && pricewake.plain && pricewake.plain.data && !pricewake.plain.busy()"
    " && document.querySelector('.outlook-page')"
    " && document.querySelector('#outlook-gap .main-svg')"
)
TESTED = f"{READY} && pricewake.plain.data.figures.backtest"
SAID = "document.getElementById('outlook-statements-words').textContent"


@pytest.fixture(scope="module")
def desk():
    made = released(140)
    walk = np.random.default_rng(9).standard_normal(140).cumsum()
    noise = Series("Noise", pd.Period("2008-01", "M"), 100 * np.exp(walk / 100), "index")
    made.add(Release("noise.csv", (noise,), ()), "2020-01-10")
    return made


@pytest.fixture(scope="module")
def there(desk):
    with served(desk) as url:
        yield url


@pytest.fixture
def page(browser, there):
    browser.get_log("browser")
    browser.get(f"{there}/outlook?{QUERY}")
    until(browser, TESTED, 60)
    return browser


def words(driver, place):
    return driver.find_element(By.ID, f"outlook-{place}").text


def trace(driver, view, name):
    return driver.execute_script(
        "const all = pricewake.ghost.chartOf(arguments[0])._fullData;"
        "return [...all.find(t => t.name === arguments[1]).y]",
        f"outlook-{view}",
        name,
    )


def test_what_is_drawn_and_said_are_the_numbers_of_the_results(page, desk):
    known = completed_outlook(ViewState.from_query(QUERY), Bridge(desk))
    np.testing.assert_allclose(trace(page, "fan", "implied")[1:], known.fan.centre, atol=1e-9)
    ratio = trace(page, "backtest", "over autoregression")
    np.testing.assert_allclose(ratio, known.scores.ratio[1], atol=1e-9)
    assert "beat its best benchmark at" in words(page, "verdict")
    assert f"{known.scores.rmse[11]:.2f}" in words(page, "backtest-words")
    assert "not a cause" in page.find_element(By.CSS_SELECTOR, ".caution").text
    assert severe(page) == []


def test_the_link_to_the_lag_page_carries_the_pair_and_the_cell(page):
    link = page.find_element(By.ID, "nav-lag").get_attribute("href")
    assert {"driver=Money", "response=Prices", "window=3", "shift=6"} <= set(
        link.partition("?")[2].split("&")
    )
    page.find_element(By.ID, "nav-lag").click()
    until(page, "window.pricewake && pricewake.lag && pricewake.lag.state", 30)
    until(page, "pricewake.lag.state.shift === 6 && pricewake.lag.state.driver === 'Money'")
    back = page.find_element(By.ID, "nav-outlook").get_attribute("href")
    assert "shift=6" in back
    assert severe(page) == []


def test_another_rate_asks_for_its_own_past(page):
    Select(page.find_element(By.ID, "field-target")).select_by_value("window")
    until(page, "!document.getElementById('outlook-work').hidden", 20)
    until(page, f"{TESTED} && pricewake.plain.state.target === 'window'", 60)
    assert "3-month mean" in words(page, "sentence")
    assert "target=window" in page.current_url


def test_the_past_is_gone_through_with_progress_and_can_be_stopped(browser, there):
    slow = QUERY.replace("cells=kept", "cells=remade&scheme=rolling")
    browser.get(f"{there}/outlook?{slow}")
    button = "document.getElementById('outlook-cancel')"
    until(browser, f"window.pricewake && {button} && !{button}.closest('.work').hidden", 30)
    browser.execute_script(f"{button}.click()")
    until(browser, "!document.getElementById('outlook-resume').hidden")
    assert "Stopped" in browser.find_element(By.ID, "outlook-progress-words").text
    assert "Not backtested yet" in words(browser, "verdict")
    assert browser.find_element(By.CSS_SELECTOR, "#outlook-fan .main-svg")
    browser.find_element(By.ID, "outlook-resume").click()
    until(browser, TESTED, 60)
    assert "In past forecasts" in words(browser, "verdict")


def test_a_shift_outside_the_map_gives_way_in_its_field_too(page):
    field = page.find_element(By.ID, "field-shift")
    field.clear()
    field.send_keys("30", Keys.TAB)
    until(page, f"{READY} && document.getElementById('outlook-notes').textContent.includes('30')")
    shown = page.execute_script("return pricewake.plain.state.shift")
    assert field.get_attribute("value") == str(shown) != "30"
    assert f"{shown} is shown" in words(page, "notes")


def test_a_driver_joins_by_its_button_and_leaves_again(page, desk):
    button = "document.querySelector(\"#outlook-drivers-words [data-set='others']\")"
    assert page.execute_script(f"return {button}.textContent") == "Noise"
    page.execute_script(f"{button}.click()")
    until(page, "pricewake.plain.state.others === 'Noise'")
    until(page, f"{TESTED} && pricewake.plain.data.figures.drivers", 60)
    known = completed_outlook(ViewState.from_query(f"{QUERY}&others=Noise"), Bridge(desk))
    for line in known.lines:
        np.testing.assert_allclose(trace(page, "drivers", line.name)[1:], line.path, atol=1e-9)
    table = words(page, "drivers-words")
    assert f"{known.lines[0].scores.rmse[11]:.2f}" in table
    assert "weighed by past errors" in table
    page.execute_script(f"{button}.click()")
    until(page, f"{TESTED} && pricewake.plain.state.others === ''", 60)


def test_a_legend_stays_above_its_chart_when_the_window_changes(page):
    over = (
        "(() => { const g = document.querySelector('#outlook-backtest .js-plotly-plot');"
        " const b = g.querySelector('g.legend .bg').getBoundingClientRect().bottom;"
        " return Math.abs(b - g.getBoundingClientRect().top - g._fullLayout._size.t) < 3"
        " && g._fullLayout.width })()"
    )
    try:
        size(page, 400, 800)
        until(page, f"{over} && {over} < 400")
    finally:
        size(page, 1280, 800)
    until(page, f"{over} && {over} > 500")


def test_no_lead_no_path_and_the_page_lives(page):
    page.get(page.current_url.replace("shift=6", "shift=-2").replace("1%3A12", "-9%3A12"))
    until(
        page,
        "document.getElementById('outlook-verdict') && "
        "document.getElementById('outlook-verdict').textContent.includes('No path')",
        30,
    )
    until(page, "document.querySelector('#outlook-gap .main-svg')")
    assert "does not lead" in words(page, "verdict")
    assert not page.find_element(By.ID, "csv-fan").is_displayed()
    field = page.find_element(By.ID, "field-shift")
    field.clear()
    field.send_keys("6", Keys.TAB)
    until(page, TESTED, 60)


def test_a_statement_is_kept_scored_when_prints_arrive_and_superseded(page, desk, there):
    assert "No statement has been kept yet" in words(page, "statements-words")
    keep = page.find_element(By.CSS_SELECTOR, "[data-keep='say']")
    keep.click()
    until(page, "document.querySelector('#statement-said .bad')")
    assert "must have words" in page.find_element(By.ID, "statement-said").text
    page.find_element(By.ID, "statement-words").send_keys("Prices ease.")
    keep.click()
    until(page, "document.querySelector('#statement-said .good')", 20)
    until(page, f"{SAID}.includes('No outcome yet.')", 20)
    until(page, "pricewake.plain.data.figures.statements")
    desk.add(release(144), "2020-02-15")
    page.get(f"{there}/outlook?{QUERY}")
    until(page, TESTED, 60)
    said = words(page, "statements-words")
    assert "4 outcomes so far" in said
    known = completed_outlook(ViewState.from_query(QUERY), Bridge(desk))
    score = known.judged[0].score
    assert f"80 % {int(np.nansum(score.inside[1]))} of 4" in said
    assert f"rank {score.rank[3]:.0f} of 100" in said
    page.find_element(By.ID, "statement-words").send_keys("They do not ease.")
    Select(page.find_element(By.ID, "statement-supersedes")).select_by_value("1")
    page.find_element(By.CSS_SELECTOR, "[data-keep='say']").click()
    until(page, "document.querySelectorAll('.statement').length === 2", 20)
    said = words(page, "statements-words")
    assert "Superseded by statement 2." in said
    assert "Prices ease." in said
    text = page.execute_async_script(
        "const done = arguments[0];"
        "fetch(document.getElementById('csv-statements').href).then(r => r.text()).then(done)"
    )
    rows = rows_of(text)
    first = [row for row in rows if row[0] == "1" and row[10] == "yearly"]
    assert [row[2] for row in first] == ["Prices ease."] * 6
    stated = np.array([float(row[13]) for row in first])
    np.testing.assert_allclose(stated, known.judged[0].said.paths["yearly"].centre)
    assert severe(page, "/keep/say") == []


def test_every_view_saves_a_picture(page, downloads):
    for view in ("fan", "backtest", "through", "coverage", "direct", "gap"):
        for kind in ("png", "svg"):
            button = page.find_element(By.CSS_SELECTOR, f"[data-save='{kind}'][data-view='{view}']")
            page.execute_script("arguments[0].click()", button)
            path = downloads / f"{view}-money-prices-2019-12.{kind}"
            for _ in range(100):
                if path.exists() and path.stat().st_size > 3000:
                    break
                time.sleep(0.1)
            assert path.exists(), path.name
