"""Results by explicit key: made once, whoever asks, in a dict or in the server's cache."""

import threading

import pytest
from flask import Flask
from flask_caching import Cache

from app.memory import Memory


def of_the_server():
    server = Flask("test")
    return Memory(Cache(server, config={"CACHE_TYPE": "SimpleCache", "CACHE_DEFAULT_TIMEOUT": 0}))


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
    made, given = [], []
    start = threading.Barrier(8)

    def ask():
        start.wait(10)
        given.append(memory.once("a", lambda: made.append(1) or len(made)))

    threads = [threading.Thread(target=ask) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(10)
    assert made == [1]
    assert given == [1] * 8


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


def test_a_failure_is_not_kept_and_locks_nothing(memory):
    def fail():
        raise ValueError("no")

    for _ in range(2):
        with pytest.raises(ValueError, match="no"):
            memory.once("a", fail)
    assert memory.found("a") is None
    assert memory.once("a", lambda: 1) == 1
    assert memory._locks == {}
