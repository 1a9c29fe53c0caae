"""What a maximum length cuts, as figures with intervals, from documents by length alone."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from auditor.figures.catalogue import CATALOGUE, Figure
from auditor.figures.values import Basis, Value, compute
from auditor.planning.histogram import Ints, LengthHistogram
from auditor.tallies.moments import Moments

_ASSESSED = {figure.name: figure for figure in CATALOGUE}
DROPPED_TOKENS = Figure(
    "dropped_tokens", "dropped_tokens", "tokens", "share of tokens",
    "Tokens of the documents that are longer than the length, when those are left out.",
)  # fmt: skip
FIGURES = (
    _ASSESSED["truncated_documents"],
    _ASSESSED["truncated_tokens"],
    DROPPED_TOKENS,
)


@dataclass(frozen=True)
class Cut:
    """The columns of documents that follow from their lengths, once ``length`` is the limit.

    Sums of columns and of their products, as `HoldsMoments` asks for them; there is one slice.
    """

    histogram: LengthHistogram
    overhead: int
    length: int

    def slices(self) -> list[str]:
        """Return the one slice key."""
        return ["all"]

    def total(self, key: str, column: str) -> int:
        """Return the sum of ``column`` over the documents."""
        del key
        return _dot(self._column(column), self.histogram.documents)

    def moments(self, key: str, y: str, x: str) -> Moments:
        """Return the moments of two columns over the documents."""
        del key
        times = self.histogram.documents.astype(object)
        left, right = (self._column(name).astype(object) for name in (y, x))
        sums = (left, right, left * left, right * right, left * right)
        return Moments(self.histogram.total_documents, *(int(s @ times) for s in sums))

    def _column(self, name: str) -> Ints:
        lengths = self.histogram.lengths
        longer = lengths > self.length
        columns: dict[str, Ints] = {
            "documents": np.ones_like(lengths),
            "tokens": lengths - self.overhead,
            "truncated_documents": longer.astype(np.int64),
            "truncated_tokens": np.maximum(0, lengths - self.length),
            "dropped_tokens": (lengths - self.overhead) * longer,
        }
        return columns[name]


def losses(histogram: LengthHistogram, overhead: int, length: int) -> dict[str, Value]:
    """Return the figures of ``FIGURES`` by name: those of an audit with ``length`` as its limit."""
    cut = Cut(histogram, overhead, length)
    basis = Basis(cut, cut)
    return {figure.name: compute(figure, "all", basis) for figure in FIGURES}


def windows(histogram: LengthHistogram, overhead: int, length: int, overlap: int) -> dict[str, Any]:
    """Return what reading long documents in windows takes, as JSON values.

    Each window holds as many tokens as there is room for; the next begins ``overlap`` tokens before
    its end, so that those are read twice. ``overlap`` is below the room.
    """
    room = length - overhead
    tokens = histogram.lengths - overhead
    further = -(-np.maximum(0, tokens - room) // (room - overlap))
    more = _dot(further, histogram.documents)
    held = _dot(tokens, histogram.documents)
    return {
        "overlap": overlap,
        "windows": histogram.total_documents + more,
        "tokens_read": held + more * overlap,
        "tokens_read_twice": more * overlap,
        "share_read_twice": more * overlap / held if held else None,
    }


def _dot(column: Ints, times: Ints) -> int:
    """Return the sum of ``column`` × ``times``, in Python integers where int64 could overflow."""
    if float(column.astype(float) @ times.astype(float)) < 2**52:
        return int(column @ times)
    return int(column.astype(object) @ times.astype(object))
