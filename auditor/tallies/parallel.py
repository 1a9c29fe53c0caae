"""Records that hold the same content, by slice: what premiums are computed from."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from auditor.tallies.base import State, Tally

Ints = npt.NDArray[np.int64]


class ParallelTally(Tally):
    """For each content and slice, the number of records and the sums of ``columns``.

    Memory grows with contents × slices: premiums need every pair.
    """

    def __init__(self, columns: tuple[str, ...]) -> None:
        self.columns = columns
        self.without = 0
        self._sums: dict[str, dict[str, list[int]]] = {}

    @property
    def settings(self) -> State:
        return {"columns": list(self.columns)}

    def add(self, contents: list[str | None], keys: list[str], table: Ints) -> None:
        """Add records: their content (``None``: none is named), slice and columns."""
        for content, key, row in zip(contents, keys, table.tolist(), strict=True):
            if content is None:
                self.without += 1
            else:
                self._take(content, key, [1, *row])

    def _take(self, content: str, key: str, row: list[int]) -> None:
        held = self._sums.setdefault(content, {})
        own = held.get(key)
        held[key] = row if own is None else [a + b for a, b in zip(own, row, strict=True)]

    def _add(self, other: ParallelTally) -> None:
        self.without += other.without
        for content, rows in other._sums.items():
            for key, row in rows.items():
                self._take(content, key, row)

    def counts(self) -> State:
        rows = {content: dict(sorted(self._sums[content].items())) for content in self._sums}
        return {"without": self.without, "contents": dict(sorted(rows.items()))}

    def fill(self, counts: State) -> None:
        self.without += counts["without"]
        for content, rows in counts["contents"].items():
            for key, row in rows.items():
                self._take(content, key, list(row))

    @property
    def contents(self) -> int:
        """The number of contents met."""
        return len(self._sums)

    def by_slice(self, column: str) -> dict[str, dict[str, tuple[int, int]]]:
        """Return slice → content → (records, sum of ``column``), contents in sorted order."""
        place = 1 + self.columns.index(column)
        found: dict[str, dict[str, tuple[int, int]]] = {}
        for content in sorted(self._sums):
            for key, row in self._sums[content].items():
                found.setdefault(key, {})[content] = (row[0], row[place])
        return found
