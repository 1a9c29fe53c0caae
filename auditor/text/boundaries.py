"""Word boundaries of plain text by a table that ICU fills; other text is left to ICU itself.

Among the characters that are here called plain, no rule of UAX #29 looks further than two
characters back and one ahead (WB6, WB7, WB7b, WB7c, WB11, WB12; marks, joiners, flags and scripts
with dictionaries are not plain). So the four characters about a place decide on it, and ICU is
asked once for each four of their kinds.
"""

from __future__ import annotations

from functools import cache
from itertools import chain, product

import numpy as np
import numpy.typing as npt
from icu4py.breakers import WordBreaker

from auditor.text import properties

Ints = npt.NDArray[np.int64]
Points = npt.NDArray[np.uint32]
Kinds = npt.NDArray[np.uint16]
Bools = npt.NDArray[np.bool_]

# The rules that no language tailors; ICU brings the dictionaries of Thai, Lao, Khmer, Burmese,
# Chinese and Japanese whatever the locale.
LOCALE = "en"
# A vertical tab is a boundary on both its sides (UAX #29 WB3a, WB3b) whatever stands beside it, so
# that one call serves many documents. A line feed would join a carriage return before it.
SEPARATOR = "\v"

# One character of each kind; the first is also what stands before and after a document. Characters
# that stand between letters or numbers each have a kind of their own: ICU tailors some of them.
_EDGE, _LETTER, _OTHER = 0, 1, 2
_KINDS = "\va#0 \r\n_:,;.'\"’"
_NOT_PLAIN = len(_KINDS)
# Latin, Greek and Cyrillic with their punctuation, and the dashes and quotes of U+2010 on.
_RANGES = ((0, 0x300), (0x370, 0x530), (0x2010, 0x2018), (0x201C, 0x2024), (0x2026, 0x2027))


@cache
def _kind_of() -> Kinds:
    """Return the kind of every code point, ``_NOT_PLAIN`` for most."""
    found = np.full(properties.CODE_POINTS, _NOT_PLAIN, dtype=np.uint16)
    within = np.zeros(properties.CODE_POINTS, dtype=np.bool_)
    for begin, end in _RANGES:
        within[begin:end] = True
    within &= ~properties.table(r"\p{Cn}")
    for kind, name in ((_LETTER, "ALetter"), (_OTHER, "Other"), (_EDGE, "Newline")):
        found[within & properties.table(rf"\p{{Word_Break={name}}}")] = kind
    found[[ord(digit) for digit in "0123456789"]] = _KINDS.index("0")
    for kind, character in enumerate(_KINDS):
        found[ord(character)] = kind
    return found


@cache
def _table() -> Bools:
    """Return by the kinds of four characters, four bits each, whether the second ends a segment."""
    fours = ["".join(four) for four in product(_KINDS, repeat=4)]
    starts = {start for start, _ in WordBreaker(SEPARATOR.join(fours), LOCALE).segments()}
    kinds = product(range(len(_KINDS)), repeat=4)
    found = np.ones(1 << 16, dtype=np.bool_)
    for place, (before, left, right, after) in enumerate(kinds):
        found[before << 12 | left << 8 | right << 4 | after] = 5 * place + 2 in starts
    return found


def segment_starts(texts: list[str], bounds: Ints, points: Points) -> Ints:
    """Return where segments of ``texts`` begin, which lie end to end with ``bounds``, rising."""
    if not len(points):
        return np.zeros(0, dtype=np.int64)
    kinds = _kind_of()[points]
    begins = bounds[:-1][np.diff(bounds) > 0]
    found = _table()[_fours(kinds, begins)]
    found[begins] = True
    odd = kinds == _NOT_PLAIN
    if odd.any():
        starts, ends = _lines_with(odd, begins, points)
        _ask(found, "".join(texts), starts, ends)
    return np.flatnonzero(found)


def _lines_with(odd: Bools, begins: Ints, points: Points) -> tuple[Ints, Ints]:
    """Return starts and ends of the lines of documents in which a character is ``odd``."""
    first = np.zeros(len(points) + 1, dtype=np.bool_)
    first[1:] = points == ord("\n")
    first[begins] = True
    first[-1] = True
    edges = np.flatnonzero(first)
    before = np.concatenate(([0], np.cumsum(odd)))[edges]
    chosen = np.flatnonzero(np.diff(before))
    return edges[chosen], edges[chosen + 1]


def _fours(kinds: Kinds, begins: Ints) -> Kinds:
    """Return for each character two kinds before it, its own and the next, four bits each.

    Documents begin at ``begins``; what stands before and after them is an edge.
    """
    edge = np.full(2, _EDGE, dtype=np.uint16)
    padded = np.concatenate((edge, kinds, edge))
    count = len(kinds)
    last = np.append(begins[1:], count) - 1
    following = padded[3 : count + 3].copy()
    following[last] = _EDGE
    earlier = padded[:count].copy()
    earlier[begins[begins + 1 < count] + 1] = _EDGE
    fours = earlier << 12 | padded[1 : count + 1] << 8 | kinds << 4 | following
    return fours.astype(np.uint16, copy=False)


def _ask(found: Bools, joined: str, starts: Ints, ends: Ints) -> None:
    """Let ICU decide on the lines from ``starts`` to ``ends``, each a part of one document."""
    lines = [joined[start:end] for start, end in zip(starts.tolist(), ends.tolist(), strict=True)]
    lengths = ends - starts
    text = SEPARATOR.join(lines)
    segments = WordBreaker(text, LOCALE).segments()
    flat = np.fromiter(chain.from_iterable(segments), dtype=np.int64)[::2]
    begins = np.cumsum(lengths + 1) - lengths - 1
    flat = utf16_to_points(flat, np.frombuffer(text.encode("utf-32-le"), dtype=np.uint32))
    line = np.searchsorted(begins, flat, side="right") - 1
    inside = flat - begins[line] < lengths[line]
    for start, end in zip(starts.tolist(), ends.tolist(), strict=True):
        found[start:end] = False
    found[(flat - begins[line] + starts[line])[inside]] = True


def utf16_to_points(offsets: Ints, points: Points) -> Ints:
    """Return UTF-16 offsets, as ICU gives them, as code point offsets into ``points``."""
    beyond = np.flatnonzero(points > 0xFFFF)
    if not len(beyond):
        return offsets
    # The k-th such character begins at UTF-16 offset beyond[k] + k; each one that begins before
    # an offset moves it by one.
    return offsets - np.searchsorted(beyond + np.arange(len(beyond)), offsets, side="left")
