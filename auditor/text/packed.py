"""Short strings of bytes as two machine words each, and a table that numbers them.

Up to 15 bytes are written out, and the last byte of the second word holds their number: two strings
are equal when their words are. So nothing is compared but words, many strings at once, and no
string becomes an object.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Ints = npt.NDArray[np.int64]
Octets = npt.NDArray[np.uint8]
Words = npt.NDArray[np.uint64]
Bools = npt.NDArray[np.bool_]

LONGEST = 15
MARKS = 16
_WORD = 8
# What `padded` adds.
ROOM = 2 * _WORD
_ONES = [(1 << 8 * held) - 1 for held in range(_WORD + 1)]
_FIRST = np.array([_ONES[min(length, _WORD)] for length in range(LONGEST + 1)], dtype=np.uint64)
_SECOND = np.array([_ONES[max(length - _WORD, 0)] for length in range(LONGEST + 1)], np.uint64)
# Odd multipliers of mixed bits (splitmix64 and Fibonacci hashing); any would do.
_MIX = tuple(map(np.uint64, (0xBF58476D1CE4E5B9, 0x94D049BB133111EB, 0x9E3779B97F4A7C15)))


def padded(data: bytes) -> Octets:
    """Return ``data`` with room after it, so that words can be read from any place in it."""
    return np.frombuffer(data + b"\0" * ROOM, dtype=np.uint8)


def packed(octets: Octets, begins: Ints, lengths: Ints, marks: Ints | None = None) -> Words:
    """Return the words of strings of 1 to ``LONGEST`` bytes, shape (strings, 2).

    ``octets`` is ``padded``. Strings are equal only when their ``marks`` (0 up to ``MARKS``) are.
    """
    words = np.ndarray((len(octets) - _WORD + 1,), "<u8", octets, strides=(1,))
    found = np.empty((len(begins), 2), dtype=np.uint64)
    tags = lengths.astype(np.uint64) * np.uint64(MARKS)
    if marks is not None:
        tags |= marks.astype(np.uint64)
    found[:, 0] = words[begins] & _FIRST[lengths]
    found[:, 1] = (words[begins + _WORD] & _SECOND[lengths]) | tags << np.uint64(56)
    return found


def mixed(words: Words) -> Words:
    """Return a hash of 64 bits of each pair of words, shape (strings,)."""
    found = words[:, 0] * _MIX[0]
    found ^= found >> np.uint64(32)
    found += words[:, 1] * _MIX[1]
    found ^= found >> np.uint64(29)
    return found * _MIX[2]


class PackedNumbers:
    """Numbers of packed strings: a table with open places, looked into for all strings at once.

    There is room for ``most`` strings; those that are added beyond get no number.
    """

    def __init__(self, most: int) -> None:
        bits = max(4, (2 * most).bit_length())
        self._room = most
        self._shift = np.uint64(64 - bits)
        self._last = (1 << bits) - 1
        self._words = np.zeros((1 << bits, 2), dtype=np.uint64)
        self._numbers = np.zeros(1 << bits, dtype=np.int32)

    def find(self, words: Words) -> Ints:
        """Return the number of each string, -1 where there is none."""
        places = self._first(words)
        held = self._words.take(places, axis=0)
        same = (held[:, 0] == words[:, 0]) & (held[:, 1] == words[:, 1])
        found = np.where(same, self._numbers.take(places), -1).astype(np.int64)
        # Where another string stands, the one that is sought may stand in a place after it.
        left = np.flatnonzero(~same & (held[:, 1] != 0))
        while len(left):
            places[left] = (places[left] + 1) & self._last
            held, sought = self._words[places[left]], words[left]
            same = (held == sought).all(axis=1)
            found[left[same]] = self._numbers[places[left[same]]]
            left = left[~same & (held[:, 1] != 0)]
        return found

    def add(self, words: Words, numbers: Ints) -> None:
        """Number strings that are all distinct and have no number yet."""
        words, numbers = words[: self._room], numbers[: self._room]
        self._room -= len(words)
        places = self._first(words)
        left = np.arange(len(words))
        while len(left):
            open_ = left[self._words[places[left], 1] == 0]
            # Of those that want one place, the last one written stays in it.
            self._numbers[places[open_]] = open_
            settled = open_[self._numbers[places[open_]] == open_]
            self._words[places[settled]] = words[settled]
            self._numbers[places[settled]] = numbers[settled]
            taken = np.ones(len(words), dtype=np.bool_)
            taken[settled] = False
            left = left[taken[left]]
            places[left] = (places[left] + 1) & self._last

    def _first(self, words: Words) -> Ints:
        return (mixed(words) >> self._shift).astype(np.int64)
