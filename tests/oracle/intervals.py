"""Intervals by their textbook formulas, exact until the last step."""

from __future__ import annotations

import math
from collections.abc import Iterator
from fractions import Fraction
from functools import cache

Z = 1.959964
LOWER_TAIL = Fraction(25, 1000)
UPPER_TAIL = Fraction(975, 1000)
Interval = tuple[float | None, float | None]


def standard_error_of_ratio(y: list[int], x: list[int]) -> float:
    """Cochran 1977 §6: √(n/(n−1) · Σ(y−Rx)²) / Σx, R = Σy/Σx.

    With R a fraction of integers, y − Rx = (y·Σx − x·Σy) / Σx, so the sum is exact.
    """
    n, total_y, total_x = len(y), sum(y), sum(x)
    squares = sum(
        (one_y * total_x - one_x * total_y) ** 2 for one_y, one_x in zip(y, x, strict=True)
    )
    variance = Fraction(n, n - 1) * Fraction(squares, total_x**2) / total_x**2
    return math.sqrt(variance)


def ratio_interval(y: list[int], x: list[int], *, is_share: bool) -> Interval:
    """Return R ± z·SE over the units whose totals are given; a share stays within [0, 1]."""
    ratio = float(Fraction(sum(y), sum(x)))
    half = Z * standard_error_of_ratio(y, x)
    low, high = ratio - half, ratio + half
    return (max(0.0, low), min(1.0, high)) if is_share else (low, high)


def wilson(successes: int, trials: int) -> tuple[float, float]:
    """Wilson 1927, without continuity correction."""
    p = successes / trials
    centre = p + Z**2 / (2 * trials)
    half = Z * math.sqrt(p * (1 - p) / trials + Z**2 / (4 * trials**2))
    scale = 1 + Z**2 / trials
    low = 0.0 if successes == 0 else (centre - half) / scale
    high = 1.0 if successes == trials else (centre + half) / scale
    return low, high


def binomial_cumulative(n: int, p: Fraction) -> Iterator[int]:
    """Give P(Bin(n, p) ≤ k) for k = 0 … n as integers, to be divided by p.denominator ** n."""
    a, b = p.numerator, p.denominator - p.numerator
    term = b**n  # C(n, k)·a^k·b^(n−k) at k = 0
    total = 0
    for k in range(n + 1):
        total += term
        yield total
        term = term * (n - k) * a // ((k + 1) * b)


@cache
def order_statistic_ranks(n: int, p: Fraction) -> tuple[int | None, int | None]:
    """Return the ranks (i, j), from 1, of the interval for the p-quantile; None: no limit.

    i is the largest with P(Bin(n, p) ≤ i−1) ≤ 0.025, j the smallest with P(… ≤ j−1) ≥ 0.975.
    """
    one = p.denominator**n
    low = high = None
    for rank, total in enumerate(binomial_cumulative(n, p), start=1):
        if rank > n:
            break
        if total * LOWER_TAIL.denominator <= one * LOWER_TAIL.numerator:
            low = rank
        if total * UPPER_TAIL.denominator >= one * UPPER_TAIL.numerator:
            high = rank
            break
    return low, high
