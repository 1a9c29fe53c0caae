"""Words written with a dot between their pieces, for many words at once: `cal·ib·ration`."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pyarrow as pa

from auditor.text.slices import ranges, strings
from auditor.vocabulary.engine import Bools, Ints
from auditor.vocabulary.spans import Spans

DOT = "·"


@dataclass(frozen=True, slots=True)
class Held:
    """The tokens with a non-empty span, by where they start; arrays of shape (tokens,)."""

    ids: Ints
    starts: Ints
    ends: Ints

    @classmethod
    def of(cls, spans: Spans) -> Held:
        """Return the tokens of ``spans``."""
        if spans.exact:
            return cls(spans.ids, spans.starts, spans.ends)
        held = np.flatnonzero(spans.ends > spans.starts)
        if (np.diff(spans.starts[held]) < 0).any():
            held = held[np.argsort(spans.starts[held], kind="stable")]
        return cls(spans.ids[held], spans.starts[held], spans.ends[held])

    def over(self, begins: Ints, ends: Ints) -> Touching:
        """Return the tokens from the first to the last that touches each word."""
        reached = np.maximum.accumulate(self.ends)
        firsts = np.searchsorted(reached, begins, side="right")
        return Touching(begins, ends, firsts, np.searchsorted(self.starts, ends, side="left"))


@dataclass(frozen=True, slots=True)
class Touching:
    """Words from ``begins`` to ``ends`` with the tokens ``firsts`` up to ``stops``; (words,)."""

    begins: Ints
    ends: Ints
    firsts: Ints
    stops: Ints

    def chosen(self, which: Bools) -> Touching:
        """Return some of the words."""
        return Touching(self.begins[which], self.ends[which], self.firsts[which], self.stops[which])

    def end_to_end(self, held: Held, plain: Bools) -> Bools:
        """Return the words that ``plain`` tokens (tokens,) cover, each from where one ends."""
        found = np.asarray(self.stops > self.firsts)
        last = np.maximum(self.stops, 1) - 1
        first = np.minimum(self.firsts, max(0, len(plain) - 1))
        if not len(plain):
            return found
        found &= _count(~plain, self.firsts, self.stops) == 0
        parted = np.append(held.starts[1:] != held.ends[:-1], False)
        found &= _count(parted, self.firsts, np.maximum(self.firsts, last)) == 0
        found &= (held.starts[first] <= self.begins) & (held.ends[last] >= self.ends)
        return found


def dotted(points: npt.NDArray[np.uint32], words: Touching, held: Held) -> pa.LargeStringArray:
    """Return the words with a dot before every token but the first, shape (words,)."""
    lengths, dots = words.ends - words.begins, words.stops - words.firsts - 1
    before = np.cumsum(lengths) - lengths
    spelled = points[ranges(words.begins, lengths)]
    places = held.starts[ranges(words.firsts + 1, dots)] + np.repeat(before - words.begins, dots)
    marked = np.insert(spelled, places, ord(DOT))
    return strings(marked, lengths + dots)


def _count(flags: Bools, begins: Ints, ends: Ints) -> Ints:
    before = np.concatenate(([0], np.cumsum(flags)))
    return np.asarray(before[ends] - before[begins])
