"""Encodes many short parts in one go: laid end to end where cuts are proved, then taken apart."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from auditor.vocabulary import adjoining
from auditor.vocabulary.engine import Bools, Encoding, Engine, Ints, bounds_of
from auditor.vocabulary.separation import Separation
from auditor.vocabulary.splittexts import SplitTexts
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# A fence stands between two parts that are no cut of themselves: its beginning makes a cut after
# the one, its end a cut before the other. The first of each that serves is taken.
_BEGINS = (" a", "aa")
_ENDS = ("", "\n")
_FENCES = tuple(begin + end for begin in _BEGINS for end in _ENDS)
_NONE = len(_FENCES)
_WIDTHS = np.array([*map(len, _FENCES), 0], dtype=np.int64)
_TOGETHER = 512
_WORTH_IT = 64


class JoinedParts:
    """An engine for later parts of documents (see ``Separation``) that gives what it would give.

    Parts are laid end to end. Where the last character of a part and the first of the next are no
    cut, a fence stands between them: before it there is a cut by the part before, after it one by
    the part after. Parts that no fence serves go one by one, and so do all when a string that is an
    added token comes about. Where it is known how the vocabulary splits, parts are taken apart
    instead (`splits`).
    """

    def __init__(self, separation: Separation) -> None:
        self._engine: Engine = separation.later
        self._classes = separation.classes
        self._asked = separation.asked
        contents = separation.whole_for
        self._split_texts = (
            SplitTexts(self._engine, separation.splits, separation.whole_for)
            if separation.splits and isinstance(self._engine, TokenizersEngine)
            else None
        )
        self._added = re.compile("|".join(map(re.escape, contents))) if contents else None
        self.has_decoder = self._engine.has_decoder
        self.alters = self._engine.alters
        self.unaltered = self._engine.unaltered
        self.spells_bytes = self._engine.spells_bytes

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``."""
        if self._split_texts is not None and not self._holds_added("\0".join(texts)):
            return self._split_texts.encode(texts)
        if len(texts) < _WORTH_IT:
            return self._engine.encode(texts)
        edges = _Edges.of(texts)
        begin, end = self._begins(edges), self._ends(edges)
        joinable = (begin < len(_BEGINS)) & (end < len(_ENDS))
        places = np.flatnonzero(joinable)
        apart = self._is_cut(edges.lasts[places[:-1]], edges.at(places[1:]))
        fences = np.where(apart, _NONE, begin[places[:-1]] * len(_ENDS) + end[places[1:]])
        groups = _Groups(places, fences)
        strings = groups.strings(texts)
        if any(map(self._holds_added, strings)):
            return self._engine.encode(texts)
        alone = np.flatnonzero(~joinable)
        encoded = self._engine.encode([*strings, *(texts[place] for place in alone.tolist())])
        return _taken_apart(encoded, texts, groups, alone)

    def ids_of(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``texts`` end to end, and the bounds of each text among them."""
        found = self.encode(texts)
        return found.ids, found.bounds

    def _holds_added(self, string: str) -> bool:
        return self._added is not None and self._added.search(string) is not None

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return self._engine.decode(ids)

    def normalize(self, word: str) -> str:
        """Return what the normaliser makes of ``word``."""
        return self._engine.normalize(word)

    def _begins(self, edges: _Edges) -> Ints:
        """Return which beginning of a fence makes a cut after each part, their number for none."""
        found = np.full(len(edges.lasts), len(_BEGINS), dtype=np.int64)
        for number, begin in reversed(list(enumerate(_BEGINS))):
            fence = _Edges.like(edges.lasts, begin)
            found[self._is_cut(edges.lasts, fence)] = number
        return found

    def _ends(self, edges: _Edges) -> Ints:
        """Return which end of a fence makes a cut before each part, their number for none."""
        found = np.full(len(edges.lasts), len(_ENDS), dtype=np.int64)
        for number, end in reversed(list(enumerate(_ENDS))):
            before = np.full_like(edges.lasts, ord((_BEGINS[0] + end)[-1]))
            # The line end of a fence stands after a letter.
            found[self._is_cut(before, edges, lone=True)] = number
        return found

    def _is_cut(self, before: Ints, after: _Edges, *, lone: bool = False) -> Bools:
        """Return whether a cut stands after characters ``before`` and before parts ``after``."""
        asked = self._asked[self._classes[before], self._classes[after.firsts]]
        answers = adjoining.followers()[np.maximum(after.seconds, 0)]
        # No part begins with a character that joins, so that what follows one of a single
        # character is plain.
        answers = np.where(after.seconds < 0, adjoining.PLAIN, answers) | adjoining.OPEN
        answers = answers | (adjoining.LONE if lone else 0)
        return np.asarray((asked > 0) & ((asked & ~answers) == 0))


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

    @classmethod
    def like(cls, parts: Ints, text: str) -> _Edges:
        """Return the edges of ``text``, as many times as there are ``parts``."""
        first, second, last = (np.full_like(parts, ord(text[place])) for place in (0, 1, -1))
        return cls(first, second, last)

    def at(self, places: Ints) -> _Edges:
        return _Edges(self.firsts[places], self.seconds[places], self.lasts[places])


class _Groups:
    """Parts at ``places`` laid end to end, ``fences`` (parts - 1,) between them by number."""

    def __init__(self, places: Ints, fences: Ints) -> None:
        self.places = places
        self.begins = np.arange(0, len(places), _TOGETHER)
        self.fences = np.append(fences, _NONE)[: len(places)]
        self.fences[self.begins[1:] - 1] = _NONE

    def strings(self, texts: list[str]) -> list[str]:
        """Return the string of each group."""
        spelled = (*_FENCES, "")
        parts = [
            texts[place] + spelled[fence]
            for place, fence in zip(self.places.tolist(), self.fences.tolist(), strict=True)
        ]
        return ["".join(parts[i : i + _TOGETHER]) for i in self.begins.tolist()]


def _taken_apart(encoded: Encoding, texts: list[str], groups: _Groups, alone: Ints) -> Encoding:
    """Return the tokens of each text from those of groups, then of texts alone."""
    order = np.concatenate((groups.places, alone))
    lengths = np.array([len(text) for text in texts], dtype=np.int64)[order]
    # Texts and fences take turns; where there is no fence, one of no length.
    gaps = np.concatenate((_WIDTHS[groups.fences], np.zeros(len(alone), dtype=np.int64)))
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
