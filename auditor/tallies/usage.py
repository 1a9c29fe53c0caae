"""How often each entry of the vocabulary is used."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from auditor.tallies.base import State, Tally

Ints = npt.NDArray[np.int64]


class UsageTally(Tally):
    """Occurrences of each id below ``size``."""

    def __init__(self, size: int) -> None:
        self.size = size
        self.occurrences: Ints = np.zeros(size, dtype=np.int64)

    @property
    def settings(self) -> State:
        return {"size": self.size}

    def add(self, ids: Ints, weights: Ints | None = None) -> None:
        """Add tokens by their id, shape (tokens,), each as often as ``weights`` says."""
        if weights is None:
            self.occurrences += np.bincount(ids, minlength=self.size)
        else:
            np.add.at(self.occurrences, ids, weights)

    def _add(self, other: UsageTally) -> None:
        self.occurrences += other.occurrences

    def counts(self) -> State:
        used = np.flatnonzero(self.occurrences).tolist()
        return {str(number): int(self.occurrences[number]) for number in used}

    def fill(self, counts: State) -> None:
        for number, times in counts.items():
            self.occurrences[int(number)] += times
