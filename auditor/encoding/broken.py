"""Words that are broken or lost, and how: `cal·ib·ration`."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from auditor.encoding.measures import Reading
from auditor.tallies.words import BrokenWord
from auditor.vocabulary.engine import Ints, Inventory

_DOT = "·"
_REMEMBERED = 50_000
# A word as long as this is shown by its beginning; its count stays with the whole word's pieces.
LONGEST_SHOWN = 120


@dataclass(frozen=True, slots=True)
class Broken:
    """The broken words of a stretch.

    ``rows`` are distinct; ``row_of`` and ``document_of`` have one item an occurrence.
    """

    rows: list[BrokenWord]
    row_of: Ints
    document_of: Ints


class BrokenWords:
    """Finds the words of a stretch that two tokens or more touch, or an unknown one."""

    def __init__(self, inventory: Inventory) -> None:
        self._inventory = inventory
        self._known: dict[tuple[str, bytes], BrokenWord] = {}

    def find(self, reading: Reading) -> Broken:
        """Return the broken words of ``reading``, in order."""
        words = reading.stretch.words
        hit = np.flatnonzero((reading.touches >= 2) | (reading.unknown_touches > 0))
        numbers: dict[BrokenWord, int] = {}
        row_of = [numbers.setdefault(row, len(numbers)) for row in self._rows(reading, hit)]
        documents = reading.stretch.document_of(words.starts[hit])
        return Broken(list(numbers), np.array(row_of, dtype=np.int64), documents)

    def _rows(self, reading: Reading, hit: Ints) -> Iterator[BrokenWord]:
        spans, words = reading.spans, reading.stretch.words
        held = np.flatnonzero(spans.ends > spans.starts)
        held = held[np.argsort(spans.starts[held], kind="stable")]
        ids, starts, ends = spans.ids[held], spans.starts[held], spans.ends[held]
        firsts = np.searchsorted(np.maximum.accumulate(ends), words.starts[hit], side="right")
        stops = np.searchsorted(starts, words.ends[hit], side="left")
        lost = (reading.unknown_touches[hit] > 0).tolist()
        quads = zip(hit.tolist(), firsts.tolist(), stops.tolist(), lost, strict=True)
        for place, first, stop, unknown in quads:
            key = (reading.stretch.word_texts[place], ids[first:stop].tobytes())
            row = self._known.get(key)
            if row is None:
                shift = int(words.starts[place])
                triples = zip(ids[first:stop], starts[first:stop], ends[first:stop], strict=True)
                parts = [
                    (int(i), int(start) - shift, int(end) - shift) for i, start, end in triples
                ]
                row = self._remember(key, parts, unknown=unknown)
            yield row

    def _remember(
        self, key: tuple[str, bytes], parts: list[tuple[int, int, int]], *, unknown: bool
    ) -> BrokenWord:
        if len(self._known) >= _REMEMBERED:
            self._known.clear()
        word = key[0]
        touching = [part for part in parts if part[1] < len(word) and part[2] > 0]
        row = BrokenWord(
            _shortened(word), _shortened(self._spelled(word, touching)), len(touching), int(unknown)
        )
        self._known[key] = row
        return row

    def _spelled(self, word: str, parts: list[tuple[int, int, int]]) -> str:
        """Return the word with a dot between pieces; pieces that are bytes as ⟨hexadecimal⟩."""
        shown, reached = [], 0
        for number, start, end in parts:
            piece = word[max(start, reached, 0) : min(end, len(word))]
            reached = max(reached, min(end, len(word)))
            if self._inventory.stands_for_bytes[number]:
                shown.append(f"⟨{self._bytes(number)}⟩")
            elif number == self._inventory.unknown:
                shown.append(f"⟨{self._inventory.unknown_text}⟩")
            else:
                shown.append(piece or f"⟨{self._inventory.entries[number]}⟩")
        return _DOT.join(shown)

    def _bytes(self, number: int) -> str:
        if self._inventory.entry_bytes is not None:
            return (self._inventory.entry_bytes[number] or b"").hex(" ").upper()
        return (self._inventory.entries[number] or "")[3:5]


def _shortened(text: str) -> str:
    return text if len(text) <= LONGEST_SHOWN else text[:LONGEST_SHOWN] + "…"
