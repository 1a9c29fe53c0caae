"""Encodes many short parts in one go: laid end to end where cuts are proved, then taken apart."""

from __future__ import annotations

import re

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

    Parts are laid end to end with a fence between them: before the fence there is a cut by the last
    character of a part, after it one by the first of the next. Parts for which that is not so go
    one by one, and so do all when a string that is an added token comes about.
    """

    def __init__(self, separation: Separation) -> None:
        self._engine: Engine = separation.later
        self._ends = ~separation.closed | separation.open_words[" "]
        fence = ord(_FENCE[-1])
        opens = [m for m in WHITESPACE_AFTER_WORDS if separation.open_words[m][fence]]
        self._starts = np.zeros(properties.CODE_POINTS, dtype=np.bool_)
        self._starts[[ord(mark) for mark in opens]] = True
        self._before_letters = not separation.closed[fence]
        contents = separation.whole_for
        self._added = re.compile("|".join(map(re.escape, contents))) if contents else None
        self.has_decoder = self._engine.has_decoder
        self.alters = self._engine.alters
        self.alters_ascii = self._engine.alters_ascii
        self.spells_bytes = self._engine.spells_bytes

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``."""
        if len(texts) < _WORTH_IT:
            return self._engine.encode(texts)
        joinable = np.flatnonzero(self._joinable(texts)).tolist()
        groups = [joinable[i : i + _TOGETHER] for i in range(0, len(joinable), _TOGETHER)]
        strings = [_FENCE.join([texts[place] for place in group]) for group in groups]
        if self._added is not None and any(self._added.search(string) for string in strings):
            return self._engine.encode(texts)
        alone = np.setdiff1d(np.arange(len(texts)), joinable).tolist()
        encoded = self._engine.encode([*strings, *(texts[place] for place in alone)])
        return _taken_apart(encoded, texts, [*groups, *([place] for place in alone)])

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return self._engine.decode(ids)

    def normalize(self, word: str) -> str:
        """Return what the normaliser makes of ``word``."""
        return self._engine.normalize(word)

    def _joinable(self, texts: list[str]) -> Bools:
        """Return which texts have a cut before a fence, and after one, shape (texts,)."""
        letters = properties.table(properties.WORD_CHARACTER)
        firsts, seconds, lasts = (
            np.array([ord(text[place]) if len(text) > 1 else 0 for text in texts])
            for place in (0, 1, -1)
        )
        before_letter = (firsts == ord(" ")) & letters[seconds] & self._before_letters
        return np.asarray(self._ends[lasts] & (self._starts[firsts] | before_letter))


def _taken_apart(encoded: Encoding, texts: list[str], groups: list[list[int]]) -> Encoding:
    """Return the tokens of each text from those of groups laid end to end with fences."""
    order = np.array([place for group in groups for place in group], dtype=np.int64)
    lengths = np.array([len(text) for text in texts], dtype=np.int64)[order]
    last = np.zeros(len(order), dtype=np.bool_)
    last[np.cumsum([len(group) for group in groups]) - 1] = True
    # Texts and fences take turns; the last text of a group has a fence of no length after it.
    widths = np.stack((lengths, np.where(last, 0, len(_FENCE))), axis=1).reshape(-1)
    begins = bounds_of(widths.tolist())
    ends_of_groups = begins[2 * np.flatnonzero(last) + 2]
    shift = np.repeat(np.concatenate(([0], ends_of_groups[:-1])), np.diff(encoded.bounds))
    starts = encoded.starts + shift
    segment = np.searchsorted(begins[:-1], starts, side="right") - 1
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
