"""The whole job as a person does it, on files of a planted economy: every number is known before.

Prices follow money by six months with a slope of 0.5; money is redefined in January 2010; four
components with weights make up the index. What the screen says is held against plain numpy here.
"""

import re
import time
import urllib.request
import zipfile

import numpy as np
import pandas as pd
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import Select

from app.demo import demo_releases
from app.workspace import Workspace
from tests.browser.driving import READY, served, until
from tests.exported import records

MONTHS, LAG, SLOPE, BREAK = 240, 6, 0.5, 120
PARTS = ("01 Bread", "02 Fuel", "03 Rent", "04 Travel")
SHARES = np.array([400.0, 200.0, 300.0, 100.0])
ANSWERED = "window.pricewake && pricewake.plain && pricewake.plain.data && !pricewake.plain.busy()"
MINUS = "\N{MINUS SIGN}"


@pytest.fixture(scope="module")
def economy():
    """Growth of money and prices (100 x log), levels, and the values of the components."""
    rng = np.random.default_rng(77)
    money = 0.5 + 0.6 * rng.standard_normal(MONTHS + LAG)
    prices = 0.1 + SLOPE * money[: MONTHS + LAG] + 0.05 * rng.standard_normal(MONTHS + LAG)
    driver, response = money[LAG:], prices[:MONTHS]
    tilt = rng.normal(0, 0.2, (MONTHS, len(PARTS)))
    tilt -= (tilt * SHARES).sum(axis=1, keepdims=True) / SHARES.sum()
    return {
        "driver": driver,
        "response": response,
        "money": 1000 * np.exp(np.cumsum(driver) / 100),
        "prices": 100 * np.exp(np.cumsum(response) / 100),
        "parts": 100 * np.exp(np.cumsum(response[:, None] + tilt, axis=0) / 100),
    }


@pytest.fixture(scope="module")
def files(economy, tmp_path_factory):
    """The release as three files; money's level jumps by 60 percent in January 2010."""
    folder = tmp_path_factory.mktemp("release")
    months = [str(month) for month in pd.period_range("2000-01", periods=MONTHS, freq="M")]
    redefined = economy["money"] * np.where(np.arange(MONTHS) >= BREAK, 1.6, 1.0)

    def written(name, head, columns):
        lines = [f"month,{','.join(head)}"]
        for month, *row in zip(months, *columns, strict=True):
            lines.append(",".join([month, *[repr(float(value)) for value in row]]))
        path = folder / name
        path.write_text("\n".join(lines) + "\n")
        return path

    weights = folder / "weights.csv"
    rows = [",".join([str(year), *map(str, SHARES)]) for year in range(2000, 2020)]
    weights.write_text("\n".join([f"year,{','.join(PARTS)}", *rows]) + "\n")
    return [
        written("money.csv", ["Money in hand"], [redefined]),
        written("prices.csv", ["Shop prices"], [economy["prices"]]),
        written("parts.csv", PARTS, economy["parts"].T),
        weights,
    ]


@pytest.fixture(scope="module")
def place(browser):
    here = Workspace(placeholder=demo_releases())
    with served(here) as url:
        yield url
    here.close()


def text_of(browser, name):
    return browser.execute_script("return document.getElementById(arguments[0]).innerText", name)


def said_by(page):
    """The headline of a page as a JavaScript expression; empty before the page is there."""
    return f"(document.getElementById('{page}-sentence') || {{textContent: ''}}).textContent"


def click_page(browser, title):
    browser.find_element(By.ID, f"nav-{title.lower()}").click()


def rows_of(browser, view):
    """The rows of a view's CSV, fetched from where its button leads."""
    address = browser.find_element(By.ID, f"csv-{view}").get_attribute("href")
    with urllib.request.urlopen(address, timeout=60) as answer:
        return records(answer.read().decode())


def number_in(text, pattern):
    found = re.search(pattern, text)
    assert found, (pattern, text)
    return float(found.group(1).replace(MINUS, "-"))


def test_files_are_opened_and_a_break_is_mended(browser, place, files):
    browser.get(f"{place}/lag")
    until(browser, READY, 60)
    assert browser.find_element(By.ID, "invented").is_displayed()
    browser.find_element(By.CSS_SELECTOR, "#invented a").click()
    until(browser, "document.getElementById('field-files')", 30)
    browser.find_element(By.ID, "field-files").send_keys("\n".join(map(str, files)))
    until(browser, "document.querySelectorAll('#intake-message p').length >= 4", 60)
    until(browser, "document.getElementById('data-preview-head')", 30)
    browser.find_element(By.CSS_SELECTOR, "[data-act=keep]").click()
    until(
        browser, "document.getElementById('data-sentence').innerText.includes('from 4 files')", 30
    )
    assert text_of(browser, "data-sentence").startswith("10 series from 4 files")
    until(browser, "document.getElementById('invented').hidden", 30)
    until(browser, "document.getElementById('data-breaks').innerText.includes('in Jan 2010')", 30)
    found = text_of(browser, "data-breaks")
    jump = number_in(found, r"the change of \+([\d.]+) percent in Jan 2010")
    assert jump == pytest.approx(60, abs=1.5)
    browser.find_element(By.XPATH, "//button[text()='Mark break at Jan 2010']").click()
    until(browser, "document.querySelector('[data-break=unmark]')", 30)


def test_the_print_is_read(browser, place, economy):
    click_page(browser, "Reading")
    until(browser, f"{said_by('reading')} && {ANSWERED}", 60)
    Select(browser.find_element(By.ID, "field-series")).select_by_visible_text("Shop prices")
    until(browser, f"{said_by('reading')}.includes('Shop prices') && {ANSWERED}", 60)
    prices = economy["prices"]
    monthly = 100 * (prices[1:] / prices[:-1] - 1)
    said = text_of(browser, "reading-sentence")
    direction = "rose" if monthly[-1] > 0 else "fell"
    shown = number_in(said, rf"Shop prices {direction} ([\d.]+) percent in Dec 2019")
    assert shown == round(abs(monthly[-1]), 2)
    yearly = 100 * (prices[-1] / prices[-13] - 1)
    verdict = text_of(browser, "reading-verdict")
    assert number_in(verdict, r"The 12-month rate is ([−\d.]+) percent") == round(yearly, 1)
    (last,) = [row for row in rows_of(browser, "rates") if row["period"] == "2019-12"][-1:]
    assert float(last["rate_12m_percent"]) == pytest.approx(yearly, abs=1e-9)
    below = np.sum(monthly < monthly[-1])
    assert f"{below} below" in text_of(browser, "reading-rank-words")


def test_how_broad_it_is(browser, place, economy):
    click_page(browser, "Breadth")
    until(browser, f"{said_by('breadth')}.includes('components') && {ANSWERED}", 60)
    risen = int(np.sum(economy["parts"][-1] > economy["parts"][-13]))
    assert f"{risen} of 4 components rose" in text_of(browser, "breadth-sentence")
    rows = [row for row in rows_of(browser, "strip") if row["period"] == "2019-12"]
    given = {row["component"]: float(row["rate"]) for row in rows}
    for place_of, name in enumerate(PARTS):
        part = economy["parts"][:, place_of]
        assert given[name] == pytest.approx(100 * (part[-1] / part[-13] - 1), abs=1e-6)


def test_the_lag_is_found(browser, place, economy):
    click_page(browser, "Lag")
    until(browser, READY, 60)
    state = browser.execute_script("return pricewake.lag.state")
    assert (state["driver"], state["response"]) == ("Money in hand", "Shop prices")
    until(browser, "document.getElementById('lag-strip').innerText.includes('below .001')", 120)
    until(browser, "document.getElementById('lag-verdict').innerText.includes('Shop prices')", 120)
    verdict = text_of(browser, "lag-verdict")
    assert f"shift +{LAG} months" in verdict
    slider = browser.find_element(By.ID, "field-shift")
    for _ in range(60):
        now = int(slider.get_attribute("value"))
        if now == LAG:
            break
        slider.send_keys(Keys.ARROW_LEFT if now > LAG else Keys.ARROW_RIGHT)
    until(browser, f"pricewake.lag.state.shift === {LAG} && !pricewake.lag.busy()", 30)
    growth = economy["driver"][1:].copy()
    growth[BREAK - 1] = (growth[BREAK - 2] + growth[BREAK]) / 2  # what the mark does to the month
    window = state["window"]
    mean = [
        np.convolve(side, np.ones(window) / window, "valid")
        for side in (growth, economy["response"][1:])
    ]
    slope, intercept = np.polyfit(mean[0][:-LAG], mean[1][LAG:], 1)
    shown = browser.execute_script(
        "return [pricewake.lag.cell.slope, pricewake.lag.cell.intercept]"
    )
    assert shown == pytest.approx([slope, intercept], abs=1e-9)
    assert slope == pytest.approx(SLOPE, abs=0.03)
    assert f"{intercept:.3f} + {slope:.3f} × driver" in text_of(browser, "lag-equation")


def test_what_it_implies(browser, place, economy):
    click_page(browser, "Outlook")
    until(browser, f"{said_by('outlook')}.includes('implied')", 60)
    said = text_of(browser, "outlook-sentence")
    assert "Money in hand" in said
    shown = number_in(said, r"implied 12-month rate ([−\d.]+) percent")
    month = pd.Period(re.search(r"percent in (\w+ \d{4})", said).group(1), "M")
    (row,) = [
        row
        for row in rows_of(browser, "fan")
        if row["part"] == "implied" and row["period"] == str(month)
    ]
    assert shown == round(float(row["rate"]), 1)
    assert float(row["low_80"]) < float(row["rate"]) < float(row["high_80"])
    # The driver is known to December 2019, so the response is implied for six months and no more
    # at a window of one; a longer window reaches no further.
    reach = max(row["period"] for row in rows_of(browser, "fan") if row["part"] == "implied")
    assert reach == str(pd.Period("2019-12", "M") + LAG)


def test_the_brief_is_taken_along(browser, place, economy, downloads, monkeypatch):
    monkeypatch.setenv("BROWSER_PATH", "nowhere")  # pictures have a test of their own
    click_page(browser, "Brief")
    until(browser, "window.pricewake.brief && pricewake.brief.shown && !pricewake.brief.busy()", 90)
    assert text_of(browser, "brief-message") == ""
    browser.find_element(By.ID, "brief-save").click()
    end = time.monotonic() + 120
    while not (found := list(downloads.glob("*.zip"))) and time.monotonic() < end:
        time.sleep(0.2)
    with zipfile.ZipFile(found[0]) as kept:
        names = kept.namelist()
        brief = kept.read("brief.html").decode()
        (scatter,) = [name for name in names if "scatter" in name and name.endswith(".csv")]
        text = kept.read(scatter).decode()
    assert "recipe.toml" in names
    prices = economy["prices"]
    monthly = 100 * (prices[-1] / prices[-2] - 1)
    direction = "rose" if monthly > 0 else "fell"
    assert f"Shop prices {direction} {abs(monthly):.2f} percent in Dec 2019" in brief
    assert f"The 12-month rate is {100 * (prices[-1] / prices[-13] - 1):.1f} percent" in brief
    assert len(records(text)) > 150
    assert "investment or policy advice" in brief
