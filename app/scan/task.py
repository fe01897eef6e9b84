"""One pair of a scan as it runs in a worker, here or on another machine."""

import multiprocessing
import os
import signal
import threading
from importlib.metadata import version
from typing import Any

from analytics.panel import PairScan, PanelPair, pair_scan
from app.places import software_version


class ScanError(ValueError):
    """A scan that cannot go on; the text is one sentence for the user."""


def versions() -> tuple[str, str, str]:
    """Return the versions that numbers depend on: Pricewake, numpy, scipy."""
    return software_version(), version("numpy"), version("scipy")


def scan_one(pair: PanelPair, draws: dict[str, Any], expected: tuple[str, str, str]) -> PairScan:
    """Search one pair on one thread.

    Raises
    ------
    ScanError
        This worker runs other versions than the program that asks.
    """
    if versions() != expected:
        ours, theirs = (
            ", ".join(f"{name} {number}" for name, number in zip(_PROGRAMS, each, strict=True))
            for each in (expected, versions())
        )
        raise ScanError(f"every worker must run {ours}, but one runs {theirs}")
    return pair_scan(pair, **draws, threads=1)


_PROGRAMS = ("Pricewake", "numpy", "scipy")


def begin_worker() -> None:
    """Leave Ctrl-C to the program that asks, and end with it if it is killed."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    parent = multiprocessing.parent_process()
    if parent is not None:
        threading.Thread(target=lambda: (parent.join(), os._exit(1)), daemon=True).start()
