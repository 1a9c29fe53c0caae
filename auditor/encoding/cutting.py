"""Cuts documents into pieces, and counts equal pieces: Arrow and NumPy, no object a piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from auditor.text.kinds import may_be_cut
from auditor.text.stretch import Stretch
from auditor.vocabulary import adjoining
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.separation import Separation, in_common

Asked = npt.NDArray[np.uint8]

# Characters looked up at once, so that tables and results stay in the cache.
_BLOCK = 1 << 16
# A key of the ledger: one of these for where in its document a piece stands, then its text.
INNER, LAST, FIRST, ONLY = range(4)


@dataclass(frozen=True, slots=True)
class Cut:
    """The pieces of a stretch: ``form_of`` (pieces,) indexes ``keys``, the distinct pieces.

    A key is the digit of the piece's standing (``INNER`` … ``ONLY``) and its text. Pieces
    ``bounds[i]`` up to ``bounds[i + 1]`` are document ``i``. ``counts`` and ``firsts`` have shape
    (keys,): occurrences, and the first document.
    """

    keys: list[str]
    form_of: Ints
    bounds: Ints
    counts: Ints
    firsts: Ints


class Places:
    """Where cuts are made: where each of ``separations`` allows one.

    With ``kinds``, only where the kind of no character changes by it, too.
    """

    def __init__(self, separations: list[Separation], *, kinds: bool = False) -> None:
        self._kinds = kinds
        self._classes, asked = in_common(separations)
        self._asked = asked.reshape(-1).astype(np.uint8)

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
        alone = edge[places - 1] | ~stretch.whitespace[np.maximum(places - 2, 0)]
        answers[alone] |= adjoining.LONE
        found = np.asarray(places[(asked & ~(answers | adjoining.OPEN)) == 0])
        if self._kinds:
            found = found[may_be_cut(points[found - 1], points[found])]
        return found

    def _candidates(self, points: npt.NDArray[np.uint32]) -> tuple[Ints, Asked]:
        """Return the places between two classes that are ever cut, and what is asked there."""
        places, asked = [], []
        for begin in range(0, len(points), _BLOCK):
            found = self._classes[points[begin : begin + _BLOCK + 1]].astype(np.uint16)
            codes = found[:-1] * adjoining.CLASSES + found[1:]
            own = np.take(self._asked, codes)
            held = np.flatnonzero(own)
            places.append(held + (begin + 1))
            asked.append(own[held])
        return np.concatenate(places), np.concatenate(asked)


def cut(stretch: Stretch, places: Places) -> Cut:
    """Return the pieces of ``stretch``, in which no document is empty."""
    starts = np.sort(np.concatenate((stretch.bounds[:-1], places.within(stretch))))
    bounds = np.searchsorted(starts, stretch.bounds)
    form, texts = _dictionary(stretch, starts)
    standing = np.zeros(len(starts), dtype=np.int64)
    standing[bounds[:-1]] += FIRST
    standing[bounds[1:] - 1] += LAST
    codes = form * 4 + standing
    counts = np.bincount(codes, minlength=4 * len(texts))
    present = np.flatnonzero(counts)
    number = np.zeros(len(counts), dtype=np.int64)
    number[present] = np.arange(len(present))
    form_of = number[codes]
    keys = [f"{code % 4}{texts[code // 4]}" for code in present.tolist()]
    first = np.empty(len(present), dtype=np.int64)
    first[form_of[::-1]] = np.arange(len(starts))[::-1]
    documents = np.searchsorted(bounds, first, side="right") - 1
    return Cut(keys, form_of, bounds, counts[present].astype(np.int64), documents)


def _dictionary(stretch: Stretch, starts: Ints) -> tuple[Ints, list[str]]:
    """Return the index of each piece into the distinct texts, and these texts."""
    data = stretch.joined.encode()
    edges = np.append(starts, len(stretch.points))
    offsets = edges if stretch.joined.isascii() else stretch.bytes_before[edges]
    buffers = [None, pa.py_buffer(offsets.astype(np.int64)), pa.py_buffer(data)]
    encoded = pa.Array.from_buffers(pa.large_string(), len(starts), buffers).dictionary_encode()
    return np.asarray(encoded.indices).astype(np.int64), encoded.dictionary.to_pylist()
