"""The exact histogram of lengths, per slice."""

from __future__ import annotations

from collections import Counter

import numpy as np
import numpy.typing as npt

from auditor.tallies.base import State, Tally
from auditor.tallies.groups import Grouping

Ints = npt.NDArray[np.int64]


class LengthsTally(Tally):
    """Documents by length; ``overhead`` is what the template adds to the tokens of each."""

    def __init__(self, overhead: int) -> None:
        self.overhead = overhead
        self._documents: dict[str, Counter[int]] = {}

    @property
    def settings(self) -> State:
        return {"overhead": self.overhead}

    def add(self, tokens: Ints, groups: list[Grouping]) -> None:
        """Add documents by their number of tokens, shape (documents,)."""
        for group in groups:
            span = int(tokens.max(initial=0)) + 1
            joint, times = np.unique(group.codes * span + tokens, return_counts=True)
            for code, count in zip(joint.tolist(), times.tolist(), strict=True):
                held = self._documents.setdefault(group.keys[code // span], Counter())
                held[code % span + self.overhead] += count

    def _add(self, other: LengthsTally) -> None:
        for key, histogram in other._documents.items():
            self._documents.setdefault(key, Counter()).update(histogram)

    def counts(self) -> State:
        return {
            key: [list(pair) for pair in self.histogram(key)] for key in sorted(self._documents)
        }

    def fill(self, counts: State) -> None:
        for key, pairs in counts.items():
            self._documents.setdefault(key, Counter()).update(dict(pairs))

    def histogram(self, key: str) -> list[tuple[int, int]]:
        """Return (length, documents) of the slice, shortest first."""
        return sorted(self._documents.get(key, Counter()).items())
