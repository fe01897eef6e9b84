"""Eight tabs dragged at once: what the server answers, how fast, and what memory it ends with.

    python -m tests.bench.load [--seconds 60] [--tabs 8]

Each tab is a client that asks as the pages do. Every other one drags a slider of the Reading page,
which asks every 0.12 s; the rest drag on the Lag page, which asks when the hand rests. Between two
drags of two seconds each asks for something else: a file, another pair or sample, other spans on
the Breadth page, a chunk of a search. The program runs in a process of its own. Printed are the
figures, and whether they are within the limits: no error, 95 % within 300 ms (chunks of searches
run behind and are not counted), memory flat.
"""

import argparse
import json
import random
import socket
import statistics
import subprocess
import sys
import threading
import time
import urllib.error
import urllib.request
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

from app.state import ViewState

SLIDER = 0.12  # seconds between answers while a slider is dragged: assets/plain-page.js
DRAG = 2.0  # seconds
LIMIT = 0.300
Shapes = dict[str, tuple[list[str], ...]]  # output of a callback: ids of its inputs and states
FLAT = 1.15  # memory at the end over memory after the first third


class Tab(threading.Thread):
    """One page that somebody drags and asks on."""

    def __init__(self, address: str, seed: int, until: float, shapes: Shapes) -> None:
        super().__init__(daemon=True)
        self.address, self.until, self.shapes = address, until, shapes
        self.on_lag = seed % 2 == 0
        self.random = random.Random(seed)
        self.times: dict[str, list[float]] = {}
        self.errors: list[str] = []
        self.drawn: dict[str, dict[str, str]] = {}  # marks of the charts that this page shows

    def run(self) -> None:
        """Drag, ask for one thing or another, drag again, until the time is over."""
        while time.monotonic() < self.until:
            rest = time.monotonic() + DRAG
            if self.on_lag:
                time.sleep(DRAG)
                self.ask("cell at rest")
                self.ask(self.random.choice(("pair", "file", "search")))
                continue
            while time.monotonic() < rest:
                took = self.ask("slider")
                time.sleep(max(0.0, SLIDER - took))
            self.ask(self.random.choice(("breadth", "file")))

    def ask(self, kind: str) -> float:
        """Ask once; return the seconds until the answer was there."""
        start = time.perf_counter()
        try:
            getattr(self, f"_{kind.replace(' ', '_')}")()
        except (urllib.error.URLError, OSError, ValueError, KeyError) as error:
            self.errors.append(f"{kind}: {error}")
        took = time.perf_counter() - start
        self.times.setdefault(kind, []).append(took)
        return took

    def _slider(self) -> None:
        state = ViewState(coming=round(self.random.uniform(-1, 3) * 20) / 20, draws=99)
        self._callback("reading-verdict.children", state)

    def _breadth(self) -> None:
        self._callback("breadth-verdict.children", ViewState(years=self.random.randint(3, 30)))

    def _cell_at_rest(self) -> None:
        state = ViewState(window=self.random.randint(3, 36), shift=self.random.randint(0, 48))
        self._callback("lag-verdict.children", state)

    def _pair(self) -> None:
        state = replace(
            ViewState(),
            first=f"{self.random.randint(1960, 1975)}-01",
            driver=self.random.choice(("Broad money", "Narrow money")),
        )
        body = {
            "output": "lag-data.data",
            "outputs": {"id": "lag-data", "property": "data"},
            "inputs": [{"id": "lag-question", "property": "data", "value": "any"}],
            "state": [{"id": "lag-state", "property": "data", "value": asdict(state)}],
            "changedPropIds": ["lag-question.data"],
        }
        self._post(body)

    def _file(self) -> None:
        query = ViewState(shift=self.random.randint(-36, 60)).to_query()
        with urllib.request.urlopen(f"{self.address}/export/lag/scatter.csv?{query}") as answer:
            if not answer.read().startswith(b"# Pricewake"):
                raise ValueError("no file")

    def _search(self) -> None:
        query = ViewState(surrogates=200, seed=self.random.randint(1, 3)).to_query()
        with urllib.request.urlopen(f"{self.address}/lag/work/search?{query}") as answer:
            json.load(answer)

    def _callback(self, place: str, state: ViewState) -> None:
        output, (inputs, states) = next(each for each in self.shapes.items() if place in each[0])
        parts = [part.rsplit(".", 1) for part in output.strip(".").split("...")]
        given = {"state": asdict(state), "tick": 0, "open": [], "drawn": self.drawn.get(place)}

        def stores(names: list[str]) -> list[dict[str, object]]:
            return [
                {"id": name, "property": "data", "value": given[name.rsplit("-", 1)[1]]}
                for name in names
            ]

        answer = self._post(
            {
                "output": output,
                "outputs": [{"id": name, "property": prop} for name, prop in parts],
                "inputs": stores(inputs),
                "state": stores(states),
                "changedPropIds": [f"{inputs[0]}.data"],
            }
        )
        if "drawn" in str(states):
            page = place.split("-")[0]
            charts = answer["response"][f"{page}-answer"]["data"]["figures"]
            self.drawn[place] = {view: chart["mark"] for view, chart in charts.items()}

    def _post(self, body: dict[str, object]) -> dict[str, Any]:
        request = urllib.request.Request(
            f"{self.address}/_dash-update-component",
            json.dumps(body).encode(),
            {"Content-Type": "application/json"},
        )
        with urllib.request.urlopen(request, timeout=60) as answer:
            found: dict[str, Any] = json.load(answer)
            if answer.status != 200 or "response" not in found:
                raise ValueError(f"status {answer.status}")
        return found


def memory(pid: int) -> float:
    """Return the resident memory of a process in MB."""
    for line in Path(f"/proc/{pid}/status").read_text().splitlines():
        if line.startswith("VmRSS"):
            return int(line.split()[1]) / 1024
    return float("nan")


def measure(seconds: int, tabs: int) -> bool:
    """Print the figures; give whether all are within the limits."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    address = f"http://127.0.0.1:{port}"
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
        stdout=subprocess.DEVNULL,
    )
    try:
        for _ in range(600):
            try:
                with urllib.request.urlopen(f"{address}/_dash-dependencies", timeout=5) as answer:
                    shapes = {
                        each["output"]: tuple(
                            [given["id"] for given in each[kind]] for kind in ("inputs", "state")
                        )
                        for each in json.load(answer)
                    }
                break
            except OSError:
                time.sleep(0.1)
        warm = Tab(address, 0, 0, shapes)
        for kind in ("slider", "breadth", "cell at rest", "pair", "file"):
            warm.ask(kind)
        until = time.monotonic() + seconds
        clients = [Tab(address, seed + 1, until, shapes) for seed in range(tabs)]
        for client in clients:
            client.start()
        held = []
        while time.monotonic() < until:
            time.sleep(1)
            held.append(memory(running.pid))
        for client in clients:
            client.join(90)
    finally:
        running.terminate()
        running.wait(20)
    errors = [error for client in clients for error in client.errors]
    kinds: dict[str, list[float]] = {}
    for client in clients:
        for kind, times in client.times.items():
            kinds.setdefault(kind, []).extend(times)
    every = sorted(t for kind, times in kinds.items() if kind != "search" for t in times)
    print(f"{'asked for':<16}{'times':>7}{'median ms':>11}{'p95 ms':>9}{'most ms':>9}")
    for kind, times in [*sorted(kinds.items()), ("all but search", every)]:
        ordered = sorted(times)
        p95 = ordered[int(0.95 * (len(ordered) - 1))]
        print(
            f"{kind:<16}{len(ordered):>7}{1000 * statistics.median(ordered):>11.0f}"
            f"{1000 * p95:>9.0f}{1000 * ordered[-1]:>9.0f}"
        )
    p95 = every[int(0.95 * (len(every) - 1))]
    third = statistics.median(held[len(held) // 3 : len(held) // 3 + 5])
    end = statistics.median(held[-5:])
    print(f"memory: {held[0]:.0f} MB at first, {third:.0f} after a third, {end:.0f} at the end")
    print(f"errors: {len(errors)}{'; ' + errors[0] if errors else ''}")
    held_all = not errors and p95 <= LIMIT and end <= FLAT * third
    print("within the limits" if held_all else "NOT within the limits")
    return held_all


def main() -> None:
    """Read the flags and measure."""
    flags = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    flags.add_argument("--seconds", type=int, default=60)
    flags.add_argument("--tabs", type=int, default=8)
    asked = flags.parse_args()
    sys.exit(0 if measure(asked.seconds, asked.tabs) else 1)


if __name__ == "__main__":
    main()
