"""Words that are broken or lost, and how: `cal·ib·ration`."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from auditor.encoding.measures import Reading
from auditor.tallies.words import BrokenWord
from auditor.vocabulary.engine import Ints, Inventory

# A word and the ids of the tokens that touch it.
Key = tuple[Any, ...]

_DOT = "·"
_REMEMBERED = 30_000
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
        plain = ~inventory.stands_for_bytes
        if inventory.unknown is not None:
            plain[inventory.unknown] = False
        # Whether the piece is shown by the characters it holds, by id.
        self._plain: list[bool] = plain.tolist()
        self._known: dict[Key, BrokenWord] = {}

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
        if (np.diff(spans.starts[held]) < 0).any():
            held = held[np.argsort(spans.starts[held], kind="stable")]
        starts, ends = spans.starts[held], spans.ends[held]
        firsts = np.searchsorted(np.maximum.accumulate(ends), words.starts[hit], side="right")
        stops = np.searchsorted(starts, words.ends[hit], side="left")
        tokens = (spans.ids[held].tolist(), starts.tolist(), ends.tolist())
        quads = zip(
            hit.tolist(),
            words.starts[hit].tolist(),
            firsts.tolist(),
            stops.tolist(),
            (reading.unknown_touches[hit] > 0).tolist(),
            strict=True,
        )
        texts = reading.stretch.word_texts
        for place, begin, first, stop, unknown in quads:
            key = (texts[place], *tokens[0][first:stop])
            row = self._known.get(key)
            yield row or self._remember(key, [part[first:stop] for part in tokens], begin, unknown)

    def _remember(
        self,
        key: Key,
        tokens: list[list[int]],
        begin: int,
        unknown: bool,  # noqa: FBT001 - internal
    ) -> BrokenWord:
        if len(self._known) >= _REMEMBERED:
            self._known.clear()
        word = key[0]
        parts = [
            (number, max(0, start - begin), min(len(word), end - begin))
            for number, start, end in zip(*tokens, strict=True)
            if start - begin < len(word) and end > begin
        ]
        broken = _shortened(self._spelled(word, parts))
        row = BrokenWord(_shortened(word), broken, len(parts), int(unknown))
        self._known[key] = row
        return row

    def _spelled(self, word: str, parts: list[tuple[int, int, int]]) -> str:
        """Return the word with a dot between pieces; pieces that are bytes as ⟨hexadecimal⟩."""
        shown, reached = [], 0
        for number, start, end in parts:
            if self._plain[number] and end > reached:
                shown.append(word[max(start, reached) : end])
            elif self._inventory.stands_for_bytes[number]:
                shown.append(f"⟨{self._bytes(number)}⟩")
            else:
                shown.append(f"⟨{self._inventory.entries[number]}⟩")
            reached = max(reached, end)
        return _DOT.join(shown)

    def _bytes(self, number: int) -> str:
        if self._inventory.entry_bytes is not None:
            return (self._inventory.entry_bytes[number] or b"").hex(" ").upper()
        return (self._inventory.entries[number] or "")[3:5]


def _shortened(text: str) -> str:
    return text if len(text) <= LONGEST_SHOWN else text[:LONGEST_SHOWN] + "…"
