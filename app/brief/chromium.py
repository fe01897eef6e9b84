"""The system's Chromium, where there is one: found, kept off the network, and asked for a PDF."""

import os
import shutil
import signal
import subprocess
import tempfile
from pathlib import Path

NAMES = (
    "chromium",
    "chromium-browser",
    "google-chrome",
    "google-chrome-stable",
    "chrome",
    "msedge",
    "microsoft-edge",
)
NOWHERE = "127.0.0.1:9"  # a proxy that nothing listens on: what would leave the machine cannot
PATIENCE = 60.0  # seconds for one PDF


class NoChromiumError(ValueError):
    """There is none, or it did not do its work; the text is one sentence."""


def chromium() -> str | None:
    """Return where a Chromium is: the one that ``BROWSER_PATH`` names, else the system's."""
    named = os.environ.get("BROWSER_PATH", "")
    if named:
        return named if Path(named).is_file() else None
    return next((path for path in map(shutil.which, NAMES) if path), None)


def printed(page: Path, proxy: str = NOWHERE) -> bytes:
    """Return a page as PDF, printed by a Chromium that cannot reach the network.

    Raises
    ------
    NoChromiumError
        There is no Chromium, or it failed or took too long.
    """
    path = chromium()
    if path is None:
        raise NoChromiumError("no PDF was made: no Chromium was found on this machine")
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as folder:
        target = Path(folder) / "brief.pdf"
        command = [
            path,
            "--headless=new",
            "--disable-gpu",
            "--disable-extensions",
            "--disable-background-networking",
            "--disable-component-update",
            "--disable-sync",
            "--no-first-run",
            "--no-default-browser-check",
            f"--proxy-server={proxy}",
            f"--user-data-dir={folder}/profile",
            "--no-pdf-header-footer",
            "--virtual-time-budget=30000",
            f"--print-to-pdf={target}",
            *(["--no-sandbox"] if getattr(os, "geteuid", lambda: 1)() == 0 else []),
            page.resolve().as_uri(),
        ]
        try:
            _run(command)
        except OSError as error:
            raise NoChromiumError(
                f"no PDF was made: Chromium did not start ({error.strerror})"
            ) from error
        if not target.is_file() or not target.read_bytes().startswith(b"%PDF"):
            raise NoChromiumError("no PDF was made: Chromium ended without writing one")
        return target.read_bytes()


def _run(command: list[str]) -> None:
    """Run a command to its end, or end it and all it started when its time is over."""
    process = subprocess.Popen(
        command,
        stdin=subprocess.DEVNULL,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
        start_new_session=True,
    )
    try:
        process.wait(PATIENCE)
    except subprocess.TimeoutExpired:
        raise NoChromiumError(
            f"no PDF was made: Chromium took longer than {PATIENCE:.0f} seconds"
        ) from None
    finally:
        if process.poll() is None:
            if hasattr(os, "killpg"):
                os.killpg(process.pid, signal.SIGKILL)
            else:
                process.kill()
            process.wait()
