"""The cache is emptied again and again while pages ask: every answer is there, and the same."""

import threading

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
