"""The brief as a person makes and opens it: the page, the file, its PDF, its pictures."""

import json
import re
import socket
import threading
import time
import zipfile

import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.support.ui import Select

from app.brief import chromium as chromium_module
from app.brief.assembled import OF_THE_JOB, opening, prefilled
from app.brief.building import Building
from app.brief.charts import as_picture
from app.brief.parts import Draft, Part
from app.brief.pictures import Pictures
from app.brief.recipe import Change, Comparison
from app.brief.sources import source
from tests.app.briefs import desk, quick, write_files
from tests.browser import driving
from tests.browser.driving import until


class Listener:
    """A proxy that takes no request, and remembers what was asked of it."""

    def __init__(self):
        self.asked = []
        self.socket = socket.create_server(("127.0.0.1", 0))
        self.address = f"127.0.0.1:{self.socket.getsockname()[1]}"
        threading.Thread(target=self._serve, daemon=True).start()

    def _serve(self):
        while True:
            try:
                caller, _ = self.socket.accept()
            except OSError:
                return
            with caller:
                caller.settimeout(1)
                try:
                    self.asked.append(caller.recv(300).split(b"\r\n")[0].decode("latin-1"))
                except OSError:
                    self.asked.append("nothing")

    def close(self):
        self.socket.close()


@pytest.fixture(scope="module")
def bridge(tmp_path_factory):
    return desk(write_files(tmp_path_factory.mktemp("desk")))


@pytest.fixture(scope="module")
def made(bridge, _chromium_there):
    """A whole brief with pictures and PDF, whose browser has a listening proxy."""
    listener = Listener()
    pictures = Pictures(proxy=listener.address)
    states = {name: quick(opening(name, bridge)) for name in OF_THE_JOB}
    usual = prefilled(bridge, "full", states)
    keep = [
        part for part in usual.parts if part.view not in ("base", "rank", "history", "diffusion")
    ]
    draft = Draft(
        parts=(*keep, Part(kind="words", words="# The *end*\n\n<img src=http://h.example/x.png>"))
    )
    building = Building(draft, bridge, pictures)
    try:
        building.finish()
    finally:
        pictures.close()
        listener.close()
    return building, listener


def by_a_page(listener):
    """What was asked for, without what Chromium asks its maker for by itself.

    None of either gets out: in use the proxy is one that nothing listens on.
    """
    asked = [
        line for line in listener.asked if line
    ]  # a connection that is only held ready is none
    return [line for line in asked if not re.search(r"google|duckduckgo", line)]


def test_the_browser_reaches_the_net_through_its_proxy_alone_and_the_brief_asks_for_nothing(
    made, tmp_path
):
    listener = Listener()
    page = tmp_path / "page.html"
    try:
        page.write_bytes(made[0].files["brief.html"])
        chromium_module.printed(page, listener.address)
        assert by_a_page(listener) == []
        page.write_text("<img src='http://h.example/x.png'>")  # so that it would be seen
        chromium_module.printed(page, listener.address)
        assert [line.split()[1] for line in by_a_page(listener)] == ["http://h.example/x.png"]
    finally:
        listener.close()
    with pytest.raises(ConnectionRefusedError), socket.socket() as probe:
        host, port = chromium_module.NOWHERE.split(":")
        probe.connect((host, int(port)))


def test_pictures_are_drawn_without_a_word_to_the_net(made):
    building, listener = made
    assert by_a_page(listener) == []
    assert building.said == []
    drawn = [each for each in building.brief.sections if each.chart is not None]
    assert len(drawn) >= 8
    for each in drawn:
        png = building.files[f"views/{each.stem}.png"]
        svg = building.files[f"views/{each.stem}.svg"].decode()
        width, height = (int.from_bytes(png[k : k + 4], "big") for k in (16, 20))
        figure = as_picture(each.chart, each.name, "", "", "")
        assert (width, height) == (2 * figure["layout"]["width"], 2 * figure["layout"]["height"])
        assert svg.startswith("<svg")
        assert f"<title>{each.shown.sentence.replace('&', '&amp;')}</title>" in svg
        for one in each.used[:1]:
            assert one.fingerprint.encode() in png
            assert one.fingerprint in svg
        assert f"{source(each.part.page).path}?".encode() in png
        assert b"Pricewake" in png


def test_the_renderer_has_no_script_but_the_bundled_one(made, monkeypatch):
    kaleido = pytest.importorskip("kaleido")
    pages = []
    whole = kaleido.PageGenerator.generate_index

    def seen(self):
        pages.append(whole(self))
        return pages[-1]

    monkeypatch.setattr(kaleido.PageGenerator, "generate_index", seen)
    pictures = Pictures()
    try:
        pictures.start()
    finally:
        pictures.close()
    scripts = re.findall(r'src="([^"]*)"', pages[0])
    assert len(scripts) == 2
    assert all(script.startswith("file:///") for script in scripts)
    assert scripts[0].endswith("/plotly-cartesian.min.js")
    assert "http" not in pages[0]


def test_the_file_opens_by_itself_and_asks_no_host(made, browser, tmp_path):
    path = tmp_path / "brief.html"
    path.write_bytes(made[0].files["brief.html"])
    browser.get_log("browser")
    browser.get_log("performance")
    browser.get(path.as_uri())
    until(browser, "document.querySelectorAll('.chart .main-svg').length > 7", 30)
    assert browser.get_log("browser") == []
    asked = [
        message["params"]["request"]["url"]
        for entry in browser.get_log("performance")
        for message in [json.loads(entry["message"])["message"]]
        if message["method"] == "Network.requestWillBeSent"
    ]
    assert asked
    assert {url.split(":")[0] for url in asked} <= {"file", "data", "blob"}
    assert [url for url in asked if url.startswith("file")] == [path.as_uri()]
    drawn = browser.execute_script(
        "return [...document.querySelectorAll('.chart')].map((c) => [c.clientWidth,"
        " c.querySelector('.main-svg').getBoundingClientRect().width, c.data.length])"
    )
    assert all(width == wide and traces for width, wide, traces in drawn)
    # Interactive: a hover tells a value.
    chart = browser.find_element(By.CSS_SELECTOR, ".chart .nsewdrag")
    from selenium.webdriver import ActionChains

    ActionChains(browser).move_to_element(chart).perform()
    until(browser, "document.querySelector('.chart .hovertext, .chart .legend .traces')")
    assert browser.execute_script("return document.images.length") == 0
    driving.size(browser, 400, 800)
    try:
        until(
            browser,
            "document.querySelector('.chart .main-svg').getBoundingClientRect().width < 400",
        )
        assert browser.execute_script("return document.documentElement.scrollWidth") <= 400
    finally:
        driving.size(browser, 1280, 800)


def test_the_pdf_is_printed_in_a4_and_no_chart_is_cut(made):
    pdf = made[0].files["brief.pdf"]
    assert pdf.startswith(b"%PDF")
    boxes = set(re.findall(rb"/MediaBox \[0 0 ([0-9.]+) ([0-9.]+)\]", pdf))
    assert {(round(float(w)), round(float(h))) for w, h in boxes} == {(595, 842)}
    assert 3 <= len(re.findall(rb"/Type /Page\b", pdf)) <= 12


@pytest.mark.long
def test_one_page_fits_on_one_page_of_either_paper(bridge, _chromium_there):
    states = {name: quick(opening(name, bridge)) for name in OF_THE_JOB}
    draft = prefilled(bridge, "one-page", states)
    moved = Change(
        "Reading", "Consumer prices, 12-month rate (percent)", "3.98", "4.13", "+0.15", True
    )
    said = (
        "Consumer prices (prices.csv) has 1 month more, to Jun 2022, and 14 earlier values differ"
    )
    since = Comparison((said, said, said), (moved,) * 6)
    for paper, height, changes in (
        ("a4", 842, None), ("letter", 792, None), ("a4", 842, since), ("letter", 792, since)
    ):  # fmt: skip
        building = Building(draft, bridge, Pictures(), numbers=False, images=False, paper=paper)
        building.finish()
        building.since = changes
        building._print()
        pdf = building.files["brief.pdf"]
        assert len(re.findall(rb"/Type /Page\b", pdf)) == 1
        assert f"{height}".encode() in re.search(rb"/MediaBox \[0 0 [0-9.]+ ([0-9.]+)\]", pdf)[
            1
        ] or (round(float(re.search(rb"/MediaBox \[0 0 [0-9.]+ ([0-9.]+)\]", pdf)[1])) == height)


@pytest.fixture(scope="module")
def page(bridge, browser):
    with driving.served(bridge.workspace) as address:
        browser.get(f"{address}/brief")
        browser.execute_script("localStorage.clear()")
        browser.get_log("browser")
        browser.get(f"{address}/brief")
        until(browser, "pricewake.brief.shown && !pricewake.brief.busy()", 60)
        yield browser, address


def inside(driver, script):
    """Ask the preview."""
    driver.switch_to.frame("brief-preview")
    try:
        return driver.execute_script(f"return {script}")
    finally:
        driver.switch_to.default_content()


def preview_after(driver, act):
    before = driver.execute_script("return pricewake.brief.shown")
    act()
    until(driver, f"pricewake.brief.shown !== {json.dumps(before)} && !pricewake.brief.busy()", 30)


def names(driver):
    return [each.text for each in driver.find_elements(By.CSS_SELECTOR, ".part-name")]


def test_parts_are_ordered_removed_and_written_between_and_the_preview_follows(page):
    driver, _ = page
    first = names(driver)
    assert first[0] == "Reading: headline and verdict"
    assert inside(driver, "document.querySelectorAll('.chart .main-svg').length") >= 12
    preview_after(
        driver, lambda: driver.find_element(By.CSS_SELECTOR, ".part:nth-child(2) .down").click()
    )
    assert names(driver)[1:3] == first[2:0:-1]
    assert inside(driver, "document.querySelector('figure h3').textContent") == first[2]
    preview_after(
        driver,
        lambda: driver.find_element(By.CSS_SELECTOR, "[aria-label^='Remove']").click(),
    )
    assert "Reading: headline and verdict" not in names(driver)

    def write():
        driver.find_element(By.CSS_SELECTOR, "[aria-label^='Add words below']").click()
        driver.switch_to.active_element.send_keys("We think **so** <i>x</i>")

    preview_after(driver, write)
    assert inside(driver, "document.querySelector('.words strong').textContent") == "so"
    assert inside(driver, "document.querySelectorAll('.words i').length") == 0
    driver.refresh()  # nothing is lost
    until(driver, "pricewake.brief.shown && !pricewake.brief.busy()", 30)
    assert "Words" in names(driver)
    assert (
        driver.find_element(By.CSS_SELECTOR, ".part textarea")
        .get_attribute("value")
        .startswith("We")
    )
    assert [e for e in driver.get_log("browser") if e["level"] == "SEVERE"] == []


def test_a_view_of_another_page_is_put_into_the_brief(page):
    driver, address = page
    driving.open_lag(driver, address, "?window=5&shift=3&surrogates=99")
    driver.find_element(By.CSS_SELECTOR, "[data-brief='overlay']").click()
    until(driver, "document.getElementById('toast').textContent")
    driver.find_element(By.ID, "nav-brief").click()
    until(
        driver,
        "document.querySelector('.part') && pricewake.brief.shown && !pricewake.brief.busy()",
        30,
    )
    parts = driver.execute_script("return pricewake.brief.draft.parts")
    at = max(i for i, part in enumerate(parts) if part.get("page") == "lag")  # after its like
    assert (parts[at]["kind"], parts[at]["view"]) == ("view", "overlay")
    assert "window=5&shift=3" in parts[at]["state"]


def test_all_files_are_saved_in_one_archive_and_the_recipe_opens_again(
    page, downloads, monkeypatch
):
    driver, _ = page
    monkeypatch.setenv("BROWSER_PATH", "nowhere")  # no pictures, to be quick
    preview_after(
        driver, lambda: Select(driver.find_element(By.ID, "brief-form")).select_by_value("one-page")
    )
    driver.find_element(By.ID, "brief-save-page")  # is offered
    driver.find_element(By.ID, "brief-save").click()
    archive = None
    end = time.monotonic() + 40
    while archive is None and time.monotonic() < end:
        archive = next(iter(downloads.glob("prices-and-money*.zip")), None)
        time.sleep(0.1)
    assert archive is not None
    with zipfile.ZipFile(archive) as kept:
        assert {"brief.html", "recipe.toml"} <= set(kept.namelist())
        kept.extract("recipe.toml", downloads)
    preview_after(
        driver,
        lambda: driver.find_element(By.ID, "brief-recipe-file").send_keys(
            str(downloads / "recipe.toml")
        ),
    )
    assert driver.find_element(By.ID, "brief-message").text == ""
    assert "Do not compare with it" in driver.find_element(By.ID, "brief-recipe").text
