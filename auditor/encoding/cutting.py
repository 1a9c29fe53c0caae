"""Cuts documents into pieces, and counts equal pieces: Arrow and NumPy, no object a piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pyarrow as pa

from auditor.text import properties
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Ints

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


def cut_places(stretch: Stretch, closed: Bools) -> Ints:
    """Return the positions inside documents before which a cut stands.

    A cut stands before U+0020 with a letter or number after it and, before it, a character of the
    same document that ``closed`` does not mark.
    """
    points = stretch.points
    spaces = np.flatnonzero(points[1:-1] == _SPACE) + 1
    letters = properties.table(properties.WORD_CHARACTER)
    spaces = spaces[~closed[points[spaces - 1]] & letters[points[spaces + 1]]]
    document = stretch.document_of(spaces)
    inside = (spaces > stretch.bounds[document]) & (spaces + 1 < stretch.bounds[document + 1])
    return spaces[inside]


def cut(stretch: Stretch, closed: Bools) -> Cut:
    """Return the pieces of ``stretch``, in which no document is empty."""
    begins = stretch.bounds[:-1]
    starts = np.sort(np.concatenate((begins, cut_places(stretch, closed))))
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
