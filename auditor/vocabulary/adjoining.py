"""Classes of characters, and between which of them the rules of text allow a cut.

A place in a document is judged by the class of the character before it, *x*, that of the one after
it, *y*, and what follows *y*. Here stands what holds for every vocabulary: that UAX #29 has a
boundary at the place for words and for grapheme clusters, that no normalization joins *x* and *y*,
and that no run of whitespace or of zero-width characters is cut. What a vocabulary allows is
decided elsewhere (`separation`); a cut stands where both allow it.

Each character of ASCII is a class of its own; of all others only letters and numbers matter.
"""

from __future__ import annotations

import unicodedata
from functools import cache

import numpy as np
import numpy.typing as npt

from auditor.text import properties
from auditor.vocabulary.steps import METASPACE

Bytes = npt.NDArray[np.uint8]
Bools = npt.NDArray[np.bool_]

# The classes beyond ASCII: letters and numbers that no rule singles out; letters and numbers with a
# rule of their own; characters after which there is no cut; and those after which there is one
# before a space only.
LETTER, NUMBER, SPECIAL, CLOSED, SPACED = range(128, 133)
CLASSES = 133

# What is asked at a place between two classes: 0 where no cut is ever made.
OPEN = 1
# The character after y is one that neither joins y nor is taken out before it is seen.
PLAIN = 2
# That character is whitespace or punctuation: `.` between letters or digits belongs to a word.
APART = 4
# x is a line end, with no other whitespace before it.
LONE = 8
# y is a space, with no other whitespace after it.
SINGLE = 1

_GRAPH = range(0x21, 0x7F)
PUNCTUATION = tuple(point for point in _GRAPH if not chr(point).isalnum())
WHITESPACE = tuple(map(ord, " \t\r\n"))
LINE_END = ord("\n")
SPACE = ord(" ")
ASCII_WORDS = tuple(point for point in _GRAPH if chr(point).isalnum())
# Word_Break: MidLetter, MidNum, MidNumLet, Single_Quote and Double_Quote; and ExtendNumLet.
_WITHIN_WORDS = tuple(map(ord, ".,:;'\""))
_EXTENDS_WORDS = ord("_")
_APART = tuple(p for p in PUNCTUATION if p not in (*_WITHIN_WORDS, _EXTENDS_WORDS))

_NO_RULE = (
    r"(?:(?=[\p{WB=ALetter}\p{WB=Numeric}\p{WB=Katakana}\p{WB=Other}])"
    r"[\p{GCB=Other}\p{GCB=L}\p{GCB=LV}\p{GCB=LVT}])"
)


@cache
def closed_to_all() -> Bools:
    """Return the characters after which no cut is made for any vocabulary."""
    found = properties.table(r"\p{C}") | properties.table(r"\p{Z}")
    found = found | properties.table(properties.WHITESPACE)
    # A prepended mark holds on to what follows it (UAX #29, GB9b).
    found = found | properties.table(r"\p{GCB=Prepend}")
    found[ord(METASPACE)] = True
    found.setflags(write=False)
    return found


@cache
def classes() -> Bytes:
    """Return the class of each code point.

    Engines follow different versions of Unicode: letters and numbers are taken for such that were
    so in version 3.2, which the standard library keeps for comparison, and still are.
    """
    closed = closed_to_all()
    found = np.where(closed, CLOSED, SPACED).astype(np.uint8)
    found[:128] = np.arange(128)
    words = np.flatnonzero(properties.table(properties.WORD_CHARACTER) & ~closed)
    no_rule = properties.table(_NO_RULE)
    for point in words[words >= 128].tolist():
        now, then = (f(chr(point))[0] for f in (unicodedata.category, _category_in_3_2))
        if {now, then} <= {"L", "N"}:
            plain = LETTER if now == then == "L" else NUMBER
            found[point] = plain if no_rule[point] else SPECIAL
    found.setflags(write=False)
    return found


_category_in_3_2 = unicodedata.ucd_3_2_0.category


def demoted(found: Bytes, points: npt.NDArray[np.int64]) -> Bytes:
    """Return the classes ``found``, in which ``points`` are letters and numbers no longer."""
    changed = found.copy()
    inner = points[points >= 128]
    changed[inner] = np.where(closed_to_all()[inner], CLOSED, SPACED)
    return changed


@cache
def allowed_by_text() -> Bytes:
    """Return what is asked between two classes, shape (CLASSES, CLASSES)."""
    found = np.zeros((CLASSES, CLASSES), dtype=np.uint8)
    words = (*ASCII_WORDS, LETTER, NUMBER)
    for before, after, asked in (
        (words, _APART, OPEN | PLAIN),
        (words, _WITHIN_WORDS, OPEN | APART),
        (_APART, words, OPEN | PLAIN),
        (PUNCTUATION, PUNCTUATION, OPEN | PLAIN),
        ((LINE_END,), (*words, *PUNCTUATION), OPEN | PLAIN),
        ((*words, SPECIAL, *PUNCTUATION), WHITESPACE, OPEN),
    ):
        found[np.ix_(before, after)] = asked
    found[SPACED, SPACE] = OPEN
    found[_EXTENDS_WORDS, _EXTENDS_WORDS] = 0
    found.setflags(write=False)
    return found


@cache
def followers() -> Bytes:
    """Return for each code point what it answers, of ``PLAIN`` and ``APART``."""
    found = np.zeros(properties.CODE_POINTS, dtype=np.uint8)
    letters = properties.table(properties.WORD_CHARACTER)
    found[letters & properties.table(_NO_RULE)] = PLAIN
    found[[*WHITESPACE, *PUNCTUATION]] = PLAIN | APART
    found.setflags(write=False)
    return found


# What the end of a document answers.
END = PLAIN | APART
