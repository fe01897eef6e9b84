"""Series whose names are attacks, on every page: nothing runs, is fetched, or breaks."""

import json

import pytest

from app.page_table import PAGES
from app.state import ViewState
from tests import hostile
from tests.browser.driving import served, size, until

SAID = "document.querySelector('main h1') && document.querySelector('main h1').textContent"
QUIET = "!pricewake.plain.busy() && !pricewake.lag.busy()"


@pytest.fixture(scope="module")
def place(browser):
    here = hostile.workspace()
    with served(here) as url:
        yield url, list(here.as_of().series)
    here.close()
    size(browser, 1280, 800)


@pytest.mark.parametrize(
    "page",
    [
        page if page.TITLE in ("Data", "Breadth") else pytest.param(page, marks=pytest.mark.long)
        for page in PAGES
    ],
    ids=lambda page: page.TITLE,
)
def test_no_name_runs_anything_or_breaks_the_page(browser, place, page):
    url, names = place
    query = ViewState(
        driver=names[0],
        response=names[1],
        series=names[5],
        shift=6,
        surrogates=19,
        draws=99,
    ).to_query()
    browser.get_log("browser")
    browser.get_log("performance")
    size(browser, 1280, 800)
    browser.get(f"{url}{page.PATH}?{query}")
    until(browser, SAID, 40)
    until(browser, QUIET, 90)
    browser.execute_script(
        "document.querySelectorAll('details').forEach(d => { d.open = true; });"
        "document.querySelectorAll('[data-table][aria-expanded=false]').forEach(b => b.click());"
    )
    until(browser, QUIET, 90)
    assert browser.execute_script("return window.hostile === undefined")
    strange = browser.execute_script(
        "return [...document.querySelectorAll('main img, main [onerror], main [onload],"
        " main script, main a[href^=javascript], main b b')].map(e => e.outerHTML.slice(0, 90))"
    )
    assert strange == []
    sent = [
        message["params"]["request"]["url"]
        for entry in browser.get_log("performance")
        for message in [json.loads(entry["message"])["message"]]
        if message["method"] == "Network.requestWillBeSent"
    ]
    assert [each for each in sent if not each.startswith((url, "data:", "blob:"))] == []
    assert [each for each in sent if each.endswith("/x")] == []
    severe = [e for e in browser.get_log("browser") if e["level"] == "SEVERE"]
    assert severe == []
    for width in (1280, 400):
        size(browser, width, 800)
        until(browser, f"document.documentElement.scrollWidth <= {width}", 15)
