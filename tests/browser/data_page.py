"""The Data page as a person works it: files chosen, looked at, kept; what the page then says."""

import numpy as np
from selenium.webdriver.common.by import By

from tests.browser.driving import until

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


def large(path, columns, months):
    """Write a file of so many series and months, from the year 1000 on."""
    row = ",".join(["123.456"] * columns)
    lines = [f"{1000 + i // 12}-{i % 12 + 1:02d},{row}\n" for i in range(months)]
    path.write_text("month," + ",".join(f"S{i}" for i in range(columns)) + "\n" + "".join(lines))
    return path


def opened(browser, url, query=""):
    """Open the page and wait until it has drawn."""
    browser.get(f"{url}/data{query}")
    until(browser, f"document.getElementById('field-files') && {DRAWN}")


def text_of(browser, place):
    """Give the words at a place as they are shown."""
    return browser.execute_script("return document.getElementById(arguments[0]).innerText", place)


def told(browser, place, words, seconds=15):
    """Wait until a place says these words."""
    until(browser, f"document.getElementById('{place}').innerText.includes({words!r})", seconds)


def listed(browser, count, seconds=15):
    """Wait until so many series are listed."""
    until(
        browser, f"document.querySelectorAll('#data-series tbody tr').length === {count}", seconds
    )


def send(browser, *paths):
    """Choose files."""
    names = "\n".join(str(path) for path in paths)
    browser.find_element(By.ID, "field-files").send_keys(names)


def choose(browser, *paths):
    """Choose files and wait until each has been read or refused; gives what is said of them."""
    browser.execute_script("document.getElementById('intake-message').replaceChildren()")
    send(browser, *paths)
    until(
        browser,
        f"document.querySelectorAll('#intake-message p').length >= {len(paths)}"
        " && !pricewake.intake.busy()",
        seconds=120,
    )
    return [line for line in text_of(browser, "intake-message").splitlines() if line]


def act(browser, name, place=0):
    """Press the button of an act."""
    browser.find_elements(By.CSS_SELECTOR, f"[data-act={name}]")[place].click()


def previewed(browser):
    """Wait for the preview; gives its words."""
    until(browser, "document.getElementById('data-preview-head')")
    return text_of(browser, "data-preview")


def kept(browser):
    """Keep what is previewed and wait until the preview is gone."""
    act(browser, "keep")
    gone(browser)


def gone(browser):
    """Wait until nothing is previewed."""
    until(browser, "!document.getElementById('data-preview-head')")
