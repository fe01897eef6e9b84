"""How fast the Lag page follows the hand, in a real Chromium: python -m tests.bench.latency.

Every figure is taken in this one run, so that ratios hold on any machine:

* bare restyle: ``Plotly.restyle`` of the scatter's points, call to painted frame;
* slider move: input event to painted frame with the new cell, the same scatter;
* rest: last input event to the chart itself redrawn with the cell (the page waits 0.14 s for rest);
* fast drag: the mouse drags the shift slider for 2.5 s, a move every 16 ms.
"""

import statistics
import subprocess
import sys
import time
import urllib.request

from selenium import webdriver

from app.demo import demo_releases
from app.workspace import Workspace
from tests.browser.driving import READY, chromium, open_lag, served, until

MONTHS_760 = "?first=1963-07"
MOVES = 100

_RESTYLE = """
const done = arguments[1], chart = pricewake.ghost.chartOf("lag-scatter"), times = [];
const {x, y} = chart.data[0];
(async () => {
  for (let i = 0; i < arguments[0]; i++) {
    const nudge = (v) => v * (1 + 0.001 * (i % 7));
    const start = performance.now();
    await Plotly.restyle(chart, {x: [x.map(nudge)], y: [y.map(nudge)]}, [0]);
    await new Promise((f) => requestAnimationFrame(() => setTimeout(f, 0)));
    times.push(performance.now() - start);
  }
  done(times);
})();
"""

_MOVE = """
const done = arguments[1], field = document.getElementById("field-shift"), times = [];
(async () => {
  for (let i = 0; i < arguments[0]; i++) {
    const start = performance.now();
    field.value = -36 + ((i * 7) % 97);
    field.dispatchEvent(new Event("input", {bubbles: true}));
    await new Promise((f) => requestAnimationFrame(() => setTimeout(f, 0)));
    if (pricewake.lag.cell.shift !== Number(field.value)) throw new Error("not painted");
    times.push(performance.now() - start);
  }
  done(times);
})().catch((error) => done(String(error)));
"""

_REST = """
const done = arguments[1], field = document.getElementById("field-shift"), times = [];
(async () => {
  for (let i = 0; i < arguments[0]; i++) {
    const start = performance.now();
    field.value = -36 + ((i * 7) % 97);
    field.dispatchEvent(new Event("input", {bubbles: true}));
    do await new Promise((f) => requestAnimationFrame(() => setTimeout(f, 0)));
    while (pricewake.lag.busy());
    times.push(performance.now() - start);
  }
  done(times);
})();
"""

_WATCH = """
const seen = window.benchFrames = {gaps: [], last: performance.now(), moves: pricewake.lag.moves};
const tick = () => {
  const now = performance.now();
  seen.gaps.push(now - seen.last);
  seen.last = now;
  if (window.benchFrames === seen) requestAnimationFrame(tick);
};
requestAnimationFrame(tick);
"""


def measure(throttle: int = 1) -> list[tuple[str, str, str, bool | None]]:
    """Return rows (what, figure, limit, within)."""
    rows: list[tuple[str, str, str, bool | None]] = []
    with served(Workspace(demo_releases())) as address:
        with chromium() as driver:
            first = _load(driver, address)
            second = _load(driver, address)
        rows.append(("first page load, cold browser", f"{first:.2f} s", "3 s", first < 3))
        rows.append(("second page load", f"{second:.2f} s", "", None))
        with chromium() as driver:
            driver.set_script_timeout(120)
            open_lag(driver, address, MONTHS_760)
            driver.execute_cdp_cmd("Emulation.setCPUThrottlingRate", {"rate": throttle})
            restyle = driver.execute_async_script(_RESTYLE, 40)
            driver.execute_cdp_cmd("Emulation.setCPUThrottlingRate", {"rate": 1})
            open_lag(driver, address, MONTHS_760)
            driver.execute_cdp_cmd("Emulation.setCPUThrottlingRate", {"rate": throttle})
            moves = driver.execute_async_script(_MOVE, MOVES)
            assert isinstance(moves, list), moves
            until(driver, "!pricewake.lag.busy()")
            rest = driver.execute_async_script(_REST, 15)
            bare, move = statistics.median(restyle), statistics.median(moves)
            rows += [
                ("bare Plotly restyle of the scatter, median", f"{bare:.0f} ms", "", None),
                (f"slider move to painted scatter, median of {MOVES}", f"{move:.0f} ms", "", None),
                ("  95th percentile", f"{_p95(moves):.0f} ms", "", None),
                ("  ratio to the bare restyle", f"{move / bare:.2f}", "1.5", move / bare <= 1.5),
                (
                    "one move to the chart at rest (0.14 s of it waiting)",
                    f"{statistics.median(rest):.0f} ms",
                    "",
                    None,
                ),
            ]
            rows += _drag(driver)
    return rows


def _load(driver: webdriver.Chrome, address: str) -> float:
    start = time.perf_counter()
    driver.get(f"{address}/lag{MONTHS_760}")
    until(driver, READY.replace("&& !pricewake.lag.busy()", ""))
    return time.perf_counter() - start


def _drag(driver: webdriver.Chrome) -> list[tuple[str, str, str, bool | None]]:
    box = driver.execute_script(
        "const b = document.getElementById('field-shift').getBoundingClientRect();"
        "const v = Number(document.getElementById('field-shift').value);"
        "return [b.left + 8 + (b.width - 16) * (v + 36) / 96, b.top + 8, b.left + 8, b.right - 8]"
    )
    x, y, low, high = box

    def mouse(kind: str, at: float) -> None:
        driver.execute_cdp_cmd(
            "Input.dispatchMouseEvent",
            {"type": kind, "x": at, "y": y, "button": "left", "buttons": 1, "clickCount": 1},
        )

    driver.get_log("performance")
    mouse("mouseMoved", x)
    mouse("mousePressed", x)
    driver.execute_script(_WATCH)
    start, sent, step, at = time.perf_counter(), 0, 6.0, x
    while time.perf_counter() - start < 2.5:
        if not low < at + step < high:
            step = -step
        at += step
        mouse("mouseMoved", at)
        sent += 1
        time.sleep(max(0.0, start + sent * 0.016 - time.perf_counter()))
    length = time.perf_counter() - start
    seen = driver.execute_script(
        "const seen = window.benchFrames; window.benchFrames = null;"
        "return {moves: pricewake.lag.moves - seen.moves, gap: Math.max(...seen.gaps)}"
    )
    requests = sum(
        'Network.requestWillBeSent"' in entry["message"] for entry in driver.get_log("performance")
    )
    mouse("mouseReleased", at)
    released = time.perf_counter()
    until(driver, "!pricewake.lag.busy()")
    rate = seen["moves"] / length
    return [
        (f"fast drag: repaints a second ({sent} moves sent)", f"{rate:.1f}", "8", rate >= 8),
        ("  longest freeze", f"{seen['gap']:.0f} ms", "300 ms", seen["gap"] <= 300),
        ("  requests sent during the drag", str(requests), "0", requests == 0),
        (
            "  settled after the hand rests",
            f"{1000 * (time.perf_counter() - released):.0f} ms",
            "",
            None,
        ),
    ]


def first_byte() -> tuple[str, str, str, bool]:
    """Start the command and wait for its first answer."""
    start = time.perf_counter()
    process = subprocess.Popen(
        [
            sys.executable,
            "-m",
            "app",
            "serve",
            "--no-browser",
            "--port",
            "18391",
            "--workspace=:memory:",
        ],
        stdout=subprocess.PIPE,
        text=True,
    )
    try:
        assert process.stdout is not None
        line = next(text for text in process.stdout if "http://" in text)
        address = line.split()[3]
        while True:
            try:
                urllib.request.urlopen(address).read(1)
                break
            except OSError:
                time.sleep(0.01)
        seconds = time.perf_counter() - start
    finally:
        process.terminate()
        process.wait()
    return ("start of the command to the first byte", f"{seconds:.2f} s", "3 s", seconds < 3)


def _p95(values: list[float]) -> float:
    return sorted(values)[int(0.95 * len(values))]


def main() -> None:
    """Print the table; the exit status says whether every limit was kept."""
    throttle = int(sys.argv[sys.argv.index("--throttle") + 1]) if "--throttle" in sys.argv else 1
    rows = [first_byte(), *measure(throttle)]
    print(f"CPU throttled {throttle}x" if throttle > 1 else "CPU as it is")
    for what, figure, limit, within in rows:
        said = "" if within is None else ("within" if within else "OVER") + f" {limit}"
        print(f"{what:<62}{figure:>10}  {said}")
    sys.exit(any(within is False for *_, within in rows))


if __name__ == "__main__":
    main()
