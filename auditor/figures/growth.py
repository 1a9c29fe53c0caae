"""Is the corpus large enough? Growth of distinct words and entries from how often each occurs.

Everything follows from the frequencies of frequencies: how many words occur once, twice, and so on.
All of it takes occurrences for independent draws; words of one document are not, so that what is
new in further documents is more uneven than the intervals say.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
import numpy.typing as npt

from auditor.figures.intervals import Z
from auditor.figures.values import Value, undefined

Json = dict[str, Any]
Frequencies = Mapping[int, int]

NOT_INDEPENDENT = (
    "occurrences are taken for independent draws; words of one document are not, so that further"
    " documents vary more"
)
SMOOTHED = "few were seen once: the series is smoothed (Efron & Thisted 1976)"
_POINTS, _FITTED, _THROWS = 30, 20, 15
# Up to this count the product is taken factor by factor; beyond it by the logarithm of factorials.
_BY_FACTORS = 5000


def growth(frequencies: Frequencies, unseen: int | None = None) -> Json:
    """Return what the frequencies of frequencies say, as JSON values.

    ``unseen`` is the number of kinds that could still be new, where it is known. The power law is
    fitted to the curve from a tenth of the occurrences on.
    """
    total = sum(r * n for r, n in frequencies.items())
    kinds = sum(frequencies.values())
    return {
        "occurrences": total,
        "distinct": kinds,
        "once": frequencies.get(1, 0),
        "twice": frequencies.get(2, 0),
        "next_is_new": next_is_new(frequencies).as_json(),
        "new_in_as_much_again": new_in_as_much_again(frequencies, unseen).as_json(),
        "heaps": heaps(curve(frequencies, total, total / 10, _FITTED)) if total >= 100 else None,
        "curve": [list(point) for point in curve(frequencies, total, 1, _POINTS)],
        "note": NOT_INDEPENDENT,
    }


def next_is_new(frequencies: Frequencies) -> Value:
    """Return the probability that the next occurrence is of a kind not seen: n1 / N.

    Good 1953 (Biometrika 40:237-264), after Turing; the interval is by the variance of Esty 1983
    (Annals of Statistics 11:905-912): (n1·(1 - n1/N) + 2·n2) / N² (formula from memory). Where that
    is 0 it says nothing, and there is no interval.
    """
    total = sum(r * n for r, n in frequencies.items())
    if not total:
        return undefined("no occurrences")
    once, twice = frequencies.get(1, 0), frequencies.get(2, 0)
    share = once / total
    spread = once * (1 - share) + 2 * twice
    if spread <= 0:
        return Value(share, None, None, once, total, "nothing seen once or twice: no interval")
    half = Z * math.sqrt(spread) / total
    return Value(share, max(0.0, share - half), min(1.0, share + half), once, total)


def new_in_as_much_again(frequencies: Frequencies, unseen: int | None = None) -> Value:
    """Return how many new kinds as many occurrences again are expected to bring.

    Good & Toulmin 1956 (Biometrika 43:45-63): n1 - n2 + n3 - …, with the standard error
    sqrt(n1 + n2 + n3 + …); the series holds up to as much again, not beyond. It swings where few
    kinds were seen once: unless n1 >= n2 >= n3, each term is weighted by the chance of r heads or
    more in 15 throws (in the manner of Efron & Thisted 1976, Biometrika 63:435-447; from memory),
    and the note says so. No fewer than none are new, and no more than ``unseen``, where known.
    """
    if not frequencies:
        return undefined("no occurrences")
    first = [frequencies.get(r, 0) for r in (1, 2, 3)]
    falling = first[0] >= first[1] >= first[2]
    weights = {r: 1.0 if falling else _heads(r) for r in frequencies}
    value = sum((1 if r % 2 else -1) * weights[r] * n for r, n in frequencies.items())
    half = Z * math.sqrt(sum(weights[r] ** 2 * n for r, n in frequencies.items()))
    low, middle, high = (_within(end, unseen) for end in (value - half, value, value + half))
    return Value(middle, low, high, None, None, None if falling else SMOOTHED)


def _heads(least: int) -> float:
    """Return the chance of ``least`` heads or more in 15 throws of a coin."""
    ways = sum(math.comb(_THROWS, k) for k in range(least, _THROWS + 1))
    return ways / float(1 << _THROWS)


def _within(value: float, most: int | None) -> float:
    return max(0.0, value if most is None else min(value, float(most)))


def curve(
    frequencies: Frequencies, total: int, least: float, points: int
) -> list[tuple[int, float]]:
    """Return (m, distinct kinds expected in m of all ``total`` occurrences drawn at random).

    Hurlbert 1971 (Ecology 52:577-586): the sum over kinds of 1 - C(N - r, m) / C(N, m). The values
    of m grow by the same factor from ``least`` to ``total``.
    """
    if not total:
        return []
    places = sorted({max(1, round(m)) for m in np.geomspace(max(1, least), total, points).tolist()})
    counts = np.array(list(frequencies), dtype=np.int64)
    kinds = np.array(list(frequencies.values()), dtype=np.float64)
    return [(m, float((kinds * -np.expm1(_log_missing(counts, total, m))).sum())) for m in places]


def _log_missing(counts: npt.NDArray[np.int64], total: int, m: int) -> npt.NDArray[np.float64]:
    """Return the logarithm of the chance that m draws miss a kind of each count; -inf for none.

    It is that of C(N - r, m) / C(N, m), written so that no large numbers cancel.
    """
    found = np.full(len(counts), -np.inf)
    possible = counts <= total - m
    few = possible & (counts <= _BY_FACTORS)
    if few.any():
        factors = np.log1p(-m / (total - np.arange(int(counts[few].max()), dtype=np.float64)))
        found[few] = np.cumsum(factors)[counts[few] - 1]
    for place in np.flatnonzero(possible & ~few).tolist():
        found[place] = _log_missing_many(total, int(counts[place]), m)
    return np.asarray(np.minimum(found, 0.0))


def _log_missing_many(total: int, r: int, m: int) -> float:
    """Return the same for one count: by factors over the draws, or by Stirling's series."""
    if m <= _BY_FACTORS:
        places = total - np.arange(m, dtype=np.float64)
        return float(np.log1p(-r / places).sum())
    rest = total - r - m
    if rest <= 1000:
        return (
            math.lgamma(total - r + 1) - math.lgamma(total + 1)
            + math.lgamma(total - m + 1) - math.lgamma(rest + 1)
        )  # fmt: skip
    return (
        (total - r + 0.5) * math.log1p(-r / total)
        - (rest + 0.5) * math.log1p(-r / (total - m))
        + r * math.log1p(-m / total)
        + _tail(total - r) + _tail(total - m) - _tail(total) - _tail(rest)
    )  # fmt: skip


def _tail(x: int) -> float:
    """Return the first terms of Stirling's series beyond the formula."""
    return 1 / (12 * x) - 1 / (360 * x**3)


def heaps(points: list[tuple[int, float]]) -> Json:
    """Return k and b of V = k·m^b, by least squares on the logarithms of ``points``.

    Heaps 1978; Manning et al. 2008, Introduction to Information Retrieval, section 5.1.1.
    """
    x = np.log([m for m, _ in points])
    y = np.log([v for _, v in points])
    spread = float(((x - x.mean()) ** 2).sum())
    b = float(((x - x.mean()) * (y - y.mean())).sum()) / spread if spread else 0.0
    return {"k": math.exp(float(y.mean()) - b * float(x.mean())), "b": b}
