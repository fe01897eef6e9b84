"""Results by explicit key: made once, whoever asks, in a dict or in the server's cache."""

import threading
import time

import numpy as np
import pytest
from flask import Flask

from app.memory import Memory, server_cache
from tests.app.threads import at_once


def of_the_server():
    return Memory(server_cache(Flask("test")))


@pytest.fixture(params=[Memory, of_the_server])
def memory(request):
    return request.param()


def test_nothing_is_found_before_it_was_made(memory):
    assert memory.found("a") is None
    assert memory.once("a", lambda: [1, 2]) == [1, 2]
    assert memory.found("a") == [1, 2]
    assert memory.found("b") is None


def test_what_is_kept_is_not_made_again(memory):
    made = []
    for _ in range(3):
        assert memory.once("a", lambda: made.append(1) or "first") == "first"
    assert memory.once("a", lambda: "second") == "first"
    assert made == [1]


@pytest.mark.parametrize("value", ["", 0, False, [], 0.0])
def test_a_result_that_counts_as_false_is_kept_too(memory, value):
    made = []
    for _ in range(2):
        assert memory.once("a", lambda: made.append(1) or value) == value
    assert made == [1]


def test_two_memories_know_nothing_of_each_other():
    one, two = of_the_server(), of_the_server()
    one.once("a", lambda: 1)
    assert two.found("a") is None


def test_many_threads_make_a_result_once(memory):
    made = []

    def make():
        made.append(1)
        time.sleep(0.05)
        return len(made)

    assert at_once(*[lambda: memory.once("a", make)] * 8) == [1] * 8
    assert made == [1]


def test_another_key_does_not_wait(memory):
    """A slow result keeps only those waiting who want it."""
    began, go_on = threading.Event(), threading.Event()

    def slow():
        began.set()
        assert go_on.wait(10)
        return "slow"

    thread = threading.Thread(target=memory.once, args=("slow", slow))
    thread.start()
    assert began.wait(10)
    assert memory.once("quick", lambda: "quick") == "quick"
    go_on.set()
    thread.join(10)
    assert memory.found("slow") == "slow"


def test_one_result_may_ask_for_another(memory):
    assert memory.once("a", lambda: memory.once("b", lambda: 2) + 1) == 3
    assert memory.found("b") == 2


def test_a_failure_is_raised_to_each_kept_by_none_and_locks_nothing(memory):
    def fail():
        raise ValueError("no")

    for many in (1, 4):
        met = at_once(*[lambda: memory.once("a", fail)] * many)
        assert [(type(error), str(error)) for error in met] == [(ValueError, "no")] * many
    assert memory.found("a") is None
    assert memory._locks == {}
    assert memory.once("a", lambda: 1) == 1
    assert memory._locks == {}


def test_the_object_that_was_kept_comes_back_and_cannot_be_written(memory):
    made = np.zeros(3)
    made.flags.writeable = False
    assert memory.once("a", lambda: made) is made
    found = memory.found("a")
    assert found is made
    with pytest.raises(ValueError, match="read-only"):
        found[0] = 1.0


def test_the_oldest_give_way_when_there_are_many(monkeypatch):
    monkeypatch.setattr("app.memory.MOST_KEPT", 3)
    memory = of_the_server()
    for number in range(10):
        memory.once(str(number), lambda number=number: number)
    kept = [number for number in range(10) if memory.found(str(number)) is not None]
    assert kept[-3:] == [7, 8, 9]
    assert len(kept) <= 4  # room is made before the next is kept
