"""Batches measured in this process, or in several, and handed back in reading order."""

from __future__ import annotations

import os
from collections import deque
from collections.abc import Iterable, Iterator
from concurrent.futures import Future, ProcessPoolExecutor
from multiprocessing import get_context
from multiprocessing.synchronize import Barrier

from auditor.corpus import Batch
from auditor.runs.measuring import Finished, Measurer, Outcome
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularyFacts

# Below this many bytes one process is done before others have started.
WORTH_SPREADING = 16 << 20
# Seconds that a worker waits for the others when the run ends; a batch takes far less.
_PATIENCE = 3600


def choose_workers(asked: int, corpus_bytes: int | None) -> int:
    """Return the number of processes: as asked, or one a core for corpora that are worth it."""
    if asked > 0:
        return asked
    if corpus_bytes is None or corpus_bytes < WORTH_SPREADING:
        return 1
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


class Processes:
    """A way to measure batches; use as a context manager. ``facts`` are of the vocabularies."""

    def __init__(self, plan: Plan, workers: int) -> None:
        self._workers = workers
        self._pool: ProcessPoolExecutor | None = None
        self._local: Measurer | None = None
        if workers == 1:
            self._local = Measurer(plan)
            self.facts: list[VocabularyFacts] = self._local.facts
            return
        # Spawned, never forked: the engines' threads do not survive a fork.
        context = get_context("spawn")
        meeting = context.Barrier(workers)
        self._pool = ProcessPoolExecutor(
            workers, mp_context=context, initializer=_start, initargs=(plan, meeting)
        )
        self.facts = self._pool.submit(_facts).result()

    def measured(self, batches: Iterable[tuple[Batch, int]]) -> Iterator[Outcome]:
        """Yield the outcome of each (batch, source number), in their order.

        At most two batches a worker wait at a time, so that memory does not grow with the corpus.
        """
        if self._pool is not None:
            yield from self._spread(self._pool, batches)
        elif self._local is not None:
            for batch, source in batches:
                yield self._local.measure(batch, source)

    def _spread(
        self, pool: ProcessPoolExecutor, batches: Iterable[tuple[Batch, int]]
    ) -> Iterator[Outcome]:
        waiting: deque[Future[Outcome]] = deque()
        for batch, source in batches:
            waiting.append(pool.submit(_measure, batch, source))
            if len(waiting) >= 2 * self._workers:
                yield waiting.popleft().result()
        while waiting:
            yield waiting.popleft().result()

    def finished(self) -> Iterator[Finished]:
        """Yield what each process hands over when all batches are measured."""
        if self._pool is not None:
            waiting = [self._pool.submit(_finish) for _ in range(self._workers)]
            yield from (future.result() for future in waiting)
        elif self._local is not None:
            yield self._local.finish()

    def __enter__(self) -> Processes:
        return self

    def __exit__(self, kind: object, value: object, trace: object) -> None:
        if self._pool is not None:
            self._pool.shutdown(wait=True, cancel_futures=True)


class _Worker:
    """What a worker process holds for its whole life: one plan, and the vocabularies opened."""

    plan: Plan
    meeting: Barrier
    measurer: Measurer | None = None


def _start(plan: Plan, meeting: Barrier) -> None:
    """Remember the plan; each worker is one of several, so that the library gets one thread."""
    os.environ.setdefault("TOKENIZERS_PARALLELISM", "false")
    _Worker.plan, _Worker.meeting = plan, meeting


def _own() -> Measurer:
    if _Worker.measurer is None:
        _Worker.measurer = Measurer(_Worker.plan)
    return _Worker.measurer


def _facts() -> list[VocabularyFacts]:
    return _own().facts


def _measure(batch: Batch, source: int) -> Outcome:
    return _own().measure(batch, source)


def _finish() -> Finished:
    # All workers meet here, so that none of them takes the call that is meant for another.
    _Worker.meeting.wait(_PATIENCE)
    return _own().finish()
