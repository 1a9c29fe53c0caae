"""Intervals against published values; the source stands beside each."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import binom

from auditor.figures.catalogue import CATALOGUE
from auditor.figures.intervals import Z, _binomial_cdf, quantile_ranks, ratio_interval, wilson
from auditor.figures.values import Basis, compute, proportion
from auditor.tallies.groups import groupings
from auditor.tallies.moments import MomentsTally, OriginsTally

FIGURE = {figure.name: figure for figure in CATALOGUE}

# The `apiclus1` data of the R package `survey` (T. Lumley): 15 of 757 school districts of
# California, each with the sums of api.stu and enroll over all its schools, then over its high
# schools (stype == "H").
DISTRICTS = [
    (4895, 6081, 1358, 1689), (1184, 1436, 358, 418), (532, 680, 0, 0), (5935, 6958, 0, 0),
    (610, 683, 0, 0), (1373, 1641, 350, 442), (1461, 1668, 359, 388), (7573, 9025, 0, 0),
    (1877, 2180, 959, 1105), (12618, 15038, 0, 0), (12292, 14968, 2907, 3440),
    (22452, 25814, 4960, 6195), (6047, 6777, 0, 0), (199, 274, 0, 0), (6431, 7375, 1884, 2147),
]  # fmt: skip
# 49 cities of the United States, in 1,000 inhabitants in 1920 (x) and 1930 (y): Cochran (1977),
# Sampling Techniques, 3rd ed., chapter 6; the data as `bigcity` of the R package `boot`.
CITIES = [
    (138, 143), (93, 104), (61, 69), (179, 260), (48, 75), (37, 63), (29, 50), (23, 48), (30, 111),
    (2, 50), (38, 52), (46, 53), (71, 79), (25, 57), (298, 317), (74, 93), (50, 58), (76, 80),
    (381, 464), (387, 459), (78, 106), (60, 57), (507, 634), (50, 64), (77, 89), (64, 77), (40, 60),
    (136, 139), (243, 291), (256, 288), (94, 85), (36, 46), (45, 53), (67, 67), (120, 115),
    (172, 183), (66, 86), (46, 65), (121, 113), (44, 58), (64, 63), (56, 142), (40, 64), (116, 130),
    (87, 105), (43, 61), (43, 50), (161, 232), (36, 54),
]  # fmt: skip


def columns(y, x):
    return {
        "documents": np.ones(len(y), dtype=np.int64),
        "tokens": np.array(y, dtype=np.int64),
        "words": np.array(x, dtype=np.int64),
    }


def tally_of(y, x):
    tally = MomentsTally(("documents", "tokens", "words"), (("tokens", "words"),))
    tally.add(columns(y, x), groupings(len(y), {}))
    return tally


def moments_of(y, x):
    return tally_of(y, x).moments("all", "tokens", "words")


def standard_error(interval):
    return (interval[1] - interval[0]) / 2 / Z


# --- proportions


@pytest.mark.parametrize(
    ("successes", "n", "low", "high"),
    [
        (81, 263, 0.2553, 0.3662),
        (15, 148, 0.0624, 0.1605),
        (0, 20, 0.0, 0.1611),
        (1, 29, 0.0061, 0.1718),
    ],
)
def test_wilson_gives_the_limits_of_newcombe(successes, n, low, high):
    """Newcombe (1998), Statistics in Medicine 17:857-872, Table I, method 3 (Wilson), 95 %."""
    found = wilson(successes, n)
    assert (round(found[0], 4), round(found[1], 4)) == (low, high)


@given(st.integers(1, 10**9))
def test_wilson_of_none_is_never_of_zero_width(n):
    """Wilson's limits at 0 of n are 0 and z²/(n + z²) (Newcombe 1998), mirrored at n of n."""
    low, high = wilson(0, n)
    assert low == 0.0
    assert high == pytest.approx(Z * Z / (n + Z * Z), rel=1e-9)
    assert wilson(n, n) == (pytest.approx(1 - high, abs=1e-12), 1.0)


def test_a_proportion_of_documents_has_the_limits_of_newcombe():
    """15 of 148 documents: Newcombe (1998), Table I, Wilson's row."""
    found = proportion(15, 148)
    assert (round(found.low, 4), round(found.high, 4)) == (0.0624, 0.1605)


def test_a_share_of_which_none_was_seen_names_the_bound_of_newcombe():
    """0 unknown tokens in 20 documents: up to .1611 of documents (Newcombe 1998, Table I, 0/20)."""
    tally = MomentsTally(("documents", "tokens", "unknown_tokens"), (("unknown_tokens", "tokens"),))
    rows = {**columns([7] * 20, [3] * 20), "unknown_tokens": np.zeros(20, dtype=np.int64)}
    tally.add(rows, groupings(20, {}))
    found = compute(FIGURE["unknown_tokens"], "all", Basis(tally, tally))
    assert (found.value, found.low, found.high) == (0.0, 0.0, None)
    assert "16.11" in found.note


# --- ratios


def test_a_ratio_over_clusters_gives_the_survey_package_s_standard_error():
    """R `survey`, vignette: svyratio(~api.stu, ~enroll, dclus1) = 0.8497087, SE 0.008386297."""
    moments = moments_of([row[0] for row in DISTRICTS], [row[1] for row in DISTRICTS])
    assert moments.y / moments.x == pytest.approx(0.8497087, abs=5e-8)
    error = standard_error(ratio_interval(moments, population=757))
    assert error == pytest.approx(0.008386297, abs=5e-10)


def test_a_ratio_without_finite_population_correction():
    """Regression value, not published: SE 0.0084706 of the same districts as a sample of many."""
    tally = tally_of([row[0] for row in DISTRICTS], [row[1] for row in DISTRICTS])
    found = compute(FIGURE["fertility"], "all", Basis(tally, tally))
    assert found.value == pytest.approx(0.8497087, abs=5e-8)
    assert standard_error((found.low, found.high)) == pytest.approx(0.0084706, abs=5e-8)


def test_a_ratio_in_a_domain_gives_the_survey_package_s_standard_error():
    """R `survey`: the same ratio for stype == "H" is 0.8300683, SE 0.01472607; zeros are units."""
    moments = moments_of([row[2] for row in DISTRICTS], [row[3] for row in DISTRICTS])
    assert moments.y / moments.x == pytest.approx(0.8300683, abs=5e-8)
    error = standard_error(ratio_interval(moments, population=757))
    assert error == pytest.approx(0.01472607, abs=5e-9)


@pytest.mark.parametrize("cuts", [1, 2, 5])
def test_origins_are_the_clusters_however_their_documents_are_cut(cuts):
    """R `survey` again: documents that share an origin count as one unit, SE 0.008386297."""
    y, x, origins = [], [], []
    for number, (left, right, *_) in enumerate(DISTRICTS):
        y += [1] * (cuts - 1) + [left - cuts + 1]
        x += [2] * (cuts - 1) + [right - 2 * (cuts - 1)]
        origins += [f"district {number}"] * cuts
    tally = OriginsTally(("documents", "tokens", "words"))
    tally.add(columns(y, x), groupings(len(y), {}), origins)
    moments = tally.moments("all", "tokens", "words")
    error = standard_error(ratio_interval(moments, population=757))
    assert error == pytest.approx(0.008386297, abs=5e-10)


def test_the_ratio_total_of_cochran_s_cities():
    """Cochran (1977), ch. 6, from memory of the book: 49 of 196 cities, 28,397, s.e. 604."""
    moments = moments_of([city[1] for city in CITIES], [city[0] for city in CITIES])
    assert (moments.units, moments.x, moments.y) == (49, 5054, 6262)
    assert (moments.xx, moments.yy, moments.xy) == (1_044_504, 1_527_882, 1_251_630)
    assert round(moments.y / moments.x * 22_919) == 28_397
    estimated_x = 196 / 49 * moments.x
    assert round(standard_error(ratio_interval(moments, population=196)) * estimated_x) == 604


def test_a_census_leaves_no_doubt():
    """With every unit of the population at hand the correction 1 - n/N is 0 (Cochran 1977, 2.6)."""
    moments = moments_of([city[1] for city in CITIES], [city[0] for city in CITIES])
    low, high = ratio_interval(moments, population=49)
    assert low == high == moments.y / moments.x


# --- quantiles

# Published table of intervals of the median by order statistics ("Table A.7"): n, ranks, coverage.
MEDIAN_RANKS = [
    (6, 1, 6, 0.969), (9, 2, 8, 0.961), (10, 2, 9, 0.979), (12, 3, 10, 0.961), (15, 4, 12, 0.965),
    (17, 5, 13, 0.951), (20, 6, 15, 0.959),
]  # fmt: skip


def coverage(n, p, low, high):
    """Return P(X(low) <= quantile <= X(high)) = F(high - 1) - F(low - 1)."""
    first, cdf = _binomial_cdf(n, p)
    return cdf[high - 1 - first] - cdf[low - 1 - first]


@pytest.mark.parametrize(("n", "low", "high", "covered"), MEDIAN_RANKS)
def test_ranks_of_the_median(n, low, high, covered):
    """The published ranks and their coverage to three places."""
    assert quantile_ranks(n, 0.5) == (low, high)
    assert coverage(n, 0.5, low, high) == pytest.approx(covered, abs=5e-4)


@pytest.mark.parametrize(
    ("n", "p", "low", "high", "covered", "places"),
    [
        (5, 0.5, 1, 5, 0.938, 3),  # the same published table: short of 95 %
        (35, 0.5, 17, 19, 0.264121, 6),  # the same page's worked example
        (27, 0.25, 4, 10, 0.8201, 4),  # Hogg & Tanis, first quartile; from memory
        (100, 0.95, 90, 100, 0.98261, 5),  # regression value, not published
        (1000, 0.95, 936, 964, 0.95810, 5),  # regression value, not published
    ],
)
def test_coverage_of_ranks(n, p, low, high, covered, places):
    """Coverage of two order statistics is a difference of binomial probabilities."""
    assert coverage(n, p, low, high) == pytest.approx(covered, abs=10**-places)


def test_five_observations_bound_no_median():
    """The widest interval of five covers 93.8 % (same table), so that neither end exists."""
    assert quantile_ranks(5, 0.5) == (None, None)


@pytest.mark.parametrize(("n", "ranks"), [(100, (90, 100)), (1000, (936, 964))])
def test_ranks_of_the_95th_percentile(n, ranks):
    """Regression values that the binomial of `scipy` confirms below."""
    assert quantile_ranks(n, 0.95) == ranks


def test_the_95th_percentile_has_no_upper_end_below_72_observations():
    """1 - 0.95**n reaches 97.5 % at n = 72 (one-sided 95 %: n = 59, Wilks 1941; from memory)."""
    assert all(quantile_ranks(n, 0.95)[1] is None for n in range(1, 72))
    assert all(quantile_ranks(n, 0.95)[1] is not None for n in range(72, 200))


def ranks_by_scipy(n, p):
    ranks = np.arange(1, n + 1)
    below = binom.cdf(ranks - 1, n, p)
    low, high = ranks[below <= 0.025], ranks[below >= 0.975]
    return int(low[-1]) if len(low) else None, int(high[0]) if len(high) else None


@pytest.mark.parametrize("p", [0.5, 0.9, 0.95, 0.99, 0.999])
def test_ranks_agree_with_scipy(p):
    """Every n to 300 and some to a million: the same ranks as by scipy.stats.binom."""
    for n in [*range(1, 301), 999, 1000, 1001, 4096, 65_537, 1_000_000]:
        assert quantile_ranks(n, p) == ranks_by_scipy(n, p), n
