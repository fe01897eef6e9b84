"""A served dashboard and a headless Chromium to look at it with; used by tests and benches."""

import shutil
import socket
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any
from urllib.parse import urlsplit

from selenium import webdriver
from selenium.webdriver.chrome.options import Options
from selenium.webdriver.chrome.service import Service
from selenium.webdriver.support.ui import WebDriverWait
from waitress.channel import HTTPChannel
from waitress.server import create_server

from app.server import build_app
from app.workspace import Workspace

FLAGS = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--hide-scrollbars",
    "--force-device-scale-factor=1",
    "--lang=en",
)


def chromium_path() -> str | None:
    """Return where a Chromium is, or None."""
    return shutil.which("chromium") or shutil.which("chromium-browser")


def missing() -> str | None:
    """Say what a browser test lacks on this machine, or None."""
    if chromium_path() is None:
        return "no Chromium on this machine"
    if shutil.which("chromedriver") is None:
        return "no chromedriver on this machine"
    return None


@contextmanager
def served(workspace: Workspace) -> Iterator[str]:
    """Serve a workspace on a free port of the loopback address; gives the address."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    sockets: dict[int, Any] = {}
    server = create_server(
        build_app(workspace).server,
        host="127.0.0.1",
        port=port,
        threads=8,
        ident=None,
        map=sockets,
    )
    server.channel_class = _Channel
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    try:
        yield f"http://127.0.0.1:{port}"
    finally:  # in this order: a thread left over would write to what others have opened since
        server.task_dispatcher.shutdown()
        server.trigger.pull_trigger(lambda: _closed(sockets))  # by the thread that reads them
        thread.join(10)


class _Channel(HTTPChannel):
    """A connection that lets go of an upload which the browser broke off half way."""

    def handle_close(self) -> None:
        if self.request is not None:
            self.request.close()
        super().handle_close()


def _closed(sockets: dict[int, Any]) -> None:
    for each in list(sockets.values()):
        if isinstance(each, HTTPChannel):
            each.handle_close()  # with what it has not sent yet
        else:
            each.close()
    sockets.clear()


class _Chrome(webdriver.Chrome):
    """A browser whose log leaves out that a page asks for a dashboard which a test has ended."""

    def get_log(self, log_type: str) -> list[dict[str, Any]]:
        """Return what was logged since the last look."""
        entries: list[dict[str, Any]] = super().get_log(log_type)
        here = urlsplit(self.current_url).netloc

        def of_a_page_left(message: str) -> bool:
            return "ERR_CONNECTION_REFUSED" in message and f"//{here}/" not in message

        return [
            entry
            for entry in entries
            if "/alive - Failed to load resource" not in entry["message"]
            and not of_a_page_left(entry["message"])
        ]


@contextmanager
def chromium(
    width: int = 1280, height: int = 800, downloads: str | None = None, *flags: str
) -> Iterator[webdriver.Chrome]:
    """Start a headless Chromium that logs its console and its requests."""
    options = Options()
    options.binary_location = chromium_path() or ""
    for flag in (*FLAGS, f"--window-size={width},{height}", *flags):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    if downloads:
        options.add_experimental_option("prefs", {"download.default_directory": downloads})
    driver = _Chrome(options=options, service=Service(shutil.which("chromedriver")))
    try:
        size(driver, width, height)
        # A page has the focus however many other windows the machine shows.
        driver.execute_cdp_cmd("Emulation.setFocusEmulationEnabled", {"enabled": True})
        if downloads:
            driver.execute_cdp_cmd(
                "Browser.setDownloadBehavior", {"behavior": "allow", "downloadPath": downloads}
            )
        yield driver
    finally:
        driver.quit()


def size(driver: webdriver.Chrome, width: int, height: int) -> None:
    """Set the size of the page."""
    driver.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride",
        {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": False},
    )


def blank(driver: webdriver.Chrome) -> None:
    """Leave the page that is open, its size, its theme and its logs behind."""
    driver.execute_script("try { localStorage.clear(); sessionStorage.clear() } catch {}")
    driver.get("about:blank")
    size(driver, 1280, 800)
    driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "", "features": []})
    driver.get_log("browser")
    driver.get_log("performance")


def severe(driver: webdriver.Chrome, *expected: str) -> list[dict[str, Any]]:
    """Return the errors in the console since the last look, without those that were expected."""
    return [
        entry
        for entry in driver.get_log("browser")
        if entry["level"] == "SEVERE" and not any(each in entry["message"] for each in expected)
    ]


def until(driver: webdriver.Chrome, script: str, seconds: float = 15) -> object:
    """Wait until a JavaScript expression is true; gives its value."""
    return WebDriverWait(driver, seconds, poll_frequency=0.05).until(
        lambda d: d.execute_script(f"return ({script})")
    )


READY = (
    "window.pricewake && pricewake.lag && pricewake.lag.data && !pricewake.lag.data.error"
    " && document.querySelector('#lag-scatter .points path')"
    " && document.querySelector('#lag-surface .heatmaplayer image')"
    " && document.querySelector('#lag-overlay .lines path') && !pricewake.lag.busy()"
)


def open_lag(driver: webdriver.Chrome, address: str, query: str = "") -> None:
    """Open the Lag page and wait until it has drawn."""
    driver.get(f"{address}/lag{query}")
    until(driver, READY)
