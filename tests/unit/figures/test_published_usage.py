"""Use of the vocabulary against published definitions; the source stands beside each."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.figures.usage import entropy, rank_95_frequency, renyi_efficiency


@pytest.mark.parametrize(
    ("occurrences", "alpha", "efficiency"),
    [
        ([4, 2, 1, 1], 2, 0.770284),
        ([4, 2, 1, 1], 2.5, 0.730167),
        ([4, 2, 1, 1], 3, 0.697637),
        ([9, 1], 2.5, 0.249389),
    ],
)
def test_renyi_efficiency_by_hand(occurrences, alpha, efficiency):
    """H_a / H_0 with H_a = log(Σp^a) / (1 - a) of Zouhar et al. (2023), worked out by hand."""
    found = renyi_efficiency(np.array(occurrences), len(occurrences), alpha)
    assert found == pytest.approx(efficiency, abs=5e-7)


def test_shannon_efficiency_is_the_limit_at_one():
    """p = (1/2, 1/4, 1/8, 1/8): 1.75 bits of 2, and the order tends there as it tends to 1."""
    occurrences = np.array([4, 2, 1, 1])
    assert entropy(occurrences) == 1.75
    assert renyi_efficiency(occurrences, 4, 1 + 1e-7) == pytest.approx(0.875, abs=1e-6)


@given(st.integers(2, 5000), st.sampled_from([0.5, 2, 2.5, 3, 10]))
def test_uniform_use_is_efficiency_one(entries, alpha):
    """H_a of the uniform distribution is log k for every order (Zouhar et al. 2023)."""
    found = renyi_efficiency(np.full(entries, 3), entries, alpha)
    assert found == pytest.approx(1.0, abs=1e-9)


@given(st.lists(st.integers(0, 10**6), min_size=2, max_size=30).filter(any))
def test_renyi_efficiency_falls_with_its_order(occurrences):
    """Rényi (1961): entropy does not rise with its order."""
    counts = np.array(occurrences)
    found = [renyi_efficiency(counts, len(counts), alpha) for alpha in (0.5, 1.5, 2, 2.5, 3, 5)]
    assert all(left >= right - 1e-12 for left, right in pairwise(found))


def test_the_support_counts_entries_never_seen():
    """Four unseen entries double the support: log 4 / log 8 = 2/3 of 0.730167."""
    found = renyi_efficiency(np.array([4, 2, 1, 1, 0, 0, 0, 0]), 8)
    assert found == pytest.approx(0.730167 * math.log(4) / math.log(8), abs=1e-6)


@pytest.mark.parametrize(("frequent", "passes"), [(20, True), (19, True), (18, False)])
def test_95_percent_of_classes_have_100_examples(frequent, passes):
    """The rule of Gowda & May (2020): 19 of 20 classes with 100 examples pass, 18 do not."""
    occurrences = np.array([100] * frequent + [99] * (20 - frequent))
    found = rank_95_frequency(occurrences, np.ones(20, dtype=np.bool_))
    assert (found >= 100) is passes


@pytest.mark.parametrize(("entries", "rank"), [(1, 1), (100, 95), (101, 96), (1000, 950)])
def test_the_rank_is_rounded_up(entries, rank):
    """At least 95 % of classes (Gowda & May 2020): rank ⌈0.95·k⌉, most frequent first."""
    occurrences = np.arange(entries, 0, -1)
    assert rank_95_frequency(occurrences, np.ones(entries, dtype=np.bool_)) == entries + 1 - rank


def test_control_and_byte_pieces_are_no_classes():
    """Entries that are not rankable do not count: 19 of 20 pass among five unseen others."""
    occurrences = np.array([0] * 5 + [100] * 19 + [99])
    assert rank_95_frequency(occurrences, np.arange(25) >= 5) == 100
