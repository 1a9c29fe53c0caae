"""Batches measured in this process, or in several, and handed back in reading order."""

from __future__ import annotations

import os
from collections import deque
from collections.abc import Iterable, Iterator
from concurrent.futures import Future, ProcessPoolExecutor
from multiprocessing import get_context

from auditor.corpus import Batch
from auditor.runs.measuring import Measurer, Outcome
from auditor.runs.plan import Plan
from auditor.vocabulary import VocabularyFacts

# Below this many bytes one process is done before others have started.
WORTH_SPREADING = 16 << 20
_plan: Plan | None = None
_measurer: Measurer | None = None


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
        self._pool = ProcessPoolExecutor(
            workers, mp_context=get_context("spawn"), initializer=_start, initargs=(plan,)
        )
        self.facts = self._pool.submit(_facts).result()

    def measured(self, batches: Iterable[tuple[Batch, int]]) -> Iterator[Outcome]:
        """Yield the outcome of each (batch, source number), in their order.

        At most two batches a worker wait at a time, so that memory does not grow with the corpus.
        """
        if self._local is not None:
            for batch, source in batches:
                yield self._local.measure(batch, source)
            return
        yield from self._spread(batches)

    def _spread(self, batches: Iterable[tuple[Batch, int]]) -> Iterator[Outcome]:
        waiting: deque[Future[Outcome]] = deque()
        if self._pool is None:
            return
        for batch, source in batches:
            waiting.append(self._pool.submit(_measure, batch, source))
            if len(waiting) >= 2 * self._workers:
                yield waiting.popleft().result()
        while waiting:
            yield waiting.popleft().result()

    def __enter__(self) -> Processes:
        return self

    def __exit__(self, *_: object) -> None:
        if self._pool is not None:
            self._pool.shutdown(wait=True, cancel_futures=True)


def _start(plan: Plan) -> None:
    """Remember the plan; each worker is one of several, so that the library gets one thread."""
    global _plan  # noqa: PLW0603 - a worker process serves one plan for its whole life
    os.environ.setdefault("TOKENIZERS_PARALLELISM", "false")
    _plan = plan


def _own() -> Measurer:
    global _measurer  # noqa: PLW0603
    if _measurer is None:
        if _plan is None:
            raise RuntimeError("a worker was not started by Processes")
        _measurer = Measurer(_plan)
    return _measurer


def _facts() -> list[VocabularyFacts]:
    return _own().facts


def _measure(batch: Batch, source: int) -> Outcome:
    return _own().measure(batch, source)
