"""The ledger of distinct pieces: each is measured once, and every total is count × measure.

It is a cache. It is emptied when it is full, and what it says of a piece never depends on what it
has seen before.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from auditor.encoding.cutting import FIRST, Cut
from auditor.encoding.measures import Columns
from auditor.encoding.runprofiles import RunProfiles
from auditor.encoding.whole import Contents, Measured, RunTable
from auditor.vocabulary.engine import Ints

# (texts, whether they begin a document, whether they end one) → the columns of text, and the
# measures of each vocabulary.
MeasurePieces = Callable[[list[str], Ints], tuple[Columns, list[Measured]]]
Sink = Callable[[int, Contents], None]

# Pieces are remembered by hash in this many marks, a power of two.
_MARKS = 1 << 23
_FIRST_DIGIT = str(FIRST)


@dataclass
class _Block:
    """Pieces that were measured together: ledger rows from ``begin`` on."""

    begin: int
    measured: list[Measured]
    sources: Ints
    lines: Ints

    def __len__(self) -> int:
        return len(self.sources)


@dataclass
class _Table:
    """Columns that grow: all of one length, with room to spare."""

    columns: dict[str, Ints] = field(default_factory=dict)
    used: int = 0

    def extend(self, columns: Columns, count: int) -> None:
        for name, values in columns.items():
            held = self.columns.get(name)
            if held is None or len(held) < self.used + count:
                grown = np.zeros(max(1024, 2 * (self.used + count)), dtype=np.int64)
                if held is not None:
                    grown[: self.used] = held[: self.used]
                self.columns[name] = held = grown
            held[self.used : self.used + count] = values
        self.used += count


class Ledger:
    """Distinct pieces and their measures under each of ``vocabularies`` vocabularies.

    ``measure`` measures pieces that are new; ``sink`` takes in what pieces hold, with how often
    each occurred, whenever the ledger is emptied. ``most_rows`` and
    ``most_characters`` bound what is held.
    """

    def __init__(
        self,
        vocabularies: int,
        measure: MeasurePieces,
        sink: Sink,
        *,
        most_rows: int = 200_000,
        most_characters: int = 8 << 20,
    ) -> None:
        self._vocabularies = vocabularies
        self._measure = measure
        self._sink = sink
        self._most_rows = most_rows
        self._most_characters = most_characters
        self._met = np.zeros(_MARKS, dtype=np.bool_)
        self._clear()

    def _clear(self) -> None:
        self._rows: dict[str, int] = {}
        self._characters = 0
        self._kept = 0
        self._passing: list[str] = []
        self._blocks: list[_Block] = []
        self._totals = np.zeros(1024, dtype=np.int64)
        self._text = _Table()
        self._tables = [_Table() for _ in range(self._vocabularies)]
        self._profiles = [RunProfiles() for _ in range(self._vocabularies)]

    def missing(self, cut: Cut) -> list[int]:
        """Return the indices of the keys of ``cut`` that are not in the ledger."""
        known = np.fromiter(map(self._rows.__contains__, cut.keys), np.bool_, len(cut.keys))
        new: list[int] = np.flatnonzero(~known).tolist()
        return new

    def take_in(self, cut: Cut, new: list[int], source: int, lines: Ints) -> None:
        """Measure the ``new`` keys of ``cut``; ``lines`` (documents,) is where documents stand.

        When half of the room is taken, pieces met for the first time, and once, are let go again by
        ``release``: most of them never come back.
        """
        lasting, passing = self._parted(cut, new)
        full = len(self._rows) + len(lasting) > self._most_rows
        if full or self._characters > self._most_characters:
            self.empty()
            lasting, passing = self._parted(cut, list(range(len(cut.keys))))
        self._measure_blocks(cut, lasting, source, lines)
        self._kept = len(self._rows)
        self._measure_blocks(cut, passing, source, lines)
        self._passing = [cut.keys[place] for place in passing]

    def _parted(self, cut: Cut, new: list[int]) -> tuple[list[int], list[int]]:
        """Return those of ``new`` that are worth keeping, and those met once and never before.

        Which is which is remembered by a hash, and may be wrong: it decides what is kept, never
        what is counted.
        """
        places = np.array(new, dtype=np.int64)
        marks = np.array([hash(cut.keys[place]) & _MARKS - 1 for place in new], dtype=np.int64)
        known = self._met[marks] | (cut.counts[places] > 1)
        # While there is room, a piece met again need not be measured again.
        known |= len(self._rows) + len(new) <= self._most_rows // 2
        self._met[marks] = True
        return places[known].tolist(), places[~known].tolist()

    def _measure_blocks(self, cut: Cut, places: list[int], source: int, lines: Ints) -> None:
        for begins in (False, True):
            keys = [place for place in places if (cut.keys[place][0] >= _FIRST_DIGIT) is begins]
            if keys:
                self._measure_block(cut, keys, source, lines)

    def release(self) -> None:
        """Hand over and forget the pieces that were not worth keeping."""
        while self._blocks and self._blocks[-1].begin >= self._kept:
            self._hand_over(self._blocks.pop())
        for key in self._passing:
            del self._rows[key]
        self._characters -= sum(map(len, self._passing)) - len(self._passing)
        self._totals[self._kept : self._kept + len(self._passing)] = 0
        self._passing = []
        for table in (self._text, *self._tables):
            table.used = self._kept

    def _measure_block(self, cut: Cut, places: list[int], source: int, lines: Ints) -> None:
        keys = [cut.keys[place] for place in places]
        texts = [key[1:] for key in keys]
        text, measured = self._measure(texts, np.array([int(key[0]) for key in keys]))
        begin = len(self._rows)
        self._rows.update({key: begin + place for place, key in enumerate(keys)})
        self._characters += sum(map(len, texts))
        self._text.extend(text, len(keys))
        for table, profiles, found in zip(self._tables, self._profiles, measured, strict=True):
            profile = profiles.of(found.runs, len(keys))
            table.extend({**found.columns, "profile": profile}, len(keys))
        held = [found.contents_only() for found in measured]
        sources = np.full(len(keys), source, dtype=np.int64)
        self._blocks.append(_Block(begin, held, sources, lines[cut.firsts[places]]))

    def rows_of(self, cut: Cut) -> Ints:
        """Return the row of each key of ``cut``, all of which are in the ledger."""
        return np.fromiter(map(self._rows.__getitem__, cut.keys), np.int64, len(cut.keys))

    def count(self, rows: Ints, counts: Ints) -> None:
        """Add occurrences: row ``rows[i]`` occurs ``counts[i]`` times more; rows are distinct."""
        if len(self._totals) < len(self._rows):
            grown = np.zeros(2 * len(self._rows), dtype=np.int64)
            grown[: len(self._totals)] = self._totals
            self._totals = grown
        self._totals[rows] += counts

    def text_columns(self, rows: Ints, bounds: Ints) -> Columns:
        """Return the columns of text of documents whose pieces are ``rows``."""
        return _sums(self._text, rows, bounds)

    def columns(self, vocabulary: int, rows: Ints, bounds: Ints) -> Columns:
        """Return the columns of documents under one vocabulary; all pieces must be lossless."""
        found = _sums(self._tables[vocabulary], rows, bounds)
        whole = found["lossless_documents"] == np.diff(bounds)
        return {**found, "lossless_documents": whole.astype(np.int64)}

    def runs(self, vocabulary: int, rows: Ints, bounds: Ints) -> RunTable:
        """Return the runs of whitespace of documents, equal ones of a document taken together."""
        profile = self._tables[vocabulary].columns["profile"][rows]
        documents = np.repeat(np.arange(len(bounds) - 1), np.diff(bounds))
        return self._profiles[vocabulary].expand(profile, documents)

    def ids(self, vocabulary: int, rows: Ints) -> Ints:
        """Return the tokens of the pieces in ``rows``, one piece after the other."""
        begins = np.array([block.begin for block in self._blocks], dtype=np.int64)
        places = np.searchsorted(begins, rows, side="right") - 1
        found = []
        for place, row in zip(places.tolist(), (rows - begins[places]).tolist(), strict=True):
            measured = self._blocks[place].measured[vocabulary]
            found.append(measured.ids[measured.bounds[row] : measured.bounds[row + 1]])
        return np.concatenate(found)

    def empty(self) -> None:
        """Hand what pieces hold to the sink, with their counts, and forget all pieces."""
        for block in self._blocks:
            self._hand_over(block)
        self._clear()

    def _hand_over(self, block: _Block) -> None:
        weights = self._totals[block.begin : block.begin + len(block)]
        for vocabulary, measured in enumerate(block.measured):
            self._sink(vocabulary, Contents(measured, weights, block.sources, block.lines))


def _sums(table: _Table, rows: Ints, bounds: Ints) -> Columns:
    """Return the sum of each column over the pieces of each document, none of which is empty."""
    found = {}
    for name, values in table.columns.items():
        if name == "profile":
            continue
        if values[: table.used].any():
            found[name] = np.add.reduceat(values[rows], bounds[:-1])
        else:
            found[name] = np.zeros(len(bounds) - 1, dtype=np.int64)
    return found
