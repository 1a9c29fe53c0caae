"""Cuts documents into pieces, and counts equal pieces: Arrow and NumPy, no object a piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from auditor.text import properties
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Ints
from auditor.vocabulary.separation import WHITESPACE_AFTER_WORDS, Separation

_SPACE = 0x20
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


@dataclass(frozen=True, slots=True)
class Places:
    """Where cuts are allowed: what all vocabularies of a run allow (see ``Separation``)."""

    closed: Bools
    open_words: dict[str, Bools]

    @classmethod
    def common(cls, separations: list[Separation]) -> Places:
        """Return the places that every one of ``separations`` allows."""
        closed = np.logical_or.reduce([s.closed for s in separations])
        words = {
            mark: np.logical_and.reduce([s.open_words[mark] for s in separations])
            for mark in WHITESPACE_AFTER_WORDS
        }
        return cls(closed, words)

    def within(self, stretch: Stretch) -> Ints:
        """Return the positions inside documents before which a cut stands, in rising order."""
        points = stretch.points
        inner = points[1:]
        found = [
            self._after_words(points, mark, np.flatnonzero(inner == ord(mark)) + 1)
            for mark in WHITESPACE_AFTER_WORDS
        ]
        spaces = np.flatnonzero(inner[:-1] == _SPACE) + 1
        found.append(self._before_space(stretch, spaces))
        places = np.unique(np.concatenate(found))
        return places[places > stretch.bounds[stretch.document_of(places)]]

    def _after_words(self, points: npt.NDArray[np.uint32], mark: str, places: Ints) -> Ints:
        return places[self.open_words[mark][points[places - 1]]]

    def _before_space(self, stretch: Stretch, places: Ints) -> Ints:
        points = stretch.points
        letters = properties.table(properties.WORD_CHARACTER)
        places = places[~self.closed[points[places - 1]] & letters[points[places + 1]]]
        return places[places + 1 < stretch.bounds[stretch.document_of(places) + 1]]


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
