"""The workers of a scan: processes on this machine, or a Dask scheduler's; one way through both."""

import contextlib
import logging
import multiprocessing
import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import (
    BrokenExecutor,
    CancelledError,
    Executor,
    Future,
    ProcessPoolExecutor,
    as_completed,
)
from contextlib import AbstractContextManager, contextmanager
from typing import Any

from analytics.panel import PairScan, PanelPair
from app.scan.task import ScanError, begin_worker, scan_one, versions

Pool = Callable[[], AbstractContextManager[Executor]]
PATIENCE = 5  # seconds that a scheduler has to answer
TRIES = 3  # pools of processes that may break, one after another, without a pair being done
ONE_THREAD = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")


def usual_processes() -> int:
    """Return how many processors this program may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def scanned(pairs: Sequence[PanelPair], draws: dict[str, Any], pool: Pool) -> Iterator[PairScan]:
    """Search pairs in a pool of workers, and give each as it comes back.

    A worker that dies loses nothing but its own pair, which is done again.

    Raises
    ------
    ScanError
        The workers cannot be reached, run other versions, or die again and again.
    """
    left = {pair.names: pair for pair in pairs}
    broken = 0
    while left:
        before = len(left)
        for scan in _one_round(tuple(left.values()), draws, pool):
            del left[scan.names]
            yield scan
        broken = 0 if len(left) < before else broken + 1
        if broken == TRIES:
            one = next(iter(left))
            raise ScanError(
                f"processes of the scan must live, but {TRIES} times running one was ended before"
                f" a pair was done; the first pair left is {' / '.join(one)}. Is memory short?"
            )


def _one_round(pairs: Sequence[PanelPair], draws: dict[str, Any], pool: Pool) -> Iterator[PairScan]:
    """Give what one pool brings back; where it breaks, the pairs it did not do are missing."""
    expected = versions()
    with pool() as workers:
        futures: list[Future[PairScan]] = []
        with contextlib.suppress(BrokenExecutor):  # while they are handed out
            for pair in pairs:
                futures.append(workers.submit(scan_one, pair, draws, expected))
        for future in as_completed(futures):
            with contextlib.suppress(BrokenExecutor):
                yield future.result()


def local_pool(processes: int) -> Pool:
    """Return a maker of pools of processes on this machine, each on one thread."""

    @contextmanager
    def pool() -> Iterator[Executor]:
        kept = {name: os.environ.get(name) for name in ONE_THREAD}
        os.environ.update(dict.fromkeys(ONE_THREAD, "1"))  # read when a process starts
        workers = ProcessPoolExecutor(
            processes, multiprocessing.get_context("spawn"), initializer=begin_worker
        )
        try:
            yield workers
        finally:
            workers.shutdown(wait=True, cancel_futures=True)
            _restore(kept)

    return pool


def _restore(kept: Mapping[str, str | None]) -> None:
    for name, value in kept.items():
        if value is None:
            os.environ.pop(name, None)
        else:
            os.environ[name] = value


def cluster_pool(address: str, patience: float = PATIENCE) -> Pool:
    """Return a maker of pools that are the workers of a Dask scheduler.

    The scheduler gives a dead worker's pairs to another one by itself.
    """

    @contextmanager
    def pool() -> Iterator[Executor]:
        client = _client(address, patience)
        workers = client.get_executor(pure=False)
        try:
            yield workers
        except ScanError:
            raise
        except CancelledError:
            raise ScanError(f"the scheduler at {address!r} has gone away") from None
        except Exception as error:
            raise ScanError(_explained(error)) from error
        finally:
            with contextlib.suppress(Exception):
                workers.shutdown(wait=False)
            with contextlib.suppress(Exception):
                client.close(timeout=2)

    return pool


def _client(address: str, patience: float) -> Any:
    """Connect to a scheduler that has a worker.

    Raises
    ------
    ScanError
        Dask is not installed, nothing answers, or there is no worker.
    """
    try:
        from distributed import Client
    except ImportError:
        raise ScanError(
            "--cluster needs the package 'distributed', which comes with pricewake[cluster]"
        ) from None
    logging.getLogger("distributed").setLevel(logging.CRITICAL)  # one sentence is enough

    class Connection(Client):  # type: ignore[misc]
        """A client that, failing to connect, is dropped without waiting for what never came."""

        def __del__(self) -> None:
            pass

    try:
        client = Connection(address, timeout=patience, set_as_default=False)
    except (OSError, ValueError):  # a time-out is an OSError; an unknown scheme a ValueError
        raise ScanError(
            f"--cluster must be the address of a scheduler, such as tcp://192.0.2.7:8786, but"
            f" nothing answered at {address!r} within {patience:g} seconds"
        ) from None
    try:
        client.wait_for_workers(1, timeout=patience)
    except OSError:
        client.close(timeout=1)
        raise ScanError(
            f"the scheduler at {address!r} must have a worker, but none came within"
            f" {patience:g} seconds"
        ) from None
    return client


def _explained(error: Exception) -> str:
    """Say in one sentence why the cluster gave no result."""
    if type(error).__name__ == "KilledWorker":
        return "a pair of the scan ended one worker after another; is their memory short?"
    return (
        "scheduler and workers must have the same Pricewake installed, but a pair could not be"
        f" searched: {type(error).__name__}: {error}"
    )
