"""Caches that are emptied or broken while they are used: every answer is there, and the same."""

import os
import subprocess
import sys
import threading
from pathlib import Path

import pytest
from flask import Flask

from app.compute import Bridge
from app.memory import server_cache
from app.state import ViewState
from tests.app.economies import planted, workspace


def test_a_cache_that_is_lost_while_running_changes_no_answer():
    cache = server_cache(Flask("lost"))
    bridge = Bridge(workspace(*planted()), cache)
    wanted = {
        shift: Bridge(workspace(*planted()))
        .cell(ViewState(driver="Money", response="Prices", shift=shift))
        .slope
        for shift in range(-3, 4)
    }
    over = threading.Event()
    found: list[tuple[int, float]] = []
    failed: list[Exception] = []

    def empty() -> None:
        while not over.is_set():
            cache.clear()

    def ask() -> None:
        try:
            for turn in range(70):
                shift = turn % 7 - 3
                state = ViewState(driver="Money", response="Prices", shift=shift)
                found.append((shift, bridge.cell(state).slope))
        except Exception as error:
            failed.append(error)

    emptying = threading.Thread(target=empty)
    asking = [threading.Thread(target=ask) for _ in range(4)]
    for thread in (emptying, *asking):
        thread.start()
    for thread in asking:
        thread.join()
    over.set()
    emptying.join()
    assert failed == []
    assert len(found) == 280
    assert all(slope == wanted[shift] for shift, slope in found)


BROKEN = """
import importlib, sys
from pathlib import Path
import numpy as np
import analytics.hac_loop as loop

def filled():
    rng = np.random.default_rng(1)
    x, y = rng.normal(size=(2, 1, 60))
    out = np.full((4, 1, 2), np.nan)
    loop.fill_cells(x, y, np.array([60]), np.array([0, 3]), np.array([4]), 0, 1, out)
    return out

usual = filled()
kept = [path for path in Path(sys.argv[1]).rglob("*.nb?")]
assert len(kept) >= 2, kept
for path in kept:
    path.write_bytes(b'half')
importlib.reload(loop)
assert np.array_equal(filled(), usual)
"""


@pytest.mark.long
def test_a_broken_copy_of_the_compiled_loop_is_made_anew(tmp_path):
    done = subprocess.run(
        [sys.executable, "-c", BROKEN, str(tmp_path)],
        cwd=Path(__file__).resolve().parents[2],
        env={**os.environ, "NUMBA_CACHE_DIR": str(tmp_path)},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr[-800:]
