"""How the vocabulary is used: entries seen, entropy, Rényi efficiency, rank-95 frequency."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import numpy.typing as npt

from auditor.figures.values import Value, undefined

Ints = npt.NDArray[np.int64]
ALPHA = 2.5


def describe(occurrences: Ints, entries: int, rankable: npt.NDArray[np.bool_]) -> dict[str, Any]:
    """Return the use of the vocabulary as `audit.json` holds it.

    ``occurrences`` (ids,) counts each id; ``entries`` is the number of distinct ids; ``rankable``
    (ids,) marks the entries that are neither control nor byte pieces.
    """
    seen = int((occurrences > 0).sum())
    share = Value(seen / entries, None, None, seen, entries, "a count of this corpus: no interval")
    return {
        "used_entries": share.as_json(),
        "entropy": _number(entropy(occurrences), "no tokens"),
        "renyi_efficiency": _number(
            renyi_efficiency(occurrences, entries), "no tokens, or one entry"
        ),
        "rank_95_frequency": _number(rank_95_frequency(occurrences, rankable), "no such entry"),
    }


def _number(value: float | None, reason: str) -> dict[str, Any]:
    return (
        undefined(reason).as_json()
        if value is None
        else Value(value, None, None, None, None).as_json()
    )


def entropy(occurrences: Ints) -> float | None:
    """Return the Shannon entropy of the ids in bits per token; ``None`` without tokens."""
    total = int(occurrences.sum())
    if not total:
        return None
    shares = [count / total for count in occurrences[occurrences > 0].tolist()]
    return -math.fsum(share * math.log2(share) for share in shares) + 0.0


def renyi_efficiency(occurrences: Ints, support: int, alpha: float = ALPHA) -> float | None:
    """Return the Rényi entropy of order ``alpha`` over its largest value, the log of ``support``.

    Zouhar et al. (2023), Tokenization and the Noiseless Channel; the support is every entry of the
    vocabulary, seen or not. ``None`` without tokens or with one entry.
    """
    total = int(occurrences.sum())
    if not total or support < 2:
        return None
    powers = math.fsum((count / total) ** alpha for count in occurrences[occurrences > 0].tolist())
    return math.log(powers) / (1 - alpha) / math.log(support) + 0.0


def rank_95_frequency(occurrences: Ints, rankable: npt.NDArray[np.bool_]) -> int | None:
    """Return the occurrences of the entry at rank ⌈0.95·k⌉ of k, most frequent first.

    Gowda & May (2020), Finding the Optimal Vocabulary Size; k counts the rankable entries.
    """
    counts = np.sort(occurrences[rankable])[::-1]
    if not len(counts):
        return None
    return int(counts[-(-95 * len(counts) // 100) - 1])
