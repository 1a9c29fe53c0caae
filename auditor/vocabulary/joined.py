"""Encodes many short parts in one go: laid end to end where cuts are proved, then taken apart."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from auditor.text import properties
from auditor.vocabulary.engine import Bools, Encoding, Engine, Ints, bounds_of
from auditor.vocabulary.separation import WHITESPACE_AFTER_WORDS, Separation

# Stands between two parts, so that one place is a cut before it and one after it.
_FENCE = " a"
_TOGETHER = 512
_WORTH_IT = 64


class JoinedParts:
    """An engine for later parts of documents (see ``Separation``) that gives what it would give.

    Parts are laid end to end. Where the last character of a part and the first of the next are no
    cut, a fence stands between them: before it there is a cut by the part before, after it one by
    the part after. Parts for which that is not so go one by one, and so do all when a string that
    is an added token comes about.
    """

    def __init__(self, separation: Separation) -> None:
        self._engine: Engine = separation.later
        self._closed = separation.closed
        self._open_words = separation.open_words
        contents = separation.whole_for
        self._added = re.compile("|".join(map(re.escape, contents))) if contents else None
        self.has_decoder = self._engine.has_decoder
        self.alters = self._engine.alters
        self.unaltered = self._engine.unaltered
        self.spells_bytes = self._engine.spells_bytes

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``."""
        if len(texts) < _WORTH_IT:
            return self._engine.encode(texts)
        edges = _Edges.of(texts)
        joinable = self._joinable(edges)
        places = np.flatnonzero(joinable)
        apart = self._cuts(edges.lasts[places[:-1]], edges.at(places[1:]))
        groups = _Groups(places, np.where(apart, 0, len(_FENCE)))
        strings = groups.strings(texts)
        if self._added is not None and any(self._added.search(string) for string in strings):
            return self._engine.encode(texts)
        alone = np.flatnonzero(~joinable)
        encoded = self._engine.encode([*strings, *(texts[place] for place in alone.tolist())])
        return _taken_apart(encoded, texts, groups, alone)

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return self._engine.decode(ids)

    def normalize(self, word: str) -> str:
        """Return what the normaliser makes of ``word``."""
        return self._engine.normalize(word)

    def _joinable(self, edges: _Edges) -> Bools:
        """Return which parts have a cut before a fence, and after one, shape (parts,)."""
        letter = np.full(len(edges.lasts), ord(_FENCE[-1]))
        fence = _Edges(np.full_like(letter, ord(_FENCE[0])), letter, letter)
        long_enough = edges.seconds >= 0
        return long_enough & self._cuts(edges.lasts, fence) & self._cuts(letter, edges)

    def _cuts(self, lasts: Ints, nexts: _Edges) -> Bools:
        """Return whether there is a cut after characters ``lasts`` and before parts ``nexts``."""
        letters = properties.table(properties.WORD_CHARACTER)
        spaced = (nexts.firsts == ord(" ")) & letters[np.maximum(nexts.seconds, 0)]
        found = spaced & (nexts.seconds >= 0) & ~self._closed[lasts]
        for mark in WHITESPACE_AFTER_WORDS:
            found |= (nexts.firsts == ord(mark)) & self._open_words[mark][lasts]
        return np.asarray(found)


@dataclass(frozen=True, slots=True)
class _Edges:
    """First, second and last characters of parts, shape (parts,); -1: there is no second one."""

    firsts: Ints
    seconds: Ints
    lasts: Ints

    @classmethod
    def of(cls, texts: list[str]) -> _Edges:
        lengths = np.array([len(text) for text in texts], dtype=np.int64)
        ends = np.cumsum(lengths)
        begins = ends - lengths
        joined = "".join([*texts, "\0\0"]).encode("utf-32-le")
        points = np.frombuffer(joined, dtype=np.uint32).astype(np.int64)
        return cls(
            points[begins],
            np.where(lengths > 1, points[begins + 1], -1),
            points[np.maximum(ends, 1) - 1],
        )

    def at(self, places: Ints) -> _Edges:
        return _Edges(self.firsts[places], self.seconds[places], self.lasts[places])


class _Groups:
    """Parts at ``places`` laid end to end, ``gaps`` (parts - 1,) being the fences' lengths."""

    def __init__(self, places: Ints, gaps: Ints) -> None:
        self.places = places
        self.begins = np.arange(0, len(places), _TOGETHER)
        self.gaps = np.append(gaps, 0)[: len(places)]
        self.gaps[self.begins[1:] - 1] = 0

    def strings(self, texts: list[str]) -> list[str]:
        """Return the string of each group."""
        parts = [
            texts[place] + _FENCE if gap else texts[place]
            for place, gap in zip(self.places.tolist(), self.gaps.tolist(), strict=True)
        ]
        return ["".join(parts[i : i + _TOGETHER]) for i in self.begins.tolist()]


def _taken_apart(encoded: Encoding, texts: list[str], groups: _Groups, alone: Ints) -> Encoding:
    """Return the tokens of each text from those of groups, then of texts alone."""
    order = np.concatenate((groups.places, alone))
    lengths = np.array([len(text) for text in texts], dtype=np.int64)[order]
    # Texts and fences take turns; where there is no fence, one of no length.
    gaps = np.concatenate((groups.gaps, np.zeros(len(alone), dtype=np.int64)))
    begins = bounds_of(np.stack((lengths, gaps), axis=1).reshape(-1))
    firsts = np.concatenate((groups.begins, np.arange(len(groups.places), len(order))))
    shift = np.repeat(begins[2 * firsts], np.diff(encoded.bounds))
    segment = np.searchsorted(begins[:-1], encoded.starts + shift, side="right") - 1
    exact = encoded.exact and bool((encoded.ends + shift <= begins[segment + 1]).all())
    # A fence of no length begins where the next text does: the search finds the text.
    kept = segment % 2 == 0
    begin_of = (begins[segment] - shift)[kept]
    return _in_order(encoded, kept, order[segment[kept] // 2], begin_of, len(texts), exact=exact)


def _in_order(
    encoded: Encoding, kept: Bools, text_of: Ints, begin_of: Ints, count: int, *, exact: bool
) -> Encoding:
    """Return the kept tokens by their text; ``begin_of`` is where it begins in its group."""
    ids, starts, ends = (
        encoded.ids[kept],
        encoded.starts[kept] - begin_of,
        encoded.ends[kept] - begin_of,
    )
    bounds = bounds_of(np.bincount(text_of, minlength=count))
    if (text_of[1:] >= text_of[:-1]).all():
        return Encoding(ids, starts, ends, bounds, exact)
    order = np.argsort(text_of, kind="stable")
    return Encoding(ids[order], starts[order], ends[order], bounds, exact)
