"""Spans that follow from the bytes of entries are those that the library reports when asked."""

from __future__ import annotations

import random

import numpy as np
import pytest
from hypothesis import find, given, settings
from hypothesis import strategies as st

from auditor.vocabulary.spelling import Spelling
from auditor.vocabulary.tokenizers_engine import TokenizersEngine
from tests.unit.encoding.random_vocabularies import BYTE_LEVEL, KINDS, PREFIXED, descriptions

SPLITS = {
    "type": "Sequence",
    "pretokenizers": [
        {"type": "Split", "pattern": {"Regex": r"\s?\p{L}+|\s+"}, "behavior": "Isolated"},
        {"type": "Digits", "individual_digits": True},
        {**BYTE_LEVEL, "use_regex": False},
    ],
}
REMOVES = {
    "type": "Sequence",
    "pretokenizers": [
        {"type": "Split", "pattern": {"String": " "}, "behavior": "Removed", "invert": False},
        {**BYTE_LEVEL, "use_regex": False},
    ],
}
SPLITS["pretokenizers"][0]["invert"] = False
# Normaliser and pre-tokeniser, beside byte-level entries.
VARIANTS = {
    "plain": {"pre_tokenizer": BYTE_LEVEL},
    "split": {"pre_tokenizer": SPLITS},
    "spaces removed": {"pre_tokenizer": REMOVES},
    "prefix": {"pre_tokenizer": PREFIXED},
    **{
        form: {"normalizer": {"type": form}, "pre_tokenizer": BYTE_LEVEL}
        for form in ("NFC", "NFD", "NFKC", "Lowercase")
    },
}
PARTS = [
    *"abAé.,1 \n\t▁",
    "中",
    "\u0301",
    "e\u0301",
    "<s>",
    "  ",
    "🌊",
    "\u1100\u1161",
    "ﬁ",
    "\u0344",
]
texts = st.lists(st.lists(st.sampled_from(PARTS), max_size=12).map("".join), max_size=5)


def engine_of(description, variant):
    return TokenizersEngine({**description, **variant}, control_strings="parse", where="test")


def rows(encoding):
    return [
        values.tolist()
        for values in (encoding.ids, encoding.starts, encoding.ends, encoding.bounds)
    ]


@pytest.mark.parametrize("variant", list(VARIANTS))
@settings(max_examples=60)
@given(description=descriptions("byte-level"), documents=texts)
def test_spans_by_bytes_are_the_reported_ones(variant, description, documents):
    """Random entries and merges; the texts hold marks, control strings and altered characters."""
    engine = engine_of(description, VARIANTS[variant])
    assert rows(engine.encode(documents)) == rows(engine.encode_with_offsets(documents))


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=15)
@given(data=st.data())
def test_no_other_kind_is_taken_for_bytes(kind, data):
    """Every kind of vocabulary gives the reported spans, by whichever way."""
    engine = engine_of(data.draw(descriptions(kind)), {})
    documents = data.draw(texts)
    assert rows(engine.encode(documents)) == rows(engine.encode_with_offsets(documents))


@pytest.mark.parametrize(
    ("variant", "text", "exact"),
    [
        ("plain", "é a中🌊 e\u0301", True),
        ("NFC", "é a中🌊", True),
        ("NFC", "e\u0301", False),
        ("NFKC", "é", False),
        ("NFKC", "e", True),
        ("Lowercase", "e", False),
        ("spaces removed", "a b", False),
        ("spaces removed", "ab", True),
        ("prefix", "a", False),
    ],
)
def test_which_texts_are_exact(variant, text, exact):
    """The fast way is taken where it is meant to be, and nowhere else."""
    engine = engine_of(find(descriptions("byte-level"), lambda _: True), VARIANTS[variant])
    assert engine.encode([text]).exact is exact


def test_every_character_that_composition_leaves_alone():
    """All of them, shuffled: the library reports each byte's span as its own character."""
    engine = engine_of(find(descriptions("byte-level"), lambda _: True), VARIANTS["NFC"])
    table = engine.unaltered
    points = [point for point in np.flatnonzero(table).tolist() if not 0xD800 <= point < 0xE000]
    assert len(points) > 140_000
    random.Random(7).shuffle(points)
    documents = ["".join(map(chr, points[i : i + 40])) for i in range(0, len(points), 40)]
    found = engine.encode(documents)
    assert found.exact
    assert rows(found) == rows(engine.encode_with_offsets(documents))


def test_texts_that_are_not_spelled():
    """One byte more, one byte less, another byte, a token of no bytes, bytes of the neighbour."""
    spelling = Spelling.of([b"a", b"b", "é".encode(), None])
    bounds = np.array([0, 1, 3, 4, 4, 5, 7])
    ids = np.array([0, 0, 1, 2, 0, 0, 3])
    documents = ["a", "ab", "é", "", "b", "a"]
    assert spelling.spells(ids, bounds, documents).tolist() == [
        True,
        True,
        True,
        True,
        False,
        False,
    ]
    moved = spelling.spells(np.array([0, 1, 1]), np.array([0, 1, 3]), ["ab", "b"])
    assert moved.tolist() == [False, False]
