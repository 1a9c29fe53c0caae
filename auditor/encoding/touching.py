"""Which tokens touch which words, for a whole stretch at once."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from auditor.text.words import Words
from auditor.vocabulary.engine import Bools, Ints
from auditor.vocabulary.spans import Spans


@dataclass(frozen=True, slots=True)
class SpanIndex:
    """The tokens with a non-empty span, their starts and their ends each in rising order."""

    starts: Ints
    ends: Ints

    @classmethod
    def of(cls, spans: Spans, chosen: Bools | None = None) -> SpanIndex:
        """Return the index of all tokens, or of the ``chosen`` ones."""
        kept = spans.ends > spans.starts
        if chosen is not None:
            kept &= chosen
        return cls(_rising(spans.starts[kept]), _rising(spans.ends[kept]))

    def touching(self, words: Words) -> Ints:
        """Return the number of tokens that touch each word, shape (words,).

        A token misses a word by starting at or after its end, or by ending at or before its start,
        and never by both.
        """
        if not len(self.starts):
            return np.zeros(len(words), dtype=np.int64)
        begun = np.searchsorted(self.starts, words.ends, side="left")
        finished = np.searchsorted(self.ends, words.starts, side="right")
        return (begun - finished).astype(np.int64)


def tokens_within(spans: Spans, starts: Ints, ends: Ints, chosen: Bools | None = None) -> Ints:
    """Return how many non-empty spans, of ``chosen`` tokens, lie wholly in each disjoint range."""
    if not len(starts):
        return np.zeros(0, dtype=np.int64)
    held = spans.ends > spans.starts
    places = np.flatnonzero(held if chosen is None else held & chosen)
    order = np.argsort(starts, kind="stable")
    home = np.searchsorted(starts[order], spans.starts[places], side="right") - 1
    inside = home >= 0
    inside &= spans.ends[places] <= ends[order][np.maximum(home, 0)]
    found = np.empty(len(starts), dtype=np.int64)
    found[order] = np.bincount(home[inside], minlength=len(starts))
    return found


def _rising(values: Ints) -> Ints:
    if len(values) and (values[1:] < values[:-1]).any():
        return np.sort(values)
    return values
