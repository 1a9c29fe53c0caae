"""Intervals at 95 %: values are exact for the corpus, intervals speak of further documents."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np

from auditor.tallies.moments import Moments

Z = 1.959964
CONFIDENCE = 0.95

Interval = tuple[float | None, float | None]


def ratio_interval(
    moments: Moments, *, share: bool = False, population: int | None = None
) -> Interval:
    """Return the interval of the ratio Σy / Σx by the linearised estimator over units.

    Cochran (1977), Sampling Techniques, 3rd ed., chapter 6: the standard error is
    sqrt(n/(n-1) · Σ(y - R·x)²) / Σx. With ``population`` (units in all) the finite population
    correction 1 - n/population enters. The sum of squares is exact; floats come last. ``share``
    clamps to [0, 1]. Both ends are ``None`` below two units.
    """
    n = moments.units
    if n < 2 or moments.x == 0:
        return None, None
    y, x = moments.y, moments.x
    residual = Fraction(moments.yy * x * x - 2 * y * x * moments.xy + y * y * moments.xx, x * x)
    variance = residual * n / (n - 1) / (x * x)
    if population is not None:
        variance *= Fraction(max(0, population - n), population)
    half = Z * math.sqrt(variance)
    low, high = y / x - half, y / x + half
    return (max(0.0, low), min(1.0, high)) if share else (low, high)


def wilson(successes: int, n: int, z: float = Z) -> Interval:
    """Return Wilson's score interval of a proportion (Wilson 1927; Newcombe 1998, method 3).

    ``z`` is the normal quantile of the confidence, that of 95 % unless given.
    """
    if n == 0:
        return None, None
    p, z2 = successes / n, z * z
    centre = (p + z2 / (2 * n)) / (1 + z2 / n)
    half = z * math.sqrt(p * (1 - p) / n + z2 / (4 * n * n)) / (1 + z2 / n)
    low = 0.0 if successes == 0 else max(0.0, centre - half)
    return low, 1.0 if successes == n else min(1.0, centre + half)


def quantile_ranks(n: int, p: float) -> tuple[int | None, int | None]:
    """Return ranks (i, j), from 1, between whose observations the p-quantile lies at 95 %.

    Distribution-free: i is the largest rank with P(B <= i-1) <= 2.5 %, j the smallest with
    P(B <= j-1) >= 97.5 %, where B is Binomial(n, p); ``None`` where no such rank exists
    (David & Nagaraja 2003, Order Statistics, section 7.1).
    """
    tail = (1 - CONFIDENCE) / 2
    first, cdf = _binomial_cdf(n, p)
    below = int(np.searchsorted(cdf, tail, side="right"))
    low = first + below if below else (first or None)
    reached = int(np.searchsorted(cdf, 1 - tail, side="left"))
    high = first + reached + 1
    return low, high if high <= n else None


def _binomial_cdf(n: int, p: float) -> tuple[int, np.ndarray[tuple[int], np.dtype[np.float64]]]:
    """Return a first count and P(B <= first), P(B <= first+1), … around the mean.

    Weights are built outwards from the mode by their ratio and then normalised, which needs no
    logarithm of a factorial; what lies 40 standard deviations away is below the smallest float.
    """
    mode = min(n, int((n + 1) * p))
    reach = int(40 * math.sqrt(n * p * (1 - p))) + 2
    first, last = max(0, mode - reach), min(n, mode + reach)
    up = np.arange(mode + 1, last + 1, dtype=np.float64)
    down = np.arange(mode, first, -1, dtype=np.float64)
    rising = np.cumprod((n - up + 1) / up * (p / (1 - p)))
    falling = np.cumprod(down / (n - down + 1) * ((1 - p) / p))
    weights = np.concatenate((falling[::-1], [1.0], rising))
    cdf = np.cumsum(weights)
    return first, cdf / cdf[-1]
