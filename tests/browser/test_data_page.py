"""Files in through the browser: what a person sees when they are good, and when they are not."""

import numpy as np
import pytest
from selenium.webdriver.common.by import By

from analytics.cell import lag_cell
from app.demo import demo_releases
from app.workspace import Workspace
from tests.browser.driving import READY, served, until


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
def data(browser):
    browser.get_log("browser")
    with served(Workspace(placeholder=demo_releases())) as url:
        browser.get(f"{url}/data")
        until(browser, "document.getElementById('field-files') && document.querySelector('.table')")
        yield browser, url


def upload(browser, path):
    browser.find_element(By.ID, "field-files").send_keys(str(path))
    until(
        browser,
        "/read\\b|must|not|cannot/.test(document.getElementById('data-message').textContent)",
    )
    return browser.find_element(By.ID, "data-message").text


def test_own_files_take_the_place_of_the_invented_economy(data, tmp_path):
    browser, _ = data
    text, growth = planted()
    path = tmp_path / "release.csv"
    path.write_text(text)
    assert upload(browser, path) == "release.csv: 2 series read."
    until(browser, "document.querySelectorAll('.table tbody tr').length === 2")
    assert "Money in hand" in browser.find_element(By.CSS_SELECTOR, ".table").text
    browser.find_element(By.ID, "nav-lag").click()
    until(browser, READY)
    shown = browser.execute_script("return [pricewake.lag.state, [...pricewake.lag.cell.driver]]")
    assert (shown[0]["driver"], shown[0]["response"]) == ("Money in hand", "Shop prices")
    cell = lag_cell(*growth, window=12, shift=24)
    np.testing.assert_allclose(shown[1], cell.driver, atol=1e-9)
    assert not browser.find_element(By.ID, "lag-invented").is_displayed()


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
    browser, _ = data
    path = tmp_path / name
    path.write_bytes(content)
    before = browser.find_element(By.CSS_SELECTOR, ".table").text
    said = upload(browser, path)
    assert said.startswith(name)
    assert words in said
    assert browser.find_element(By.CSS_SELECTOR, ".table").text == before


def test_text_in_numbers_leaves_the_other_series(data, tmp_path):
    browser, _ = data
    path = tmp_path / "mixed.csv"
    path.write_text("month,A,B\n2024-01,1,x\n2024-02,2,3\n2024-03,3,4\n")
    assert upload(browser, path).startswith("mixed.csv: 1 series read; ")
    until(browser, "document.querySelectorAll('.table').length === 2")
    found = browser.find_element(By.CSS_SELECTOR, ".table").text
    assert "error" in found
    assert "row 2" in found
    assert "column B" in found


def test_a_file_of_forty_megabytes_is_read_or_refused_in_a_sentence(data, tmp_path):
    browser, _ = data
    row = ",".join(["123.456"] * 590)
    head = "month," + ",".join(f"S{i}" for i in range(590)) + "\n"
    path = tmp_path / "large.csv"
    with path.open("w") as out:
        out.write(head)
        for i in range(9000):
            out.write(f"{1000 + i // 12}-{i % 12 + 1:02d},{row}\n")
    assert path.stat().st_size > 40e6
    browser.find_element(By.ID, "field-files").send_keys(str(path))
    until(
        browser,
        "/series read|must/.test(document.getElementById('data-message').textContent)",
        seconds=120,
    )
    assert browser.find_element(By.ID, "data-message").text.startswith("large.csv")
    assert browser.find_elements(By.CSS_SELECTOR, ".table tbody tr")
