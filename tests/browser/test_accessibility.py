"""Every page, in every state, by axe-core (tests/browser/axe.min.js, MPL 2.0, text beside it).

The rules are those of WCAG 2.2, levels A and AA, and the program's browser good practice.
"""

import time
from pathlib import Path

import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from app.server import PAGES
from app.state import field_kind
from tests.browser.driving import size, until

AXE = (Path(__file__).parent / "axe.min.js").read_text(encoding="utf-8")
TAGS = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]
RUN = """
const done = arguments[1];
axe.run(document, {runOnly: {type: 'tag', values: arguments[0]}, resultTypes: ['violations']})
  .then(found => done(found.violations.map(v => [
    v.id, v.impact, v.nodes.length, v.nodes[0].target.join(' '), v.nodes[0].failureSummary])),
    error => done([['axe failed', String(error)]]));
"""
SETTLED = (
    "window.pricewake && document.querySelector('h1') && document.querySelector('h1').textContent"
    " && !(pricewake.plain && pricewake.plain.busy()) && !pricewake.lag.busy()"
    " && [...document.querySelectorAll('.js-plotly-plot')]"
    ".every(c => !c.checkVisibility() || c.getAttribute('aria-label'))"
)
OPEN_ALL = (
    "document.querySelectorAll('details').forEach(d => { d.open = true; });"
    "document.querySelectorAll('[data-table][aria-expanded=false]').forEach(b => b.click());"
)
# What a table is made of shows in its first cells; thousands would keep axe for a minute.
FEW_CELLS = (
    "document.querySelectorAll('.chart-numbers tr > :nth-child(n+9)').forEach(c => c.remove());"
    "document.querySelectorAll('.chart-numbers tr:nth-child(n+9)').forEach(r => r.remove());"
)


# Every run takes this one; the rest come with `pytest -m long`, as axe takes half a minute a page.
FEW = [
    page if page.TITLE == "Lag" else pytest.param(page, marks=pytest.mark.long) for page in PAGES
]
QUICK = "?surrogates=99&draws=99"  # long work is not what is looked at here


def violations(driver):
    driver.set_script_timeout(60)
    time.sleep(0.5)  # charts that were drawn anew fill their tables anew
    driver.execute_script(FEW_CELLS)
    if not driver.execute_script("return Boolean(window.axe)"):
        driver.execute_script(AXE)
    return driver.execute_async_script(RUN, TAGS)


def go(driver, address, path, theme="light"):
    driver.get(f"{address}{path}")
    until(driver, SETTLED, 40)
    driver.execute_script(
        "if (document.documentElement.dataset.theme !== arguments[0])"
        " document.getElementById('theme').click()",
        theme,
    )
    until(driver, SETTLED, 40)


@pytest.mark.parametrize("page", FEW, ids=lambda page: page.TITLE)
def test_no_rule_is_broken_with_everything_open_light_dark_and_narrow(browser, address, page):
    size(browser, 1280, 800)
    go(browser, address, page.PATH + QUICK)
    browser.execute_script(OPEN_ALL)
    until(browser, SETTLED, 40)
    assert violations(browser) == [], "light"
    browser.execute_script("document.getElementById('theme').click()")
    size(browser, 400, 800)
    until(browser, SETTLED, 40)
    assert browser.execute_script("return document.documentElement.dataset.theme") == "dark"
    assert violations(browser) == [], "narrow and dark"


@pytest.mark.parametrize(
    "path",
    [
        "/no-such-page",
        "/reading?newest=1900-01",
        "/lag?first=2026-01",
        "/data?as_of=1990-01-01",
        "/breadth?aggregate=Nothing+of+the+kind",
    ],
)
def test_pages_that_show_nothing_say_so_and_break_no_rule(browser, address, path):
    size(browser, 1280, 800)
    browser.get(f"{address}{path}")
    until(browser, "document.querySelector('h1') && document.querySelector('h1').textContent", 40)
    time.sleep(1)
    assert violations(browser) == []
    said = browser.execute_script("return document.querySelector('main').innerText")
    assert len(said) > 40
    assert "undefined" not in said
    assert "NaN" not in said


@pytest.mark.parametrize("page", FEW, ids=lambda page: page.TITLE)
def test_at_twice_the_zoom_nothing_scrolls_sideways_and_every_chart_has_words(
    browser, address, page
):
    # 200 % on a window 1280 wide leaves 640 (WCAG 2.2, 1.4.4 and 1.4.10).
    size(browser, 640, 400)
    go(browser, address, page.PATH + QUICK)
    assert browser.execute_script("return document.documentElement.scrollWidth") <= 640
    labels = browser.execute_script(
        "return [...document.querySelectorAll('.js-plotly-plot')]"
        ".filter(c => c.checkVisibility()).map(c => [c.getAttribute('role'),"
        " c.getAttribute('aria-label')])"
    )
    for role, label in labels:
        assert role == "img"
        assert ", a chart." in label
        assert any(letter.isdigit() for letter in label)
        assert "Click to enter" not in label


def test_a_table_holds_the_numbers_that_are_drawn(browser, address):
    size(browser, 1280, 800)
    go(browser, address, "/reading" + QUICK)
    button = browser.find_element(By.CSS_SELECTOR, "[data-table='rates']")
    button.send_keys(Keys.ENTER)
    assert button.get_attribute("aria-expanded") == "true"
    place = browser.find_element(By.CSS_SELECTOR, ".chart-numbers")
    assert place.get_attribute("role") == "region"
    rows = [
        [cell.get_property("textContent") for cell in row.find_elements(By.XPATH, "./*")]
        for row in place.find_elements(By.CSS_SELECTOR, "table:nth-of-type(1) tbody tr:last-child")
    ]
    drawn = browser.execute_script(
        "return pricewake.ghost.chartOf('reading-rates')._fullData.slice(0, 2)"
        ".map(t => [...t.y].at(-1))"
    )
    assert rows[-1][0] == "Oct 2026"
    shown = [float(cell.replace("\N{MINUS SIGN}", "-")) for cell in rows[-1][1:]]
    assert shown == [round(value, 3) for value in drawn]
    button.send_keys(Keys.ENTER)
    assert not place.is_displayed()


def test_help_comes_with_the_keyboard_and_goes_with_escape(browser, address):
    size(browser, 1280, 800)
    go(browser, address, "/reading" + QUICK)
    fields = browser.execute_script(
        "return [...document.querySelectorAll('[data-field]')].map(f => [f.id,"
        " f.getAttribute('aria-describedby')])"
    )
    assert len(fields) >= 10
    for name, described in fields:
        sentence = browser.execute_script(
            "return document.getElementById(arguments[0]).textContent", described
        )
        assert sentence.endswith("."), name
        helped = f"[data-help='{described}']"
        assert browser.find_elements(By.CSS_SELECTOR, helped), f"{name} has no visible help"
    browser.execute_script("document.querySelector('[data-help=help-measure]').focus()")
    hint = browser.find_element(By.CSS_SELECTOR, ".hint")
    assert hint.is_displayed()
    assert hint.text == field_kind("measure").help
    browser.switch_to.active_element.send_keys(Keys.ESCAPE)
    assert not hint.is_displayed()


def test_the_focus_is_seen_and_no_motion_is_forced(browser, address):
    size(browser, 1280, 800)
    go(browser, address, "/lag")
    seen = browser.execute_script(
        "const found = [];"
        "for (const e of document.querySelectorAll('main button, main select, main input, main a'))"
        "{ if (!e.checkVisibility()) continue; e.focus({focusVisible: true});"
        "  if (document.activeElement !== e) continue;"
        "  const s = getComputedStyle(e); found.push([e.id || e.textContent,"
        "  s.outlineStyle, parseFloat(s.outlineWidth)]); }"
        "return found"
    )
    assert len(seen) > 15
    assert [each for each in seen if each[1] == "none" or each[2] < 2] == []
    browser.execute_cdp_cmd(
        "Emulation.setEmulatedMedia",
        {"features": [{"name": "prefers-reduced-motion", "value": "reduce"}]},
    )
    moving = browser.execute_script(
        "return [...document.querySelectorAll('*')].filter(e =>"
        " getComputedStyle(e).animationName !== 'none'"
        " || parseFloat(getComputedStyle(e).transitionDuration) > 0).length"
    )
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": []})
    assert moving == 0


@pytest.mark.long
def test_a_dark_page_prints_light_and_is_dark_again(browser, address):
    size(browser, 1280, 800)
    go(browser, address, "/reading" + QUICK)
    browser.execute_script("document.getElementById('theme').click()")
    drawn = "pricewake.ghost.chartOf('reading-rates')"
    browser.execute_script("window.dispatchEvent(new Event('beforeprint'))")
    theme = "return document.documentElement.dataset.theme"
    assert browser.execute_script(theme) == "light"
    assert browser.execute_script(f"return {drawn}._fullLayout.paper_bgcolor").upper() == "#FBFAF6"
    assert browser.execute_script(
        f"return {drawn}.querySelector('.main-svg').getAttribute('viewBox')"
    )
    browser.execute_script("window.dispatchEvent(new Event('afterprint'))")
    assert browser.execute_script(theme) == "dark"
    until(browser, f"{drawn}._fullLayout.paper_bgcolor.toUpperCase() === '#171A20'")
