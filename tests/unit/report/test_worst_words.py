"""The words that cost most, and those lost most often, against sorting every row."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.report import tables
from auditor.tallies.words import BrokenWord, WordsTally

ROW = st.tuples(
    st.builds(
        BrokenWord, st.text("ab", max_size=2), st.just("b"), st.integers(1, 3), st.integers(0, 1)
    ),
    st.integers(1, 4),
)


@pytest.fixture(autouse=True)
def three_are_shown(monkeypatch):
    monkeypatch.setattr(tables, "WORST", 3)


@given(st.lists(ROW, max_size=40), st.sampled_from([2, 1000]))
def test_worst_words_are_those_of_a_sort(rows, in_memory):
    """Extra tokens first, then losses not named yet; ties go by the word."""
    tally = WordsTally(in_memory)
    for row, count in rows:
        tally.add(row, count)
    every = list(tally.rows())
    costly = sorted(every, key=lambda item: (-item[1] * (item[0].pieces - 1), item[0]))[:3]
    others = [item for item in every if item not in costly and item[0].unknown]
    lost = sorted(others, key=lambda item: (-item[1], item[0]))[:3]
    assert tables.worst_words(tally) == [*costly, *lost]
