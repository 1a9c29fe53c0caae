"""Kinds of text: every character is of exactly one kind.

The law of locality: the kind of a character depends only on its own maximal run of characters that
are no whitespace (an item), that of whitespace only on its own run of line ends or of other
whitespace. So a text may be cut wherever these three meet, and between line ends
(`may_be_cut`), and no kind changes.
"""

from __future__ import annotations

from functools import cache
from itertools import chain
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from auditor.text import properties
from auditor.text.kind_patterns import BEGINNINGS, PAIRS, pattern
from auditor.text.slices import distinct, ranges
from auditor.text.words import runs_of

if TYPE_CHECKING:
    from auditor.text.stretch import Stretch

Ints = npt.NDArray[np.int64]
Kinds = npt.NDArray[np.uint8]
Bools = npt.NDArray[np.bool_]
Points = npt.NDArray[np.uint32]

KINDS = (
    "words",
    "numbers",
    "dates_and_times",
    "units",
    "identifiers",
    "urls_and_addresses",
    "formulas",
    "emoji",
    "punctuation",
    "repeated_punctuation",
    "single_spaces",
    "alignment",
    "line_ends",
    "other",
)
INK_KINDS = tuple(k for k in KINDS if k not in ("single_spaces", "alignment", "line_ends"))
_NUMBER_OF = {kind: number for number, kind in enumerate(KINDS)}
# By Unicode's general category (UAX #44, table 12), later rows over earlier ones; what no pattern
# holds stays of this kind. Line ends are UAX #14's mandatory breaks (BK, CR, LF, NL).
_BASE = (
    ("words", r"[\p{L}\p{M}]"),
    ("numbers", r"\p{N}"),
    ("punctuation", r"[\p{P}\p{S}]"),
    ("formulas", r"(?:(?!\p{ASCII})\p{Sm})"),
    ("emoji", r"\p{Emoji_Presentation}"),
    ("alignment", properties.WHITESPACE),
    ("line_ends", r"[\n\r\v\f\x85\u2028\u2029]"),
)
# Characters that may begin or mark what a pattern holds, whatever stands beside them.
_TRIGGERS = (
    r"[0-9_°℃℉µ\u20e3\p{Emoji_Presentation}\p{Regional_Indicator}"
    r"\p{Extended_Pictographic}\uFE0F\U0001f3fb-\U0001f3ff]"
)
# Marked only before a character that is no whitespace.
_BEFORE_INK = r"[.:@\\/=<>\^≤≥≈≠]"
_SPACE = ord(" ")
# UAX #29 MidLetter and the joiners: within a word between two of its letters.
_WITHIN = r"['’\u200c\u200d\u00ad]"


@cache
def _base() -> Kinds:
    found = np.full(properties.CODE_POINTS, _NUMBER_OF["other"], dtype=np.uint8)
    for kind, members in _BASE:
        found[properties.table(members)] = _NUMBER_OF[kind]
    return found


# What a character may trigger, as bits of one table.
_ALWAYS, _BEFORE, _LOWER, _UPPER, _MARK, _JOIN = 1, 2, 4, 8, 16, 32


@cache
def _flags() -> Kinds:
    found = np.zeros(properties.CODE_POINTS, dtype=np.uint8)
    for bit, members in (
        (_ALWAYS, _TRIGGERS),
        (_BEFORE, _BEFORE_INK),
        (_LOWER, r"[a-zß-öø-ÿ]"),
        (_UPPER, r"[A-ZÀ-ÖØ-Þ]"),
        (_MARK, r"[\p{P}\p{S}]"),
        (_JOIN, _WITHIN),
    ):
        found[properties.table(members)] |= bit
    return found


@cache
def _pairs() -> Kinds:
    """Return by two characters of ASCII: 1 where units begin with them, 2 where they are one."""
    found = np.zeros(128 * 128, dtype=np.uint8)
    for bit, pairs in ((1, BEGINNINGS), (2, PAIRS)):
        found[[ord(pair[0]) * 128 + ord(pair[1]) for pair in pairs]] |= bit
    return found


def may_be_cut(before: Points, after: Points) -> Bools:
    """Return whether a text may be cut between two characters without any kind changing."""
    left, right = _base()[before], _base()[after]
    end, blank = _NUMBER_OF["line_ends"], _NUMBER_OF["alignment"]
    ink = (left != end) & (left != blank) & (right != end) & (right != blank)
    return np.asarray(~ink & ((left != right) | (left == end)))


def kinds_of(stretch: Stretch) -> Kinds:
    """Return the kind of every character, a number of ``KINDS``, shape (characters,)."""
    # A line end before and after every document: nothing reaches across one.
    edges = stretch.bounds
    points = np.insert(stretch.points, edges, ord("\n"))
    kinds = _of_points(points)
    return np.delete(kinds, edges + np.arange(len(edges)))


def _of_points(points: Points) -> Kinds:
    kinds = _base()[points]
    ends, blank = kinds == _NUMBER_OF["line_ends"], kinds == _NUMBER_OF["alignment"]
    _mark_single_spaces(points, kinds, blank)
    ink = ~(ends | blank)
    starts, stops = runs_of(ink, np.array([0, len(points)]))
    triggers = np.flatnonzero(_triggers(points, kinds, ink))
    _join_words(points, kinds)
    if len(triggers) and len(starts):
        chosen = np.zeros(len(starts), dtype=np.bool_)
        chosen[np.searchsorted(starts, triggers, side="right") - 1] = True
        starts, stops = starts[chosen], stops[chosen]
        form, texts = distinct(points, starts, stops)
        held, begins = _of_items(texts)
        lengths = stops - starts
        kinds[ranges(starts, lengths)] = held[ranges(begins[form], lengths)]
    return kinds


def _mark_single_spaces(points: Points, kinds: Kinds, blank: Bools) -> None:
    """A run of other whitespace that is one U+0020 is a single space."""
    alone = blank & (points == _SPACE)
    alone[1:] &= ~blank[:-1]
    alone[:-1] &= ~blank[1:]
    kinds[alone] = _NUMBER_OF["single_spaces"]


def _triggers(points: Points, kinds: Kinds, ink: Bools) -> Bools:
    """Return the characters for which their item is looked at by the patterns."""
    flags = _flags()[points]
    found = (flags & _ALWAYS) > 0
    found[:-1] |= ((flags[:-1] & _BEFORE) > 0) & ink[1:]
    found[:-1] |= ((flags[:-1] & _LOWER) > 0) & ((flags[1:] & _UPPER) > 0)
    if len(points) > 2:
        marks = (flags[:-2] & _MARK) > 0
        found[:-2] |= marks & (points[:-2] == points[1:-1]) & (points[1:-1] == points[2:])
        found[1:-1] |= _unit_pairs(points, kinds)
    return found


def _unit_pairs(points: Points, kinds: Kinds) -> Bools:
    """Return, for all but the first and last character, whether a unit may begin there."""
    small = np.minimum(points, 127).astype(np.uint16)
    pair = _pairs()[small[1:-1] * 128 + small[2:]]
    found = np.zeros(len(pair), dtype=np.bool_)
    places = np.flatnonzero(pair) + 1
    word = kinds == _NUMBER_OF["words"]
    whole = ~word[np.minimum(places + 2, len(word) - 1)]
    kept = ~word[places - 1] & ((pair[places - 1] == 1) | (pair[places - 1] == 3) | whole)
    found[places[kept] - 1] = True
    return found


def _join_words(points: Points, kinds: Kinds) -> None:
    """Apostrophes and joiners between two letters belong to the word."""
    joins = np.flatnonzero((_flags()[points] & _JOIN) > 0)
    joins = joins[(joins > 0) & (joins < len(points) - 1)]
    word = _NUMBER_OF["words"]
    within = (kinds[joins - 1] == word) & (kinds[joins + 1] == word)
    kinds[joins[within]] = word


def _of_items(texts: list[str]) -> tuple[Kinds, Ints]:
    """Return the kinds of items laid end to end, a line end between two, and where each begins."""
    joined = "\n".join(texts)
    points = np.frombuffer(joined.encode("utf-32-le"), dtype=np.uint32)
    kinds = _base()[points]
    _join_words(points, kinds)
    lengths = np.array([len(text) + 1 for text in texts], dtype=np.int64)
    found = [
        (_NUMBER_OF[match.lastgroup], *match.span())
        for match in pattern().finditer(joined)
        if match.lastgroup is not None
    ]
    if found:
        flat = np.fromiter(chain.from_iterable(found), dtype=np.int64).reshape(-1, 3)
        sizes = flat[:, 2] - flat[:, 1]
        kinds[ranges(flat[:, 1], sizes)] = np.repeat(flat[:, 0], sizes)
    return kinds, np.cumsum(lengths) - lengths
