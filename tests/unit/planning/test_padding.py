"""Padding against exact fractions, against every arrangement of tiny corpora, and published."""

from __future__ import annotations

import math
from decimal import Decimal, localcontext
from fractions import Fraction
from itertools import combinations, permutations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.errors import SettingsError
from auditor.planning import padding
from auditor.planning.histogram import LengthHistogram
from auditor.planning.padding import Padding, fixed, random_batches, similar_batches
from tests.unit.planning.documents import histogram_of
from tests.unit.planning.squad_lengths import squad

ROUNDING = Fraction(1, 10**14)  # the promise is 1e-12

# Notes of a buoy service: many short readings, some reports, one long log of a storm.
NOTES = LengthHistogram.of([(10, 6), (12, 3), (40, 2), (100, 1)])


def close(value: float, exact: Fraction, tolerance: Fraction = ROUNDING) -> bool:
    return abs(Fraction(value) - exact) <= tolerance * exact


def spelled_out(histogram: LengthHistogram) -> list[int]:
    return np.repeat(histogram.lengths, histogram.documents).tolist()


def exact_longest(histogram: LengthHistogram, batch: int) -> Fraction:
    """E[longest], from the definition of an expectation."""
    counts = np.cumsum(histogram.documents).tolist()
    none_longer = [Fraction(math.comb(n, batch), math.comb(counts[-1], batch)) for n in counts]
    steps = zip(histogram.lengths.tolist(), none_longer, [Fraction(0), *none_longer], strict=False)
    return sum((length * (upto - below) for length, upto, below in steps), Fraction(0))


def exact_random(histogram: LengthHistogram, batch: int) -> Fraction:
    full, left = divmod(histogram.total_documents, batch)
    padded = full * batch * exact_longest(histogram, batch) if full else Fraction(0)
    return padded + (left * exact_longest(histogram, left) if left else 0)


def in_batches(lengths, batch: int) -> int:
    """Return the positions computed for documents in this order."""
    batches = [lengths[start : start + batch] for start in range(0, len(lengths), batch)]
    return sum(len(held) * max(held) for held in batches)


histograms = st.dictionaries(st.integers(0, 2000), st.integers(1, 60), min_size=1, max_size=12).map(
    lambda table: LengthHistogram.of(sorted(table.items()))
)
tiny = st.lists(st.integers(0, 9), min_size=1, max_size=6)


def test_the_notes_worked_by_hand():
    """12 documents of 276 positions; sorted in fives: 10 | 40 | 100, in batches of 5, 5 and 2."""
    assert fixed(NOTES, 100) == Padding(276, 1200)
    assert fixed(NOTES, 128).share == (1536 - 276) / 1536
    assert similar_batches(NOTES, 5) == Padding(276, 5 * 10 + 5 * 40 + 2 * 100)


def test_two_documents_of_four_worked_by_hand():
    """Of six pairs of 1, 2, 3 and 4 three hold the 4, two of the rest the 3, and one is (1, 2)."""
    four = LengthHistogram.of([(1, 1), (2, 1), (3, 1), (4, 1)])
    longest = Fraction(3 * 4 + 2 * 3 + 1 * 2, 6)
    assert close(random_batches(four, 2).padded, 4 * longest)


def test_padding_to_384_as_published():
    """Totals of the published histogram: 1 - 15,249,479 / (88,641 × 384) = 0.551989."""
    found = fixed(squad(), 384)
    assert (squad().total_documents, found.positions) == (88_641, 15_249_479)
    assert found.padded == 88_641 * 384
    assert found.share == pytest.approx(0.551989, abs=5e-7)


@pytest.mark.parametrize("batch", [2, 4096, 98_304 // 3])
def test_serial_numbers_as_published(batch):
    """Lengths 1..N once each: E[longest of k] = k(N+1)/(k+1) (Johnson 1994, Teach. Stat. 16(2))."""
    n = 98_304
    serial = LengthHistogram(np.arange(1, n + 1), np.ones(n, dtype=np.int64))
    assert close(random_batches(serial, batch).padded, n * Fraction(batch * (n + 1), batch + 1))


@given(histograms, st.integers(1, 800))
def test_random_batches_equal_exact_fractions(histogram, batch):
    found = random_batches(histogram, batch)
    assert close(found.padded, exact_random(histogram, batch))
    assert found.positions <= found.padded <= fixed(histogram, int(histogram.lengths[-1])).padded


@given(histograms, st.data())
def test_the_longest_of_any_batch_equals_exact_fractions(histogram, data):
    batch = data.draw(st.integers(1, histogram.total_documents))
    found = padding._expected_longest(histogram, batch)
    assert close(found, exact_longest(histogram, batch))


@given(tiny, st.data())
def test_the_longest_equals_the_mean_over_all_subsets(lengths, data):
    batch = data.draw(st.integers(1, len(lengths)))
    longest = [max(held) for held in combinations(lengths, batch)]
    found = padding._expected_longest(histogram_of(lengths), batch)
    assert close(found, Fraction(sum(longest), len(longest)))


@given(tiny, st.integers(1, 8))
def test_random_batches_equal_the_mean_over_all_orders(lengths, batch):
    padded = [in_batches(order, batch) for order in permutations(lengths)]
    found = random_batches(histogram_of(lengths), batch).padded
    assert close(found, Fraction(sum(padded), len(padded)))


@given(histograms, st.integers(1, 800))
def test_similar_batches_equal_the_sorted_documents(histogram, batch):
    assert similar_batches(histogram, batch) == Padding(
        histogram.total_positions, in_batches(spelled_out(histogram), batch)
    )


def test_another_order_may_pad_less_in_two_batches():
    """1, 1, 9 | 9, 9 where 9, 9, 9 | 1, 1 would do: the order is ascending all the same."""
    assert similar_batches(LengthHistogram.of([(1, 2), (9, 3)]), 3).padded == 3 * 9 + 2 * 9


def test_a_billion_documents_equal_exact_fractions():
    """10**9 documents in batches of 4096, with a last batch of 2560: products of 4096 factors."""
    pairs = [
        (1, 10),
        (7, 600_000_000),
        (300, 399_000_000),
        (8000, 999_000),
        (90_000, 987),
        (1e6, 3),
    ]
    histogram = LengthHistogram.of(pairs)
    counts = np.cumsum(histogram.documents).tolist()
    exact = Fraction(0)
    for batch, documents in ((4096, 10**9 - 2560), (2560, 2560)):
        total = math.perm(10**9, batch)
        longest = Fraction(1)
        for step, count in zip(np.diff(histogram.lengths).tolist(), counts, strict=False):
            longest += step * (1 - Fraction(math.perm(count, batch), total))
        exact += documents * longest
    assert counts[-1] == 10**9
    assert close(random_batches(histogram, 4096).padded, exact)


def chance_of_longer(documents: int, longer: int, batch: int) -> Fraction:
    """1 - C(N-a, b) / C(N, b) factor by factor, in 60 digits; a and b may change places."""
    few, many = sorted((longer, batch))
    with localcontext(prec=60):
        none = Decimal(1)
        for drawn in range(few):
            none *= Decimal(max(0, documents - many - drawn)) / Decimal(documents - drawn)
        return Fraction(1 - none)


@pytest.mark.parametrize(
    ("documents", "longer", "batch"),
    [
        (10**9, 1, 1),
        (10**9, 1, 65_536),
        (10**9, 10_000, 65_536),
        (10**9, 30_000, 65_536),
        (10**9, 500_000, 65_536),
        (10**9, 2, 500_000_000),
        (10**9, 9, 999_999_990),
        (10**9, 999_999_990, 9),
        (10**9, 999_999_990, 11),
        (10**12, 1, 2),
        (2**53, 3, 40_000),
        (70, 1, 3),
        (64, 31, 33),
        (66, 33, 32),
        (3, 2, 1),
        (3, 1, 2),
    ],
)
def test_the_chance_of_a_longer_document_keeps_its_digits(documents, longer, batch):
    """Relative, also where the chance is 10**-12 or all but a handful are drawn."""
    reached = np.array([documents - longer])
    found = padding._chance_of_longer(reached, documents, batch)[0]
    assert close(found, chance_of_longer(documents, longer, batch), Fraction(2, 10**15))


def test_stirling_remainders_equal_factorials():
    """r(n) = ln n! - x ln x + x - ln(2π)/2 in 50 digits: tabled up to 31, a series from 32."""
    numbers = np.arange(80)
    found = padding._remainder(numbers)
    with localcontext(prec=50):
        pi = Decimal("3.14159265358979323846264338327950288419716939937510")  # DLMF 3.12.1
        for n in numbers.tolist():
            x = n + Decimal("0.5")
            exact = Decimal(math.factorial(n)).ln() - x * x.ln() + x - (2 * pi).ln() / 2
            assert abs(Decimal(float(found[n])) - exact) < Decimal("3e-17")


def test_a_batch_of_one_is_not_padded():
    assert random_batches(NOTES, 1) == similar_batches(NOTES, 1) == Padding(276, 276)
    assert random_batches(NOTES, 1).share == 0


@pytest.mark.parametrize("batch", [12, 13, 10**9])
def test_a_batch_of_everything_is_padded_to_the_longest(batch):
    assert random_batches(NOTES, batch) == similar_batches(NOTES, batch) == fixed(NOTES, 100)


def test_one_rare_long_document_among_empty_ones():
    """A chance of 2 in 10**9 keeps its digits."""
    histogram = LengthHistogram.of([(0, 10**9 - 1), (10**6, 1)])
    assert close(random_batches(histogram, 2).padded, Fraction(2 * 10**6))
    assert similar_batches(histogram, 4096) == Padding(10**6, 2560 * 10**6)


def test_empty_documents_have_no_share():
    assert fixed(LengthHistogram.of([(0, 4)]), 0).share is None


def test_impossible_settings_are_refused():
    with pytest.raises(SettingsError, match="100 positions cannot be padded to 99"):
        fixed(NOTES, 99)
    for way in (random_batches, similar_batches):
        with pytest.raises(SettingsError, match="batch of 0"):
            way(NOTES, 0)
