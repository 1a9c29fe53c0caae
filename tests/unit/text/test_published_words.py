"""Words, graphemes and whitespace against Unicode's own examples; the source stands beside each."""

from __future__ import annotations

import numpy as np
import pytest
import regex
from hypothesis import given, settings
from hypothesis import strategies as st
from icu4py.breakers import WordBreaker

from auditor.text import properties
from auditor.text.boundaries import LOCALE, utf16_to_points
from auditor.text.stretch import Stretch
from auditor.text.words import count_graphemes

# UAX #29, section 4 ("Word Boundaries"), figure 1.
QUICK = "The quick (“brown”) fox can’t jump 32.3 feet, right?"

# What decides boundaries: line ends, marks, joiners, emoji, scripts with dictionaries, astral.
TRICKY = st.text(
    st.sampled_from("ab1. '’:_\r\n\t\v\u0308\u200d\ufe0f👍🇵🇹𝔘กาแม่ໜ日本カひक्ष\u202f\u2028א\"")
)


def word_texts(*texts, words="icu"):
    return Stretch(list(texts), words=words).word_texts


def test_the_example_of_uax_29_has_nine_words():
    """UAX #29, figure 1: of 23 segments, nine are words."""
    assert len(list(WordBreaker(QUICK, LOCALE).segments())) == 23
    nine = ["The", "quick", "brown", "fox", "can’t", "jump", "32.3", "feet", "right"]
    assert word_texts(QUICK) == nine


def test_the_example_split_at_whitespace():
    """Splitting at whitespace gives nine as well, with the punctuation attached."""
    expected = ["The", "quick", "(“brown”)", "fox", "can’t", "jump", "32.3", "feet,", "right?"]
    assert word_texts(QUICK, words="whitespace") == expected


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("3.2", ["3.2"]),  # WB11, WB12
        ("3a", ["3a"]),  # WB10
        ("can't", ["can't"]),  # WB6, WB7
        ("e\u0301te\u0301", ["e\u0301te\u0301"]),  # WB4: marks stay with their base
        ("a\u202fb", ["a\u202fb"]),  # WB13a: U+202F is ExtendNumLet
        ("snake_case", ["snake_case"]),  # WB13a, WB13b
        ("– … 👍 ?!", []),  # no letter and no number: no word
    ],
)
def test_rules_of_uax_29(text, words):
    """One case for each rule of UAX #29 that joins."""
    assert word_texts(text) == words


def test_thai_is_segmented_by_a_dictionary():
    """UAX #29, section 4: Thai needs a dictionary; "cat eats fish" is three words."""
    assert word_texts("แมวกินปลา") == ["แมว", "กิน", "ปลา"]


@pytest.mark.parametrize(
    ("text", "clusters"),
    [
        ("g\u0308", 1),  # UAX #29, table 1a: combining character sequence
        ("\uac01", 1),  # the same: Hangul syllable
        ("\u1100\u1161\u11a8", 1),  # the same: conjoining jamo
        ("\u0e01\u0e33", 1),  # the same: Thai kam
        ("\u0bb7\u0bbf", 1),  # the same: Tamil ssi
        ("\r\n", 1),  # GB3
        ("\n\r", 2),  # GB4, GB5
        ("👨\u200d👩\u200d👧", 1),  # GB11
        ("🇵🇹🇧🇷", 2),  # GB12
        ("", 0),
    ],
)
def test_grapheme_clusters_of_uax_29(text, clusters):
    """UAX #29, section 3: table 1a and rules GB3 to GB13 for extended grapheme clusters."""
    assert count_graphemes(text) == clusters


def test_whitespace_is_the_25_characters_of_the_standard():
    """Unicode Character Database, PropList.txt, White_Space: 25 code points since Unicode 6.3."""
    expected = [*range(0x09, 0x0E), 0x20, 0x85, 0xA0, 0x1680, *range(0x2000, 0x200B)]
    expected += [0x2028, 0x2029, 0x202F, 0x205F, 0x3000]
    assert np.flatnonzero(properties.table(properties.WHITESPACE)).tolist() == expected


def test_zero_width_characters_are_no_whitespace():
    """U+200B to U+200D, U+2060 and U+FEFF are not White_Space (PropList.txt)."""
    assert Stretch(["\u200b\u200c\u200d\u2060\ufeff"]).ink.all()


def test_a_letter_beyond_the_bmp_takes_two_utf16_units():
    """The Unicode Standard, D91: 𝔘 is a surrogate pair, so that offsets after it move by one."""
    text = "𝔘x𝔘y"
    points = Stretch([text]).points
    found = utf16_to_points(np.array([0, 2, 3, 5, 6]), points)
    assert found.tolist() == [0, 1, 2, 3, 4]


@pytest.mark.parametrize("head", ["", "𝔘", "𝔘𝔘𝔘 ", "👍 ", "a👍𝔘. "])
def test_words_after_letters_beyond_the_bmp_stand_where_they_stand(head):
    """Positions are code points: the last word is cut out of the text by them."""
    stretch = Stretch([head + " sea 𝔘nd tide", "low 𝔘"])
    assert stretch.word_texts[-5:] == ["sea", "𝔘nd", "tide", "low", "𝔘"]


@given(st.text())
def test_utf16_offsets_are_mapped_as_by_counting(text):
    """Against a count of UTF-16 units, character by character."""
    units = [0]
    for character in text:
        units.append(units[-1] + len(character.encode("utf-16-le")) // 2)
    found = utf16_to_points(np.array(units), Stretch([text]).points)
    assert found.tolist() == list(range(len(text) + 1))


def segments_alone(text):
    """Return ICU's segments of one document that hold a letter or number, by plain slicing."""
    spelled, holds = text.encode("utf-16-le"), properties.table(properties.WORD_CHARACTER)
    pairs = WordBreaker(text, LOCALE).segments()
    cut = [spelled[2 * start : 2 * end].decode("utf-16-le") for start, end in pairs]
    return [piece for piece in cut if any(holds[ord(character)] for character in piece)]


@settings(max_examples=300)
@given(st.lists(TRICKY, min_size=1, max_size=8))
def test_words_of_many_documents_are_those_of_each(texts):
    """Laying documents end to end neither joins nor splits a word."""
    assert word_texts(*texts) == [word for text in texts for word in segments_alone(text)]


@given(st.lists(st.text(), min_size=1, max_size=6))
def test_words_of_many_documents_are_those_of_each_on_any_text(texts):
    """The same over all of Unicode."""
    assert word_texts(*texts) == [word for text in texts for word in segments_alone(text)]


@given(st.lists(TRICKY, min_size=1, max_size=6))
def test_runs_of_many_documents_are_those_of_each(texts):
    """The whitespace rule against `regex`: runs of each document that hold a letter or number."""
    runs = [run for text in texts for run in regex.findall(r"\P{White_Space}+", text)]
    expected = [run for run in runs if regex.search(r"[\p{L}\p{N}]", run)]
    assert word_texts(*texts, words="whitespace") == expected
