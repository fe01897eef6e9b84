"""What an open page does when the program goes away, and when it comes back."""

import os
import signal
import socket
import subprocess
import sys
import time
import urllib.request
from contextlib import contextmanager
from pathlib import Path

import pytest
from selenium.webdriver.common.keys import Keys

from app.page_table import PAGES
from tests.browser.driving import until
from tests.browser.test_accessibility import QUICK, SETTLED

ROOT = Path(__file__).resolve().parents[2]
ANSWERED = "window.pricewake && pricewake.plain && pricewake.plain.data && !pricewake.plain.busy()"
SAID = "(document.getElementById('connection') || {textContent: ''}).textContent"


@contextmanager
def program(port):
    """The program as a user starts it, in a process of its own; killed at the end."""
    running = subprocess.Popen(
        [
            sys.executable,
            "-m",
            "app",
            "--no-browser",
            "--port",
            str(port),
            "--workspace",
            ":memory:",
        ],
        cwd=ROOT,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    try:
        for _ in range(600):
            try:
                urllib.request.urlopen(f"http://127.0.0.1:{port}/alive", timeout=5).close()
                break
            except OSError:
                time.sleep(0.1)
        yield running
    finally:
        os.kill(running.pid, signal.SIGKILL)
        running.wait()


@pytest.fixture
def port():
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return probe.getsockname()[1]


def test_a_killed_program_is_told_and_its_return_opens_the_page_anew(browser, port):
    with program(port):
        browser.get(f"http://127.0.0.1:{port}/reading?draws=99&coming=0.5")
        until(browser, ANSWERED, 60)
        number = browser.find_element("id", "reading-whatif-words").text
        assert "+0.50" in number
    field = browser.find_element("id", "field-coming")
    browser.execute_script(
        "arguments[0].value = 0.8;arguments[0].dispatchEvent(new Event('change', {bubbles: true}))",
        field,
    )
    until(browser, f"{SAID}.includes('Pricewake does not answer')", 30)
    assert browser.find_element("id", "connection").get_attribute("role") == "status"
    assert browser.find_element("id", "reading-whatif-words").text == number, "the page stays"
    with program(port):
        until(browser, f"{SAID}.includes('started again; this page has been opened anew')", 60)
        until(browser, ANSWERED, 60)
        until(
            browser,
            "(document.getElementById('reading-whatif-words') || {textContent: ''})"
            ".textContent.includes('+0.80')",
            30,
        )
        assert "coming=0.8" in browser.current_url


@pytest.mark.long
@pytest.mark.parametrize(
    "page", [page for page in PAGES if page.TITLE != "Reading"], ids=lambda page: page.TITLE
)
def test_every_page_stays_while_the_program_is_away_and_opens_anew_when_it_is_back(
    browser, port, page
):
    address = f"http://127.0.0.1:{port}{page.PATH}{QUICK}"
    with program(port):
        browser.get(address)
        until(browser, SETTLED, 60)
        headline = browser.execute_script("return document.querySelector('h1').textContent")
    if page.TITLE == "Lag":  # the browser computes: the hand moves on without the program
        browser.find_element("id", "field-shift").send_keys(Keys.ARROW_RIGHT)
        until(browser, "document.querySelector('h1').textContent.includes('25 months later')")
        headline = headline.replace("24 months", "25 months")
    browser.execute_script("document.dispatchEvent(new Event('visibilitychange'))")  # look now
    until(browser, f"{SAID}.includes('Pricewake does not answer')", 30)
    assert browser.execute_script("return document.querySelector('h1').textContent") == headline
    with program(port):
        until(browser, f"{SAID}.includes('started again; this page has been opened anew')", 60)
        until(browser, SETTLED, 60)
        assert browser.execute_script("return document.querySelector('h1').textContent") == headline
