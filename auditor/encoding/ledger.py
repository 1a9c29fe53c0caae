"""The ledger of distinct pieces: each is measured once, and every total is count × measure.

It is a cache. It is emptied when it is full, and what it says of a piece never depends on what it
has seen before.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from auditor.encoding.cutting import FIRST, Cut, Distinct
from auditor.encoding.measures import Columns
from auditor.encoding.runprofiles import RunProfiles
from auditor.encoding.whole import Contents, Measured, RunTable
from auditor.text import packed
from auditor.text.packed import PackedNumbers
from auditor.vocabulary.engine import Ints

# (texts, whether they begin a document, whether they end one) → the columns of text, and the
# measures of each vocabulary.
MeasurePieces = Callable[[list[str], Ints], tuple[Columns, list[Measured]]]
Sink = Callable[[int, Contents], None]

# Pieces are remembered by hash in this many marks, a power of two.
_MARKS = 1 << 23
# Rows that are held before the ledger is emptied.
MOST_ROWS = 400_000


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
        most_rows: int | None = None,
        most_characters: int = 16 << 20,
    ) -> None:
        self._vocabularies = vocabularies
        self._measure = measure
        self._sink = sink
        self._most_rows = MOST_ROWS if most_rows is None else most_rows
        self._most_characters = most_characters
        self.measured = 0
        self._met = np.zeros(_MARKS, dtype=np.bool_)
        self._clear()

    def _clear(self) -> None:
        self._numbers = PackedNumbers(self._most_rows)
        self._rows: dict[str, int] = {}
        self._used = 0
        self._kept = 0
        self._characters = 0
        self._passing_characters = 0
        self._blocks: list[_Block] = []
        self._totals = np.zeros(1024, dtype=np.int64)
        self._text = _Table()
        self._tables = [_Table() for _ in range(self._vocabularies)]
        self._profiles = [RunProfiles() for _ in range(self._vocabularies)]

    def rows_of(self, cut: Cut) -> Ints:
        """Return the row of each piece of ``cut``, -1 for those that are not in the ledger.

        Short pieces are found by their bytes, as machine words; the few others by their text.
        """
        short = cut.lengths <= packed.LONGEST
        rows = np.empty(len(cut), dtype=np.int64)
        places = np.flatnonzero(short)
        rows[places] = self._numbers.find(cut.words(places))
        places = np.flatnonzero(~short)
        if len(places):
            distinct = cut.distinct(places)
            known = [self._rows.get(key, -1) for key in distinct.keyed()]
            rows[places] = np.array(known, dtype=np.int64)[distinct.form_of]
        return rows

    def take_in(self, cut: Cut, rows: Ints, new: Distinct, source: int, lines: Ints) -> Ints:
        """Measure the ``new`` pieces of ``cut``, whose ``rows`` are -1; return all rows.

        ``lines`` (documents,) is where documents stand. When half of the room is taken, pieces met
        for the first time, and once, are let go again by ``release``: most of them never come back.
        """
        lasting, passing = self._parted(cut, new)
        full = self._used + len(lasting) > self._most_rows
        if full or self._characters > self._most_characters:
            self.empty()
            rows, new = np.full_like(rows, -1), cut.distinct(np.arange(len(cut)))
            lasting, passing = self._parted(cut, new)
        if not len(new):
            return rows
        places = np.searchsorted(cut.bounds, new.firsts, side="right") - 1
        row_of = np.empty(len(new), dtype=np.int64)
        for chosen in (lasting, passing):
            self._kept = self._used
            for begins in (False, True):
                part = chosen[(new.standing[chosen] >= FIRST) == begins]
                if len(part):
                    row_of[part] = self._measure_block(new, part, source, lines[places[part]])
        self._remember(cut, new, lasting, row_of)
        self._passing_characters = sum(len(new.texts[place]) for place in passing.tolist())
        rows[rows < 0] = row_of[new.form_of]
        return rows

    def _parted(self, cut: Cut, new: Distinct) -> tuple[Ints, Ints]:
        """Return those of ``new`` that are worth keeping, and those met once and never before.

        Which is which is remembered by a hash, and may be wrong: it decides what is kept, never
        what is counted.
        """
        marks = self._hashes(cut, new) & (_MARKS - 1)
        known = self._met[marks] | (new.counts > 1)
        # While there is room, a piece met again need not be measured again.
        known |= self._used + len(new) <= self._most_rows // 2
        self._met[marks] = True
        return np.flatnonzero(known), np.flatnonzero(~known)

    def _hashes(self, cut: Cut, new: Distinct) -> Ints:
        found = np.empty(len(new), dtype=np.int64)
        short = cut.lengths[new.firsts] <= packed.LONGEST
        words = cut.words(new.firsts[short])
        found[short] = (packed.mixed(words) >> np.uint64(1)).astype(np.int64)
        places = np.flatnonzero(~short)
        found[places] = [hash(new.texts[place]) for place in places.tolist()]
        return found

    def _remember(self, cut: Cut, new: Distinct, lasting: Ints, row_of: Ints) -> None:
        """Note in which rows the lasting ones of ``new`` stand."""
        short = cut.lengths[new.firsts[lasting]] <= packed.LONGEST
        places = lasting[short]
        self._numbers.add(cut.words(new.firsts[places]), row_of[places])
        rows = row_of.tolist()
        for place in lasting[~short].tolist():
            self._rows[f"{new.standing[place]}{new.texts[place]}"] = rows[place]

    def release(self) -> None:
        """Hand over and forget the pieces that were not worth keeping."""
        while self._blocks and self._blocks[-1].begin >= self._kept:
            self._hand_over(self._blocks.pop())
        self._totals[self._kept : self._used] = 0
        self._characters -= self._passing_characters
        self._passing_characters = 0
        self._used = self._kept
        for table in (self._text, *self._tables):
            table.used = self._kept

    def _measure_block(self, new: Distinct, places: Ints, source: int, lines: Ints) -> Ints:
        """Measure the pieces at ``places`` of ``new`` and return their rows."""
        texts = [new.texts[place] for place in places.tolist()]
        text, measured = self._measure(texts, new.standing[places])
        begin, count = self._used, len(texts)
        self._used += count
        self.measured += count
        self._characters += sum(map(len, texts))
        self._text.extend(text, count)
        for table, profiles, found in zip(self._tables, self._profiles, measured, strict=True):
            profile = profiles.of(found.runs, count)
            table.extend({**found.columns, "profile": profile}, count)
        held = [found.contents_only() for found in measured]
        sources = np.full(count, source, dtype=np.int64)
        self._blocks.append(_Block(begin, held, sources, lines))
        return np.arange(begin, self._used)

    def count(self, rows: Ints) -> None:
        """Add one occurrence of the piece in each of ``rows``."""
        if len(self._totals) < self._used:
            grown = np.zeros(2 * self._used, dtype=np.int64)
            grown[: len(self._totals)] = self._totals
            self._totals = grown
        times = np.bincount(rows)
        self._totals[: len(times)] += times

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
