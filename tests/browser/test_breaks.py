"""A break found, marked, seen on the Lag page and taken away, through the browser."""

import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.support.ui import Select

from app.demo import demo_releases
from app.workspace import Workspace
from tests.browser.driving import READY, served, severe, until

SAID = (
    "break treated at Jul 1987: growth of the month set to the mean of the months before and after"
)


@pytest.fixture
def desk(browser):
    browser.get_log("browser")
    here = Workspace(placeholder=demo_releases())
    with served(here) as url:
        yield browser, url, here
    here.close()


def open_data(browser, url):
    browser.get(f"{url}/data")
    until(
        browser,
        "document.querySelector('#data-breaks h2') && document.querySelector('#field-files')",
    )


def words(browser):
    return browser.execute_script("return document.getElementById('data-breaks').innerText")


def test_a_break_is_found_marked_said_and_taken_away(desk):
    browser, url, here = desk
    open_data(browser, url)
    assert "the change of +31.4 percent in Jul 1987" in words(browser)
    browser.find_element(By.XPATH, "//button[text()='Mark break at Jul 1987']").click()
    until(browser, "document.querySelector('[data-break=unmark]')")
    assert "Marked as a break, see below." in words(browser)
    assert SAID.capitalize().replace("jul", "Jul") in words(browser)
    assert [mark.treatment for mark in here.as_of().marks] == ["exclude"]
    browser.get(f"{url}/lag?driver=Narrow+money")
    until(browser, READY)
    said = browser.execute_script("return document.getElementById('lag-message').innerText")
    assert f"Narrow money: {SAID}." in said
    open_data(browser, url)
    browser.find_element(By.CSS_SELECTOR, "[data-break=unmark]").click()
    until(browser, "!document.querySelector('[data-break=unmark]')")
    until(browser, "document.activeElement.id === 'breaks-message'")  # its button is gone
    assert here.as_of().marks == ()
    assert severe(browser) == []


def test_a_mark_by_hand_and_one_that_cannot_be(desk):
    browser, url, here = desk
    open_data(browser, url)
    browser.execute_script("document.getElementById('data-break-form').open = true")
    until(browser, "document.getElementById('break-period')")
    field = browser.find_element(By.ID, "break-period")
    field.send_keys("1987-Q3")
    button = browser.find_element(By.XPATH, "//button[text()='Mark break']")
    button.click()
    until(browser, "document.querySelector('#breaks-message .bad')")
    told = browser.find_element(By.ID, "breaks-message").text
    assert told == "a period must be monthly, but got '1987-Q3'"
    field.clear()
    field.send_keys("1990-01")
    button.click()
    until(browser, "document.querySelector('#breaks-message .good')")
    (mark,) = here.as_of().marks
    assert mark.period == "1990-01"
    until(browser, "document.querySelector('[data-break=unmark]')")  # the page is drawn anew
    until(browser, "document.querySelector('[data-break-box=form] #break-period')")
    choose = "document.querySelector('[data-break-box=form] [data-part={}]')"
    assert browser.execute_script(f"return {choose.format('other')}.hidden")
    box = browser.find_element(By.CSS_SELECTOR, "[data-break-box=form]")
    for part, value in (
        ("series", "Narrow money"),
        ("treatment", "overlap-mean"),
        ("other", "Broad money"),
    ):
        Select(box.find_element(By.CSS_SELECTOR, f"[data-part={part}]")).select_by_value(value)
    field = browser.find_element(By.ID, "break-period")
    field.clear()
    field.send_keys("1987-07")
    box.find_element(By.XPATH, ".//button").click()
    until(browser, "document.querySelectorAll('[data-break=unmark]').length === 2")
    assert "overlap-mean:Broad money" in [mark.treatment for mark in here.as_of().marks]
    assert "spliced by overlap with Broad money, by the means of a year" in words(browser)
    assert browser.execute_script("return document.getElementById('data-break-form').open")
