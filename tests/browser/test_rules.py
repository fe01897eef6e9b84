"""Alert rules on the Reading page, as a person keeps them and takes them away."""

from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

from tests.browser.driving import severe, until

DRAWN = (
    "window.pricewake && pricewake.plain && pricewake.plain.data && !pricewake.plain.busy()"
    " && document.querySelector('#reading-rules')"
)


def listed(driver):
    return [one.text for one in driver.find_elements(By.CSS_SELECTOR, ".rule-list code")]


def test_a_rule_is_kept_raises_its_alert_and_is_taken_away(browser, address):
    browser.get_log("browser")
    browser.get(f"{address}/reading?draws=99")
    until(browser, DRAWN)
    browser.find_element(By.CSS_SELECTOR, ".rules summary").click()
    before = listed(browser)
    assert "rate_12m above 5" in before
    field = browser.find_element(By.ID, "rule-text")
    field.send_keys("rate_12m above tomorrow", Keys.ENTER)
    until(browser, "document.querySelector('#rule-said .bad')")
    assert "must be of one of" in browser.find_element(By.ID, "rule-said").text
    assert field.get_attribute("value") == "rate_12m above tomorrow"  # nothing is lost
    field.clear()
    field.send_keys("rate_1m above -50", Keys.ENTER)
    until(browser, "document.querySelector('#rule-said .good')")
    until(browser, "document.getElementById('reading-alerts').textContent.includes('50.00')")
    assert listed(browser) == [*before, "rate_1m above -50"]
    said = browser.find_element(By.ID, "reading-alerts").text
    assert "The rate over one period is 0.07 percent, above −50.00 percent." in said
    browser.find_element(By.CSS_SELECTOR, "[data-value='rate_1m above -50']").click()
    until(browser, "!document.getElementById('reading-alerts').textContent.includes('50.00')")
    assert listed(browser) == before
    assert browser.find_element(By.CSS_SELECTOR, ".rules[open]")
    assert severe(browser, "keep-rule") == []
