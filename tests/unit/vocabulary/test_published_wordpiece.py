"""WordPiece against google-research/bert @eedf571 (tokenization.py and its test)."""

from __future__ import annotations

from string import ascii_lowercase

import pytest

from tests.unit.small_vocabularies import entries_of, measured, wordpiece

# tokenization_test.py, test_full_tokenizer and test_wordpiece_tokenizer.
PUBLISHED = ["[UNK]", "[CLS]", "[SEP]", "want", "##want", "##ed", "wa", "un", "runn", "##ing", ","]
# Every ASCII letter as an entry and as a continuation, so that nothing but the limit is unknown.
LETTERS = ["[UNK]", *ascii_lowercase, *(f"##{letter}" for letter in ascii_lowercase)]


@pytest.fixture
def published(tmp_path):
    return wordpiece(tmp_path, PUBLISHED)


@pytest.mark.parametrize(
    ("text", "ids"),
    [
        ("UNwant\u00e9d,running", [7, 4, 5, 10, 8, 9]),  # un ##want ##ed , runn ##ing
        ("unwanted running", [7, 4, 5, 8, 9]),
        ("unwantedX running", [0, 8, 9]),  # [UNK] runn ##ing
        ("", []),
    ],
)
def test_ids_of_the_release_s_own_tests(published, text, ids):
    """tokenization_test.py: ids are places of lines in vocab.txt."""
    assert published.engine.encode([text]).ids.tolist() == ids


def test_the_docstring_s_example(tmp_path):
    """tokenization.py, WordpieceTokenizer: "unaffable" is un ##aff ##able, given those."""
    vocabulary = wordpiece(tmp_path, ["[UNK]", "un", "##aff", "##able"])
    assert entries_of(vocabulary, "unaffable") == ["un", "##aff", "##able"]


def test_the_longest_match_comes_first(tmp_path):
    """tokenization.py: greedy longest-match-first, even where it leads to more pieces."""
    vocabulary = wordpiece(tmp_path, ["[UNK]", "una", "un", "##aff", "##able", "##ffa", "##ble"])
    assert entries_of(vocabulary, "unaffable") == ["una", "##ffa", "##ble"]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("ah\u535a\u63a8zz", ["ah", "\u535a", "\u63a8", "zz"]),  # test_chinese
        (" \tHeLLo!how  \n Are yoU?  ", ["hello", "!", "how", "are", "you", "?"]),  # lower
        ("H\u00e9llo", ["hello"]),  # lower, accents stripped
        ("hello\u00a0you", ["hello", "you"]),  # test_is_whitespace: U+00A0 is
        ("hel\u0005lo", ["hello"]),  # test_is_control: U+0005 is, and is cleaned away
        ("a$b`c", ["a", "$", "b", "`", "c"]),  # test_is_punctuation: "$" and "`" are
    ],
)
def test_splitting_of_the_release_s_own_tests(tmp_path, text, words):
    """tokenization_test.py, BasicTokenizer: each word being an entry, words are the tokens."""
    every = ["ah", "\u535a", "\u63a8", "zz", "hello", "how", "are", "you", *"!?$`abc"]
    vocabulary = wordpiece(tmp_path, ["[UNK]", *every])
    assert entries_of(vocabulary, text) == words


def test_a_pictograph_is_no_control_character(tmp_path):
    """tokenization_test.py, test_is_control: U+1F4A9 stays, here as a word unknown."""
    vocabulary = wordpiece(tmp_path, ["[UNK]", "hello"])
    assert entries_of(vocabulary, "hello \U0001f4a9") == ["hello", "[UNK]"]


@pytest.mark.parametrize(("length", "pieces"), [(99, 99), (100, 100), (101, 1), (5000, 1)])
def test_a_word_over_100_characters_is_one_unknown_token(tmp_path, length, pieces):
    """The library's `max_input_chars_per_word` is 100 (tokenizers 0.23; Google's code has 200)."""
    found = measured(wordpiece(tmp_path, LETTERS), ["a" * length])
    assert found["tokens"] == [pieces]
    assert found["unknown_tokens"] == [int(length > 100)]


def test_lost_text_flatters_fertility_but_not_that_of_known_words(tmp_path):
    """By hand: "tide" of 4 pieces beside 101 letters gives 5 tokens for 2 words, 4 for 1 known."""
    found = measured(wordpiece(tmp_path, LETTERS), ["tide " + "a" * 100, "tide " + "a" * 101])
    assert [found[name] for name in ("tokens", "words")] == [[104, 5], [2, 2]]
    assert [found[name] for name in ("pieces", "known_pieces")] == [[104, 5], [104, 4]]
    assert [found[name] for name in ("known_words", "unknown_words")] == [[2, 1], [0, 1]]
    assert found["unknown_characters"] == [0, 101]


def test_measures_of_the_release_s_example(published):
    """By hand from tokenization_test.py: un ##want ##ed , runn ##ing over two words."""
    found = measured(published, ["UNwant\u00e9d,running", "unwantedX running", ""])
    assert found["words"] == [2, 2, 0]
    assert found["tokens"] == [6, 3, 0]
    assert found["pieces"] == [5, 3, 0]
    assert found["continued_words"] == [2, 1, 0]
    assert found["unknown_words"] == [0, 1, 0]
    assert [found["case_folded_words"], found["changed_words"]] == [[0, 1, 0], [1, 0, 0]]
