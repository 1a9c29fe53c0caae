"""Figures over pairs of records that hold the same content."""

from __future__ import annotations

import math
from collections.abc import Sequence

from auditor.figures.intervals import Z, ratio_interval
from auditor.figures.values import Value, undefined
from auditor.tallies.moments import Moments

NO_PAIRS = "no content is held by both"
ONE_PAIR = "one pair: no interval"


def ratio_of_totals(pairs: Sequence[tuple[int, int]]) -> Value:
    """Return Σy / Σx over ``pairs`` (y, x), its interval by the ratio estimator over pairs.

    Cochran (1977), Sampling Techniques, 3rd ed., chapter 6.
    """
    if not pairs:
        return undefined(NO_PAIRS)
    ys, xs = [y for y, _ in pairs], [x for _, x in pairs]
    moments = Moments(
        len(pairs), sum(ys), sum(xs), sum(y * y for y in ys), sum(x * x for x in xs),
        sum(y * x for y, x in pairs),
    )  # fmt: skip
    if not moments.x:
        return Value(None, None, None, moments.y, 0, "the other side has no tokens")
    low, high = ratio_interval(moments)
    note = ONE_PAIR if low is None else None
    return Value(moments.y / moments.x, low, high, moments.y, moments.x, note)


def mean_of_ratios(pairs: Sequence[tuple[int, int]]) -> Value:
    """Return the mean of y / x over ``pairs``, its interval by the standard error of the mean.

    The premium of Petrov et al. 2023 (arXiv 2305.15425, section 3) for one pair, averaged. Pairs
    without tokens on the other side have no ratio; a note counts them.
    """
    ratios = [y / x for y, x in pairs if x]
    lacking = len(pairs) - len(ratios)
    counted = f"{lacking} pair is" if lacking == 1 else f"{lacking} pairs are"
    note = f"{counted} left out: no tokens on the other side" if lacking else None
    if not ratios:
        return undefined(note or NO_PAIRS)
    mean = math.fsum(ratios) / len(ratios)
    if len(ratios) == 1:
        return Value(mean, None, None, None, None, note or ONE_PAIR)
    squares = math.fsum((ratio - mean) ** 2 for ratio in ratios)
    half = Z * math.sqrt(squares / (len(ratios) - 1) / len(ratios))
    return Value(mean, mean - half, mean + half, None, None, note)
