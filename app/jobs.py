"""Long work as a sequence of short chunks that are asked for one after another.

Progress is what has come back; to cancel is not to ask again. A chunk is drawn from the seed and
its own number, so order, tabs and restarts change nothing.
"""

import threading
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from app.memory import Memory

MOST_KEPT = 3  # unfinished jobs held in memory; a forgotten one is simply done again
PATIENCE = 32  # steps of other jobs after which a job counts as left alone


@dataclass(frozen=True)
class Work:
    """How one kind of work is cut: a plan with a number of ``chunks``, a chunk, the result."""

    key: str
    plan: Callable[[], Any]
    chunk: Callable[[Any, int], Any]
    result: Callable[[Any, list[Any]], Any]


@dataclass(frozen=True)
class Progress:
    """How far a job has come; `result` is None until all chunks are there."""

    done: int
    total: int
    result: Any = None


@dataclass
class _Job:
    plan: Any
    asked: int = 0
    chunks: dict[int, Any] = field(default_factory=dict)
    lock: threading.Lock = field(default_factory=threading.Lock)


class Jobs:
    """Unfinished work by key, and finished results in the memory."""

    def __init__(self, memory: Memory) -> None:
        self._memory = memory
        self._guard = threading.Lock()
        self._jobs: dict[str, _Job] = {}  # in the order in which they were begun
        self._steps = 0

    def remembered(self, work: Work) -> Any:
        """Return the result if the work was done before, else None."""
        return self._memory.found(work.key)

    def refusal(self, work: Work) -> str:
        """Return why the work was refused when it was asked for, or nothing."""
        return self._memory.found(f"refused:{work.key}") or ""

    def step(self, work: Work) -> Progress:
        """Do the next chunk of some work; the last one gives the result.

        Raises
        ------
        ValueError
            The work cannot be done; `refusal` keeps the sentence.
        """
        try:
            return self._step(work)
        except ValueError as error:
            sentence = str(error)
            self._memory.once(f"refused:{work.key}", lambda: sentence)
            raise

    def _step(self, work: Work) -> Progress:
        known = self._memory.found(work.key)
        if known is not None:
            return Progress(1, 1, known)
        job = self._job(work)
        with job.lock:
            total = job.plan.chunks
            result = self._memory.found(work.key)  # another tab may have finished just now
            if result is None:
                if len(job.chunks) < total:
                    index = next(i for i in range(total) if i not in job.chunks)
                    job.chunks[index] = work.chunk(job.plan, index)
                if len(job.chunks) < total:
                    return Progress(len(job.chunks), total)
                result = self._memory.once(
                    work.key,
                    lambda: work.result(job.plan, [job.chunks[i] for i in range(total)]),
                )
        with self._guard:
            self._jobs.pop(work.key, None)
        return Progress(total, total, result)

    def complete(self, work: Work) -> Any:
        """Do all the chunks, one after another, and return the result."""
        while (progress := self.step(work)).result is None:
            pass
        return progress.result

    def _job(self, work: Work) -> _Job:
        with self._guard:
            job = self._jobs.get(work.key)
        if job is None:
            job = _Job(work.plan())
        with self._guard:
            job = self._jobs.setdefault(work.key, job)
            self._steps += 1
            job.asked = self._steps
            if len(self._jobs) > MOST_KEPT:
                self._forget_one()
            return job

    def _forget_one(self) -> None:
        """Forget a job left alone, or else the youngest but this one: the oldest come to an end.

        Were it the one asked for longest ago, more tabs than `MOST_KEPT` that take turns would
        forget each other's work for ever.
        """
        *others, _this = self._jobs
        alone = [key for key in others if self._steps - self._jobs[key].asked > PATIENCE]
        del self._jobs[alone[0] if alone else others[-1]]
