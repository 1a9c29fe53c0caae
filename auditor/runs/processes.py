"""Batches measured in this process, or in several, and handed back in reading order."""

from __future__ import annotations

import os
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Future, ProcessPoolExecutor
from multiprocessing import get_context
from multiprocessing.synchronize import Barrier
from typing import Any, Generic, Protocol, Self, TypeVar

from auditor.vocabulary import VocabularyFacts

# Below this many bytes one process is done before others have started.
WORTH_SPREADING = 16 << 20
# Seconds that a worker waits for the others when the run ends; a batch takes far less.
_PATIENCE = 3600

Outcome_co = TypeVar("Outcome_co", covariant=True)
Finished_co = TypeVar("Finished_co", covariant=True)


def choose_workers(asked: int, corpus_bytes: int | None) -> int:
    """Return the number of processes: as asked, or one a core for corpora that are worth it."""
    if asked > 0:
        return asked
    if corpus_bytes is None or corpus_bytes < WORTH_SPREADING:
        return 1
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


class Measures(Protocol[Outcome_co, Finished_co]):
    """What one process does: measure batches, and hand over what it kept when all are measured."""

    @property
    def facts(self) -> list[VocabularyFacts]:
        """The facts of the vocabularies that are measured with."""

    def measure(self, *args: Any, **kwargs: Any) -> Outcome_co:  # noqa: ANN401 - any task
        """Return the outcome of one task."""

    def finish(self) -> Finished_co:
        """Return what was gathered over all tasks."""


class Processes(Generic[Outcome_co, Finished_co]):
    """A way to measure batches; use as a context manager. ``facts`` are of the vocabularies.

    ``make`` builds what measures, once in each process; it must pickle.
    """

    def __init__(self, make: Callable[[], Measures[Outcome_co, Finished_co]], workers: int) -> None:
        self._workers = workers
        self._pool: ProcessPoolExecutor | None = None
        self._local: Measures[Outcome_co, Finished_co] | None = None
        if workers == 1:
            self._local = make()
            self.facts: list[VocabularyFacts] = self._local.facts
            return
        # Spawned, never forked: the engines' threads do not survive a fork.
        context = get_context("spawn")
        meeting = context.Barrier(workers)
        self._pool = ProcessPoolExecutor(
            workers, mp_context=context, initializer=_start, initargs=(make, meeting)
        )
        # A process starts when a task finds none idle: with one for each, all start at once.
        asked = [self._pool.submit(_facts) for _ in range(workers)]
        self.facts = asked[0].result()

    def measured(self, tasks: Iterable[tuple[Any, ...]]) -> Iterator[Outcome_co]:
        """Yield the outcome of each task, in their order.

        At most two batches a worker wait at a time, so that memory does not grow with the corpus.
        """
        if self._pool is not None:
            yield from self._spread(self._pool, tasks)
        elif self._local is not None:
            for task in tasks:
                yield self._local.measure(*task)

    def _spread(
        self, pool: ProcessPoolExecutor, tasks: Iterable[tuple[Any, ...]]
    ) -> Iterator[Outcome_co]:
        waiting: deque[Future[Outcome_co]] = deque()
        for task in tasks:
            waiting.append(pool.submit(_measure, *task))
            if len(waiting) >= 2 * self._workers:
                yield waiting.popleft().result()
        while waiting:
            yield waiting.popleft().result()

    def finished(self) -> Iterator[Finished_co]:
        """Yield what each process hands over when all batches are measured."""
        if self._pool is not None:
            waiting = [self._pool.submit(_finish) for _ in range(self._workers)]
            yield from (future.result() for future in waiting)
        elif self._local is not None:
            yield self._local.finish()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, kind: object, value: object, trace: object) -> None:
        if self._pool is not None:
            self._pool.shutdown(wait=True, cancel_futures=True)


class _Worker:
    """What a worker process holds for its whole life: what measures, its vocabularies opened."""

    make: Callable[[], Measures[Any, Any]]
    meeting: Barrier
    own: Measures[Any, Any] | None


_OWN = _Worker()


def _start(make: Callable[[], Measures[Any, Any]], meeting: Barrier) -> None:
    """Remember what to make; each worker is one of several: the library gets one thread."""
    os.environ.setdefault("TOKENIZERS_PARALLELISM", "false")
    _OWN.make, _OWN.meeting, _OWN.own = make, meeting, None


def _own() -> Measures[Any, Any]:
    if _OWN.own is None:
        _OWN.own = _OWN.make()
    return _OWN.own


def _facts() -> list[VocabularyFacts]:
    return _own().facts


def _measure(*task: Any) -> Any:  # noqa: ANN401 - as `Measures` has it
    return _own().measure(*task)


def _finish() -> Any:  # noqa: ANN401
    # All workers meet here, so that none of them takes the call that is meant for another.
    _OWN.meeting.wait(_PATIENCE)
    return _own().finish()
