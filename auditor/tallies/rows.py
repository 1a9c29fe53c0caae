"""Counts of named rows per slice, a few columns each: scripts, characters, labels."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import numpy.typing as npt

from auditor.tallies.base import State, Tally
from auditor.tallies.groups import Grouping

Ints = npt.NDArray[np.int64]


class RowsTally(Tally):
    """Sums of ``columns`` by slice and by the name of a row.

    Memory grows with the distinct names in each slice, not with the documents.
    """

    def __init__(self, columns: tuple[str, ...]) -> None:
        self.columns = columns
        self._sums: dict[str, dict[str, list[int]]] = {}

    @property
    def settings(self) -> State:
        return {"columns": list(self.columns)}

    def add(
        self, documents: Ints, rows: Ints, names: list[str], counts: Ints, groups: list[Grouping]
    ) -> None:
        """Add ``counts``, shape (entries, columns), of ``names[rows]`` in ``documents``."""
        for group in groups:
            codes = group.codes[documents] * len(names) + rows
            distinct, place = np.unique(codes, return_inverse=True)
            sums = np.zeros((len(distinct), len(self.columns)), dtype=np.int64)
            np.add.at(sums, place, counts)
            for code, own in zip(distinct.tolist(), sums.tolist(), strict=True):
                self._take(group.keys[code // len(names)], names[code % len(names)], own)

    def _take(self, key: str, name: str, counts: list[int]) -> None:
        rows = self._sums.setdefault(key, {})
        held = rows.get(name)
        rows[name] = counts if held is None else [a + b for a, b in zip(held, counts, strict=True)]

    def _add(self, other: RowsTally) -> None:
        for key, rows in other._sums.items():
            for name, counts in rows.items():
                self._take(key, name, counts)

    def counts(self) -> State:
        return {key: dict(sorted(self._sums[key].items())) for key in sorted(self._sums)}

    def fill(self, counts: State) -> None:
        for key, rows in counts.items():
            for name, own in rows.items():
                self._take(key, name, list(own))

    def rows(self, key: str) -> Iterator[tuple[str, dict[str, int]]]:
        """Yield each row of the slice with its columns by name, in the order of names."""
        for name, counts in sorted(self._sums.get(key, {}).items()):
            yield name, dict(zip(self.columns, counts, strict=True))
