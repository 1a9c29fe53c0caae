"""Short strings as machine words: numbers are found as a dictionary of the strings finds them."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.text import packed
from auditor.text.packed import LONGEST, PackedNumbers

# Few letters, so that strings share beginnings; zero bytes, which look like the room after one.
string = st.lists(st.sampled_from([0, 1, 97, 98, 255]), min_size=1, max_size=LONGEST).map(bytes)
marked = st.tuples(string, st.integers(0, packed.MARKS - 1))


def words_of(strings: list[tuple[bytes, int]]) -> packed.Words:
    lengths = np.array([len(text) for text, _ in strings], dtype=np.int64)
    begins = np.cumsum(lengths) - lengths
    octets = packed.padded(b"".join(text for text, _ in strings))
    return packed.packed(octets, begins, lengths, np.array([mark for _, mark in strings]))


@settings(max_examples=300)
@given(strings=st.lists(marked, min_size=1, max_size=40))
def test_words_are_equal_when_strings_and_marks_are(strings):
    """Against every pair of strings."""
    words = [tuple(pair) for pair in words_of(strings).tolist()]
    for left, one in zip(strings, words, strict=True):
        assert [one == other for other in words] == [left == right for right in strings]


@settings(max_examples=300)
@given(
    held=st.lists(marked, min_size=1, max_size=60, unique=True),
    sought=st.lists(marked, min_size=1, max_size=60),
    parts=st.integers(1, 4),
)
def test_numbers_are_those_of_a_dictionary(held, sought, parts):
    """In a table that is half full, strings taken in by parts."""
    table = PackedNumbers(len(held))
    for begin in range(0, len(held), parts):
        some = held[begin : begin + parts]
        table.add(words_of(some), np.arange(begin, begin + len(some)))
    numbers = {text: number for number, text in enumerate(held)}
    every = [*held, *sought]
    assert table.find(words_of(every)).tolist() == [numbers.get(text, -1) for text in every]


@pytest.mark.parametrize("count", [1, 100])
def test_strings_that_want_one_place_stand_beside_each_other(count, monkeypatch):
    """With a hash that tells nothing apart, and one that begins at the table's end."""
    strings = [(bytes([97 + place // 26, 97 + place % 26]), 0) for place in range(count)]
    for hashed in (0, (1 << 64) - 1):
        alike = lambda words, hashed=hashed: np.full(len(words), hashed, dtype=np.uint64)  # noqa: E731
        monkeypatch.setattr(packed, "mixed", alike)
        table = PackedNumbers(count)
        table.add(words_of(strings), np.arange(count))
        assert table.find(words_of(strings)).tolist() == list(range(count))
        assert table.find(words_of([(b"zz", 1), (b"z", 0)])).tolist() == [-1, -1]
