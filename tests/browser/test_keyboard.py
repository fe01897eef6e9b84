"""Each page walked with the Tab key from its top to its end: order, focus, size, help.

The success criteria named are those of WCAG 2.2: 2.1.2 no trap, 2.4.1 skip link, 2.4.3 order,
2.4.7 and 2.4.11 the focus is seen and not covered, 2.5.8 targets of at least 24 by 24 pixels.
"""

import time

import pytest
from selenium.webdriver.common.action_chains import ActionChains
from selenium.webdriver.common.keys import Keys

from app.page_table import PAGES
from tests.browser.driving import until
from tests.browser.test_accessibility import QUICK, SETTLED

MOST_STOPS = 600
# Told of the element that has the focus; null once the Tab key has left the page.
STOP = """
const named = e => e.id || e.getAttribute('aria-label') || e.textContent.slice(0, 40);
const e = document.activeElement;
if (!e || e === document.body || e === document.documentElement) return null;
window.walked = window.walked || [];
const again = walked.includes(e), before = walked.at(-1);
if (!again) walked.push(e);
const box = e.getBoundingClientRect(), style = getComputedStyle(e);
const within = (value, most) => Math.min(Math.max(value, 0), most - 1);
const over = document.elementFromPoint(within(box.left + box.width / 2, innerWidth),
  within(box.top + box.height / 2, innerHeight));
return {
  name: named(e),
  kind: e.tagName, again,
  forward: !before || again || Boolean(before.compareDocumentPosition(e) & 4),
  inside: box.bottom > 0 && box.top < innerHeight && box.right > 0 && box.left < innerWidth,
  covered: !over || !(over === e || e.contains(over) || over.contains(e)),
  outline: style.outlineStyle === 'none' ? 0 : parseFloat(style.outlineWidth),
  small: Math.min(box.width, box.height) < 24 && !(style.display === 'inline' && e.tagName === 'A'),
};
"""
# What the keyboard must reach: everything that can be pressed or filled in and is there to see.
LEFT_OUT = """
const named = e => e.id || e.getAttribute('aria-label') || e.textContent.slice(0, 40);
const pressed = 'a[href], button, input, select, textarea, summary';
return [...document.querySelectorAll(`#frame :is(${pressed})`)]
  .filter(e => e.checkVisibility({visibilityProperty: true}))
  .filter(e => !e.disabled && e.tabIndex >= 0)
  .map(named).filter(name => !walked.map(named).includes(name));
"""
UNHELPED = """
return [...document.querySelectorAll('main :is(.control, .slider) :is(select, input)')]
  .filter(e => e.checkVisibility() && !e.getAttribute('aria-label'))
  .filter(e => {
    const words = document.getElementById(e.getAttribute('aria-describedby'));
    return !words || !words.textContent.trim().endsWith('.')
      || !document.querySelector(`[data-help="${words.id}"]`);
  }).map(e => e.id);
"""
OPEN = "document.querySelectorAll('main details').forEach(d => { d.open = true; })"
LOST = "pricewake.connection.say('Pricewake does not answer. What is on the page stays.')"
FEW = [
    page if page.TITLE == "Reading" else pytest.param(page, marks=pytest.mark.long)
    for page in PAGES
]


def press(browser, *keys):
    ActionChains(browser).send_keys(*keys).perform()


def press_back(browser):
    ActionChains(browser).key_down(Keys.SHIFT).send_keys(Keys.TAB).key_up(Keys.SHIFT).perform()


@pytest.mark.parametrize("page", FEW, ids=lambda page: page.TITLE)
def test_the_tab_key_reaches_everything_in_order_and_is_always_seen(browser, address, page):
    browser.get(address + page.PATH + QUICK)
    until(browser, SETTLED + " && !(pricewake.brief && pricewake.brief.busy())", 90)
    browser.execute_script(OPEN)
    time.sleep(1)  # what has been opened asks for its numbers
    until(browser, SETTLED, 60)
    press(browser, Keys.TAB)
    first = browser.execute_script(STOP)
    assert first["name"] == "Skip to the page"
    assert first["inside"], "2.4.1: the way past the navigation is seen when it is reached"
    assert not first["small"]
    wrong, stops = [], 1
    while stops < MOST_STOPS:
        press(browser, Keys.TAB)
        stop = browser.execute_script(STOP)
        if stop is None:
            break
        stops += 1
        parts_of_one = stop["again"] and stop["kind"] in ("INPUT", "IFRAME")  # a date has three
        if (
            not stop["forward"]
            or not stop["inside"]
            or stop["covered"]
            or (stop["outline"] < 2 and stop["kind"] != "IFRAME")  # what is inside has it
            or stop["small"]
            or (stop["again"] and not parts_of_one)
        ):
            wrong.append(stop)
    assert wrong == [], str(wrong)
    assert stop is None, f"2.1.2: {stops} stops and no end"
    assert stops > 20
    left_out = browser.execute_script(LEFT_OUT)
    assert left_out == [], str(left_out)
    assert browser.execute_script(UNHELPED) == []


def test_the_skip_link_leads_past_the_navigation(browser, address):
    browser.get(address + "/reading" + QUICK)
    until(browser, SETTLED, 60)
    press(browser, Keys.TAB)
    press(browser, Keys.ENTER)
    assert browser.execute_script("return document.activeElement.id") == "page"
    press(browser, Keys.TAB)
    assert browser.execute_script("return Boolean(document.activeElement.closest('main'))")


def test_the_notice_of_a_lost_program_covers_nothing_that_has_the_focus(browser, address):
    browser.get(address + "/reading" + QUICK)
    until(browser, SETTLED, 60)
    browser.execute_script(LOST)
    last = "[...document.querySelectorAll('main [data-brief]')].at(-1)"
    browser.execute_script(f"{last}.focus()")
    covered = []
    for _ in range(40):  # upwards, so that each is scrolled to the upper edge
        press_back(browser)
        stop = browser.execute_script(STOP)
        bottom, top = browser.execute_script(
            "return [document.getElementById('connection').getBoundingClientRect().bottom,"
            " document.activeElement.getBoundingClientRect().top]"
        )
        if top < bottom and stop["inside"] and browser.execute_script("return scrollY") > 60:
            covered.append(stop["name"])
    assert covered == []
