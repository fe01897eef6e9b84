"""Chunked work: the same result in any order, from any number of tabs, after any loss."""

from dataclasses import dataclass, field
from functools import partial

import numpy as np
import pytest
from flask import Flask
from flask_caching import Cache

from analytics.search import lag_search
from analytics.shiftset import shift_set
from app.compute import Bridge
from app.jobs import MOST_KEPT, PATIENCE, Jobs, Progress, Work
from app.lag.evidence import search_work, shift_set_work
from app.memory import Memory
from app.state import ViewState
from tests.app.economies import LAG, planted, workspace
from tests.app.threads import at_once

STATE = ViewState(
    driver="Money", response="Prices", window=3, shift=LAG,
    windows="1:6", shifts="-6:20", surrogates=1100, seed=4,
)  # fmt: skip


@dataclass(frozen=True)
class Plan:
    chunks: int


@dataclass
class Counted:
    """Work that counts what it is asked to do; each chunk is drawn from the key and its number."""

    key: str
    chunks: int = 5
    plans: int = 0
    results: int = 0
    done: list[int] = field(default_factory=list)

    def work(self):
        return Work(self.key, self._plan, self._chunk, self._result)

    def _plan(self):
        self.plans += 1
        return Plan(self.chunks)

    def _chunk(self, plan, index):
        assert plan == Plan(self.chunks)
        self.done.append(index)
        seed = [sum(self.key.encode()), index]
        return float(np.random.default_rng(seed).standard_normal())

    def _result(self, plan, chunks):
        assert plan == Plan(self.chunks)
        self.results += 1
        return chunks


def undisturbed(key, chunks=5):
    return Jobs(Memory()).complete(Counted(key, chunks).work())


def memory_of_the_server():
    server = Flask("test")
    return Memory(Cache(server, config={"CACHE_TYPE": "SimpleCache", "CACHE_DEFAULT_TIMEOUT": 0}))


# Step by step --------------------------------------------------------------------------------


@pytest.mark.parametrize("memory", [Memory, memory_of_the_server])
def test_each_step_does_one_chunk_and_the_last_gives_the_result(memory):
    jobs, counted = Jobs(memory()), Counted("a")
    seen = [jobs.step(counted.work()) for _ in range(5)]
    assert [(p.done, p.total) for p in seen] == [(k, 5) for k in range(1, 6)]
    assert [p.result for p in seen[:-1]] == [None] * 4
    assert len(seen[-1].result) == 5
    assert counted.done == [0, 1, 2, 3, 4]
    assert (counted.plans, counted.results) == (1, 1)


@pytest.mark.parametrize("memory", [Memory, memory_of_the_server])
def test_a_finished_job_is_remembered_and_not_done_again(memory):
    jobs, counted = Jobs(memory()), Counted("a")
    assert jobs.remembered(counted.work()) is None
    jobs.step(counted.work())
    assert jobs.remembered(counted.work()) is None
    result = jobs.complete(counted.work())
    assert jobs.remembered(counted.work()) == result
    again = jobs.step(counted.work())
    assert again.result == result
    assert again.done == again.total
    assert jobs.complete(counted.work()) == result
    assert len(counted.done) == 5
    assert counted.plans == 1
    assert jobs._jobs == {}


def test_work_of_one_chunk_is_done_in_one_step():
    assert Jobs(Memory()).step(Counted("a", 1).work()) == Progress(1, 1, undisturbed("a", 1))


def test_the_search_by_chunks_is_the_loop_of_analytics():
    here = Bridge(workspace(*planted(lag=LAG)))
    work = search_work(STATE, here)
    seen = []
    while not seen or seen[-1].result is None:
        seen.append(here.jobs.step(work))
    assert [p.done for p in seen] == [1, 2, 3, 4, 5]  # 250 surrogates a chunk
    found, pair = seen[-1].result, here.pair(STATE)
    whole = lag_search(
        pair.driver.values, pair.response.values,
        windows=range(1, 7), shifts=range(-6, 21), surrogates=1100, seed=4,
    )  # fmt: skip
    for name in ("p", "p_one_sided", "best_window", "best_shift", "best_correlation", "method"):
        assert getattr(found, name) == getattr(whole, name)
    for name in ("p_cell", "z", "correlation"):
        np.testing.assert_array_equal(getattr(found, name), getattr(whole, name))


def test_the_shift_set_by_chunks_is_the_loop_of_analytics():
    here = Bridge(workspace(*planted(lag=LAG)))
    found, pair = here.jobs.complete(shift_set_work(STATE, here)), here.pair(STATE)
    whole = shift_set(
        pair.driver.values, pair.response.values, window=3, shifts=range(-6, 21), seed=4
    )
    np.testing.assert_array_equal(found.shifts, whole.shifts)
    np.testing.assert_array_equal(found.p_by_shift, whole.p_by_shift)


# Tabs ----------------------------------------------------------------------------------------


def tabs(jobs, *works):
    """Let a thread for each of some works ask until it has the result; the results."""
    results = at_once(*(partial(jobs.complete, work) for work in works), seconds=60)
    assert not any(isinstance(result, Exception) for result in results)
    return results


@pytest.mark.parametrize("memory", [Memory, memory_of_the_server])
def test_tabs_that_ask_for_the_same_share_the_chunks(memory):
    for round_ in range(20):
        jobs, counted = Jobs(memory()), Counted(f"round {round_}", 8)
        results = tabs(jobs, *[counted.work()] * 4)
        assert results == [undisturbed(f"round {round_}", 8)] * 4
        assert sorted(counted.done) == list(range(8)), "each chunk was done once"
        assert counted.results == 1
        assert counted.plans <= 4
        assert jobs._jobs == {}


def test_a_tab_that_comes_late_goes_on_where_the_first_is():
    jobs, counted = Jobs(Memory()), Counted("a", 6)
    jobs.step(counted.work())
    jobs.step(counted.work())
    assert jobs.step(counted.work()).done == 3  # whoever asks


def test_tabs_with_different_work_do_not_disturb_each_other():
    jobs, works = Jobs(Memory()), [Counted(key, 7) for key in "abcdef"]
    assert tabs(jobs, *[w.work() for w in works]) == [undisturbed(key, 7) for key in "abcdef"]
    assert jobs._jobs == {}


def test_a_tab_that_planned_while_another_finished_does_nothing_twice():
    """The last moment: found nothing in memory, and before the job is looked up it is done."""
    jobs, counted = Jobs(Memory()), Counted("a", 3)

    class Late(Memory):
        looks = 0

        def found(self, key):
            self.looks += 1
            if self.looks == 1:
                Jobs.complete(other, counted.work())
                return None
            return super().found(key)

    late = Late()
    other, jobs = Jobs(late), Jobs(late)
    late.looks = 1  # the other tab looks without delay ...
    first = other.step(counted.work())
    assert first.done == 1
    late.looks = 0  # ... and ends while this one has just looked
    progress = jobs.step(counted.work())
    assert progress.result == undisturbed("a", 3)
    assert counted.done == [0, 1, 2]
    assert jobs._jobs == {}


# Memory --------------------------------------------------------------------------------------


def test_no_more_jobs_are_kept_than_the_most():
    jobs = Jobs(Memory())
    for place in range(3 * MOST_KEPT):
        jobs.step(Counted(f"job {place}").work())
        assert len(jobs._jobs) == min(place + 1, MOST_KEPT)


def test_a_job_that_was_forgotten_is_done_again_with_the_same_result():
    jobs, first = Jobs(Memory()), Counted("first")
    jobs.step(first.work())
    jobs.step(first.work())
    for place in range(PATIENCE + MOST_KEPT):
        jobs.step(Counted(f"other {place}").work())
    assert "first" not in jobs._jobs
    assert jobs.complete(first.work()) == undisturbed("first")
    assert first.done == [0, 1, 0, 1, 2, 3, 4]


@pytest.mark.parametrize("tabs_open", [MOST_KEPT, MOST_KEPT + 1, 2 * MOST_KEPT, 12])
def test_tabs_that_take_turns_all_come_to_an_end(tabs_open):
    """However many there are, they do not forget each other's work for ever."""
    jobs, works = Jobs(Memory()), [Counted(f"tab {k}", 8) for k in range(tabs_open)]
    waiting, rounds = list(works), 0
    while waiting:
        waiting = [w for w in waiting if jobs.step(w.work()).result is None]
        rounds += 1
        assert rounds <= 8 * tabs_open
    for counted in works:
        assert jobs.remembered(counted.work()) == undisturbed(counted.key, 8)
    wasted = sum(len(w.done) for w in works) - 8 * tabs_open
    assert wasted <= 8 * tabs_open * max(0, tabs_open - MOST_KEPT)
    if tabs_open == MOST_KEPT:
        assert wasted == 0


def test_jobs_left_alone_make_room():
    """Whoever drags leaves jobs behind; two tabs at work then still share the room."""
    jobs = Jobs(Memory())
    for place in range(MOST_KEPT):
        jobs.step(Counted(f"left {place}", 9).work())
    pair = [Counted("one", 2 * PATIENCE), Counted("two", 2 * PATIENCE)]
    waiting, steps = list(pair), 0
    while waiting:
        waiting = [w for w in waiting if jobs.step(w.work()).result is None]
        steps += 1
        assert steps <= 2 * PATIENCE + PATIENCE
    assert [k for k in jobs._jobs if k.startswith("left")]


# Failures ------------------------------------------------------------------------------------


def test_a_plan_that_is_refused_says_why_and_leaves_nothing():
    memory = Memory()
    jobs = Jobs(memory)

    def refuse():
        raise ValueError("a search must have at least 60 periods, but got 50")

    work = Work("refused", refuse, lambda plan, index: index, lambda plan, chunks: chunks)
    for ask in (jobs.step, jobs.complete, jobs.step):
        with pytest.raises(ValueError, match="at least 60 periods"):
            ask(work)
    assert jobs._jobs == {}
    assert jobs.remembered(work) is None


def test_a_chunk_that_fails_is_tried_again_and_the_rest_is_kept():
    jobs, counted = Jobs(Memory()), Counted("a")
    failing = [True]

    def chunk(plan, index):
        if index == 2 and failing.pop():
            failing.append(False)
            raise ValueError("no")
        return counted._chunk(plan, index)

    work = Work("a", counted._plan, chunk, counted._result)
    jobs.step(work)
    jobs.step(work)
    with pytest.raises(ValueError, match="no"):
        jobs.step(work)
    assert jobs.step(work).done == 3
    assert jobs.complete(work) == undisturbed("a")
    assert counted.done == [0, 1, 2, 3, 4]
