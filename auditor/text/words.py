"""Words: segments between UAX #29 boundaries that hold a letter or number, or plain runs."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import chain

import numpy as np
import numpy.typing as npt
from icu4py.breakers import CharacterBreaker, WordBreaker

from auditor.text import properties

Ints = npt.NDArray[np.int64]
Points = npt.NDArray[np.uint32]

RULES = ("icu", "whitespace")
# The rules that no language tailors; ICU brings the dictionaries of Thai, Lao, Khmer, Burmese,
# Chinese and Japanese whatever the locale.
LOCALE = "en"
# A vertical tab is a boundary on both its sides (UAX #29 WB3a, WB3b) whatever stands beside it, so
# that one call serves many documents. A line feed would join a carriage return before it.
_SEPARATOR = "\v"


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
    segments = WordBreaker(_SEPARATOR.join(texts), LOCALE).segments()
    flat = np.fromiter(chain.from_iterable(segments), dtype=np.int64).reshape(-1, 2)
    separated = np.insert(points, bounds[1:-1], ord(_SEPARATOR))
    flat = utf16_to_points(flat, separated)
    places = bounds[1:-1] + np.arange(len(texts) - 1)
    document = np.searchsorted(places, flat[:, 0], side="left")
    kept = ~np.isin(flat[:, 0], places)
    return (flat[:, 0] - document)[kept], (flat[:, 1] - document)[kept]


def utf16_to_points(offsets: Ints, points: Points) -> Ints:
    """Return UTF-16 offsets, as ICU gives them, as code point offsets into ``points``."""
    beyond = np.flatnonzero(points > 0xFFFF)
    if not len(beyond):
        return offsets
    # The k-th such character begins at UTF-16 offset beyond[k] + k; each one that begins before
    # an offset moves it by one.
    return offsets - np.searchsorted(beyond + np.arange(len(beyond)), offsets, side="left")


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
