"""By axe-core: what opens over a page, what is read but not kept, what runs, what is printed."""

import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from app.page_table import PAGES
from app.workspace import Workspace
from tests.browser.data_page import choose
from tests.browser.driving import served, size, until
from tests.browser.test_accessibility import OPEN_ALL, QUICK, SETTLED, go, violations
from tests.browser.test_keyboard import LOST

LONG_WORK = {
    "/lag": "?surrogates=9999&seed=7",
    "/outlook": "?window=11",
    "/scan": "?surrogates=9999&seed=7",
    "/reading": "?draws=5000&seed=7",
    "/brief": "",
}
RUNNING = "[...document.querySelectorAll('.work')].some(work => work.checkVisibility())"
CHOOSE = (
    "const field = document.getElementById(arguments[0]); field.value = arguments[1];"
    "field.dispatchEvent(new Event('change', {bubbles: true}))"
)


def test_the_list_of_keys_and_the_notice_of_a_lost_program_break_no_rule(browser, address):
    go(browser, address, "/reading" + QUICK)
    browser.find_element(By.TAG_NAME, "body").send_keys("?")
    until(browser, "document.getElementById('keys').open")
    assert violations(browser) == [], "keys"
    browser.switch_to.active_element.send_keys(Keys.ESCAPE)
    until(browser, "!document.getElementById('keys').open")
    browser.execute_script(LOST)
    browser.execute_script("document.getElementById('theme').click()")
    until(browser, SETTLED)
    assert violations(browser) == [], "notice, dark"


@pytest.mark.long
def test_all_tools_of_the_lag_page_at_work_break_no_rule(browser, address):
    go(
        browser,
        address,
        "/lag" + QUICK + "&pinned=24:12&band=driver&peaks=sd2&other_responses=Real+output",
    )
    browser.execute_script(OPEN_ALL)
    until(browser, "!document.getElementById('lag-band').hidden")
    until(browser, SETTLED, 60)
    assert violations(browser) == []


@pytest.mark.long
def test_files_read_refused_and_not_kept_yet_break_no_rule(browser, tmp_path):
    good, faulty, refused = (tmp_path / name for name in ("good.csv", "faulty.csv", "refused.csv"))
    good.write_text("period,Prices\n2024-01,100\n2024-02,101\n2024-03,102\n")
    faulty.write_text("period,Prices\n2024-01,100\n2024-02,n.a. 1\n2024-04,102\n2024-04,103\n")
    refused.write_text('period,"Prices\n2024-01,100\n')
    with served(Workspace(())) as url:
        go(browser, url, "/data")
        choose(browser, good, faulty, refused)
        until(browser, "document.getElementById('data-preview-head')")
        browser.execute_script(OPEN_ALL)
        assert violations(browser) == []
        size(browser, 400, 800)
        assert browser.execute_script("return document.documentElement.scrollWidth") <= 400
        assert violations(browser) == [], "narrow"
        size(browser, 1280, 800)


@pytest.mark.long
@pytest.mark.parametrize("path", LONG_WORK)
def test_work_that_runs_breaks_no_rule(browser, address, path):
    browser.get(address + path + LONG_WORK[path])
    until(browser, RUNNING, 30)
    assert violations(browser) == []
    far = "[...document.querySelectorAll('.work progress')].some(bar => bar.checkVisibility())"
    assert browser.execute_script(f"return {far}")


@pytest.mark.long
@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.TITLE)
def test_on_paper_no_rule_is_broken(browser, address, page):
    go(browser, address, page.PATH + QUICK)
    browser.execute_script(OPEN_ALL)
    until(browser, SETTLED, 40)
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    try:
        assert violations(browser) == []
        shown = browser.execute_script(
            "return [...document.querySelectorAll('main button, main select, .help')]"
            ".filter(e => e.checkVisibility() && e.closest('.controls, .save, .acts')).length"
        )
        assert shown == 0
    finally:
        browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})


@pytest.mark.long
@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.TITLE)
def test_an_empty_workspace_breaks_no_rule_and_says_what_to_do(browser, page):
    with served(Workspace(())) as url:
        browser.get(url + page.PATH)
        until(browser, SETTLED, 40)
        assert violations(browser) == []
        said = browser.execute_script("return document.querySelector('main').innerText")
        assert any(word in said for word in ("open", "Open", "Choose"))
