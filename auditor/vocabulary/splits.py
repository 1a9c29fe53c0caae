"""Where a vocabulary's tokens are proved to part: of its pattern alone, whatever words are.

Beside two classes of characters (`patterns.splits_between`) these are two places in whitespace that
stands before a word (`indents`). In text that no normaliser alters, encoding what lies between such
places apart gives the tokens of the whole.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from auditor.text.words import runs_of
from auditor.vocabulary import adjoining
from auditor.vocabulary.adjoining import Bools
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.indents import Indents, splits_indents
from auditor.vocabulary.patterns import splits_between, takes_line_ends

_INK = (
    *adjoining.PUNCTUATION, *adjoining.ASCII_WORDS,
    adjoining.LETTER, adjoining.NUMBER, adjoining.SPECIAL,
)  # fmt: skip
_LINE_ENDS = (ord("\n"), ord("\r"))


def _flags(classes: tuple[int, ...]) -> Bools:
    found = np.zeros(adjoining.CLASSES, dtype=np.bool_)
    found[list(classes)] = True
    return found


@dataclass(frozen=True)
class Splits:
    """The places: ``apart`` (CLASSES, CLASSES), and what holds of whitespace before words."""

    apart: Bools
    indents: Indents

    @classmethod
    def of(cls, pattern: str) -> Splits:
        """Return what is proved of ``pattern``, which must be proved to split before a space."""
        apart = splits_between(pattern)
        # Engines do not agree on which control characters are whitespace: none is after a place.
        after, before = _flags((*_INK, *adjoining.WHITESPACE)), _flags(_INK)
        before[adjoining.LINE_END] = takes_line_ends(pattern)
        apart = apart & np.outer(before, after)
        # What a look-ahead sees behind whitespace is whether more of it follows.
        apart[adjoining.LINE_END] &= _flags(_INK)
        apart[adjoining.SPACED, adjoining.SPACE] = True
        return cls(apart, splits_indents(pattern))

    def within(self, points: npt.NDArray[np.uint32], bounds: Ints) -> Bools:
        """Return before which characters a text may be split, shape (characters,).

        ``bounds`` delimits the texts, none of which is empty; each begins with such a character.
        """
        found = np.zeros(len(points), dtype=np.bool_)
        classes = adjoining.classes()[points]
        codes = classes[:-1].astype(np.uint16) * adjoining.CLASSES + classes[1:]
        found[1:] = self.apart.reshape(-1)[codes]
        if self.indents.last_blank:
            found[self._in_whitespace(classes, bounds)] = True
        found[bounds[:-1]] = True
        return found

    def _in_whitespace(self, classes: npt.NDArray[np.uint8], bounds: Ints) -> Ints:
        """Return the places within whitespace that ink follows, and none but ink precedes."""
        starts, ends = runs_of(_flags(adjoining.WHITESPACE)[classes], bounds)
        edges = np.zeros(len(classes) + 1, dtype=np.bool_)
        edges[bounds] = True
        ink = np.append(_flags(_INK)[classes], False)
        chosen = (ends - starts > 1) & ink[ends] & ~edges[ends] & (edges[starts] | ink[starts - 1])
        starts, ends = starts[chosen], ends[chosen]
        is_end = _flags(_LINE_ENDS)[classes]
        blanks: Ints = ends[~is_end[ends - 1]] - 1
        if not self.indents.last_line_end:
            return blanks
        reached = np.maximum.accumulate(np.where(is_end, np.arange(len(classes)), -1))
        lasts = reached[ends - 1]
        found: Ints = np.concatenate((blanks, lasts[(lasts >= starts) & (lasts < ends - 1)] + 1))
        return found
