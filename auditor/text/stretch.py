"""Documents laid end to end: one array of code points, so that one pass serves them all."""

from __future__ import annotations

from functools import cached_property
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from auditor.text import properties
from auditor.text.kinds import kinds_of
from auditor.text.slices import utf8_lengths
from auditor.text.words import Words, find_words

Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]


class Edges(NamedTuple):
    """For texts that are parts of documents: which begin one and which end one, shape (texts,)."""

    begins: Bools
    ends: Bools


class Stretch:
    """The text of consecutive documents and what is known of it without a vocabulary.

    Positions are code points counted from the start of the stretch; document ``i`` holds
    ``bounds[i]`` up to ``bounds[i + 1]``. With ``edges`` the texts are parts of documents.
    """

    def __init__(self, texts: list[str], *, words: str = "icu", edges: Edges | None = None) -> None:
        self.texts = texts
        self.edges = edges
        self.joined = "".join(texts)
        self._rule = words
        self.bounds: Ints = _cumulated([len(text) for text in texts])

    def __len__(self) -> int:
        return len(self.texts)

    @cached_property
    def points(self) -> npt.NDArray[np.uint32]:
        """The code points, shape (characters,)."""
        return np.frombuffer(self.joined.encode("utf-32-le"), dtype=np.uint32)

    @cached_property
    def whitespace(self) -> Bools:
        """Which characters are whitespace, shape (characters,)."""
        return properties.table(properties.WHITESPACE)[self.points]

    @cached_property
    def ink(self) -> Bools:
        """Which characters are not whitespace, shape (characters,)."""
        return ~self.whitespace

    @cached_property
    def ink_before(self) -> Ints:
        """The non-whitespace characters before each position, shape (characters + 1,)."""
        return _cumulated(self.ink)

    @cached_property
    def marks(self) -> Bools:
        """Which characters are combining marks, shape (characters,)."""
        return properties.table(properties.MARK)[self.points]

    @cached_property
    def utf8_lengths(self) -> Ints:
        """UTF-8 bytes of each character (RFC 3629 section 3), shape (characters,)."""
        return utf8_lengths(self.points)

    @cached_property
    def bytes_before(self) -> Ints:
        """UTF-8 bytes before each position, shape (characters + 1,)."""
        return _cumulated(self.utf8_lengths)

    @cached_property
    def words(self) -> Words:
        """The words of all documents, in order."""
        return find_words(self.texts, self.bounds, self.points, rule=self._rule)

    @cached_property
    def kinds(self) -> npt.NDArray[np.uint8]:
        """The kind of text of each character, numbers of ``kinds.KINDS``, shape (characters,)."""
        return kinds_of(self)

    @cached_property
    def word_texts(self) -> list[str]:
        """The words themselves, in the order of ``words``."""
        joined = self.joined
        pairs = zip(self.words.starts.tolist(), self.words.ends.tolist(), strict=True)
        return [joined[start:end] for start, end in pairs]

    def document_of(self, positions: Ints) -> Ints:
        """Return the index of the document that holds each of ``positions``."""
        return np.searchsorted(self.bounds, positions, side="right") - 1

    def per_document(self, positions: Ints) -> Ints:
        """Return how many of ``positions`` lie in each document, shape (documents,)."""
        return np.bincount(self.document_of(positions), minlength=len(self)).astype(np.int64)

    def sum_per_document(self, flags: Bools) -> Ints:
        """Return how many characters of each document are flagged, shape (documents,)."""
        before = _cumulated(flags)
        return before[self.bounds[1:]] - before[self.bounds[:-1]]


def _cumulated(values: list[int] | Bools | Ints) -> Ints:
    """Return the running sum with a leading zero."""
    sums = np.zeros(len(values) + 1, dtype=np.int64)
    np.cumsum(values, out=sums[1:])
    return sums
