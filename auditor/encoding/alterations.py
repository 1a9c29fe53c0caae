"""Which words a normaliser alters: in case alone, or in more."""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

import numpy as np
import regex

from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Ints

Alteration = Literal[0, 1, 2]
UNALTERED: Alteration = 0
CASE_ONLY: Alteration = 1
MORE_THAN_CASE: Alteration = 2

# What normalisers insert; no word holds either (UAX #29).
_INSERTED = str.maketrans("", "", " \u2581")
# `regex` also pairs i with İ and ı, as Turkish does; full case folding (CaseFolding.txt, C and F)
# takes İ for i with a dot above, and ı for itself: so spelled, they match nothing else.
_DOTS = str.maketrans({"\u0130": "i\u0307", "\u0131": "\uffff"})
_REMEMBERED = 50_000


class Alterations:
    """Judges words by ``normalize``, each distinct word once (as long as memory is bounded).

    ``unaltered`` is a table of the characters that it leaves alone whatever stands beside them:
    words of these are not shown to it.
    """

    def __init__(self, normalize: Callable[[str], str], unaltered: Bools | None = None) -> None:
        self._normalize = normalize
        self._unaltered = unaltered
        self._known: dict[str, Alteration] = {}

    def of_words(self, stretch: Stretch) -> Ints:
        """Return how the normaliser alters each word of ``stretch``, shape (words,)."""
        words, joined = stretch.words, stretch.joined
        found = np.full(len(words), UNALTERED, dtype=np.int64)
        places = np.arange(len(words))
        if self._unaltered is not None:
            odd = np.concatenate(([0], np.cumsum(~self._unaltered[stretch.points])))
            places = np.flatnonzero(odd[words.ends] > odd[words.starts])
        pairs = zip(words.starts[places].tolist(), words.ends[places].tolist(), strict=True)
        found[places] = [self.of(joined[start:end]) for start, end in pairs]
        return found

    def of(self, word: str) -> Alteration:
        """Return how the normaliser alters ``word`` when it stands alone."""
        known = self._known.get(word)
        if known is None:
            if len(self._known) >= _REMEMBERED:
                self._known.clear()
            known = self._known[word] = judge(word, self._normalize(word))
        return known


def judge(word: str, normalized: str) -> Alteration:
    """Return how ``normalized`` differs from ``word``, inserted spaces and markers aside.

    Case is compared by full case folding as `regex` knows it.
    """
    if normalized == word:
        return UNALTERED
    bare = normalized.translate(_INSERTED)
    if bare == word:
        return UNALTERED
    return CASE_ONLY if _same_but_for_case(word, bare) else MORE_THAN_CASE


def _same_but_for_case(word: str, other: str) -> bool:
    if word.isascii() and other.isascii():
        return word.lower() == other.lower()
    flags = regex.IGNORECASE | regex.FULLCASE | regex.VERSION1
    pattern = regex.escape(word.translate(_DOTS))
    return regex.fullmatch(pattern, other.translate(_DOTS), flags=flags) is not None
