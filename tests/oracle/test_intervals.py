"""The oracle's intervals against published values."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest

from tests.oracle.intervals import order_statistic_ranks, standard_error_of_ratio, wilson


@pytest.mark.parametrize(
    ("successes", "trials", "low", "high"),
    [
        (81, 263, 0.2553, 0.3662),
        (15, 148, 0.0624, 0.1605),
        (0, 20, 0, 0.1611),
        (1, 29, 0.0061, 0.1718),
    ],
)
def test_wilson_limits_are_the_published_ones(successes, trials, low, high):
    """Newcombe 1998, Statistics in Medicine 17:857, Table I (layout from memory)."""
    assert wilson(successes, trials) == pytest.approx((low, high), abs=5e-5)


def test_the_standard_error_of_a_ratio_is_the_published_one():
    """R `survey` vignette, 15 of 757 districts: ratio 0.8497087, SE 0.008386297."""
    y = [4895, 1184, 532, 5935, 610, 1373, 1461, 7573, 1877, 12618, 12292, 22452, 6047, 199, 6431]
    x = [6081, 1436, 680, 6958, 683, 1641, 1668, 9025, 2180, 15038, 14968, 25814, 6777, 274, 7375]
    correction = math.sqrt(1 - Fraction(15, 757))
    assert sum(y) / sum(x) == pytest.approx(0.8497087, abs=5e-8)
    assert standard_error_of_ratio(y, x) * correction == pytest.approx(0.008386297, abs=5e-10)


@pytest.mark.parametrize(
    ("n", "ranks"),
    [(6, (1, 6)), (9, (2, 8)), (10, (2, 9)), (12, (3, 10)), (15, (4, 12)), (20, (6, 15))],
)
def test_the_medians_ranks_are_the_published_ones(n, ranks):
    """Table of order-statistic intervals for the median, coverage 95 % or more ("Table A.7")."""
    assert order_statistic_ranks(n, Fraction(1, 2)) == ranks


def test_a_high_quantile_of_few_documents_has_no_upper_limit():
    """1 − 0.95^n reaches 0.975 at n = 72 (Wilks's argument, by hand)."""
    assert order_statistic_ranks(71, Fraction(95, 100))[1] is None
    assert order_statistic_ranks(72, Fraction(95, 100))[1] == 72
    assert order_statistic_ranks(5, Fraction(1, 2)) == (None, None)
