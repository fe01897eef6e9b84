"""Workers of a scan: the same numbers to the bit whoever does them, and nothing lost with one."""

import contextlib
import os
import signal
import socket
import subprocess
import sys
import time
from concurrent.futures import Future
from concurrent.futures.process import BrokenProcessPool
from pathlib import Path

import pytest

from analytics.panel import pair_scan
from app.scan import task, workers
from app.scan.task import ScanError, scan_one, versions
from app.scan.workers import cluster_pool, local_pool, scanned
from tests.app.panels import DRAWS, panel_pairs

ROOT = Path(__file__).resolve().parents[2]
SLOPES = {f"Economy {i}": 0.2 * (i % 4) for i in range(16)}


@pytest.fixture(scope="module")
def pairs():
    return panel_pairs(SLOPES)


@pytest.fixture(scope="module")
def alone(pairs):
    """What each pair gives in this process."""
    return {pair.names: repr(pair_scan(pair, **DRAWS)) for pair in pairs}


def by_names(scans):
    return {scan.names: repr(scan) for scan in scans}


# Processes on this machine -------------------------------------------------------------------


def test_one_process_gives_the_same_to_the_bit_and_ends_with_the_scan(pairs, alone):
    kept = {name: os.environ.get(name) for name in workers.ONE_THREAD}
    pools = []

    @contextlib.contextmanager
    def watched():
        with local_pool(1)() as pool:
            pools.append(pool)
            yield pool

    scans = scanned(pairs, DRAWS, watched)
    first, second = next(scans), next(scans)
    (process,) = pools[0]._processes.values()
    scans.close()  # as Ctrl-C does
    assert process.exitcode is not None
    assert [repr(one) for one in (first, second)] == [alone[one.names] for one in (first, second)]
    assert {name: os.environ.get(name) for name in workers.ONE_THREAD} == kept


def test_two_processes_give_the_same_to_the_bit_though_one_is_killed(pairs, alone):
    pools = []

    @contextlib.contextmanager
    def watched():
        with local_pool(2)() as pool:
            pools.append(pool)
            yield pool

    scans = scanned(pairs, DRAWS, watched)
    found = [next(scans)]
    os.kill(next(iter(pools[0]._processes)), signal.SIGKILL)
    found += scans
    assert by_names(found) == alone
    assert len(found) == len(pairs)  # none twice
    assert len(pools) == 2


class DyingPool:
    """Workers that take pairs and are gone before one is done, as where memory is short."""

    def submit(self, *_words):
        future = Future()
        future.set_exception(BrokenProcessPool("ended abruptly"))
        return future


def test_processes_that_die_again_and_again_are_given_up_with_a_sentence(pairs):
    made = []

    @contextlib.contextmanager
    def dying():
        made.append(1)
        yield DyingPool()

    with pytest.raises(ScanError, match="3 times running one was ended before a pair was done"):
        list(scanned(pairs[:2], DRAWS, dying))
    assert len(made) == workers.TRIES


def test_a_worker_of_another_version_is_refused(pairs, monkeypatch):
    theirs = versions()
    monkeypatch.setattr(task, "software_version", lambda: "99.0")
    with pytest.raises(ScanError, match=r"every worker must run Pricewake .*, but one runs.*99\.0"):
        scan_one(pairs[0], DRAWS, theirs)


# A Dask scheduler and its workers ------------------------------------------------------------


@contextlib.contextmanager
def started(*words):
    """Start ``dask`` as a program of its own, and end it."""
    program = subprocess.Popen(
        [sys.executable, "-m", "dask", *words],
        cwd=ROOT,
        env=os.environ | {"PYTHONPATH": str(ROOT), "OPENBLAS_NUM_THREADS": "1"},
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    try:
        yield program
    finally:
        program.kill()
        program.wait()


def free_port():
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return probe.getsockname()[1]


def answers(port):
    with contextlib.suppress(OSError), socket.create_connection(("127.0.0.1", port), 0.2):
        return True
    return False


@contextlib.contextmanager
def cluster(number):
    """Start a scheduler and some workers on the loopback address; gives address and workers."""
    port = free_port()
    local = ("--host", "127.0.0.1", "--no-dashboard")
    address = f"tcp://127.0.0.1:{port}"
    with contextlib.ExitStack() as stack:
        stack.enter_context(started("scheduler", *local, "--port", str(port)))
        hands = [
            stack.enter_context(started("worker", address, *local, "--nthreads", "1", "--no-nanny"))
            for _ in range(number)
        ]
        end = time.monotonic() + 60
        while not answers(port) and time.monotonic() < end:
            time.sleep(0.1)
        yield address, hands


def test_a_cluster_gives_the_same_to_the_bit_and_a_killed_worker_loses_nothing(pairs, alone):
    pytest.importorskip("distributed")
    with cluster(2) as (address, hands):
        scans = scanned(pairs, DRAWS, cluster_pool(address, patience=60))
        found = [next(scans)]
        hands[0].send_signal(signal.SIGKILL)
        found += scans
        assert hands[0].wait(5) == -signal.SIGKILL
        assert hands[1].poll() is None
        assert by_names(found) == alone
        assert len(found) == len(pairs)


def test_a_scheduler_without_workers_is_named(pairs):
    pytest.importorskip("distributed")
    with (
        cluster(0) as (address, _),
        pytest.raises(ScanError, match="must have a worker, but none came within 1 seconds"),
    ):
        list(scanned(pairs[:1], DRAWS, cluster_pool(address, patience=1)))


@pytest.mark.parametrize("address", ["tcp://127.0.0.1:9", "nonsense:nonsense"])
def test_a_cluster_that_cannot_be_reached_is_one_sentence(pairs, address):
    pytest.importorskip("distributed")
    start = time.monotonic()
    with pytest.raises(ScanError, match=f"nothing answered at '{address}' within 1 seconds"):
        list(scanned(pairs[:1], DRAWS, cluster_pool(address, patience=1)))
    assert time.monotonic() - start < 30


def test_without_dask_a_sentence_says_what_is_missing(pairs, monkeypatch):
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(ScanError, match=r"comes with pricewake\[cluster\]"):
        list(scanned(pairs[:1], DRAWS, cluster_pool("tcp://127.0.0.1:9")))
