"""How digits are grouped: rules of published splitting patterns, on constructed numbers.

The patterns are those that byte-level vocabularies publish for numbers: `\\p{N}{1,3}` groups digits
in threes from the left, `\\p{N}` takes them one at a time. Every join of digits is an entry here,
so that the pattern alone decides.
"""

from __future__ import annotations

from itertools import product

import pytest
from tokenizers import Regex, Tokenizer, models, pre_tokenizers

from auditor.encoding.digits import constructed, digit_groups, in_threes, rule
from auditor.vocabulary import VocabularySpec, open_vocabulary
from auditor.vocabulary.bytelevel import CHARACTER_OF_BYTE

THREES = r"[^\r\n\p{L}\p{N}]?\p{L}+|\p{N}{1,3}| ?[^\s\p{L}\p{N}]+|\s+"
SINGLE = r"[^\r\n\p{L}\p{N}]?\p{L}+|\p{N}| ?[^\s\p{L}\p{N}]+|\s+"
# Groups of three from the right, as some patterns write it: a look-ahead for whole threes.
RIGHT = r"\p{L}+|\p{N}{1,3}(?=(?:\p{N}{3})*(?!\p{N}))|[^\s\p{L}\p{N}]+|\s+"


def split_by(pattern, folder, joins=()):
    """Return a byte-level BPE with this Split pattern; entries: all of up to three digits."""
    digits = "0123456789"
    pairs = ["".join(pair) for pair in product(digits, repeat=2)]
    threes = ["".join(three) for three in product(digits, repeat=3)]
    entries = [*CHARACTER_OF_BYTE.values(), *pairs, *threes, *("".join(join) for join in joins)]
    merges = list(joins) + [(pair[0], pair[1]) for pair in pairs]
    merges += [(t[:2], t[2]) for t in threes] + [(t[0], t[1:]) for t in threes]
    vocab = {entry: number for number, entry in enumerate(dict.fromkeys(entries))}
    made = Tokenizer(models.BPE(vocab=vocab, merges=merges))
    parts = [pre_tokenizers.ByteLevel(add_prefix_space=False, use_regex=False)]
    if pattern:
        parts.insert(0, pre_tokenizers.Split(Regex(pattern), "isolated"))
    made.pre_tokenizer = pre_tokenizers.Sequence(parts)
    path = folder / "tokenizer.json"
    path.write_text(made.to_str())
    return open_vocabulary(VocabularySpec(str(path)))


@pytest.mark.parametrize(
    ("pattern", "expected"),
    [(THREES, "3 from the left"), (SINGLE, "one at a time"), (RIGHT, "3 from the right")],
)
def test_rules_of_published_patterns(pattern, expected, tmp_path):
    found = digit_groups(split_by(pattern, tmp_path))
    assert set(found.rules.values()) == {expected}
    assert set(found.positions.values()) == {0}


def test_seven_digits_in_threes(tmp_path):
    found = digit_groups(split_by(THREES, tmp_path), given=["1013255"])
    assert set(found.by_length["start"][7]) == {(3, 3, 1)}
    assert found.separators["none"] == 0
    # Parted by commas every number of a length that three does not divide is grouped otherwise.
    odd = [n for n in [*constructed(), "1013255"] if len(n) > 3 and len(n) % 3]
    assert found.separators["comma"] == len(odd)
    assert found.tokens["comma"] > found.tokens["none"]


def test_a_merge_before_others_decides_without_a_pattern(tmp_path):
    """`(0` is the first merge: in parentheses a leading 0 is taken from its number's first two."""
    vocabulary = split_by(None, tmp_path, joins=[("(", "0")])
    found = digit_groups(vocabulary, given=["01"])
    assert found.by_length["start"][2] == {(2,): 24}
    assert found.by_length["in parentheses"][2] == {(1, 1): 1, (2,): 23}
    assert found.positions["after a letter"] == 0
    assert found.positions["in parentheses"] >= 1


def test_numbers_are_the_same_in_every_run():
    assert constructed() == constructed()
    assert {len(number) for number in constructed()} == set(range(1, 13))


@pytest.mark.parametrize(
    ("number", "expected"), [("1", "1"), ("123", "123"), ("1234567", "1,234,567")]
)
def test_in_threes(number, expected):
    assert in_threes(number, ",") == expected


@pytest.mark.parametrize(
    ("groups", "expected"),
    [
        ([(1,), (1, 1)], "one at a time"),
        ([(1,), (2,), (12,)], "one token"),
        ([(2, 2, 1), (2,)], "2 from the left"),
        ([(1, 2, 2), (2,)], "2 from the right"),
        ([(1, 2), (2, 1)], "irregular"),
    ],
)
def test_rules(groups, expected):
    assert rule({sum(g): {g: 1} for g in groups} | {99: dict.fromkeys(groups, 1)}) == expected
