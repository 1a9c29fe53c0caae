"""Lengths and the use of the vocabulary."""

from __future__ import annotations

import math
from collections import Counter
from fractions import Fraction
from typing import Any

from tests.oracle.intervals import order_statistic_ranks
from tests.oracle.vocabularies import OracleVocabulary

QUANTILES = {
    "p50": Fraction(50, 100),
    "p90": Fraction(90, 100),
    "p95": Fraction(95, 100),
    "p99": Fraction(99, 100),
    "p99_9": Fraction(999, 1000),
}
RENYI_ALPHA = 2.5
FREQUENCY_RANK = Fraction(95, 100)


def lengths_of(lengths: list[int]) -> dict[str, Any]:
    """Return the statistics of the documents' lengths, overhead included."""
    ordered = sorted(lengths)
    n = len(ordered)
    return {
        "minimum": ordered[0] if ordered else None,
        "mean": float(Fraction(sum(ordered), n)) if ordered else None,
        "maximum": ordered[-1] if ordered else None,
        "quantiles": {name: _quantile(ordered, share) for name, share in QUANTILES.items()},
        "histogram": [[length, count] for length, count in sorted(Counter(ordered).items())],
    }


def _quantile(ordered: list[int], share: Fraction) -> dict[str, Any]:
    n = len(ordered)
    if n == 0:
        return {"value": None, "low": None, "high": None, "note": "no documents"}
    low, high = order_statistic_ranks(n, share)
    return {
        "value": ordered[math.ceil(n * share) - 1],
        "low": None if low is None else ordered[low - 1],
        "high": None if high is None else ordered[high - 1],
        "note": "too few documents for this end" if low is None or high is None else None,
    }


def usage_of(ids: list[int], vocabulary: OracleVocabulary) -> dict[str, Any]:
    """Return how evenly and how widely the entries are used."""
    counts = Counter(ids)
    used, entries = len(counts), vocabulary.entries
    shares = [count / len(ids) for count in counts.values()]
    entropy = -math.fsum(share * math.log2(share) for share in shares) if ids else None
    return {
        "used_entries": {
            "value": float(Fraction(used, entries)),
            "numerator": used,
            "denominator": entries,
        },
        "entropy": {"value": entropy},
        "renyi_efficiency": {"value": _renyi_efficiency(shares, entries)},
        "rank_95_frequency": {"value": _rank_95_frequency(counts, vocabulary)},
    }


def _renyi_efficiency(shares: list[float], entries: int) -> float | None:
    """Zouhar et al. 2023: H_α / log(entries), H_α = log(Σ p^α) / (1 − α)."""
    if not shares or entries < 2:
        return None
    power_sum = math.fsum(share**RENYI_ALPHA for share in shares)
    return math.log(power_sum) / (1 - RENYI_ALPHA) / math.log(entries)


def _rank_95_frequency(counts: Counter[int], vocabulary: OracleVocabulary) -> int | None:
    """Gowda & May 2020, over the entries that are neither control nor byte pieces."""
    left_out = vocabulary.control_ids | vocabulary.byte_ids
    k = vocabulary.entries - len(left_out)
    if k == 0:
        return None
    ranked = sorted((n for i, n in counts.items() if i not in left_out), reverse=True)
    rank = math.ceil(FREQUENCY_RANK * k)
    return ranked[rank - 1] if rank <= len(ranked) else 0
