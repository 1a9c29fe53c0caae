"""SentencePiece against Kudo & Richardson (2018, D18-2012) and google/sentencepiece @2734490."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.text.stretch import Stretch
from auditor.vocabulary.spans import correct
from tests.unit.small_vocabularies import (
    byte_fallback,
    decoded,
    entries_of,
    measured,
    trained,
)

LINES = ["the buoy drifts at night", "the lamp is lit", "a b c d ab cd", "two metres of tide"] * 3


@pytest.fixture(scope="module")
def by_defaults(tmp_path_factory):
    """Return a model with the trainer's own defaults, without byte fallback."""
    return trained(tmp_path_factory.mktemp("defaults"), LINES, vocab_size=60)


@pytest.fixture(scope="module")
def with_fallback(tmp_path_factory):
    """Return the same with byte fallback, which makes every normalised text writable."""
    folder = tmp_path_factory.mktemp("fallback")
    return trained(folder, LINES, vocab_size=320, byte_fallback=True)


@pytest.fixture(scope="module")
def letters(tmp_path_factory):
    """Return the pieces of the library's own test of byte fallback; E, F and あ are unknown."""
    pieces = ["▁ABC", "▁D", "▁", "A", "B", "C"]
    return byte_fallback(tmp_path_factory.mktemp("letters"), pieces)


# --- sentencepiece_processor_test.cc: byte fallback


def test_unknown_characters_are_written_by_their_bytes(letters):
    """sentencepiece_processor_test.cc: ▁ABC ▁D, then E, F and あ byte by byte."""
    expected = ["▁ABC", "▁D", "<0x45>", "<0x46>", "<0xE3>", "<0x81>", "<0x82>"]
    assert entries_of(letters, "ABC DEFあ") == expected


def test_every_byte_of_a_character_stands_over_it(letters):
    """The library gives the surfaces "", "", "あ" (same test); a span is the whole character."""
    text = "ABC DEFあ"
    spans = correct(letters.engine.encode([text]), Stretch([text]), letters.inventory)
    cut = [text[s:e] for s, e in zip(spans.starts.tolist(), spans.ends.tolist(), strict=True)]
    assert cut == ["ABC", " D", "E", "F", "あ", "あ", "あ"]


def test_measures_of_the_library_s_example(letters):
    """By hand: 5 of 7 tokens are bytes, and they spell 3 of 7 characters that are ink."""
    found = measured(letters, ["ABC DEFあ"])
    assert (found["tokens"], found["byte_tokens"]) == ([7], [5])
    assert (found["ink_characters"], found["byte_spelled_characters"]) == ([7], [3])
    assert (found["unknown_tokens"], found["lossless_documents"]) == ([0], [1])


def test_bytes_that_are_no_utf_8_come_back_as_replacement(letters):
    """sentencepiece_processor_test.cc: each invalid byte is one U+FFFD; a true U+FFFD stays."""
    numbers = {entry: number for number, entry in enumerate(letters.inventory.entries)}
    spelled = "<s> A B <0xE3> <0x81> <0x82> <0x5A> <0xCE> <0xA9> C <0xE0> <0x80> <0xE3> <0x81> "
    spelled += "<0x84> <0xEF> <0xBF> <0xBD>"
    ids = [numbers[entry] for entry in spelled.split()]
    assert letters.engine.decode([ids]) == ["ABあZΩC\ufffd\ufffdい\ufffd"]


# --- doc/options.md: what the defaults do


def test_the_defaults_number_the_usual_three_pieces(by_defaults):
    """doc/options.md: unigram, unk/bos/eos = 0/1/2, no padding, nmt_nfkc, a dummy prefix."""
    assert by_defaults.family == "unigram"
    assert by_defaults.inventory.entries[:3] == ["<unk>", "<s>", "</s>"]
    assert by_defaults.inventory.unknown == 0
    assert "<pad>" not in by_defaults.inventory.entries
    assert by_defaults.engine.proto.normalizer_spec.name == "nmt_nfkc"
    assert by_defaults.spaces.prefix_added


def test_the_defaults_delete_whitespace(by_defaults):
    """doc/options.md: remove_extra_whitespaces is on, so that whitespace is lossy by default."""
    assert decoded(by_defaults, "  a  b\tc\n d ") == "a b c d"
    assert measured(by_defaults, ["  a  b\tc\n d ", "a b c d"])["lossless_documents"] == [0, 1]


def test_an_unknown_character_comes_back_as_the_unknown_surface(by_defaults):
    """doc/options.md: unk_surface is " ⁇ " (U+2047 between spaces)."""
    assert decoded(by_defaults, "あ") == " \u2047 "
    assert measured(by_defaults, ["あ"])["unknown_characters"] == [1]


def test_with_fallback_it_comes_back_itself(with_fallback):
    """doc/options.md: byte_fallback decomposes unknown pieces into UTF-8 bytes."""
    assert decoded(with_fallback, "あ") == "あ"
    assert measured(with_fallback, ["あ"])["byte_spelled_characters"] == [1]


def test_the_meta_symbol_is_u_2581(by_defaults):
    """model_interface.cc: U+2581, bytes E2 96 81; README: joined and replaced by spaces."""
    assert by_defaults.inventory.marker.encode() == bytes.fromhex("E2 96 81")
    text = "the buoy is lit"
    joined = "".join(entries_of(by_defaults, text))
    assert joined.replace("▁", " ") == f" {text}"


# --- Kudo & Richardson, section 3.1: Decode(Encode(Normalize(text))) = Normalize(text)


def normalized(vocabulary, text):
    """Return the normalised text, its spaces written as spaces and without the dummy prefix."""
    return vocabulary.engine.normalize(text).replace("▁", " ").removeprefix(" ")


@given(text=st.text())
def test_normalised_text_comes_back(with_fallback, text):
    """Section 3.1 on any text at all, once it is normalised; raw text need not come back."""
    once = normalized(with_fallback, text)
    assert decoded(with_fallback, once) == once
    assert measured(with_fallback, [once])["lossless_documents"] == [1]


@given(text=st.text(st.characters(exclude_characters="▁", exclude_categories=["Cs"])))
def test_without_normalisation_every_text_comes_back(letters, text):
    """Section 3.1 with the identity for a normaliser: raw text comes back, whitespace and all."""
    assert decoded(letters, text) == text


def test_a_meta_symbol_of_the_text_comes_back_as_a_space(letters):
    """README: U+2581 stands for a space, so that one in the text itself is lost."""
    assert decoded(letters, "A▁B") == "A B"
    assert measured(letters, ["A▁B"])["lossless_documents"] == [0]
