"""Fixtures of the browser tests. Without a Chromium they skip, saying so; CI requires one."""

import os

import pytest

from app.demo import demo_releases
from app.workspace import Workspace
from tests.browser import data_page, driving


def pytest_collection_modifyitems(items):
    for item in items:
        if "tests/browser" in str(item.path):
            item.add_marker(pytest.mark.browser)


@pytest.fixture(scope="session")
def _chromium_there():
    lacking = driving.missing()
    if lacking and os.environ.get("PRICEWAKE_REQUIRE_BROWSER"):
        pytest.fail(f"browser tests are required here, but there is {lacking}")
    if lacking:
        pytest.skip(f"browser test left out: {lacking}")


@pytest.fixture(scope="session")
def downloads(tmp_path_factory):
    return tmp_path_factory.mktemp("downloads")


@pytest.fixture(scope="session")
def browser(_chromium_there, downloads):
    with driving.chromium(1280, 800, str(downloads)) as driver:
        yield driver


@pytest.fixture(scope="module", autouse=True)
def _blank_page(browser):
    driving.blank(browser)


@pytest.fixture(scope="session")
def address():
    """Give the address of a dashboard that shows the invented economy."""
    with driving.served(Workspace(demo_releases())) as url:
        yield url


@pytest.fixture
def data(browser, tmp_path):
    """Give the Data page on a workspace file of this test alone, with an empty log."""
    browser.get_log("browser")
    here = Workspace(placeholder=demo_releases(), path=tmp_path / "desk" / "desk.sqlite")
    with driving.served(here) as url:
        data_page.opened(browser, url)
        yield browser, url, here
    here.close()


@pytest.fixture
def release(tmp_path):
    """Give the path of a good file: 300 months of money and prices."""
    path = tmp_path / "release.csv"
    path.write_text(data_page.planted()[0])
    return path


@pytest.fixture
def lag(browser, address):
    """Give the Lag page of the invented economy, drawn, with empty logs."""
    browser.get_log("browser")
    browser.get_log("performance")
    driving.open_lag(browser, address)
    return browser
