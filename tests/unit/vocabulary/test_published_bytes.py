"""Bytes: GPT-2's table, SentencePiece's byte pieces, the lengths of UTF-8."""

from __future__ import annotations

from itertools import groupby

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.text.stretch import Stretch
from auditor.vocabulary import facts_of
from auditor.vocabulary.bytelevel import CHARACTER_OF_BYTE, bytes_of, is_whole_text
from tests.unit.small_vocabularies import byte_level, trained

# --- openai/gpt-2 @9b63575, src/encoder.py, bytes_to_unicode


def test_the_table_has_188_identities_and_68_moved():
    """encoder.py: 0x21-7E, A1-AC and AE-FF stand for themselves, the others go to U+0100-0143."""
    same = {byte for byte, character in CHARACTER_OF_BYTE.items() if ord(character) == byte}
    assert same == {*range(0x21, 0x7F), *range(0xA1, 0xAD), *range(0xAE, 0x100)}
    moved = [CHARACTER_OF_BYTE[byte] for byte in range(256) if byte not in same]
    assert [ord(character) for character in moved] == list(range(0x100, 0x144))


def test_the_table_is_one_to_one():
    """encoder.py: 256 bytes, 256 characters."""
    assert len(CHARACTER_OF_BYTE) == len(set(CHARACTER_OF_BYTE.values())) == 256


@pytest.mark.parametrize(
    ("byte", "point"),
    [(0x20, 0x120), (0x0A, 0x10A), (0x09, 0x109), (0x0D, 0x10D), (0x00, 0x100), (0x7F, 0x121),
     (0x80, 0x122), (0xA0, 0x142), (0xAD, 0x143)],
)  # fmt: skip
def test_bytes_that_are_moved(byte, point):
    """encoder.py: space is Ġ (U+0120), line feed Ċ (U+010A), and so on."""
    assert CHARACTER_OF_BYTE[byte] == chr(point)


@given(st.binary())
def test_every_bytes_is_spelled_and_read_back(content):
    """The table is its own inverse's inverse."""
    assert bytes_of("".join(CHARACTER_OF_BYTE[byte] for byte in content)) == content


def test_a_character_outside_the_table_is_no_spelling():
    """U+0144 is the first character after the table; a space is moved away from itself."""
    assert bytes_of("a\u0144") is None
    assert bytes_of("a b") is None


def test_no_other_character_is_a_spelling():
    """Every code point against the table itself."""
    known = {character: bytes([byte]) for byte, character in CHARACTER_OF_BYTE.items()}
    for point in range(0x110000):
        assert bytes_of(chr(point)) == known.get(chr(point)), hex(point)


def test_128_single_bytes_are_no_text(tmp_path):
    """RFC 3629, section 3: only 0x00-7F stand alone, whatever the vocabulary."""
    inventory = byte_level(tmp_path, []).inventory
    held = [inventory.entry_bytes[number] for number in np.flatnonzero(inventory.stands_for_bytes)]
    assert sorted(held) == [bytes([byte]) for byte in range(0x80, 0x100)]


# --- google/sentencepiece @2734490: "<0x%02X>", all 256


def test_byte_pieces_follow_the_three_usual_ones(tmp_path):
    """A freshly trained model with fallback: ids 0 to 2, then <0x00> to <0xFF> as 3 to 258."""
    lines = ["the buoy drifts", "the lamp is lit", "a tide of two metres"] * 3
    vocabulary = trained(tmp_path, lines, vocab_size=290, byte_fallback=True)
    entries = vocabulary.inventory.entries
    assert entries[:3] == ["<unk>", "<s>", "</s>"]
    assert entries[3:259] == [f"<0x{byte:02X}>" for byte in range(256)]
    assert np.flatnonzero(vocabulary.inventory.stands_for_bytes).tolist() == list(range(3, 259))
    assert facts_of(vocabulary).byte_pieces == {"kind": "fallback", "complete": True, "missing": []}


# --- RFC 3629

EVERY_SCALAR = "".join(map(chr, [*range(0xD800), *range(0xE000, 0x110000)]))


def test_lengths_of_every_character():
    """RFC 3629, section 3: scalars of 1 to 4 bytes; counts follow from the ranges there."""
    lengths = Stretch([EVERY_SCALAR]).utf8_lengths
    counts = np.bincount(lengths).tolist()
    assert counts == [0, 128, 1_920, 61_440, 1_048_576]
    assert sum(counts) == 1_112_064


@pytest.mark.parametrize(
    ("length", "first", "last"),
    [(1, 0x0, 0x7F), (2, 0x80, 0x7FF), (3, 0x800, 0xFFFF), (4, 0x10000, 0x10FFFF)],
)
def test_lengths_at_the_ends_of_ranges(length, first, last):
    """RFC 3629, section 3, the table of ranges."""
    assert Stretch([chr(first) + chr(last)]).utf8_lengths.tolist() == [length, length]


@pytest.mark.parametrize(
    ("text", "spelled"),
    [
        ("A\u2262\u0391.", "41 E2 89 A2 CE 91 2E"),
        ("\ud55c\uad6d\uc5b4", "ED 95 9C EA B5 AD EC 96 B4"),
        ("\u65e5\u672c\u8a9e", "E6 97 A5 E6 9C AC E8 AA 9E"),
        ("\ufeff\U000233b4", "EF BB BF F0 A3 8E B4"),
    ],
)
def test_bytes_of_the_rfc_s_examples(text, spelled):
    """RFC 3629, section 7, from memory: 7, 9, 9 and 7 bytes."""
    stretch = Stretch([text])
    assert text.encode() == bytes.fromhex(spelled)
    assert stretch.bytes_before[-1] == len(bytes.fromhex(spelled))


def test_13_bytes_never_occur():
    """RFC 3629, section 3: "octet values C0, C1, F5 to FF never appear"."""
    never = [0xC0, 0xC1, *range(0xF5, 0x100)]
    seen = np.unique(np.frombuffer(EVERY_SCALAR.encode(), dtype=np.uint8))
    assert sorted(set(range(256)) - set(seen.tolist())) == never
    assert len(never) == 13


def test_text_is_whole_or_not():
    """RFC 3629, section 3: overlong forms and surrogates are no UTF-8; part of a letter is none."""
    whole = [b"", b"a", "\u00e9".encode(), "\U0001f30a".encode()]
    broken = [b"\xc3", b"\xa9", b"\xc0\x80", b"\xed\xa0\x80", b"\xf0\x9f\x8c", b"\xf5\x80\x80\x80"]
    assert [key for key, _ in groupby([*whole, *broken], is_whole_text)] == [True, False]
