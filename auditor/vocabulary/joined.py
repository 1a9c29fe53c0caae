"""Encodes many short parts in one go: laid end to end where cuts are proved, then taken apart."""

from __future__ import annotations

import re

import numpy as np

from auditor.vocabulary import adjoining
from auditor.vocabulary.engine import Bools, Encoding, Engine, Ints, bounds_of
from auditor.vocabulary.separation import Separation

# One stands between two parts, so that one place is a cut before it and one after it: the second
# serves parts that begin with a letter.
_FENCES = (" a", " a\n")
_TOGETHER = 512
_WORTH_IT = 64


class JoinedParts:
    """An engine for later parts of documents (see ``Separation``) that gives what it would give.

    Parts are laid end to end with a fence between them: before the fence there is a cut by the last
    character of a part, after it one by the first two of the next. Parts are laid with others that
    the same fence serves; those that none serves go one by one, and so do all when a string that is
    an added token comes about.
    """

    def __init__(self, separation: Separation) -> None:
        self._engine: Engine = separation.later
        self._classes = separation.classes
        self._asked = separation.asked
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
        fence_of = self._fences(texts)
        groups: list[list[int]] = []
        strings: list[str] = []
        for number, fence in enumerate(_FENCES):
            joinable = np.flatnonzero(fence_of == number).tolist()
            own = [joinable[i : i + _TOGETHER] for i in range(0, len(joinable), _TOGETHER)]
            groups += own
            strings += [fence.join([texts[place] for place in group]) for group in own]
        if self._added is not None and any(self._added.search(string) for string in strings):
            return self._engine.encode(texts)
        alone = np.flatnonzero(fence_of == len(_FENCES)).tolist()
        encoded = self._engine.encode([*strings, *(texts[place] for place in alone)])
        widths = np.array([*map(len, _FENCES), 0], dtype=np.int64)[fence_of]
        return _taken_apart(encoded, texts, [*groups, *([place] for place in alone)], widths)

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return self._engine.decode(ids)

    def normalize(self, word: str) -> str:
        """Return what the normaliser makes of ``word``."""
        return self._engine.normalize(word)

    def _fences(self, texts: list[str]) -> Ints:
        """Return the first fence that serves each text, or their number for none."""
        # A text of one character is followed by a fence, which begins with a space.
        first, second, last = (
            np.array([ord((text + " ")[place]) for text in texts]) for place in (0, 1, -2)
        )
        found = np.full(len(texts), len(_FENCES), dtype=np.int64)
        space, letter = (np.full(len(texts), ord(character)) for character in _FENCES[0])
        closed = self._is_cut(last, space, letter)
        for number, fence in reversed(list(enumerate(_FENCES))):
            end = np.full(len(texts), ord(fence[-1]))
            found[closed & self._is_cut(end, first, second)] = number
        return found

    def _is_cut(self, before: Ints, after: Ints, next_one: Ints) -> Bools:
        """Return whether a cut stands between two characters; a line end is taken to be alone."""
        asked = self._asked[self._classes[before], self._classes[after]]
        answers = adjoining.followers()[next_one] | (adjoining.OPEN | adjoining.LONE)
        return np.asarray((asked > 0) & ((asked & ~answers) == 0))


def _taken_apart(
    encoded: Encoding, texts: list[str], groups: list[list[int]], fences: Ints
) -> Encoding:
    """Return the tokens of each text from those of groups laid end to end.

    ``fences`` (texts,) are the widths of the fences between the texts of a group.
    """
    order = np.array([place for group in groups for place in group], dtype=np.int64)
    lengths = np.array([len(text) for text in texts], dtype=np.int64)[order]
    last = np.zeros(len(order), dtype=np.bool_)
    last[np.cumsum([len(group) for group in groups]) - 1] = True
    # Texts and fences take turns; the last text of a group has a fence of no length after it.
    widths = np.stack((lengths, np.where(last, 0, fences[order])), axis=1).reshape(-1)
    begins = bounds_of(widths.tolist())
    ends_of_groups = begins[2 * np.flatnonzero(last) + 2]
    shift = np.repeat(np.concatenate(([0], ends_of_groups[:-1])), np.diff(encoded.bounds))
    segment = np.searchsorted(begins[:-1], encoded.starts + shift, side="right") - 1
    # A fence of no length begins where the next text does: the search finds the text.
    kept = segment % 2 == 0
    begin_of = (begins[segment] - shift)[kept]
    return _in_order(encoded, kept, order[segment[kept] // 2], begin_of, len(texts))


def _in_order(
    encoded: Encoding, kept: Bools, text_of: Ints, begin_of: Ints, count: int
) -> Encoding:
    """Return the kept tokens by their text; ``begin_of`` is where it begins in its group."""
    order = np.argsort(text_of, kind="stable")
    starts, ends = encoded.starts[kept] - begin_of, encoded.ends[kept] - begin_of
    bounds = bounds_of(np.bincount(text_of, minlength=count).tolist())
    return Encoding(encoded.ids[kept][order], starts[order], ends[order], bounds)
