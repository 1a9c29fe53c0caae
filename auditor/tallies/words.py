"""Words that are broken or lost: each form with how it is broken, counted exactly.

Distinct words never stop coming, so that the counts in memory are bounded: past the bound they
are written to a temporary file in sorted order, and all such files are merged when read.
"""

from __future__ import annotations

import heapq
import tempfile
import weakref
from collections.abc import Iterable, Iterator
from itertools import groupby
from pathlib import Path
from typing import IO, NamedTuple

import orjson

from auditor.tallies.base import State, Tally

# Files of one tally: past this number they are merged into one.
_MOST_FILES = 32
_PREFIX = "auditor-words-"


class BrokenWord(NamedTuple):
    """A word as written and the way it is broken; rows of one word differ by context."""

    word: str
    broken: str
    pieces: int
    unknown: int


class WordsTally(Tally):
    """Occurrences of each ``BrokenWord``; at most ``in_memory`` of them are held in memory."""

    def __init__(self, in_memory: int = 50_000) -> None:
        self._bound = in_memory
        self._held: dict[BrokenWord, int] = {}
        self._spilled: list[IO[bytes]] = []
        weakref.finalize(self, _close, self._spilled)

    @property
    def settings(self) -> State:
        return {}

    def add(self, row: BrokenWord, count: int) -> None:
        """Add ``count`` occurrences of ``row``."""
        self._held[row] = self._held.get(row, 0) + count
        if len(self._held) > self._bound:
            self._spill()

    def _spill(self) -> None:
        if len(self._spilled) < _MOST_FILES:
            self._spilled.append(_written(sorted(self._held.items())))
        else:
            whole = _written(self.rows())
            _close(self._spilled)
            self._spilled.append(whole)
        self._held = {}

    def rows(self) -> Iterator[tuple[BrokenWord, int]]:
        """Yield every row with its count, in sorted order, whatever lies in memory or on disk."""
        runs = [_read(file) for file in self._spilled]
        merged = heapq.merge(sorted(self._held.items()), *runs)
        for row, same in groupby(merged, key=lambda item: item[0]):
            yield row, sum(count for _, count in same)

    def _add(self, other: WordsTally) -> None:
        for row, count in other.rows():
            self.add(row, count)

    def counts(self) -> State:
        return {"rows": [[*row, count] for row, count in self.rows()]}

    def fill(self, counts: State) -> None:
        for *row, count in counts["rows"]:
            self.add(BrokenWord(*row), count)

    def __reduce__(self) -> tuple[object, ...]:
        """Travel between processes by way of a file: all rows may be more than memory holds."""
        with tempfile.NamedTemporaryFile(prefix=_PREFIX, delete=False) as file:
            _write(file, self.rows())
        return _received, (self._bound, file.name)


def _received(bound: int, name: str) -> WordsTally:
    tally = WordsTally(bound)
    path = Path(name)
    with path.open("rb") as file:
        for row, count in _read(file):
            tally.add(row, count)
    path.unlink()
    return tally


def _written(rows: Iterable[tuple[BrokenWord, int]]) -> IO[bytes]:
    file = tempfile.TemporaryFile(prefix=_PREFIX)  # noqa: SIM115 - closed with its tally
    _write(file, rows)
    return file


def _write(file: IO[bytes], rows: Iterable[tuple[BrokenWord, int]]) -> None:
    for row, count in rows:
        file.write(orjson.dumps([*row, count]) + b"\n")


def _close(files: list[IO[bytes]]) -> None:
    for file in files:
        file.close()
    files.clear()


def _read(file: IO[bytes]) -> Iterator[tuple[BrokenWord, int]]:
    file.seek(0)
    for line in file:
        *row, count = orjson.loads(line)
        yield BrokenWord(*row), count
