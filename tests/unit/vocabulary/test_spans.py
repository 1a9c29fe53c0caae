"""The three corrections of spans, each with a case that it must leave alone."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Encoding, Inventory, bounds_of, flags
from auditor.vocabulary.spans import correct, coverage

# Entry 0 is nothing but the marker of a space, entry 1 is any other.
MARKER, OTHER = 0, 1
INVENTORY = Inventory(
    entries=["\u2581", "x"], entry_bytes=None, marker="\u2581", marker_only=flags(2, [MARKER]),
    stands_for_bytes=flags(2, []), control=flags(2, []), unknown=None, unknown_text=None,
    byte_kind="none", lacking=(),
)  # fmt: skip


def corrected(texts, *documents):
    """Return (start, end) of each token; tokens are (id, reported start, reported end)."""
    flat = np.array([t for tokens in documents for t in tokens], dtype=np.int64).reshape(-1, 3)
    bounds = bounds_of([len(tokens) for tokens in documents])
    found = correct(Encoding(flat[:, 0], flat[:, 1], flat[:, 2], bounds), Stretch(texts), INVENTORY)
    return list(zip(found.starts.tolist(), found.ends.tolist(), strict=True))


def test_an_inserted_marker_has_an_empty_span():
    """(a) A prefix that stands for nothing in "ab" is reported over the "a" and holds nothing."""
    assert corrected(["ab"], [(MARKER, 0, 1), (OTHER, 0, 2)]) == [(0, 0), (0, 2)]


def test_a_marker_over_whitespace_keeps_its_span():
    """(a), against: the marker stands for the space that is there."""
    assert corrected([" ab"], [(MARKER, 0, 1), (OTHER, 1, 3)]) == [(0, 1), (1, 3)]


def test_another_token_over_ink_keeps_its_span():
    """(a), against: only entries of nothing but markers are meant."""
    assert corrected(["ab"], [(OTHER, 0, 1), (OTHER, 1, 2)]) == [(0, 1), (1, 2)]


def test_an_empty_range_covers_its_character():
    """(b) Of one character that became several tokens the later ones are reported empty."""
    assert corrected(["a½b"], [(OTHER, 1, 2), (OTHER, 1, 1)]) == [(1, 2), (1, 2)]


def test_an_empty_range_after_the_last_character_stays_empty():
    """(b), against: there is no character there, not even of the next document."""
    assert corrected(["ab", "cd"], [(OTHER, 2, 2)], [(OTHER, 0, 2)]) == [(2, 2), (2, 4)]


def test_an_empty_range_of_a_marker_stays_empty():
    """(b) with (a): the character that it would cover is no whitespace."""
    assert corrected(["ab"], [(MARKER, 0, 0)]) == [(0, 0)]


def test_uncovered_marks_join_the_token_before():
    """(c) A normaliser that composed e and U+0301 reports the e alone."""
    tokens = [(OTHER, 0, 1), (OTHER, 3, 4)]
    assert corrected(["e\u0301\u0323n"], tokens) == [(0, 3), (3, 4)]


def test_uncovered_marks_join_every_token_over_their_base():
    """(c) Three bytes of one letter: the mark belongs to each of them."""
    tokens = [(OTHER, 0, 1)] * 3
    assert corrected(["か\u3099"], tokens) == [(0, 2)] * 3


def test_a_covered_mark_changes_nothing():
    """(c), against: the mark has a token of its own."""
    tokens = [(OTHER, 0, 1), (OTHER, 1, 2)]
    assert corrected(["e\u0301"], tokens) == [(0, 1), (1, 2)]


def test_an_uncovered_letter_is_not_taken():
    """(c), against: only marks move; a letter that nothing covers is dropped."""
    assert corrected(["exy"], [(OTHER, 0, 1)]) == [(0, 1)]


def test_marks_after_an_uncovered_letter_stay_uncovered():
    """(c), against: no token covers the character before the mark."""
    assert corrected(["ax\u0301"], [(OTHER, 0, 1)]) == [(0, 1)]


def test_marks_do_not_cross_documents():
    """(c), against: a mark that begins a document has no character before it."""
    assert corrected(["e", "\u0301n"], [(OTHER, 0, 1)], [(OTHER, 1, 2)]) == [(0, 1), (2, 3)]


def test_marks_stop_at_the_end_of_their_document():
    """(c), against: bare marks on both sides of a document's end; only the near one is taken."""
    texts, tokens = ["e\u0301", "\u0301n"], ([(OTHER, 0, 1)], [(OTHER, 1, 2)])
    assert corrected(texts, *tokens) == [(0, 2), (3, 4)]


def test_an_empty_span_takes_no_marks():
    """(c) with (a): an inserted marker before a leading mark holds nothing still."""
    assert corrected(["\u0301n"], [(MARKER, 0, 0), (OTHER, 1, 2)]) == [(0, 0), (1, 2)]


def test_positions_count_from_the_start_of_the_stretch():
    """Spans of the second document are moved by the length of the first."""
    assert corrected(["abc", "de"], [(OTHER, 0, 3)], [(OTHER, 0, 1)]) == [(0, 3), (3, 4)]


TOKENS = st.lists(st.tuples(st.integers(0, 1), st.integers(0, 8), st.integers(0, 8)), max_size=6)


def slowly(text, tokens):
    """Return the corrected spans of one document, rule by rule as FIGURES states them."""
    size, spans = len(text), []
    for number, start, end in tokens:
        span = [start, min(end if end > start else start + 1, size)]
        if number == MARKER and not any(c.isspace() for c in text[span[0] : span[1]]):
            span[1] = span[0]
        spans.append(span)
    bare = [not any(s <= p < e for s, e in spans) for p in range(size)]
    for span in spans:
        held = span[1] > span[0]
        while held and span[1] < size and bare[span[1]] and text[span[1]] == "\u0301":
            span[1] += 1
    return [tuple(span) for span in spans]


@given(st.lists(st.tuples(st.text(st.sampled_from("ab \u0301"), max_size=7), TOKENS), max_size=4))
def test_corrections_agree_with_a_loop(documents):
    """The array code against the rules applied token by token."""
    rows = [
        (text, [(i, min(s, e, len(text)), min(max(s, e), len(text))) for i, s, e in tokens])
        for text, tokens in documents
    ]
    shift, expected = 0, []
    for text, tokens in rows:
        expected += [(start + shift, end + shift) for start, end in slowly(text, tokens)]
        shift += len(text)
    assert corrected([text for text, _ in rows], *(tokens for _, tokens in rows)) == expected


@given(st.lists(st.tuples(st.integers(0, 9), st.integers(0, 9)), max_size=8))
def test_coverage_counts_spans_over_each_character(pairs):
    """Against a count character by character."""
    spans = [(min(pair), max(pair)) for pair in pairs]
    starts = np.array([start for start, _ in spans], dtype=np.int64)
    ends = np.array([end for _, end in spans], dtype=np.int64)
    expected = [sum(start <= place < end for start, end in spans) for place in range(9)]
    assert coverage(starts, ends, 9).tolist() == expected
