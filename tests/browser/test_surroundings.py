"""The browser's own time zone and language change no number and no word of a page."""

import pytest

from app.page_table import PAGES
from tests.browser.driving import open_lag, until
from tests.browser.test_accessibility import QUICK, SETTLED

AT_HOME = ("UTC", "en-GB")
AWAY = (("Pacific/Kiritimati", "de-DE"), ("America/Los_Angeles", "ar-EG"))
WORDS = (
    "return [...document.querySelectorAll('main :is(h1, p, dd, td, th, text, option, output)')]"
    ".filter(e => e.checkVisibility()).map(e => e.textContent)"
)
DONE = (
    "![...document.querySelectorAll('.work')].some(work => work.checkVisibility())"
    " && !/not searched|being worked out/.test(document.querySelector('main').innerText)"
)
# A drag across "Through time" as the chart library reports it: months as written, no time zone.
DRAGGED = (
    "pricewake.ghost.chartOf('lag-overlay').emit('plotly_selected',"
    " {range: {x: ['1974-03-01 00:00', '1977-05-31 23:00'], y: [0, 1]}, points: []})"
)


def move(browser, zone, language):
    browser.execute_cdp_cmd("Emulation.setTimezoneOverride", {"timezoneId": zone})
    browser.execute_cdp_cmd("Emulation.setLocaleOverride", {"locale": language})


@pytest.fixture(scope="module")
def own(browser):
    yield browser
    move(browser, "", "")


def test_months_chosen_by_a_drag_are_those_under_the_hand_everywhere(own, address):
    said = set()
    for zone, language in (AT_HOME, *AWAY):
        move(own, zone, language)
        open_lag(own, address)
        offset = own.execute_script("return new Date(2020, 0).getTimezoneOffset()")
        assert (offset == 0) == (zone == "UTC"), "the change did not happen"
        own.execute_script(DRAGGED)
        until(own, "!document.getElementById('range-choice').hidden")
        said.add(own.execute_script("return document.getElementById('range-words').textContent"))
    assert said == {"Mar 1974 to May 1977"}


@pytest.mark.long
@pytest.mark.parametrize("page", PAGES[:-1], ids=lambda page: page.TITLE)  # the brief is its own
def test_a_page_reads_the_same_in_another_time_zone_and_language(own, address, page):
    found = []
    for zone, language in (AT_HOME, *AWAY):
        move(own, zone, language)
        own.get(address + page.PATH + QUICK)
        until(own, SETTLED, 90)
        until(own, DONE, 90)
        found.append(own.execute_script(WORDS))
    assert len(found[0]) > 20
    assert found[0] == found[1] == found[2]
