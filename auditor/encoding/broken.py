"""Words that are broken or lost, and how: `cal·ib·ration`."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from auditor.encoding.dotted import DOT, Held, Touching, dotted
from auditor.encoding.measures import Reading
from auditor.encoding.shown import Shown, parts_of
from auditor.tallies.words import BrokenWord, table_of
from auditor.text.slices import integers
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Ints, Inventory

# A word and the ids of the tokens that touch it.
Key = tuple[Any, ...]

_REMEMBERED = 30_000
# A word as long as this is shown by its beginning; its count stays with the whole word's pieces.
LONGEST_SHOWN = 120


@dataclass(frozen=True, slots=True)
class Broken:
    """The broken words of a stretch.

    ``rows`` is a table as `WordsTally` takes it, without counts, whose rows are mostly distinct;
    ``row_of`` and ``document_of`` have one item an occurrence.
    """

    rows: pa.Table
    row_of: Ints
    document_of: Ints


class BrokenWords:
    """Finds the words of a stretch that two tokens or more touch, or an unknown one.

    Words that lie in whole characters of tokens end to end are written all at once; the others,
    with bytes or unknown tokens in them, one by one.
    """

    def __init__(self, inventory: Inventory) -> None:
        self._shown = Shown(inventory)
        self._known: dict[Key, BrokenWord] = {}

    def find(self, reading: Reading) -> Broken:
        """Return the broken words of ``reading``."""
        stretch = reading.stretch
        hit = np.flatnonzero((reading.touches >= 2) | (reading.unknown_touches > 0))
        held = Held.of(reading.spans)
        words = held.over(stretch.words.starts[hit], stretch.words.ends[hit])
        plain = words.end_to_end(held, self._shown.plain[held.ids]) & _short_and_undotted(
            stretch, words
        )
        strings = dotted(stretch.points, words.chosen(plain), held)
        written = strings.cast(pa.string()).dictionary_encode()
        rest = words.chosen(~plain)
        unknown = (reading.unknown_touches[hit[~plain]] > 0).tolist()
        numbers: dict[BrokenWord, int] = {}
        odd = [
            numbers.setdefault(row, len(numbers))
            for row in self._rows(stretch.joined, held, rest, unknown)
        ]
        first = np.asarray(written.indices).astype(np.int64)
        second = np.array(odd, dtype=np.int64) + len(written.dictionary)
        begins = np.concatenate((words.begins[plain], rest.begins))
        return Broken(
            pa.concat_tables([_table(written.dictionary), table_of(list(numbers))]),
            np.concatenate((first, second)),
            stretch.document_of(begins),
        )

    def _rows(
        self, joined: str, held: Held, words: Touching, unknown: list[bool]
    ) -> Iterator[BrokenWord]:
        quads = zip(
            words.begins.tolist(),
            words.ends.tolist(),
            words.firsts.tolist(),
            words.stops.tolist(),
            unknown,
            strict=True,
        )
        for begin, end, first, stop, lost in quads:
            tokens = [part[first:stop].tolist() for part in (held.ids, held.starts, held.ends)]
            key = (joined[begin:end], *tokens[0])
            yield self._known.get(key) or self._remember(key, tokens, begin, lost)

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
        parts = parts_of(word, begin, tokens)
        broken = _shortened(DOT.join(self._shown.pieces(word, parts)))
        row = BrokenWord(_shortened(word), broken, len(parts), int(unknown))
        self._known[key] = row
        return row


def _short_and_undotted(stretch: Stretch, words: Touching) -> Bools:
    """Return the words that are shown in full, and from which the dots can be taken again."""
    dots = np.concatenate(([0], np.cumsum(stretch.points == ord(DOT))))
    short = words.ends - words.begins + words.stops - words.firsts - 1 <= LONGEST_SHOWN
    return np.asarray(short & (dots[words.ends] == dots[words.begins]))


def _table(broken: pa.StringArray) -> pa.Table:
    """Return the rows of words that are ``broken`` without loss."""
    pieces = pc.add(pc.cast(pc.count_substring(broken, DOT), pa.int64()), 1)
    word = pc.replace_substring(broken, DOT, "")
    unknown = integers(np.zeros(len(broken), dtype=np.int64))
    return pa.table([word, broken, pieces, unknown], names=list(BrokenWord._fields))


def _shortened(text: str) -> str:
    return text if len(text) <= LONGEST_SHOWN else text[:LONGEST_SHOWN] + "…"
