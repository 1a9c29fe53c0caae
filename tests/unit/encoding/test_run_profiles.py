"""Profiles of whitespace: what goes in for pieces comes out for documents."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from auditor.encoding.runprofiles import RunProfiles
from auditor.encoding.whole import RunTable

WIDTH = 8
# A run: the piece it lies in, its kind, and one count of each column.
RUN = st.tuples(st.integers(0, 6), st.integers(0, 2), st.integers(0, 3), st.integers(0, 1))
HUGE = st.tuples(st.integers(0, 6), st.integers(0, 2), st.just(2**40), st.integers(0, 2**30))


def table_of(runs):
    kinds = np.array([run[1] for run in runs], dtype=np.int64)
    columns = np.array([[1, run[2], *[run[3]] * 6] for run in runs], dtype=np.int64)
    documents = np.array([run[0] for run in runs], dtype=np.int64)
    return RunTable(kinds, columns.reshape(-1, WIDTH), documents)


def summed(documents, kinds, table):
    """Return the sums of the columns by document and kind."""
    found = {}
    for document, kind, row in zip(documents, kinds, table, strict=True):
        held = found.setdefault((document, kind), [0] * WIDTH)
        found[document, kind] = [a + b for a, b in zip(held, row, strict=True)]
    return found


@given(
    st.lists(st.lists(RUN, max_size=9) | st.lists(HUGE, max_size=4), min_size=1, max_size=3),
    st.lists(st.tuples(st.integers(0, 2), st.integers(0, 6), st.integers(0, 3)), max_size=12),
)
def test_runs_of_documents_are_those_of_their_pieces(blocks, used):
    """Several blocks of seven pieces; a document is pieces of any block, in any number."""
    profiles = RunProfiles()
    numbers = [profiles.of(table_of(runs), 7) for runs in blocks]
    used = [(block % len(blocks), piece, document) for block, piece, document in used]
    profile_of = np.array([numbers[b][p] for b, p, _ in used], dtype=np.int64)
    document_of = np.array([document for *_, document in used], dtype=np.int64)
    found = profiles.expand(profile_of, document_of)
    expected = [
        (document, run[1], [1, run[2], *[run[3]] * 6])
        for block, piece, document in used
        for run in blocks[block]
        if run[0] == piece
    ]
    ours = summed(found.document_of.tolist(), found.kind_of.tolist(), found.table.tolist())
    assert ours == summed(*zip(*expected, strict=True)) if expected else not len(found.kind_of)


@given(st.lists(RUN, max_size=12))
def test_pieces_with_the_same_runs_share_a_profile(runs):
    """Whatever their order: a profile is what a piece holds, and only that."""
    numbers = RunProfiles().of(table_of(runs), 7).tolist()
    held = [sorted(run[1:] for run in runs if run[0] == piece) for piece in range(7)]
    for one in range(7):
        for other in range(7):
            assert (numbers[one] == numbers[other]) == (held[one] == held[other])
