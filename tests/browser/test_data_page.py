"""Files in through the browser: what a person sees when they are good, and when they are not."""

import json
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

from analytics.cell import lag_cell
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_releases
from app.desk import bridge as desk
from app.intake.reading import Release, read_release
from app.state import ViewState
from app.workspace import Workspace
from tests.browser.driving import READY, served, size, until

DRAWN = "document.querySelector('#data-series .table, #data-series .empty')"


def planted(months=300, lag=9):
    """Return CSV text of a pair in which money leads prices by `lag` months, and its growth."""
    rng = np.random.default_rng(31)
    driver = 0.5 + rng.standard_normal(months + lag)
    response = 0.2 + 0.4 * driver + 0.05 * rng.standard_normal(months + lag)
    money = 1000 * np.exp(np.cumsum(driver[lag:]) / 100)
    prices = 100 * np.exp(np.cumsum(response[:months]) / 100)
    lines = [
        f"{1990 + i // 12}-{i % 12 + 1:02d},{float(money[i])!r},{float(prices[i])!r}"
        for i in range(months)
    ]
    growth = [100 * np.diff(np.log(side)) for side in (money, prices)]
    return "month,Money in hand,Shop prices\n" + "\n".join(lines) + "\n", growth


@pytest.fixture
def data(browser, tmp_path):
    """Give the Data page on a workspace file of this test alone, with an empty log."""
    browser.get_log("browser")
    here = Workspace(placeholder=demo_releases(), path=tmp_path / "desk" / "desk.sqlite")
    with served(here) as url:
        opened(browser, url)
        yield browser, url, here
    here.close()


def opened(browser, url, query=""):
    browser.get(f"{url}/data{query}")
    until(browser, f"document.getElementById('field-files') && {DRAWN}")


def text_of(browser, place):
    return browser.execute_script("return document.getElementById(arguments[0]).innerText", place)


def choose(browser, *paths):
    """Choose files and wait until each has been read or refused."""
    browser.execute_script("document.getElementById('intake-message').replaceChildren()")
    names = "\n".join(str(path) for path in paths)
    browser.find_element(By.ID, "field-files").send_keys(names)
    until(
        browser,
        f"document.querySelectorAll('#intake-message p').length >= {len(paths)}"
        " && !pricewake.intake.busy()",
        seconds=120,
    )
    return [line for line in text_of(browser, "intake-message").splitlines() if line]


def act(browser, name, place=0):
    browser.find_elements(By.CSS_SELECTOR, f"[data-act={name}]")[place].click()


def previewed(browser):
    until(browser, "document.getElementById('data-preview-head')")
    return text_of(browser, "data-preview")


def gone(browser):
    until(browser, "!document.getElementById('data-preview-head')")


def severe(browser):
    """Give the console's errors, but for refusals that the page was answered."""
    return [
        entry
        for entry in browser.get_log("browser")
        if entry["level"] == "SEVERE" and "422" not in entry["message"]
    ]


def test_own_files_take_the_place_of_the_invented_economy_once_they_are_kept(data, tmp_path):
    browser, _, here = data
    text, growth = planted()
    path = tmp_path / "release.csv"
    path.write_text(text)
    assert choose(browser, path) == ["release.csv: 2 series read; nothing is kept yet."]
    shown = previewed(browser)
    for part in ("release.csv", "Money in hand", "Shop prices", "Jan 1990 to Dec 2014", "new"):
        assert part in shown
    assert here.as_of().placeholder  # nothing is stored by looking
    assert "invented economy" in text_of(browser, "data-sentence")
    assert browser.execute_script("return document.activeElement.id") == "data-preview-head"
    act(browser, "keep")
    gone(browser)
    until(browser, "document.querySelectorAll('#data-series tbody tr').length === 2")
    assert text_of(browser, "data-sentence") == "2 series from 1 file, as they stand now."
    assert text_of(browser, "intake-message") == "release.csv: 2 series kept."
    browser.find_element(By.ID, "nav-lag").click()
    until(browser, READY)
    shown = browser.execute_script("return [pricewake.lag.state, [...pricewake.lag.cell.driver]]")
    assert (shown[0]["driver"], shown[0]["response"]) == ("Money in hand", "Shop prices")
    cell = lag_cell(*growth, window=12, shift=24)
    np.testing.assert_allclose(shown[1], cell.driver, atol=1e-9)
    assert not browser.find_element(By.ID, "invented").is_displayed()
    assert severe(browser) == []
    again = Workspace(path=here.store.path)  # another program sees what was kept
    assert list(again.series) == ["Money in hand", "Shop prices"]
    again.close()


def test_several_files_at_once_good_and_bad(data, tmp_path):
    browser, _, here = data
    good, other, bad = (tmp_path / name for name in ("good.csv", "other.csv", "image.csv"))
    good.write_text(planted()[0])
    other.write_text("month,A,B\n2024-01,1,x\n2024-02,2,3\n2024-03,3,4\n")
    bad.write_bytes(b"\x89PNG\r\n\x1a\n" + bytes(200))
    said = choose(browser, good, bad, other)
    assert said[0].startswith("good.csv: 2 series read")
    assert said[1].startswith("image.csv")
    assert "PNG" in said[1]
    assert said[2].startswith("other.csv: 1 series read, ")
    shown = previewed(browser)
    assert "good.csv" in shown
    assert "image.csv" not in shown
    for part in ("error", "other.csv", "2", "B", "must be a number, but got 'x'"):
        assert part in shown
    act(browser, "discard", 0)
    until(browser, "!document.getElementById('data-preview').innerText.includes('good.csv')")
    act(browser, "keep")
    gone(browser)
    until(browser, "document.querySelectorAll('#data-series tbody tr').length === 1")
    assert [each.name for each in here.releases] == ["other.csv"]
    found = text_of(browser, "data-problems")
    assert "Found in the files" in found
    assert "must be a number, but got 'x'" in found
    assert "1 error" in text_of(browser, "data-verdict")
    assert severe(browser) == []


@pytest.mark.parametrize(
    ("name", "content", "words"),
    [
        ("empty.csv", b"", "empty"),
        ("one.csv", b"2024-01\n2024-02\n", "column"),
        ("image.csv", b"\x89PNG\r\n\x1a\n" + bytes(200), "PNG"),
        ("twice.csv", b"month,A\n2024-01,1\n2024-01,2\n", "Jan 2024"),
    ],
)
def test_bad_files_get_one_sentence_and_change_nothing(data, tmp_path, name, content, words):
    browser, _, here = data
    path = tmp_path / name
    path.write_bytes(content)
    before = text_of(browser, "data-series")
    (said,) = choose(browser, path)
    assert said.startswith(name)
    assert words in said
    assert text_of(browser, "data-series") == before
    assert text_of(browser, "data-preview") == ""
    assert here.as_of().placeholder


def test_everything_discarded_leaves_things_as_they_were(data, tmp_path):
    browser, _, here = data
    path = tmp_path / "release.csv"
    path.write_text(planted()[0])
    choose(browser, path)
    previewed(browser)
    act(browser, "discard-all")
    gone(browser)
    assert text_of(browser, "intake-message") == "Discarded; nothing was kept."
    assert here.as_of().placeholder
    choose(browser, path)  # the same file may be chosen again
    assert "release.csv" in previewed(browser)


def test_files_waiting_for_a_look_are_still_there_after_another_page(data, tmp_path):
    browser, _, _ = data
    path = tmp_path / "release.csv"
    path.write_text(planted()[0])
    choose(browser, path)
    previewed(browser)
    browser.find_element(By.ID, "nav-lag").click()
    until(browser, READY)
    browser.find_element(By.ID, "nav-data").click()
    assert "release.csv" in previewed(browser)


def test_reading_can_be_cancelled(data, tmp_path):
    browser, _, here = data
    row = ",".join(["123.456"] * 300)
    paths = []
    for k in range(4):
        path = tmp_path / f"large {k}.csv"
        lines = [f"{1000 + i // 12}-{i % 12 + 1:02d},{row}\n" for i in range(5000)]
        path.write_text("month," + ",".join(f"S{i}" for i in range(300)) + "\n" + "".join(lines))
        paths.append(str(path))
    browser.find_element(By.ID, "field-files").send_keys("\n".join(paths))
    until(browser, "!document.getElementById('intake-work').hidden")
    assert "of 4)" in text_of(browser, "intake-work")
    browser.find_element(By.ID, "intake-cancel").click()
    until(browser, "!pricewake.intake.busy()", seconds=60)
    said = text_of(browser, "intake-message")
    assert "Cancelled: " in said
    assert "of 4 files were not read." in said
    assert browser.execute_script("return document.getElementById('intake-work').hidden")
    assert here.as_of().placeholder


def test_files_are_dropped(data):
    browser, _, here = data
    browser.execute_script(
        """
        const files = new DataTransfer();
        for (const name of ["one.csv", "two.csv"])
          files.items.add(new File([arguments[0].replaceAll("hand", name)], name));
        const zone = document.querySelector("#data-drop h2");
        const options = { bubbles: true, cancelable: true, dataTransfer: files };
        for (const kind of ["dragover", "drop"]) zone.dispatchEvent(new DragEvent(kind, options));
        """,
        planted()[0],
    )
    shown = previewed(browser)
    assert "Money in one.csv" in shown
    assert "Money in two.csv" in shown
    assert not browser.execute_script("return document.querySelector('.drop.over')")
    act(browser, "keep")
    gone(browser)
    until(browser, "document.querySelectorAll('#data-series tbody tr').length === 3")
    assert [each.name for each in here.releases] == ["one.csv", "two.csv"]


def test_a_whole_folder_of_files_is_opened_at_once(data):
    browser, _, here = data
    folder = Path(__file__).resolve().parents[1] / "data"
    files = sorted(path for path in folder.glob("*.*") if path.suffix not in (".py", ".pyc"))
    assert len(files) > 60
    names = "\n".join(str(path) for path in files)
    browser.find_element(By.ID, "field-files").send_keys(names)
    until(browser, "document.getElementById('intake-message').innerText", 90)
    assert text_of(browser, "intake-message") == f"{len(files)} files: read; nothing is kept yet"
    previewed(browser)
    act(browser, "keep")
    gone(browser)
    until(browser, "document.getElementById('intake-message').innerText.includes('kept')", 60)
    assert text_of(browser, "intake-message") == f"{len(files)} files: kept"
    assert {each.name for each in here.releases} == {path.name for path in files}
    assert severe(browser) == []


def test_another_sheet_of_a_workbook_is_read_in_the_preview(data):
    browser, _, here = data
    book = Path(__file__).resolve().parents[1] / "data" / "xlsx_second_sheet.xlsx"
    choose(browser, book)
    assert "Broad money" in previewed(browser)
    sheet = "#data-preview [data-sheet]"
    for name, said in (("Quarterly", "1 series read"), ("Contents", "must be a month, a quarter")):
        Select(browser.find_element(By.CSS_SELECTOR, sheet)).select_by_value(name)
        until(browser, f"document.getElementById('intake-message').innerText.includes('{said}')")
    until(browser, f"document.querySelector('{sheet}').value === 'Quarterly'")  # the one held
    assert "xlsx_second_sheet.xlsx, Quarterly" in previewed(browser)
    act(browser, "keep")
    gone(browser)
    assert [one.frequency for one in here.series.values()] == ["quarterly"]


@pytest.mark.long
def test_a_file_of_forty_megabytes_is_read_or_refused_in_a_sentence(data, tmp_path):
    browser, _, _ = data
    row = ",".join(["123.456"] * 590)
    head = "month," + ",".join(f"S{i}" for i in range(590)) + "\n"
    path = tmp_path / "large.csv"
    with path.open("w") as out:
        out.write(head)
        for i in range(9000):
            out.write(f"{1000 + i // 12}-{i % 12 + 1:02d},{row}\n")
    assert path.stat().st_size > 40e6
    (said,) = choose(browser, path)
    assert said.startswith("large.csv")
    if "590 series read" in said:
        previewed(browser)
        act(browser, "keep")
        gone(browser)
        until(browser, "document.querySelectorAll('#data-series tbody tr').length === 60", 60)
        assert "1 to 60 of 590" in text_of(browser, "data-series")


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
    assert severe(browser) == []


# Corrections, files out of view, dates -------------------------------------------------------


def kept(here, months=30, first=200):
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


def test_a_correction_is_kept_and_remembered(data, tmp_path):
    browser, url, here = data
    kept(here, 2)
    opened(browser, url)
    until(browser, "document.querySelector('input[aria-label=\"Unit of Shop prices\"]')")
    unit = browser.find_element(By.CSS_SELECTOR, "input[aria-label='Unit of Shop prices']")
    unit.send_keys("2015 = 100", Keys.TAB)
    until(browser, "document.getElementById('intake-message').innerText.includes('2015 = 100')")
    # The page was answered anew meanwhile: the focus is where it was, on what follows the unit.
    anew = "document.querySelector('[data-entry][data-series=\"Shop prices\"]').dataset.value"
    until(browser, f"{anew} === '2015 = 100'")
    until(browser, "document.activeElement.dataset.correct === 'adjustment'")
    browser.switch_to.active_element.send_keys(Keys.SHIFT, Keys.TAB, Keys.TAB)
    until(browser, "document.activeElement.dataset.correct === 'kind'")
    browser.switch_to.active_element.send_keys("index", Keys.SHIFT, Keys.TAB)
    until(browser, "document.getElementById('intake-message').innerText.includes('kind is')")
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
    assert severe(browser) == []


def test_a_file_is_taken_out_of_view_and_brought_back(data):
    browser, url, here = data
    here.add(Release("a.csv", (Series("A", pd.Period("2024-01", "M"), [1.0, 2.0]),), ()))
    here.add(Release("b.csv", (Series("B", pd.Period("2024-01", "M"), [1.0, 2.0]),), ()))
    opened(browser, url)
    browser.find_element(By.CSS_SELECTOR, "[data-act=hide][data-file='a.csv']").click()
    until(browser, "document.querySelectorAll('#data-series tbody tr').length === 1")
    assert list(here.series) == ["B"]
    assert len(here.vintages("A")) == 1
    browser.find_element(By.XPATH, "//summary[starts-with(., 'Out of view')]").click()
    browser.find_element(By.CSS_SELECTOR, "[data-act=show]").click()
    until(browser, "document.querySelectorAll('#data-series tbody tr').length === 2")
    assert set(here.series) == {"A", "B"}
    assert severe(browser) == []


def test_every_page_shows_what_stood_on_the_date_chosen(data):
    browser, url, here = data
    kept(here)
    opened(browser, url)
    browser.execute_script(
        "const f = document.getElementById('field-as_of'); f.value = '2020-06-20';"
        "f.dispatchEvent(new Event('change', { bubbles: true }));"
    )
    until(browser, "document.getElementById('data-sentence').innerText.includes('20 Jun 2020')")
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
    until(browser, "document.getElementById('data-sentence').innerText.includes('stand now')")
    assert browser.execute_script("return document.getElementById('field-as_of').value") == ""
    assert "as_of" not in browser.current_url
    assert browser.execute_script(
        "return [...document.querySelectorAll('[id^=nav-]')].every(a => !a.href.includes('as_of'))"
    )
    assert severe(browser) == []


def test_revisions_are_drawn_and_said_as_they_are_computed(data):
    browser, url, here = data
    kept(here)
    opened(browser, url, "?series=Shop+prices")
    until(browser, "document.querySelector('#data-revisions .points path')")
    found = desk.revised(ViewState(series="Shop prices"), Bridge(here))
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
    until(
        browser, "document.getElementById('data-revisions-words').innerText.includes('not named')"
    )
    assert severe(browser) == []


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize("width", [1280, 400])
def test_nothing_runs_out_of_the_page(data, tmp_path, width, theme):
    browser, url, here = data
    kept(here, 4)
    here.add(
        read_release("faults.csv", b"month,A long name of a series,B\n2024-01,1,x\n2024-03,2,3\n")
    )
    try:
        size(browser, width, 800)
        opened(browser, url)
        if browser.execute_script("return document.documentElement.dataset.theme") != theme:
            browser.find_element(By.ID, "theme").click()
        path = tmp_path / "release.csv"
        path.write_text(planted()[0])
        choose(browser, path)
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


def test_the_whole_way_by_keyboard(data, tmp_path):
    browser, _, here = data
    path = tmp_path / "release.csv"
    path.write_text(planted()[0])
    choose(browser, path)
    previewed(browser)
    reached = []
    for _ in range(12):
        browser.switch_to.active_element.send_keys(Keys.TAB)
        reached.append(
            browser.execute_script(
                "return document.activeElement.dataset.act || document.activeElement.id"
            )
        )
        if reached[-1] == "keep":
            break
    assert reached[0] == "discard"
    assert "stands-from" in reached
    assert reached[-1] == "keep"
    browser.switch_to.active_element.send_keys(Keys.ENTER)
    gone(browser)
    until(browser, "document.querySelectorAll('#data-series tbody tr').length === 2")
    until(browser, "document.activeElement.id === 'field-files'")
    assert json.dumps(sorted(here.series)) == '["Money in hand", "Shop prices"]'
