"""Byte-pair encoding against Sennrich, Haddow & Birch (2016, ACL P16-1162) and GPT-2."""

from __future__ import annotations

from collections import Counter
from itertools import pairwise

import pytest

from tests.unit.small_vocabularies import byte_level, decoded, entries_of, measured, merging

# Algorithm 1 of the paper: the words of its toy corpus with their counts.
TOY = {"low": 5, "lower": 2, "newest": 6, "widest": 3}


def learn(words, merges):
    """Return (merges, their counts) by Algorithm 1, the pair met first winning a tie."""
    held, learnt, counts = dict(words), [], []
    for _ in range(merges):
        pairs = Counter()
        for symbols, times in held.items():
            for pair in pairwise(symbols):
                pairs[pair] += times
        best = max(pairs, key=pairs.get, default=None)
        if best is None or pairs[best] < 2:
            break
        learnt.append(best)
        counts.append(pairs[best])
        held = {joined(symbols, best): times for symbols, times in held.items()}
    return learnt, counts


def joined(symbols, pair):
    found, place = [], 0
    while place < len(symbols):
        both = symbols[place : place + 2] == pair
        found.append("".join(pair) if both else symbols[place])
        place += 2 if both else 1
    return tuple(found)


def toy_document(end=""):
    return " ".join(word + end for word, times in TOY.items() for _ in range(times))


@pytest.fixture
def paper(tmp_path):
    """Return the ten merges of Algorithm 1; the end of a word is a symbol of its own, here "·"."""
    merges, counts = learn({(*word, "·"): times for word, times in TOY.items()}, 10)
    assert counts == [9, 9, 9, 7, 7, 6, 6, 6, 5, 3]  # whatever the rule for ties
    return merging(tmp_path, [*"lowernstid", "·"], merges)


@pytest.mark.parametrize(
    ("word", "entries"),
    [
        ("low·", ["low·"]),
        ("newest·", ["newest·"]),
        ("lower·", ["low", "e", "r", "·"]),
        ("widest·", ["wi", "d", "est·"]),
        ("lowest·", ["low", "est·"]),
    ],
)
def test_words_after_the_ten_merges_of_algorithm_1(paper, word, entries):
    """Sennrich et al. (2016): low and newest are whole after nine merges, wi is the tenth."""
    assert entries_of(paper, word) == entries


def test_fertility_of_the_toy_corpus(paper):
    """16 words of 95 symbols, less the 67 occurrences merged: 28 tokens, fertility 1.75."""
    found = measured(paper, [toy_document("·")])
    assert (found["tokens"], found["words"]) == ([28], [16])
    assert found["tokens"][0] / found["words"][0] == 1.75


def test_figure_1_of_the_paper(tmp_path):
    """Figure 1, from memory: with r·, lo, low, er· learnt, the unseen "lower" is low er·."""
    merges = [("r", "·"), ("l", "o"), ("lo", "w"), ("e", "r·")]
    vocabulary = merging(tmp_path, [*"lower", "·"], merges)
    assert entries_of(vocabulary, "lower·") == ["low", "er·"]


def glued(word):
    return (*word[:-1], word[-1] + "</w>")


@pytest.fixture
def toy_of_the_authors(tmp_path):
    """Return rsennrich/subword-nmt @92d6139, bpe_toy.py: `</w>` glued to the last letter."""
    merges, counts = learn({glued(word): times for word, times in TOY.items()}, 15)
    assert counts == [9, 9, 7, 6, 6, 6, 5, 3, 3, 3, 2, 2, 2]
    letters = "lowernstid"
    return merging(tmp_path, [*letters, *(f"{letter}</w>" for letter in letters)], merges)


@pytest.mark.parametrize("word", TOY)
def test_the_authors_toy_ends_with_four_whole_words(toy_of_the_authors, word):
    """bpe_toy.py: thirteen merges, and each of the four words is one entry with `</w>`."""
    assert entries_of(toy_of_the_authors, word) == [f"{word}</w>"]


def test_whole_words_have_fertility_one(toy_of_the_authors):
    """bpe_toy.py again: 16 words, 16 tokens, none continued, and all comes back."""
    found = measured(toy_of_the_authors, [toy_document()])
    assert (found["tokens"], found["words"], found["continued_words"]) == ([16], [16], [0])
    assert found["lossless_documents"] == [1]


def test_the_end_of_a_word_is_a_symbol_not_a_space(toy_of_the_authors):
    """The convention of `</w>`: no token spends itself on the space (subword-nmt README)."""
    assert toy_of_the_authors.spaces.convention == "word-end marker"
    assert measured(toy_of_the_authors, [toy_document()])["whitespace_tokens"] == [0]


# openai/gpt-2 @9b63575, src/encoder.py: the pattern; regression value of its split, not published.
PARTS = ["Hello", " world", " ", " how", "'s", " ", " it", "\n\n", " going", " 123", " a", "1", "b",
         "2", " "]  # fmt: skip
# Pairs across the parts: they rank first, so that a wrong split would let them merge.
ACROSS = ["oĠ", "dĠ", "ĠĠ", "w'", "sĠ", "tĊ", "ĊĠ", "gĠ", "3Ġ", "a1", "1b", "b2", "2Ġ"]


def spelled(part):
    return part.replace(" ", "Ġ").replace("\n", "Ċ")


@pytest.fixture
def gpt_2_pattern(tmp_path):
    """Return a byte-level vocabulary that holds each of ``PARTS`` whole."""
    merges = [(pair[0], pair[1]) for pair in ACROSS]
    for part in map(spelled, PARTS):
        merges += [(part[:place], part[place]) for place in range(1, len(part))]
    return byte_level(tmp_path, list(dict.fromkeys(merges)))


def test_text_is_split_by_the_pattern_of_gpt_2(gpt_2_pattern):
    """encoder.py: contractions, letters, numbers, the rest, and all but the last of the spaces."""
    assert entries_of(gpt_2_pattern, "".join(PARTS)) == [spelled(part) for part in PARTS]


def test_the_parts_tile_the_text(gpt_2_pattern):
    """''.join(findall(pattern, text)) == text: spans follow one another, and all comes back."""
    text = "".join(PARTS)
    found = gpt_2_pattern.engine.encode([text])
    cut = [text[s:e] for s, e in zip(found.starts.tolist(), found.ends.tolist(), strict=True)]
    assert cut == PARTS
    assert decoded(gpt_2_pattern, text) == text
