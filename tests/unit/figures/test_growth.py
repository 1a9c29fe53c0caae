"""Growth of distinct words: published counts, and drawing by hand."""

import itertools
import math
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.figures.growth import (
    SMOOTHED,
    curve,
    growth,
    heaps,
    new_in_as_much_again,
    next_is_new,
)

# Words of Shakespeare that occur r times, r = 1 … 100, and 846 that occur more often: Efron &
# Thisted 1976, Biometrika 63:435-447, table 1. N = 884,647, 31,534 distinct.
SHAKESPEARE = [
    14376, 4343, 2292, 1463, 1043, 837, 638, 519, 430, 364,
    305, 259, 242, 223, 187, 181, 179, 130, 127, 128,
    104, 105, 99, 112, 93, 74, 83, 76, 72, 63,
    73, 47, 56, 59, 53, 45, 34, 49, 45, 52,
    49, 41, 30, 35, 37, 21, 41, 30, 28, 19,
    25, 19, 28, 27, 31, 19, 19, 22, 23, 14,
    30, 19, 21, 18, 15, 10, 15, 14, 11, 16,
    13, 12, 10, 16, 18, 11, 8, 15, 12, 7,
    13, 12, 11, 8, 10, 11, 7, 12, 9, 8,
    4, 7, 6, 7, 10, 10, 15, 7, 7, 5,
]  # fmt: skip
# Malayan butterflies that Corbet caught r times, r = 1 … 24 (Fisher, Corbet & Williams 1943).
BUTTERFLIES = [118, 74, 44, 24, 29, 22, 20, 19, 20, 15, 12, 14, 6, 12, 6, 9, 9, 6, 10, 10, 11, 5,
               3, 3]  # fmt: skip


def frequencies(counts):
    return dict(enumerate(counts, start=1))


def test_the_published_probability_of_a_new_word():
    """14,376 / 884,647 = 0.0162505 (Efron & Thisted 1976)."""
    held = frequencies(SHAKESPEARE)
    rest = 884_647 - sum(r * n for r, n in held.items())
    assert sum(SHAKESPEARE) == 30_688
    # The 846 frequent words share what is left; how, does not matter here.
    each, over = divmod(rest, 846)
    held |= {each: 846 - over, each + 1: over}
    found = next_is_new(held)
    assert (found.numerator, found.denominator) == (14_376, 884_647)
    assert found.value == pytest.approx(0.0162505, abs=5e-8)
    assert found.low < found.value < found.high


def test_the_published_number_of_new_words_in_as_much_again():
    """11,430 with a standard error of 178 (Efron & Thisted 1976, by Good & Toulmin 1956)."""
    found = new_in_as_much_again(frequencies(SHAKESPEARE))
    assert abs(found.value - 11_430) < 178
    assert (found.high - found.value) / 1.959964 == pytest.approx(math.sqrt(30_688))


def test_the_published_number_of_new_butterflies():
    """75 new kinds in as many further years (Fisher, Corbet & Williams 1943)."""
    assert new_in_as_much_again(frequencies(BUTTERFLIES)).value == 75


def test_the_published_power_law():
    """Manning et al. 2008, exercise: 3,000 terms at 10^4 and 30,000 at 10^6 give b = 0.5, k = 30.

    And section 5.1.1: 44 · 1,000,020^0.49 = 38,323.
    """
    found = heaps([(10**4, 3000.0), (10**6, 30_000.0)])
    assert found["b"] == pytest.approx(0.5, rel=1e-12)
    assert found["k"] == pytest.approx(30, rel=1e-12)
    made = heaps([(m, 44 * m**0.49) for m in (10**5, 3 * 10**5, 10**6)])
    assert made["k"] * 1_000_020 ** made["b"] == pytest.approx(38_323, abs=1)


@given(st.lists(st.integers(1, 4), min_size=2, max_size=4), st.data())
def test_the_curve_is_the_mean_over_all_draws(counts, data):
    """Every way to draw m of the occurrences, counted out."""
    words = [word for word, times in enumerate(counts) for _ in range(times)]
    m = data.draw(st.integers(1, len(words)))
    held: dict[int, int] = {}
    for times in counts:
        held[times] = held.get(times, 0) + 1
    draws = list(itertools.combinations(words, m))
    mean = sum(len(set(draw)) for draw in draws) / len(draws)
    found = dict(curve(held, len(words), m, 1))
    assert found[m] == pytest.approx(mean)


@pytest.mark.parametrize("total", [10**5, 2 * 10**6, 10**8, 10**10])
def test_the_chance_of_missing_a_kind_is_exact_at_any_size(total):
    """Counts and draws on both sides of each border, against products of exact fractions."""
    for times in (1, 40, 4999, 5001, total // 7):
        for m in (1, 24, 4999, 5001):
            if min(times, m) > 5001 or times > total - m:
                continue
            few, many = sorted((times, m))
            missed = Fraction(1)
            for i in range(min(few, 60)):
                missed *= Fraction(total - many - i, total - i)
            if few > 60:
                logs = (math.log1p(-many / (total - i)) for i in range(few))
                expected = -math.expm1(math.fsum(logs))
            else:
                expected = float(1 - missed)
            [(_, value)] = curve({times: 1}, total, m, 1)[:1]
            assert value == pytest.approx(expected, rel=1e-8)


def test_one_draw_finds_one_kind_of_ten_thousand_million():
    """Counts by Zipf's law: whatever their number, the first draw is one kind."""
    counts = {10**10 // (rank * 20): 1 for rank in range(1, 300)}
    rest = 10**10 - sum(counts)
    counts[1] = counts.get(1, 0) + rest
    assert curve(counts, 10**10, 1, 30)[0] == (1, pytest.approx(1))


def test_few_singletons_are_smoothed_and_bounded():
    """The plain series would say -10: none is less than none, and the note says what was done."""
    found = new_in_as_much_again({2: 10})
    assert found.value == 0.0
    assert found.low <= found.value <= found.high
    assert found.note == SMOOTHED
    capped = new_in_as_much_again({1: 50, 2: 10, 3: 5}, unseen=4)
    assert (capped.value, capped.high) == (4.0, 4.0)


@pytest.mark.parametrize("held", [{3: 5}, {1: 1}])
def test_counts_that_say_nothing_of_the_next_have_no_interval(held):
    """Nothing seen once or twice, and one occurrence of all: no claim of certainty."""
    found = next_is_new(held)
    assert (found.low, found.high) == (None, None)
    assert found.note is not None


def test_growth_of_everything_and_of_nothing():
    """The curve ends at what was seen; a corpus without words says why."""
    held = growth(frequencies(BUTTERFLIES))
    assert held["curve"][0] == [1, pytest.approx(1)]
    assert held["curve"][-1] == [held["occurrences"], pytest.approx(held["distinct"])]
    assert 0 < held["heaps"]["b"] < 1
    nothing = growth({})
    assert nothing["next_is_new"]["note"] == "no occurrences"
    assert nothing["curve"] == []
