"""Documents by length: everything that depends on lengths alone is computed from it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from auditor.errors import AuditError

Ints = npt.NDArray[np.int64]
MOST_POSITIONS = 2**53


@dataclass(frozen=True)
class LengthHistogram:
    """How many documents have each length, in positions (overhead included), shortest first.

    ``lengths`` and ``documents`` have shape (distinct lengths,); lengths rise strictly and every
    count is at least 1. Raises AuditError when they do not, or hold 2**53 positions or more.
    """

    lengths: Ints
    documents: Ints

    def __post_init__(self) -> None:
        rising = bool(np.all(self.lengths[1:] > self.lengths[:-1]))
        if not len(self.lengths) or not rising or self.lengths[0] < 0 or self.documents.min() < 1:
            raise AuditError(
                "A histogram of lengths must hold rising lengths of at least 0, each with a count"
                " of at least 1.",
                hint="Measure the corpus again with `auditor assess`.",
            )
        if float(self.lengths.astype(float) @ self.documents.astype(float)) >= MOST_POSITIONS:
            raise AuditError(
                "The lengths sum to 2**53 positions or more, which is beyond exact arithmetic.",
                hint="Plan a part of the corpus.",
            )

    @classmethod
    def of(cls, pairs: Iterable[Iterable[int]]) -> LengthHistogram:
        """Return the histogram of (length, documents) pairs, as `audit.json` holds them."""
        table = np.array([list(pair) for pair in pairs], dtype=np.int64).reshape(-1, 2)
        return cls(table[:, 0].copy(), table[:, 1].copy())

    @property
    def total_documents(self) -> int:
        """The number of documents."""
        return int(self.documents.sum())

    @property
    def total_positions(self) -> int:
        """The sum of the lengths of all documents."""
        return int(self.lengths @ self.documents)

    def cut_at(self, length: int) -> LengthHistogram:
        """Return the histogram once every longer document is cut to ``length`` positions."""
        cut = np.minimum(self.lengths, length)
        lengths, place = np.unique(cut, return_inverse=True)
        documents = np.zeros(len(lengths), dtype=np.int64)
        np.add.at(documents, place, self.documents)
        return LengthHistogram(lengths, documents)
