"""What the exploration was worth, on the page: asked for in chunks, shown, stopped, reproduced."""

import json
import re
import time

import numpy as np
import pytest
from selenium.webdriver.common.by import By

from app.compute import Bridge
from app.demo import demo_releases
from app.figures.evidence import support_traces
from app.lag.cells import episode_code, influence, without_episode
from app.lag.evidence import completed, opinions_work
from app.lag.verdict import verdict
from app.state import ViewState
from app.words import p_words
from app.workspace import Workspace
from tests.browser.driving import open_lag, severe, until
from tests.exported import records

SHORT = {"surrogates": 250, "windows": "1:24", "shifts": "-12:36"}
DONE = (
    "!pricewake.lag.busy() && pricewake.lag.known && !pricewake.lag.known.jobs.length"
    " && !pricewake.work.running && document.getElementById('lag-work').hidden"
    " && !document.querySelector('.lag-page.stale')"
)


@pytest.fixture(scope="module")
def bridge():
    return Bridge(Workspace(demo_releases()))


def words_of(bridge, state):
    """The verdict as Python completes it."""
    return " ".join(verdict(completed(state, bridge), bridge.pair(state), state))


def shown_words(driver, name="lag-verdict"):
    return driver.execute_script(f"return document.getElementById('{name}').textContent")


def traces(driver, graph):
    """The traces of a chart as plotly holds them: type, name and numbers."""
    return driver.execute_script(
        "return pricewake.ghost.chartOf(arguments[0])._fullData.map((t) => ({type: t.type,"
        " name: t.name, x: t.x && [...t.x], y: t.y && [...t.y],"
        " z: t.z && [...t.z].map((row) => [...row])}))",
        graph,
    )


def asked_for(driver):
    """Requests for long work since the log was last read."""
    found = []
    for entry in driver.get_log("performance"):
        if "Network.requestWillBeSent" in entry["message"]:
            sent = json.loads(entry["message"])["message"]["params"].get("request", {})
            if "/lag/work/" in sent.get("url", ""):
                found.append(sent["url"].split("/lag/work/")[1])
    return found


def opened(driver, name):
    """Open a fold and wait for its chart."""
    driver.find_element(By.CSS_SELECTOR, f"#fold-{name} summary").click()
    until(
        driver,
        f"(() => {{ const chart = pricewake.ghost.chartOf('lag-{name}');"
        " return chart && chart.data && chart.data.length && chart.clientHeight > 100; })()",
    )


def test_verdict_folds_and_map_are_pythons_and_a_reload_reproduces_them(
    browser, address, bridge, downloads
):
    browser.get_log("browser")
    state = ViewState(**SHORT)
    open_lag(browser, address, f"?{state.to_query()}")
    until(browser, DONE)
    known = completed(state, bridge)
    assert known.found
    assert shown_words(browser) == words_of(bridge, state)
    values = [e.text for e in browser.find_elements(By.CSS_SELECTOR, "#lag-strip dd")]
    wanted = (known.naive_p, known.inference.p, known.search.p)
    assert values[:3] == [p_words(p) for p in wanted]

    # The map: what the search says of the cells, and the shift set on the row of the window.
    surface, veil, line, chosen = traces(browser, "lag-surface")
    assert surface["type"] == "heatmap"
    for drawn, made in zip((veil, line), support_traces(known.search), strict=True):
        assert (drawn["type"], drawn["name"]) == (made.type, made.name)
    np.testing.assert_array_equal(np.array(line["z"], dtype=float), known.search.p_cell)
    assert chosen["name"] == "shift set"
    assert chosen["x"] == known.shift_set.shifts.tolist()
    assert set(chosen["y"]) == {12}

    # Folds: a chart each, with the numbers of the results.
    opened(browser, "profile")
    kept = traces(browser, "lag-profile")[2]
    assert kept["x"] == known.shift_set.shifts.tolist()
    opened(browser, "plane")
    robust = traces(browser, "lag-plane")[0]
    np.testing.assert_allclose(robust["x"], known.inference.plane.robust[:, 0], atol=1e-12)
    opened(browser, "episodes")
    shares = [y for t in traces(browser, "lag-episodes") for y in t["y"]]
    assert sum(shares) == pytest.approx(100.0, abs=1e-6)
    opened(browser, "opinions")  # this one is worked out when it is asked for
    until(browser, DONE)
    opinions = bridge.jobs.complete(opinions_work(state, bridge))
    lag = traces(browser, "lag-opinions")[3]
    np.testing.assert_allclose(lag["y"], opinions.distributed.averaged.estimate, atol=1e-9)
    assert "driver first, search-adjusted p" in shown_words(browser, "lag-opinions-words")

    # The file of a fold.
    browser.find_element(By.ID, "csv-episodes").click()
    path = downloads / "episodes-broad-money-consumer-prices-window-12-shift-24.csv"
    end = time.monotonic() + 15
    while not (path.exists() and path.stat().st_size) and time.monotonic() < end:
        time.sleep(0.05)
    text = path.read_text()
    assert f"# search: p {known.search.p!r};" in text
    shares = [float(row["covariance_share"]) for row in records(text)]
    assert shares == [e.share for e in known.influence.episodes]

    # An episode is left out: in the address, in the chart; and back.
    button = "button[data-without]:not([data-without=''])"
    code = browser.find_element(By.CSS_SELECTOR, button).get_attribute("data-without")
    pair = bridge.pair(state)
    codes = {episode_code(e, pair, state) for e in influence(state, bridge).episodes}
    assert code in codes
    browser.find_element(By.CSS_SELECTOR, button).click()
    until(browser, DONE + " && pricewake.lag.known.state.without !== ''")
    without = ViewState(**SHORT, without=code)
    assert browser.current_url == f"{address}/lag?{without.to_query()}"
    until(browser, "pricewake.ghost.chartOf('lag-without')?.data?.length === 4")
    rest = without_episode(without, bridge)[1]
    kept, gone, _, line = traces(browser, "lag-without")
    np.testing.assert_allclose(kept["x"], rest.driver[rest.kept], atol=1e-12)
    np.testing.assert_allclose(gone["y"], rest.response[~rest.kept], atol=1e-12)
    slope = (line["y"][1] - line["y"][0]) / (line["x"][1] - line["x"][0])
    assert slope == pytest.approx(rest.slope, abs=1e-9)

    browser.refresh()
    until(browser, f"window.pricewake && pricewake.lag && pricewake.lag.data && {DONE}")
    assert shown_words(browser) == words_of(bridge, state)
    assert browser.execute_script("return pricewake.lag.state.without") == code
    assert len(traces(browser, "lag-surface")) == 4
    opened(browser, "episodes")
    until(browser, "pricewake.ghost.chartOf('lag-without')?.data?.length === 4")
    np.testing.assert_allclose(traces(browser, "lag-without")[0]["x"], kept["x"])
    pressed = browser.find_element(By.CSS_SELECTOR, "button.episode[aria-pressed=true]")
    assert pressed.get_attribute("data-without") == ""
    pressed.click()
    until(browser, DONE + " && pricewake.lag.known.state.without === ''")
    assert browser.current_url == f"{address}/lag?{state.to_query()}"
    assert browser.execute_script("return document.getElementById('place-without').hidden")

    # The other theme keeps the charts, with their numbers.
    before = browser.execute_script("return document.documentElement.dataset.theme")
    shares = traces(browser, "lag-episodes")
    browser.find_element(By.ID, "theme").click()
    until(browser, f"document.documentElement.dataset.theme !== '{before}'")
    until(browser, "document.querySelector('#lag-episodes .barlayer path')")
    assert traces(browser, "lag-episodes") == shares
    assert len(traces(browser, "lag-surface")) == 4
    browser.find_element(By.ID, "theme").click()
    assert severe(browser) == []


def test_stop_stops_asking_and_a_moving_slider_never_waits_for_the_search(browser, address, bridge):
    browser.get_log("browser")
    long = SHORT | {"surrogates": 12000}  # 48 chunks
    state = ViewState(**long)
    open_lag(browser, address, f"?{state.to_query()}")
    until(browser, "pricewake.work.running && document.getElementById('lag-progress').value >= 1")
    assert re.fullmatch(
        r"Searching the map against unrelated drivers, \d+ of 48",
        shown_words(browser, "lag-progress-words"),
    )
    assert browser.execute_script("return document.getElementById('lag-progress').max") == 48
    assert shown_words(browser).startswith("Not searched yet")

    browser.find_element(By.ID, "lag-cancel").click()
    done = browser.execute_script("return document.getElementById('lag-progress').value")
    time.sleep(0.3)  # the one request that may be under way
    asked_for(browser)
    browser.execute_script("pricewake.lag.move({shift: 20}); pricewake.lag.settle()")
    until(browser, "!pricewake.lag.busy() && pricewake.lag.known.state.shift === 20")
    time.sleep(0.7)
    assert asked_for(browser) == [], "stopped, and a slider does not set it going again"
    assert shown_words(browser, "lag-progress-words") == "The search was stopped."
    assert browser.find_element(By.ID, "lag-resume").is_displayed()
    assert not browser.find_element(By.ID, "lag-cancel").is_displayed()

    browser.find_element(By.ID, "lag-resume").click()
    until(browser, f"document.getElementById('lag-progress').value > {done}")
    # Drag while it runs: every move is painted at once, and the search goes on.
    before = browser.execute_script("return pricewake.lag.moves")
    painted = browser.execute_async_script(
        "const done = arguments[0], page = pricewake.lag, seen = [], waits = [];"
        "let shift = -12;"
        "const step = () => {"
        "  if (shift > 36) return done({seen, waits, running: pricewake.work.running});"
        "  const at = performance.now(); page.move({shift});"
        "  requestAnimationFrame(() => {"
        "    seen.push([shift, page.painted.shift,"
        "      Boolean(document.querySelector('#lag-scatter').closest('.plot.moving'))]);"
        "    waits.push(performance.now() - at); shift += 2; setTimeout(step, 20); });"
        "}; step();"
    )
    assert painted["running"], "the search was running all the while"
    assert [seen[0] for seen in painted["seen"]] == list(range(-12, 37, 2))
    assert all(shift == drawn and moving for shift, drawn, moving in painted["seen"])
    assert browser.execute_script("return pricewake.lag.moves") >= before + 25

    browser.execute_script("pricewake.lag.move({window: 6, shift: 23}); pricewake.lag.settle()")
    until(browser, DONE, 40)
    final = ViewState(**long, window=6, shift=23)
    assert shown_words(browser) == words_of(bridge, final)
    assert browser.current_url == f"{address}/lag?{final.to_query()}"
    assert set(traces(browser, "lag-surface")[3]["y"]) == {6}
    names = asked_for(browser)
    assert names[-1].startswith("shift_set?")
    assert sum(name.startswith("search?") for name in names) <= 50, "no chunk is done twice"
    assert severe(browser) == []


def test_an_unrelated_pair_reads_found_nothing(browser, address, bridge):
    browser.get_log("browser")
    state = ViewState(**SHORT, driver="Unemployment rate", last="1979-12")
    open_lag(browser, address, f"?{state.to_query()}")
    until(browser, DONE)
    assert not completed(state, bridge).found
    assert shown_words(browser) == words_of(bridge, state)
    assert "found nothing" in shown_words(browser)
    assert [t["type"] for t in traces(browser, "lag-surface")] == ["heatmap", "heatmap", "contour"]
    browser.find_element(By.CSS_SELECTOR, "#fold-profile summary").click()
    assert "none is shown" in browser.find_element(By.ID, "lag-profile-words").text
    assert browser.execute_script("return document.getElementById('place-profile').hidden")
    assert severe(browser) == []


def test_a_cell_that_cannot_be_judged_is_said_and_the_page_goes_on(browser, address, bridge):
    """A map that was asked for may have cells with too few months; the slider reaches them."""
    browser.get_log("browser")
    state = ViewState(
        first="2018-01", windows="1:50", shifts="0:40", window=6, shift=6, surrogates=39
    )
    open_lag(browser, address, f"?{state.to_query()}")
    until(browser, DONE)
    browser.execute_script("pricewake.lag.move({window: 50, shift: 40}); pricewake.lag.settle()")
    until(browser, "document.getElementById('lag-verdict').textContent.includes('24 pairs')")
    assert shown_words(browser).endswith(".")
    browser.execute_script("pricewake.lag.move({window: 6, shift: 6}); pricewake.lag.settle()")
    until(browser, DONE + " && pricewake.lag.known.state.shift === 6")
    assert shown_words(browser) == words_of(bridge, state)
    assert severe(browser) == []
