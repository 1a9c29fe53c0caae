"""Words: segments between UAX #29 boundaries that hold a letter or number, or plain runs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from icu4py.breakers import CharacterBreaker

from auditor.text import properties
from auditor.text.boundaries import LOCALE, segment_starts

Ints = npt.NDArray[np.int64]
Points = npt.NDArray[np.uint32]

RULES = ("icu", "whitespace")


@dataclass(frozen=True, slots=True)
class Words:
    """Words by position: character ``starts[i]`` up to ``ends[i]``, both of shape (words,)."""

    starts: Ints
    ends: Ints

    def __len__(self) -> int:
        return len(self.starts)


def find_words(texts: list[str], bounds: Ints, points: Points, *, rule: str) -> Words:
    """Return the words of ``texts``, which lie end to end with document bounds ``bounds``.

    ``rule`` is ``icu`` (UAX #29) or ``whitespace`` (maximal runs of non-whitespace). Either way a
    word holds at least one ``\\p{L}`` or ``\\p{N}``.
    """
    find = _runs if rule == "whitespace" else _segments
    starts, ends = find(texts, bounds, points)
    holds = properties.table(properties.WORD_CHARACTER)[points]
    before = np.concatenate(([0], np.cumsum(holds)))
    kept = before[ends] > before[starts]
    return Words(starts[kept], ends[kept])


def _segments(texts: list[str], bounds: Ints, points: Points) -> tuple[Ints, Ints]:
    starts = segment_starts(texts, bounds, points)
    return starts, np.append(starts[1:], len(points))[: len(starts)]


def _runs(texts: list[str], bounds: Ints, points: Points) -> tuple[Ints, Ints]:
    del texts
    ink = ~properties.table(properties.WHITESPACE)[points]
    return runs_of(ink, bounds)


def runs_of(flags: npt.NDArray[np.bool_], bounds: Ints) -> tuple[Ints, Ints]:
    """Return starts and ends of the maximal runs of flagged positions, none across a bound."""
    before = np.concatenate(([False], flags))
    after = np.concatenate((flags, [False]))
    begins, finishes = after & ~before, before & ~after
    inner = bounds[1:-1]
    begins[inner] |= after[inner]
    finishes[inner] |= before[inner]
    return np.flatnonzero(begins), np.flatnonzero(finishes)


def count_graphemes(text: str) -> int:
    """Return the number of extended grapheme clusters (UAX #29) of ``text``, by ICU."""
    return sum(1 for _ in CharacterBreaker(text, LOCALE).segments())
