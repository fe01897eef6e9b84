"""Files in through the browser: what a person sees when they are good, and when they are not."""

from pathlib import Path

import numpy as np
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

from analytics.cell import lag_cell
from app.workspace import Workspace
from tests.browser.data_page import (
    act,
    choose,
    gone,
    kept,
    large,
    listed,
    planted,
    previewed,
    send,
    text_of,
    told,
)
from tests.browser.driving import READY, severe, until


def test_own_files_take_the_place_of_the_invented_economy_once_they_are_kept(data, release):
    browser, _, here = data
    growth = planted()[1]
    assert choose(browser, release) == ["release.csv: 2 series read; nothing is kept yet."]
    shown = previewed(browser)
    for part in ("release.csv", "Money in hand", "Shop prices", "Jan 1990 to Dec 2014", "new"):
        assert part in shown
    assert here.as_of().placeholder  # nothing is stored by looking
    assert "invented economy" in text_of(browser, "data-sentence")
    assert browser.execute_script("return document.activeElement.id") == "data-preview-head"
    kept(browser)
    listed(browser, 2)
    assert text_of(browser, "data-sentence") == "2 series from 1 file, as they stand now."
    assert text_of(browser, "intake-message") == "release.csv: 2 series kept."
    browser.find_element(By.ID, "nav-lag").click()
    until(browser, READY)
    shown = browser.execute_script("return [pricewake.lag.state, [...pricewake.lag.cell.driver]]")
    assert (shown[0]["driver"], shown[0]["response"]) == ("Money in hand", "Shop prices")
    cell = lag_cell(*growth, window=12, shift=24)
    np.testing.assert_allclose(shown[1], cell.driver, atol=1e-9)
    assert not browser.find_element(By.ID, "invented").is_displayed()
    assert severe(browser, "422") == []
    again = Workspace(path=here.store.path)  # another program sees what was kept
    assert list(again.series) == ["Money in hand", "Shop prices"]
    again.close()


def test_several_files_at_once_good_and_bad(data, release, tmp_path):
    browser, _, here = data
    other, bad = (tmp_path / name for name in ("other.csv", "image.csv"))
    other.write_text("month,A,B\n2024-01,1,x\n2024-02,2,3\n2024-03,3,4\n")
    bad.write_bytes(b"\x89PNG\r\n\x1a\n" + bytes(200))
    said = choose(browser, release, bad, other)
    assert said[0].startswith("release.csv: 2 series read")
    assert said[1].startswith("image.csv")
    assert "PNG" in said[1]
    assert said[2].startswith("other.csv: 1 series read, ")
    shown = previewed(browser)
    assert "release.csv" in shown
    assert "image.csv" not in shown
    for part in ("error", "other.csv", "2", "B", "must be a number, but got 'x'"):
        assert part in shown
    act(browser, "discard", 0)
    until(browser, "!document.getElementById('data-preview').innerText.includes('release.csv')")
    kept(browser)
    listed(browser, 1)
    assert [each.name for each in here.releases] == ["other.csv"]
    found = text_of(browser, "data-problems")
    assert "Found in the files" in found
    assert "must be a number, but got 'x'" in found
    assert "1 error" in text_of(browser, "data-verdict")
    assert severe(browser, "422") == []


BAD = (
    ("empty.csv", b"", "empty"),
    ("one.csv", b"2024-01\n2024-02\n", "column"),
    ("image.csv", b"\x89PNG\r\n\x1a\n" + bytes(200), "PNG"),
    ("twice.csv", b"month,A\n2024-01,1\n2024-01,2\n", "Jan 2024"),
)


def test_bad_files_get_one_sentence_and_change_nothing(data, tmp_path):
    browser, _, here = data
    before = text_of(browser, "data-series")
    for name, content, words in BAD:
        path = tmp_path / name
        path.write_bytes(content)
        (said,) = choose(browser, path)
        assert said.startswith(name)
        assert words in said
        assert text_of(browser, "data-series") == before
        assert text_of(browser, "data-preview") == ""
        assert here.as_of().placeholder


def test_everything_discarded_leaves_things_as_they_were(data, release):
    browser, _, here = data
    choose(browser, release)
    previewed(browser)
    act(browser, "discard-all")
    gone(browser)
    assert text_of(browser, "intake-message") == "Discarded; nothing was kept."
    assert here.as_of().placeholder
    choose(browser, release)  # the same file may be chosen again
    assert "release.csv" in previewed(browser)


def test_files_waiting_for_a_look_are_still_there_after_another_page(data, release):
    browser, _, _ = data
    choose(browser, release)
    previewed(browser)
    browser.find_element(By.ID, "nav-lag").click()
    until(browser, READY)
    browser.find_element(By.ID, "nav-data").click()
    assert "release.csv" in previewed(browser)


def test_reading_can_be_cancelled(data, tmp_path):
    browser, _, here = data
    send(browser, *(large(tmp_path / f"large {k}.csv", 300, 5000) for k in range(4)))
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
    kept(browser)
    listed(browser, 3)
    assert [each.name for each in here.releases] == ["one.csv", "two.csv"]


def test_a_whole_folder_of_files_is_opened_at_once(data):
    browser, _, here = data
    folder = Path(__file__).resolve().parents[1] / "data"
    files = sorted(path for path in folder.glob("*.*") if path.suffix not in (".py", ".pyc"))
    assert len(files) > 60
    send(browser, *files)
    until(browser, "document.getElementById('intake-message').innerText", 90)
    assert text_of(browser, "intake-message") == f"{len(files)} files: read; nothing is kept yet"
    previewed(browser)
    kept(browser)
    told(browser, "intake-message", "kept", 60)
    assert text_of(browser, "intake-message") == f"{len(files)} files: kept"
    assert {each.name for each in here.releases} == {path.name for path in files}
    assert severe(browser, "422") == []


def test_another_sheet_of_a_workbook_is_read_in_the_preview(data):
    browser, _, here = data
    book = Path(__file__).resolve().parents[1] / "data" / "xlsx_second_sheet.xlsx"
    choose(browser, book)
    assert "Broad money" in previewed(browser)
    sheet = "#data-preview [data-sheet]"
    for name, said in (("Quarterly", "1 series read"), ("Contents", "must be a month, a quarter")):
        Select(browser.find_element(By.CSS_SELECTOR, sheet)).select_by_value(name)
        told(browser, "intake-message", said)
    until(browser, f"document.querySelector('{sheet}').value === 'Quarterly'")  # the one held
    assert "xlsx_second_sheet.xlsx, Quarterly" in previewed(browser)
    kept(browser)
    assert [one.frequency for one in here.series.values()] == ["quarterly"]


@pytest.mark.long
def test_a_file_of_forty_megabytes_is_read_or_refused_in_a_sentence(data, tmp_path):
    browser, _, _ = data
    path = large(tmp_path / "large.csv", 590, 9000)
    assert path.stat().st_size > 40e6
    (said,) = choose(browser, path)
    assert said.startswith("large.csv")
    if "590 series read" in said:
        previewed(browser)
        kept(browser)
        listed(browser, 60, 60)
        assert "1 to 60 of 590" in text_of(browser, "data-series")


def test_the_whole_way_by_keyboard(data, release):
    browser, _, here = data
    choose(browser, release)
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
    listed(browser, 2)
    until(browser, "document.activeElement.id === 'field-files'")
    assert sorted(here.series) == ["Money in hand", "Shop prices"]
