"""Premiums over pairs: two figures that differ, published ratios, and independent ratios."""

from __future__ import annotations

import math

import pytest

from auditor.figures.intervals import Z
from auditor.figures.paired import mean_of_ratios, ratio_of_totals
from tests.unit.figures.test_published_statistics import CITIES

# Three contents: tokens of a language and of the reference.
THREE = [(10, 5), (30, 10), (12, 12)]


def test_the_two_premiums_of_three_contents():
    """Ratio of totals 52/27, mean of 2, 3 and 1 is 2 (Petrov et al. 2023, section 3, by hand)."""
    totals, mean = ratio_of_totals(THREE), mean_of_ratios(THREE)
    assert (totals.numerator, totals.denominator) == (52, 27)
    assert totals.value == 52 / 27
    assert mean.value == 2.0
    half = Z * 1 / math.sqrt(3)  # the ratios' standard deviation is 1
    assert (mean.low, mean.high) == pytest.approx((2 - half, 2 + half), rel=1e-12)
    assert totals.value != mean.value


def test_the_published_ratio_of_paired_totals():
    """49 of 196 cities: R = 1.2390186, and 604.04 is the error of the total that it estimates.

    Cochran (1977), Sampling Techniques, 3rd ed., chapter 6; the sums are those of R's
    boot::bigcity. The published error has the correction for a finite population, 1 - 49/196.
    """
    pairs = [(y, x) for x, y in CITIES]
    assert (len(pairs), sum(x for _, x in pairs), sum(y for y, _ in pairs)) == (49, 5054, 6262)
    found = ratio_of_totals(pairs)
    assert found.value == pytest.approx(1.2390186, abs=5e-8)
    error = (found.high - found.value) / Z
    assert error * 5054 / 49 * 196 * math.sqrt(1 - 49 / 196) == pytest.approx(604.04, abs=0.02)


def test_no_pair_and_one_pair():
    """Undefined with the reason, or a value without an interval."""
    assert ratio_of_totals([]).value is mean_of_ratios([]).value is None
    assert "held by both" in (ratio_of_totals([]).note or "")
    one = ratio_of_totals([(6, 4)])
    assert (one.value, one.low, one.high, one.note) == (1.5, None, None, "one pair: no interval")


def test_contents_without_tokens_on_the_other_side():
    """They have no ratio of their own, and are counted in the note."""
    found = mean_of_ratios([(2, 1), (4, 1), (3, 0)])
    assert (found.value, found.note) == (3.0, "1 pair is left out: no tokens on the other side")
    assert ratio_of_totals([(3, 0)]).note == "the other side has no tokens"
