"""Tokens that touch words or lie in ranges, against plain loops over every pair."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from auditor.encoding.touching import SpanIndex, tokens_within
from auditor.text.words import Words
from auditor.vocabulary.spans import Spans

# Spans as libraries give them: in any order, overlapping, empty.
SPANS = st.lists(st.tuples(st.integers(0, 30), st.integers(0, 6)), max_size=25)
# Disjoint ranges: gaps and lengths, laid one after another.
RANGES = st.lists(st.tuples(st.integers(0, 3), st.integers(1, 5)), max_size=9)


def spans_of(pairs):
    starts = np.array([start for start, _ in pairs], dtype=np.int64)
    ends = np.array([end for _, end in pairs], dtype=np.int64)
    return Spans(np.zeros(len(pairs), dtype=np.int64), starts, ends, np.array([0, len(pairs)]))


def laid_out(gaps):
    ranges, place = [], 0
    for gap, length in gaps:
        ranges.append((place + gap, place + gap + length))
        place += gap + length
    return ranges


def as_ends(drawn):
    return [(start, start + length) for start, length in drawn]


def words_of(ranges):
    flat = np.array(ranges, dtype=np.int64).reshape(-1, 2)
    return Words(flat[:, 0], flat[:, 1])


def held(span, place):
    return span[0] <= place < span[1]


def touched(spans, ranges):
    """Return for each range the spans that hold a character of it, place by place."""
    return [sum(any(held(s, p) for p in range(*r)) for s in spans) for r in ranges]


@given(SPANS, RANGES)
def test_touching_agrees_with_a_loop(drawn, gaps):
    """A token touches a word when its span holds a character of it."""
    spans, ranges = as_ends(drawn), laid_out(gaps)
    found = SpanIndex.of(spans_of(spans)).touching(words_of(ranges))
    assert found.tolist() == touched(spans, ranges)


@given(SPANS, RANGES, st.integers(0, 2**25))
def test_chosen_tokens_alone_are_counted(drawn, gaps, bits):
    """With a choice of tokens the others are as if they were not there."""
    spans, ranges = as_ends(drawn), laid_out(gaps)
    chosen = np.array([bits >> place & 1 for place in range(len(spans))], dtype=np.bool_)
    found = SpanIndex.of(spans_of(spans), chosen).touching(words_of(ranges))
    kept = [span for span, choice in zip(spans, chosen, strict=True) if choice]
    assert found.tolist() == touched(kept, ranges)


@given(SPANS, RANGES, st.randoms())
def test_tokens_within_ranges_agree_with_a_loop(drawn, gaps, random):
    """Non-empty spans that lie wholly in a range, the ranges in any order."""
    spans, ranges = as_ends(drawn), laid_out(gaps)
    random.shuffle(ranges)
    flat = np.array(ranges, dtype=np.int64).reshape(-1, 2)
    found = tokens_within(spans_of(spans), flat[:, 0], flat[:, 1])
    expected = [sum(low <= s < e <= high for s, e in spans) for low, high in ranges]
    assert found.tolist() == expected


@given(SPANS, RANGES, st.integers(0, 2**25))
def test_chosen_tokens_within_ranges_are_counted(drawn, gaps, bits):
    """With a choice of tokens the others are as if they were not there."""
    spans, ranges = as_ends(drawn), laid_out(gaps)
    chosen = np.array([bits >> place & 1 for place in range(len(spans))], dtype=np.bool_)
    flat = np.array(ranges, dtype=np.int64).reshape(-1, 2)
    found = tokens_within(spans_of(spans), flat[:, 0], flat[:, 1], chosen)
    kept = [span for span, choice in zip(spans, chosen, strict=True) if choice]
    assert found.tolist() == [sum(low <= s < e <= high for s, e in kept) for low, high in ranges]


def test_a_token_over_two_words_touches_both():
    """By hand: one span over "a b" touches "a" and "b"."""
    found = SpanIndex.of(spans_of([(0, 3)])).touching(words_of([(0, 1), (2, 3)]))
    assert found.tolist() == [1, 1]


def test_a_token_beside_a_word_does_not_touch_it():
    """By hand: spans that end where the word starts, or start where it ends."""
    found = SpanIndex.of(spans_of([(0, 2), (4, 6)])).touching(words_of([(2, 4)]))
    assert found.tolist() == [0]
