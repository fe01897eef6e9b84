"""Series whose names are attacks, on every page: nothing runs, is fetched, or breaks."""

import json
from dataclasses import replace

import pytest

from app.brief.assembled import OF_THE_JOB, prefilled
from app.brief.parts import Part
from app.compute import Bridge
from app.page_table import PAGES
from app.state import ViewState
from tests import hostile
from tests.app.briefs import built
from tests.app.test_hostile_names import NUMBER, RUNS
from tests.browser.driving import served, severe, size, until
from tests.exported import rows_of

SAID = "document.querySelector('main h1') && document.querySelector('main h1').textContent"
QUIET = "!pricewake.plain.busy() && !pricewake.lag.busy()"


WORDS = f"{hostile.MARKUP} {hostile.SCRIPT} {hostile.FORMULA} {hostile.TURNED}"


def asked_for(browser):
    """Give the addresses that the browser has asked for since the last look."""
    return [
        message["params"]["request"]["url"]
        for entry in browser.get_log("performance")
        for message in [json.loads(entry["message"])["message"]]
        if message["method"] == "Network.requestWillBeSent"
    ]


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
    sent = asked_for(browser)
    assert [each for each in sent if not each.startswith((url, "data:", "blob:"))] == []
    assert [each for each in sent if each.endswith("/x")] == []
    assert severe(browser) == []
    for width in (1280, 400):
        size(browser, width, 800)
        until(browser, f"document.documentElement.scrollWidth <= {width}", 15)


def test_a_brief_of_hostile_names_is_harmless_when_opened_from_its_file(browser, tmp_path):
    here = hostile.workspace()
    bridge = Bridge(here)
    names = list(here.as_of().series)
    shown = ViewState(
        driver=names[0], response=names[5], series=names[5], shift=6, surrogates=19, draws=99
    )
    draft = prefilled(bridge, given=dict.fromkeys(OF_THE_JOB, shown))
    draft = replace(draft, title=WORDS[:200], parts=(Part(kind="words", words=WORDS), *draft.parts))
    made = built(draft, bridge)
    files = made.files
    page = tmp_path / "brief.html"
    page.write_bytes(files["brief.html"])
    cells = 0
    for name in files:
        assert len(name) < 200
        assert not set(name) & set('<>"|:*?\\'), name
        if not name.endswith(".csv"):
            continue
        for row in rows_of(files[name].decode()):
            for cell in row:
                assert not cell.startswith(RUNS) or NUMBER.fullmatch(cell), (name, cell)
                cells += 1
    assert cells > 1000
    here.close()
    browser.get_log("browser")
    browser.get_log("performance")
    size(browser, 1280, 800)
    browser.get(page.as_uri())
    until(browser, "document.readyState === 'complete' && document.querySelector('h1')")
    assert browser.execute_script("return window.hostile === undefined")
    strange = browser.execute_script(
        "return [...document.querySelectorAll('img, [onerror], [onload], a[href^=javascript]')]"
        ".map(e => e.outerHTML.slice(0, 90))"
    )
    assert strange == []
    assert "onerror=" in browser.execute_script("return document.body.innerText")
    sent = [each for each in asked_for(browser) if not each.startswith(("data:", "blob:"))]
    assert set(sent) == {page.as_uri()}
    assert severe(browser) == []
    for width in (1280, 400):
        size(browser, width, 800)
        until(browser, f"document.documentElement.scrollWidth <= {width}", 15)


@pytest.mark.long
def test_hostile_words_of_a_statement_stay_words(browser, place):
    url, names = place
    query = ViewState(driver=names[0], response=names[1], shift=6).to_query()
    size(browser, 1280, 800)
    browser.get(f"{url}/outlook?{query}")
    until(browser, SAID, 40)
    until(browser, QUIET, 90)
    browser.execute_script(
        "const field = document.getElementById('statement-words'); field.value = arguments[0];"
        "document.querySelector('[data-keep=say]').click()",
        WORDS,
    )
    until(browser, "document.querySelector('.statement .said-words')", 30)
    until(browser, QUIET, 60)
    said = browser.execute_script("return document.querySelector('.said-words').textContent")
    for part in (hostile.MARKUP, hostile.SCRIPT, hostile.FORMULA, "evil"):
        assert part in said
    assert "\u202e" not in said
    assert browser.execute_script("return window.hostile === undefined")
    assert browser.execute_script("return document.querySelectorAll('main img').length") == 0
    assert browser.execute_script("return document.title") == "Outlook · Pricewake"
    assert browser.execute_script("return document.documentElement.scrollWidth") <= 1280
