"""Cuts documents into pieces, and counts equal pieces: Arrow and NumPy, no object a piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from auditor.text import packed, properties
from auditor.text.kinds import may_be_cut
from auditor.text.packed import Octets
from auditor.text.slices import integers
from auditor.text.stretch import Stretch
from auditor.vocabulary import adjoining
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.separation import Separation, in_common

Asked = npt.NDArray[np.uint8]

# Characters looked up at once, so that tables and results stay in the cache.
_BLOCK = 1 << 16
# Where in its document a piece stands.
INNER, LAST, FIRST, ONLY = range(4)


@dataclass(frozen=True, slots=True)
class Distinct:
    """Some pieces of a stretch, equal ones taken together.

    ``form_of`` (pieces,) indexes ``texts``, each with its ``standing``; ``firsts`` is the place of
    the first piece of each among all of the stretch, ``counts`` how many there are.
    """

    texts: list[str]
    standing: Ints
    form_of: Ints
    firsts: Ints
    counts: Ints

    def __len__(self) -> int:
        return len(self.texts)

    @property
    def characters(self) -> int:
        """The characters of all distinct pieces."""
        return sum(map(len, self.texts))

    def keyed(self) -> list[str]:
        """Return the digit of its standing and the text of each."""
        return [
            f"{standing}{text}"
            for standing, text in zip(self.standing.tolist(), self.texts, strict=True)
        ]


@dataclass(frozen=True, slots=True)
class Cut:
    """The pieces of a stretch, arrays of shape (pieces,).

    Piece ``i`` is ``lengths[i]`` bytes of ``octets`` from ``begins[i]`` on; ``standing`` tells
    where in its document it stands (``INNER`` … ``ONLY``). Pieces ``bounds[i]`` up to
    ``bounds[i + 1]`` are document ``i``.
    """

    octets: Octets
    begins: Ints
    lengths: Ints
    standing: Ints
    bounds: Ints

    def __len__(self) -> int:
        return len(self.begins)

    def words(self, chosen: Ints) -> packed.Words:
        """Return the chosen pieces, short ones all, as machine words with their standing."""
        return packed.packed(
            self.octets, self.begins[chosen], self.lengths[chosen], self.standing[chosen]
        )

    def distinct(self, chosen: Ints) -> Distinct:
        """Return the distinct pieces among the chosen ones."""
        offsets = np.append(self.begins, len(self.octets) - packed.ROOM)
        buffers = [None, pa.py_buffer(offsets), pa.py_buffer(self.octets)]
        every = pa.Array.from_buffers(pa.large_string(), len(self), buffers)
        encoded = every.take(integers(chosen)).dictionary_encode()
        codes = np.asarray(encoded.indices).astype(np.int64) * 4 + self.standing[chosen]
        counts = np.bincount(codes, minlength=1)
        present = np.flatnonzero(counts)
        number = np.zeros(len(counts), dtype=np.int64)
        number[present] = np.arange(len(present))
        form_of = number[codes]
        firsts = np.empty(len(present), dtype=np.int64)
        firsts[form_of[::-1]] = chosen[::-1]
        texts = encoded.dictionary.to_pylist()
        if len(present) != len(texts):
            texts = [texts[form] for form in (present // 4).tolist()]
        return Distinct(texts, present % 4, form_of, firsts, counts[present])


class Places:
    """Where cuts are made: where each of ``separations`` allows one.

    With ``kinds``, only where the kind of no character changes by it, too.
    """

    def __init__(self, separations: list[Separation], *, kinds: bool = False) -> None:
        self._kinds = kinds
        classes, asked = in_common(separations)
        # A code point's class stands in two bytes: as the one before a place, and as the one after.
        self._classes = classes.astype(np.uint16) * 0x101
        table = np.zeros((0x100, 0x100), dtype=np.uint8)
        table[: len(asked), : len(asked)] = asked
        self._asked = table.reshape(-1)

    def within(self, stretch: Stretch) -> Ints:
        """Return the positions inside documents before which a cut stands, in rising order."""
        points = stretch.points
        edge = np.zeros(len(points) + 1, dtype=np.bool_)
        edge[stretch.bounds] = True
        places, asked = self._candidates(points)
        inside = ~edge[places]
        places, asked = places[inside], asked[inside]
        answers = adjoining.followers()[points[np.minimum(places + 1, len(points) - 1)]]
        answers[edge[places + 1]] = adjoining.END
        # A line end is alone when nothing, or no whitespace, stands before it in its document.
        lone = np.flatnonzero(asked & adjoining.LONE)
        ends = places[lone]
        blank = properties.table(properties.WHITESPACE)[points[np.maximum(ends - 2, 0)]]
        answers[lone[edge[ends - 1] | ~blank]] |= adjoining.LONE
        found = np.asarray(places[(asked & ~(answers | adjoining.OPEN)) == 0])
        if self._kinds:
            found = found[may_be_cut(points[found - 1], points[found])]
        return found

    def _candidates(self, points: npt.NDArray[np.uint32]) -> tuple[Ints, Asked]:
        """Return the places between two classes that are ever cut, and what is asked there."""
        places, asked = [], []
        for begin in range(0, len(points), _BLOCK):
            found = self._classes.take(points[begin : begin + _BLOCK + 1])
            codes = (found[:-1] & 0xFF00) | (found[1:] & 0x00FF)
            own = self._asked.take(codes)
            held = np.flatnonzero(own)
            places.append(held + (begin + 1))
            asked.append(own.take(held))
        return np.concatenate(places), np.concatenate(asked)


def cut(stretch: Stretch, places: Places) -> Cut:
    """Return the pieces of ``stretch``, in which no document is empty."""
    starting = np.zeros(len(stretch.points) + 1, dtype=np.bool_)
    starting[places.within(stretch)] = True
    starting[stretch.bounds] = True
    edges = np.flatnonzero(starting)
    bounds = np.searchsorted(edges, stretch.bounds)
    standing = np.zeros(len(edges) - 1, dtype=np.int64)
    standing[bounds[:-1]] += FIRST
    standing[bounds[1:] - 1] += LAST
    octets = packed.padded(stretch.joined.encode())
    if not stretch.joined.isascii():
        # Characters begin at the bytes that continue none (RFC 3629); so does the room after them.
        edges = np.flatnonzero((octets & 0xC0) != 0x80)[edges]
    return Cut(octets, edges[:-1], np.diff(edges), standing, bounds)
