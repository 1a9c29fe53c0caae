"""Buckets against exhaustive search, against the quadratic programme, and worked by hand."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.errors import SettingsError
from auditor.planning.buckets import Buckets, best_buckets
from auditor.planning.histogram import LengthHistogram
from auditor.planning.padding import fixed
from tests.unit.planning.squad_lengths import squad

# Notes of a buoy service: many short readings, some reports, one long log of a storm.
NOTES = LengthHistogram.of([(10, 6), (12, 3), (40, 2), (100, 1)])

# Few distinct values, so that ties are common.
histograms = st.dictionaries(st.integers(0, 12), st.integers(1, 4), min_size=1, max_size=9).map(
    lambda table: LengthHistogram.of(sorted(table.items()))
)
wide = st.dictionaries(st.integers(0, 10**9), st.integers(1, 10**5), min_size=1, max_size=9).map(
    lambda table: LengthHistogram.of(sorted(table.items()))
)


def cost(histogram: LengthHistogram, boundaries: tuple[int, ...]) -> int:
    """Pad each length to the first boundary that holds it."""
    pairs = zip(histogram.lengths.tolist(), histogram.documents.tolist(), strict=True)
    return sum(count * min(b for b in boundaries if b >= length) for length, count in pairs)


def every_choice(histogram: LengthHistogram, buckets: int) -> list[tuple[int, tuple[int, ...]]]:
    *rest, longest = histogram.lengths.tolist()
    choices = [(*inner, longest) for inner in combinations(rest, buckets - 1)]
    return [(cost(histogram, boundaries), boundaries) for boundaries in choices]


def quadratic(histogram: LengthHistogram, most: int) -> list[int]:
    """Return the fewest positions for 1..most buckets, by trying every start of a last bucket."""
    lengths, reached = histogram.lengths, np.cumsum(histogram.documents)
    best, found = lengths * reached, []
    for _ in range(most):
        found.append(int(best[-1]))
        later = [
            min((best[:j] + lengths[j] * (reached[j] - reached[:j])).tolist())
            for j in range(1, len(lengths))
        ]
        # A bucket more never pads more, so that j = 0, which cannot be split, keeps its value.
        best = np.array([best[0], *later])
    return found


def test_the_notes_worked_by_hand():
    """Two buckets: 660 at (10, 100), 408 at (12, 100), 540 at (40, 100)."""
    assert best_buckets(NOTES) == [
        Buckets((100,), (12,), 276, 1200),
        Buckets((12, 100), (9, 3), 276, 9 * 12 + 3 * 100),
        Buckets((12, 40, 100), (9, 2, 1), 276, 9 * 12 + 2 * 40 + 100),
        Buckets((10, 12, 40, 100), (6, 3, 2, 1), 276, 276),
    ]
    assert best_buckets(NOTES)[1].share == (408 - 276) / 408


@pytest.mark.parametrize("some", [histograms, wide])
@given(st.data())
def test_equal_to_exhaustive_search(some, data):
    """Fewest positions and, where choices tie, the one whose every boundary is lowest."""
    histogram = data.draw(some)
    found = best_buckets(histogram)
    assert len(found) == min(8, len(histogram.lengths))
    for number, buckets in enumerate(found, start=1):
        least, first = min(every_choice(histogram, number))
        assert (buckets.padded, buckets.boundaries) == (least, first)
        ties = [choice for padded, choice in every_choice(histogram, number) if padded == least]
        assert first == tuple(map(min, zip(*ties, strict=True)))


@given(histograms)
def test_every_document_is_in_its_bucket(histogram):
    lengths = np.repeat(histogram.lengths, histogram.documents)
    for buckets in best_buckets(histogram):
        places = np.searchsorted(buckets.boundaries, lengths)
        counts = np.bincount(places, minlength=len(buckets.boundaries))
        assert buckets.documents == tuple(counts.tolist())
        assert buckets.positions == histogram.total_positions


@given(wide)
def test_more_buckets_never_pad_more(histogram):
    padded = [buckets.padded for buckets in best_buckets(histogram, 9)]
    assert padded[0] == fixed(histogram, int(histogram.lengths[-1])).padded
    assert padded == sorted(padded, reverse=True)
    assert padded[-1] == histogram.total_positions


def test_a_tie_goes_to_the_lower_boundary():
    """One document each of 1, 2, 3: (1, 3) and (2, 3) both take 7 positions."""
    assert best_buckets(LengthHistogram.of([(1, 1), (2, 1), (3, 1)]), 2)[1].boundaries == (1, 3)


@pytest.mark.parametrize("seed", range(5))
def test_equal_to_the_quadratic_programme(seed):
    random = np.random.default_rng(seed)
    lengths = np.unique(random.integers(0, 5000, 400))
    documents = (random.pareto(0.8, len(lengths)) * 50).astype(np.int64) + 1
    histogram = LengthHistogram(lengths, documents)
    assert [b.padded for b in best_buckets(histogram)] == quadratic(histogram, 8)


def test_a_published_histogram():
    """The optimum on real lengths, and boundaries that cost what is said."""
    found = best_buckets(squad())
    assert [buckets.padded for buckets in found] == quadratic(squad(), 8)
    assert [buckets.padded for buckets in found] == [
        cost(squad(), buckets.boundaries) for buckets in found
    ]


def test_beyond_64_bits():
    """2**50 documents of 1 and one of 2**50: 2**100 + 2**50 positions in one bucket."""
    found = best_buckets(LengthHistogram.of([(1, 2**50), (2**50, 1)]))
    assert [buckets.padded for buckets in found] == [2**100 + 2**50, 2**51]


def test_empty_documents_have_no_share():
    assert best_buckets(LengthHistogram.of([(0, 3)])) == [Buckets((0,), (3,), 0, 0)]
    assert best_buckets(LengthHistogram.of([(0, 3)]))[0].share is None


def test_no_bucket_is_refused():
    with pytest.raises(SettingsError, match="0 buckets"):
        best_buckets(NOTES, 0)
