"""How far two distributions of lengths lie apart: the Kolmogorov-Smirnov distance."""

from __future__ import annotations

import math
from collections.abc import Iterable
from fractions import Fraction

from auditor.figures.intervals import CONFIDENCE

Histogram = Iterable[tuple[int, int]]


def distance(before: Histogram, after: Histogram) -> tuple[Fraction, int]:
    """Return the largest difference of the two shares at or below a length, and that length.

    Both are (length, documents), none empty. The shortest such length is named; the fraction is
    exact.
    """
    one, other = dict(before), dict(after)
    n, m = sum(one.values()), sum(other.values())
    widest, at, reached, reached_other = -1, 0, 0, 0
    for length in sorted(one.keys() | other.keys()):
        reached += one.get(length, 0)
        reached_other += other.get(length, 0)
        apart = abs(reached * m - reached_other * n)
        if apart > widest:
            widest, at = apart, length
    return Fraction(widest, n * m), at


def critical_distance(n: int, m: int) -> float:
    """Return the distance that two samples of one continuous distribution exceed in 5 % of cases.

    The asymptotic value (Smirnov 1948, Annals of Mathematical Statistics 19, 279-281):
    sqrt(-ln(0.025)/2 · (n + m)/(n·m)). Where lengths are tied, as whole numbers are, less than
    5 % exceed it.
    """
    return math.sqrt(-math.log((1 - CONFIDENCE) / 2) / 2 * (n + m) / (n * m))
