"""What a length cuts, from the histogram: by hand, and against documents one by one."""

from __future__ import annotations

import json

from hypothesis import given
from hypothesis import strategies as st

from auditor.figures.intervals import wilson
from auditor.planning.histogram import LengthHistogram
from auditor.planning.losses import losses, windows
from tests.unit.planning.documents import histogram_of, lengths_of_documents


def test_by_hand():
    """Ten notes, two positions of each the template's: at 10, two are cut, by 2 and 7 tokens."""
    held = LengthHistogram.of([(6, 5), (10, 3), (12, 1), (17, 1)])
    found = losses(held, 2, 10)
    assert (found["truncated_documents"].numerator, found["truncated_documents"].denominator) == (
        2, 10,
    )  # fmt: skip
    assert (found["truncated_tokens"].numerator, found["truncated_tokens"].denominator) == (9, 69)
    assert found["dropped_tokens"].numerator == 10 + 15
    documents = found["truncated_documents"]
    assert (documents.low, documents.high) == wilson(2, 10)


@given(lengths_of_documents, st.integers(1, 60), st.data())
def test_windows_equal_a_walk_over_each_document(lengths, room, data):
    """Windows of ``room`` tokens, the next one ``overlap`` before the end of the last."""
    overlap = data.draw(st.integers(0, room - 1))
    found = windows(histogram_of([n + 2 for n in lengths]), 2, room + 2, overlap)
    count = read = 0
    for tokens in lengths:
        start, more = 0, True
        while more:
            count += 1
            read += min(room, tokens - start)
            more = start + room < tokens
            start += room - overlap
    assert (found["windows"], found["tokens_read"]) == (count, read)
    assert found["tokens_read_twice"] == read - sum(lengths)
    json.dumps(found)
