"""Every page, in every state, by axe-core (tests/browser/axe.min.js, MPL 2.0, text beside it).

The rules are those of WCAG 2.2, levels A and AA, and the program's own good practice.
"""

import time
from pathlib import Path

import pytest

from app.server import PAGES
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
    driver.execute_script("localStorage.setItem('pricewake-theme', arguments[0])", theme)
    until(driver, SETTLED, 40)


@pytest.fixture(scope="module")
def own(browser, address):
    yield browser
    browser.execute_script("localStorage.setItem('pricewake-theme', 'light')")
    size(browser, 1280, 800)


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.TITLE)
def test_no_rule_is_broken_with_everything_open_light_dark_and_narrow(own, address, page):
    size(own, 1280, 800)
    go(own, address, page.PATH + QUICK)
    assert violations(own) == []
    own.execute_script(OPEN_ALL)
    until(own, SETTLED, 40)
    assert violations(own) == [], "light, all open"
    own.execute_script("document.getElementById('theme').click()")
    until(own, SETTLED, 40)
    assert own.execute_script("return document.documentElement.dataset.theme") == "dark"
    assert violations(own) == [], "dark"
    size(own, 400, 800)
    assert violations(own) == [], "narrow and dark"
