"""Differences of two estimates, against published values, scipy and slow ways of the same."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import optimize, stats

from auditor.figures.differences import Estimate, holm, interval_of_difference, p_value
from auditor.figures.distances import critical_distance, distance
from auditor.figures.intervals import Z, wilson


def proportion(successes: int, n: int) -> Estimate:
    return Estimate(successes / n, *wilson(successes, n), (successes, n), share=True)


def scores(successes: int, n: int) -> list[float]:
    """Return Wilson's limits as roots of |p - t| = z·sqrt(t(1-t)/n), found by search."""
    p = successes / n

    def beyond(t: float) -> float:
        return (p - t) ** 2 - Z * Z * t * (1 - t) / n

    beside = 1e-12  # at 0 and 1 the proportion itself is a root, which is not meant
    low = optimize.brentq(beyond, 0.0, p - beside, xtol=1e-14) if successes else 0.0
    high = optimize.brentq(beyond, p + beside, 1.0, xtol=1e-14) if successes < n else 1.0
    return [low, high]


def newcombe(one: tuple[int, int], other: tuple[int, int]) -> tuple[float, float]:
    """Return method 10 for p1 - p2 as the paper writes it, from limits found by search."""
    (p1, p2) = (a / n for a, n in (one, other))
    (l1, u1), (l2, u2) = scores(*one), scores(*other)
    difference = p1 - p2
    return (
        difference - math.sqrt((p1 - l1) ** 2 + (u2 - p2) ** 2),
        difference + math.sqrt((u1 - p1) ** 2 + (p2 - l2) ** 2),
    )


# Newcombe (1998), Table II, method 10, from memory; each is found again by `newcombe` above.
PUBLISHED = [
    ((56, 70), (48, 80), (0.0524, 0.3339)),
    ((9, 10), (3, 10), (0.1705, 0.8090)),
    ((10, 10), (0, 20), (0.6791, 1.0000)),
]


@pytest.mark.parametrize(("one", "other", "ends"), PUBLISHED)
def test_two_proportions_have_newcombes_interval(one, other, ends):
    """To the four digits printed, and to 1e-9 by a search that shares no formula."""
    found = interval_of_difference(proportion(*other), proportion(*one))
    assert found == pytest.approx(ends, abs=5e-5)
    assert found == pytest.approx(newcombe(one, other), abs=1e-7)


COUNTS = st.integers(2, 400).flatmap(lambda n: st.tuples(st.integers(0, n), st.just(n)))


@given(COUNTS, COUNTS)
def test_the_interval_is_the_same_from_either_side(one, other):
    """Exchanging the two turns the interval round; it holds the difference."""
    low, high = interval_of_difference(proportion(*one), proportion(*other))
    turned = interval_of_difference(proportion(*other), proportion(*one))
    assert turned == pytest.approx((-high, -low))
    assert low <= other[0] / other[1] - one[0] / one[1] <= high


@given(COUNTS, COUNTS)
def test_p_is_below_5_percent_exactly_when_the_interval_leaves_0_out(one, other):
    """The p-value and the interval never contradict each other."""
    before, after = proportion(*one), proportion(*other)
    low, high = interval_of_difference(before, after)
    if min(abs(low), abs(high)) > 1e-9:
        assert (p_value(before, after) < math.erfc(Z / math.sqrt(2))) is (low > 0 or high < 0)


@given(*[st.floats(0.5, 5.0)] * 2, *[st.floats(0.01, 1.0)] * 2)
def test_normal_estimates_have_the_z_test(one, other, half, other_half):
    """Symmetric intervals: widths add in squares, and p is that of the z test of scipy."""
    before = Estimate(one, one - half, one + half)
    after = Estimate(other, other - other_half, other + other_half)
    both = math.hypot(half, other_half)
    found = interval_of_difference(before, after)
    assert found == pytest.approx((other - one - both, other - one + both), abs=1e-9)
    z = abs(other - one) / (both / Z)
    assert p_value(before, after) == pytest.approx(2 * stats.norm.sf(z), rel=1e-6, abs=1e-300)


def test_a_clamped_share_agrees_with_its_interval():
    """Clamped at 0, the lower distance stays the value itself at every confidence."""
    before = Estimate(0.30, 0.20, 0.40, share=True)
    after = Estimate(0.01, 0.0, 0.05, share=True)
    low, high = interval_of_difference(before, after)
    assert (low, high) == pytest.approx((-0.29 - math.hypot(0.01, 0.1),
                                         -0.29 + math.hypot(0.04, 0.1)))  # fmt: skip
    assert high < 0
    assert p_value(before, after) < 0.05


def test_an_unknown_end_leaves_one_end_open():
    """Nothing seen before: how much higher at most is known, how much at least is not."""
    before, after = Estimate(0.0, 0.0, None), Estimate(0.2, 0.1, 0.3)
    assert interval_of_difference(before, after) == (None, pytest.approx(0.3))
    assert interval_of_difference(after, before) == (pytest.approx(-0.3), None)
    nothing = Estimate(1.0, None, None)
    assert interval_of_difference(nothing, after) == (None, None)


def test_equal_and_certain_values():
    """No difference has p = 1; two values without any width that differ have p = 0."""
    one, other = Estimate(1.0, 1.0, 1.0), Estimate(1.5, 1.5, 1.5)
    assert p_value(one, one) == 1.0
    assert p_value(one, other) == 0.0


def test_holm_as_worked_by_hand():
    """Smallest times 4, next times 3 and never below it, and so on, at most 1."""
    assert holm([0.01, 0.04, 0.03, 0.005]) == pytest.approx([0.03, 0.06, 0.06, 0.02])
    assert holm([0.9, 0.8]) == [1.0, 1.0]
    assert holm([]) == []


@given(st.lists(st.floats(0.0, 1.0), max_size=12))
def test_holm_rejects_what_stepping_down_rejects(p_values):
    """Against the procedure as it is told: stop at the first that is not below 5 % / (m - i)."""
    adjusted = holm(p_values)
    order = sorted(range(len(p_values)), key=lambda place: p_values[place])
    rejected = set()
    for rank, place in enumerate(order):
        if (len(order) - rank) * p_values[place] >= 0.05:
            break
        rejected.add(place)
    assert {place for place, p in enumerate(adjusted) if p < 0.05} == rejected


HISTOGRAM = st.dictionaries(st.integers(0, 30), st.integers(1, 9), min_size=1).map(
    lambda held: sorted(held.items())
)


def expanded(histogram) -> list[int]:
    return [length for length, documents in histogram for _ in range(documents)]


@given(HISTOGRAM, HISTOGRAM)
def test_the_distance_is_that_of_scipy_on_single_documents(one, other):
    """`ks_2samp` on each document's length, and the length where it is reached first."""
    apart, at = distance(one, other)
    # Four of each document: the same distributions, and enough for scipy's p-value.
    found = stats.ks_2samp(4 * expanded(one), 4 * expanded(other), method="asymp")
    assert float(apart) == pytest.approx(found.statistic, abs=1e-12)
    shares = [
        sum(n for length, n in own if length <= at) / sum(n for _, n in own) for own in (one, other)
    ]
    assert abs(shares[0] - shares[1]) == pytest.approx(float(apart))


def test_the_distance_is_exact():
    """2 of 3 against 1 of 7, at the shortest length where they lie so far apart."""
    apart, at = distance([(3, 2), (9, 1)], [(3, 1), (9, 6)])
    assert (apart.numerator, apart.denominator, at) == (11, 21, 3)
    assert distance([(5, 4)], [(5, 1)]) == (0, 5)


@pytest.mark.parametrize(("n", "m"), [(50, 50), (200, 300), (1000, 40)])
def test_the_critical_distance_has_5_percent_beyond_it(n, m):
    """Smirnov's limit distribution in scipy, to the first term of its series."""
    scaled = critical_distance(n, m) * math.sqrt(n * m / (n + m))
    assert stats.kstwobign.sf(scaled) == pytest.approx(0.05, abs=1e-5)
