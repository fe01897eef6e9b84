"""Build the wheel, install it alone, and run the command from an empty folder.

Shows that the wheel carries assets and demo data: nothing of the checkout is on the path.
Run with the project's interpreter, which has the dependencies::

    python -m tests.bench.wheel
"""

import json
import os
import re
import subprocess
import sys
import tempfile
import threading
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
NEEDED = (
    "app/bundled/assets/tokens.css",
    "app/bundled/assets/page.css",
    "app/bundled/assets/page-lag.js",
    "app/bundled/data_samples/economy_monthly.csv",
    "app/bundled/data_samples/series.csv",
)
SERVED = ("/lag", "/data", "/assets/page.css", "/assets/tokens.css", "/export/lag/overlay.csv")


class Installed:
    """The wheel alone in a folder, and an empty folder to run it from."""

    def __init__(self, folder: Path) -> None:
        self.target, self.empty = folder / "target", folder / "empty"
        self.empty.mkdir()
        pip = (sys.executable, "-m", "pip", "--disable-pip-version-check", "-q")
        subprocess.run((*pip, "wheel", "--no-deps", str(ROOT), "-w", str(folder)), check=True)
        (self.wheel,) = folder.glob("*.whl")
        subprocess.run(
            (*pip, "install", "--no-deps", "--target", str(self.target), str(self.wheel)),
            check=True,
        )

    def start(self, *words: str) -> "subprocess.Popen[str]":
        """Start python with the wheel first on its path and the current folder not on it."""
        return subprocess.Popen(
            (sys.executable, "-P", *words),
            cwd=self.empty,
            stdin=subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            text=True,
            encoding="utf-8",
            env={
                **os.environ,
                "PYTHONPATH": str(self.target),
                "PYTHONSAFEPATH": "1",
                "PYTHONUTF8": "1",
                "PYTHONUNBUFFERED": "1",
            },
        )

    def output(self, *words: str) -> str:
        """Run to the end; any other exit status than 0 is an error."""
        process = self.start(*words)
        out, _ = process.communicate(timeout=300)
        if process.returncode:
            raise SystemExit(f"{' '.join(words)} ended with {process.returncode}")
        return out

    @contextmanager
    def served(self) -> Iterator[str]:
        """Serve the dashboard; yield its address."""
        process = self.start("-m", "app", "--no-browser", "--workspace", ":memory:")
        watchdog = threading.Timer(120, process.kill)
        watchdog.start()
        try:
            assert process.stdout is not None
            for line in process.stdout:
                found = re.search(r"http://127\.0\.0\.1:\d+", line)
                if found:
                    yield found[0]
                    break
            else:
                raise SystemExit("the server ended without naming its address")
        finally:
            watchdog.cancel()
            process.terminate()
            process.wait(timeout=30)


def check(truth: bool, what: str) -> None:
    """Print what holds; end where it does not."""
    if not truth:
        raise SystemExit(f"wheel: {what}: no")
    print(f"wheel: {what}: yes", flush=True)


def main() -> None:
    """Run all checks."""
    with tempfile.TemporaryDirectory() as folder:
        wheel = Installed(Path(folder))
        absent = [name for name in NEEDED if not (wheel.target / name).is_file()]
        check(not absent, f"files inside {wheel.wheel.name} ({', '.join(absent) or 'all'})")
        tests = [p for p in wheel.target.iterdir() if p.name == "tests"]
        check(not tests, "no tests inside")
        where = wheel.output("-c", "import app, analytics; print(app.__file__, analytics.__file__)")
        check(where.count(str(wheel.target)) == 2, "imported from the wheel, not the checkout")
        cell = json.loads(wheel.output("-m", "app", "lag", "--json"))["cell"]
        check(cell["n"] > 700 and cell["slope"] > 0, f"lag --json, cell of {cell['n']} months")
        series = json.loads(wheel.output("-m", "app", "inspect", "--json"))["series"]
        check(len(series) > 10, f"inspect --json, {len(series)} series")
        with wheel.served() as address:
            for path in SERVED:
                with urllib.request.urlopen(address + path, timeout=60) as answer:
                    check(answer.status == 200 and bool(answer.read()), f"serves {path}")
        check(not list(wheel.empty.iterdir()), "nothing left in the folder it ran in")


if __name__ == "__main__":
    main()
