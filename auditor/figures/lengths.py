"""The distribution of lengths: exact quantiles with distribution-free intervals."""

from __future__ import annotations

from itertools import accumulate
from typing import Any

from auditor.figures.intervals import quantile_ranks

QUANTILES = {
    "p50": (50, 100),
    "p90": (90, 100),
    "p95": (95, 100),
    "p99": (99, 100),
    "p99_9": (999, 1000),
}

Histogram = list[tuple[int, int]]


def describe(histogram: Histogram) -> dict[str, Any]:
    """Return minimum, mean, maximum, quantiles and histogram as `audit.json` holds them.

    ``histogram`` is (length, documents), shortest first, and not empty. A quantile is the smallest
    observed length with at least that share of documents at or below it (inverse ECDF).
    """
    documents = sum(count for _, count in histogram)
    total = sum(length * count for length, count in histogram)
    return {
        "minimum": histogram[0][0],
        "mean": total / documents,
        "maximum": histogram[-1][0],
        "quantiles": {
            name: _quantile(histogram, documents, share) for name, share in QUANTILES.items()
        },
        "histogram": [list(pair) for pair in histogram],
    }


def _quantile(histogram: Histogram, n: int, share: tuple[int, int]) -> dict[str, Any]:
    numerator, denominator = share
    rank = -(-n * numerator // denominator)
    low, high = quantile_ranks(n, numerator / denominator)
    found: dict[str, Any] = {
        "value": _at_rank(histogram, rank),
        "low": None if low is None else _at_rank(histogram, low),
        "high": None if high is None else _at_rank(histogram, high),
    }
    ends = [end for end, rank in (("lower", low), ("upper", high)) if rank is None]
    if ends:
        found["note"] = f"too few documents: no {' and '.join(ends)} end at 95 %"
    return found


def _at_rank(histogram: Histogram, rank: int) -> int:
    """Return the length of the document at ``rank``, shortest first, from 1."""
    reached = accumulate(count for _, count in histogram)
    return next(
        length for (length, _), below in zip(histogram, reached, strict=True) if below >= rank
    )
