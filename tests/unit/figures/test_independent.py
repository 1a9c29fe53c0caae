"""Ratios of independent figures, against Fieller's interval and by trial."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.figures.independent import NO_BASE, UNBOUNDED, ratio
from auditor.figures.intervals import Z, wilson


def figure(value, low, high):
    return {"value": value, "low": low, "high": high, "note": None}


def even(value, half):
    return figure(value, value - half, value + half)


def fieller(top, base, error_top, error_base):
    """Fieller (1954), J. R. Stat. Soc. B 16:175-185, for estimates that do not covary."""
    g = (Z * error_base / base) ** 2
    middle = top / base
    half = Z / base * math.sqrt((1 - g) * error_top**2 + middle**2 * error_base**2)
    return (middle - half) / (1 - g), (middle + half) / (1 - g)


@given(
    st.floats(0.5, 100), st.floats(0.5, 100), st.floats(0.001, 0.4), st.floats(0.001, 0.4)
)  # fmt: skip
def test_symmetric_intervals_give_fiellers(top, base, share_top, share_base):
    """Both methods invert the same test when the variance does not move with the value."""
    error_top, error_base = share_top * top / Z, share_base * base / Z
    found = ratio(even(top, Z * error_top), even(base, Z * error_base))
    assert found.value == top / base
    assert (found.low, found.high) == pytest.approx(
        fieller(top, base, error_top, error_base), rel=1e-9
    )


def test_two_proportions_keep_their_lopsided_ends():
    """By hand from the formula of Donner & Zou 2012 with Wilson's limits of 8/80 and 4/100."""
    ours, theirs = figure(0.1, *wilson(8, 80)), figure(0.04, *wilson(4, 100))
    found = ratio(ours, theirs)
    product = 0.1 * 0.04
    l1, u1, l2, u2 = ours["low"], ours["high"], theirs["low"], theirs["high"]
    lower = (product - math.sqrt(product**2 - l1 * u2 * (0.2 - l1) * (0.08 - u2))) / (
        u2 * (0.08 - u2)
    )
    upper = (product + math.sqrt(product**2 - u1 * l2 * (0.2 - u1) * (0.08 - l2))) / (
        l2 * (0.08 - l2)
    )
    assert (found.low, found.high) == pytest.approx((lower, upper), rel=1e-12)
    assert found.value == pytest.approx(2.5)
    assert found.low < found.value < found.high


def test_nothing_lost_against_something_lost():
    """0 of 100 over 10 of 100: the ratio is 0 and may be larger."""
    found = ratio(figure(0.0, *wilson(0, 100)), figure(0.1, *wilson(10, 100)))
    assert (found.value, found.low) == (0.0, 0.0)
    assert found.high > 0.1


def test_what_cannot_be_divided_says_why():
    """By 0: undefined; by what may be 0: no upper end; without an interval: none."""
    assert ratio(even(1.0, 0.1), figure(0.0, 0.0, 0.1)).note == NO_BASE
    open_ended = ratio(even(1.0, 0.1), figure(0.01, 0.0, 0.05))
    assert (open_ended.high, open_ended.note) == (None, UNBOUNDED)
    assert open_ended.low is not None
    assert ratio(even(1.0, 0.1), figure(2.0, None, None)).low is None
    lacking = {"value": None, "low": None, "high": None, "note": "no limit"}
    assert ratio(lacking, even(1.0, 0.1)).note == "no limit"


def test_the_interval_holds_the_true_ratio_as_often_as_it_says():
    """20,000 pairs of drawn proportions, 0.05 of 400 over 0.08 of 300: 95 % within 1.5 points."""
    drawn = np.random.default_rng(7)
    held = 0
    for x, y in zip(
        drawn.binomial(400, 0.05, 20_000), drawn.binomial(300, 0.08, 20_000), strict=True
    ):
        if not y:
            continue
        found = ratio(figure(x / 400, *wilson(x, 400)), figure(y / 300, *wilson(y, 300)))
        held += found.low <= 0.05 / 0.08 <= (found.high or math.inf)
    assert held / 20_000 == pytest.approx(0.95, abs=0.015)
