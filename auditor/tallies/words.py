"""Words that are broken or lost: each form with how it is broken, counted exactly.

Distinct words never stop coming, so that the counts in memory are bounded: past the bound they
are written to a temporary file in sorted order, and all such files are merged when read. Tables are
Arrow's, so that no object is made for a row.
"""

from __future__ import annotations

import tempfile
import weakref
from bisect import bisect_left
from collections.abc import Callable, Iterable, Iterator, Sequence
from mmap import ACCESS_READ, mmap
from pathlib import Path
from typing import IO, NamedTuple

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from auditor.tallies.base import State, Tally
from auditor.text.slices import integers

Ints = npt.NDArray[np.int64]

# Files of one tally: past this number they are merged into one.
_MOST_FILES = 32
_PREFIX = "auditor-words-"


class BrokenWord(NamedTuple):
    """A word as written and the way it is broken; rows of one word differ by context."""

    word: str
    broken: str
    pieces: int
    unknown: int


_ROW = pa.schema(
    [
        ("word", pa.string()),
        ("broken", pa.string()),
        ("pieces", pa.int64()),
        ("unknown", pa.int64()),
    ]
)
_COUNTED = _ROW.append(pa.field("count", pa.int64()))
_ORDER = [(name, "ascending") for name in _ROW.names]


def table_of(rows: Sequence[BrokenWord]) -> pa.Table:
    """Return ``rows`` as a table with the columns of ``BrokenWord``."""
    columns = zip(*rows, strict=True) if rows else [()] * len(_ROW)
    arrays = [pa.array(values, field.type) for values, field in zip(columns, _ROW, strict=True)]
    return pa.Table.from_arrays(arrays, schema=_ROW)


def row_table(words: pa.Array) -> pa.Table:
    """Return rows of ``words`` by themselves, neither broken nor unknown."""
    none = pa.array(np.zeros(len(words), dtype=np.int64))
    empty = pa.array([""] * len(words), pa.string())
    return pa.Table.from_arrays([words.cast(pa.string()), empty, none, none], schema=_ROW)


class WordsTally(Tally):
    """Occurrences of each ``BrokenWord``; about ``in_memory`` of them are held in memory."""

    def __init__(self, in_memory: int = 100_000) -> None:
        self._bound = in_memory
        self._held: list[pa.Table] = []
        self._waiting = 0
        self._spilled: list[IO[bytes]] = []
        weakref.finalize(self, _close, self._spilled)

    @property
    def settings(self) -> State:
        return {}

    def add(self, row: BrokenWord, count: int) -> None:
        """Add ``count`` occurrences of ``row``."""
        self.add_table(table_of([row]), np.array([count], dtype=np.int64))

    def add_table(self, rows: pa.Table, counts: Ints) -> None:
        """Add ``counts`` (rows,) occurrences of ``rows``, as ``table_of`` makes them."""
        counted = rows.append_column("count", integers(counts)).cast(_COUNTED)
        self.take(counted if counts.all() else counted.filter(counts > 0))

    def take(self, counted: pa.Table) -> None:
        """Add rows that carry their own column of counts."""
        self._held.append(counted)
        self._waiting += len(counted)
        if self._waiting > 2 * self._bound:
            self._gather()
            if self._waiting > self._bound:
                self._spill()

    def _gather(self) -> pa.Table:
        """Return what is held, as one table in which each row stands once."""
        gathered = _summed(self._held)
        self._held, self._waiting = [gathered], len(gathered)
        return gathered

    def _spill(self) -> None:
        if len(self._spilled) < _MOST_FILES:
            self._spilled.append(_written([self._gather().sort_by(_ORDER)]))
        else:
            whole = _written(self.tables())
            _close(self._spilled)
            self._spilled.append(whole)
        self._held, self._waiting = [], 0

    def rows(self) -> Iterator[tuple[BrokenWord, int]]:
        """Yield every row with its count, in sorted order, whatever lies in memory or on disk."""
        for table in self.tables():
            yield from _rows(table)

    def largest(
        self, count: int, weigh: Callable[[pa.Table], Ints]
    ) -> list[tuple[BrokenWord, int]]:
        """Return up to ``count`` rows of the greatest weight, ties in sorted order.

        ``weigh`` gives the weights of a table with the columns of ``BrokenWord`` and ``count``;
        rows of a negative weight are left out.
        """
        held = _COUNTED.empty_table()
        for table in self.tables():
            # Both are in sorted order among equals, and no row of the one comes after the other's.
            both = pa.concat_tables([held, table])
            weights = weigh(both)
            order = np.argsort(-weights, kind="stable")[:count]
            held = both.take(order[weights[order] >= 0])
        return list(_rows(held))

    def tables(self) -> Iterator[pa.Table]:
        """Yield every row with its count, in sorted order, some rows at a time."""
        parts = [*map(_read, self._spilled), self._gather().sort_by(_ORDER)]
        edges = _edges(parts, max(1, self._bound // len(parts)))
        begins = [0] * len(parts)
        for edge in [*edges, None]:
            stops = [len(part) if edge is None else _place(part, edge) for part in parts]
            slices = [
                part.slice(begin, stop - begin)
                for part, begin, stop in zip(parts, begins, stops, strict=True)
                if stop > begin
            ]
            begins = stops
            if slices:
                yield _summed(slices).sort_by(_ORDER)

    def _add(self, other: WordsTally) -> None:
        for table in other.tables():
            self.take(table)

    def counts(self) -> State:
        return {"rows": [[*row, count] for row, count in self.rows()]}

    def fill(self, counts: State) -> None:
        rows = [BrokenWord(*row) for *row, _ in counts["rows"]]
        times = [count for *_, count in counts["rows"]]
        self.add_table(table_of(rows), np.array(times, dtype=np.int64))

    def __reduce__(self) -> tuple[object, ...]:
        """Travel between processes by way of a file: all rows may be more than memory holds."""
        with tempfile.NamedTemporaryFile(prefix=_PREFIX, delete=False) as file:
            _write(file, self.tables())
        return _received, (self._bound, file.name)


def _rows(counted: pa.Table) -> Iterator[tuple[BrokenWord, int]]:
    *row, counts = (column.to_pylist() for column in counted.columns)
    return zip(map(BrokenWord._make, zip(*row, strict=True)), counts, strict=True)


def _received(bound: int, name: str) -> WordsTally:
    tally = WordsTally(bound)
    path = Path(name)
    with path.open("rb") as file:
        for batch in _read(file).to_batches():
            tally.take(pa.Table.from_batches([batch]))
    path.unlink()
    return tally


def _summed(tables: list[pa.Table]) -> pa.Table:
    """Return the rows of ``tables``, each once, with its counts summed."""
    whole = pa.concat_tables([_COUNTED.empty_table(), *tables])
    grouped = whole.group_by(_ROW.names, use_threads=False).aggregate([("count", "sum")])
    return grouped.rename_columns(
        ["count" if name == "count_sum" else name for name in grouped.column_names]
    ).select(_COUNTED.names)


def _edges(parts: list[pa.Table], step: int) -> list[str]:
    """Return words in rising order by which ``parts`` are merged some rows at a time.

    Every ``step``-th word of each part is taken, and of these, sorted, one for each part: between
    two of them there are no more than 2 · ``step`` · parts rows, repetitions of one word aside.
    """
    words: list[str] = []
    for part in parts:
        words += part["word"].take(np.arange(step, len(part), step)).to_pylist()
    return sorted(set(words))[len(parts) - 1 :: len(parts)]


def _place(part: pa.Table, word: str) -> int:
    column = part["word"]
    return bisect_left(range(len(part)), word, key=lambda place: column[place].as_py())


def _written(tables: Iterable[pa.Table]) -> IO[bytes]:
    file = tempfile.TemporaryFile(prefix=_PREFIX)  # noqa: SIM115 - closed with its tally
    _write(file, tables)
    return file


def _write(file: IO[bytes], tables: Iterable[pa.Table]) -> None:
    with pa.ipc.new_file(file, _COUNTED) as writer:
        for table in tables:
            writer.write_table(table.combine_chunks())
    file.flush()


def _read(file: IO[bytes]) -> pa.Table:
    """Return the table in ``file``; its pages are the system's to keep or to drop."""
    mapped = mmap(file.fileno(), 0, access=ACCESS_READ)
    return pa.ipc.open_file(pa.BufferReader(pa.py_buffer(mapped))).read_all()


def _close(files: list[IO[bytes]]) -> None:
    for file in files:
        file.close()
    files.clear()
