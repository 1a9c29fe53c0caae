"""The whitespace table: runs by kind and what becomes of them, per slice."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from auditor.tallies.base import State, Tally
from auditor.tallies.groups import Grouping, summed

Ints = npt.NDArray[np.int64]
COLUMNS = ("occurrences", "tokens", "kept", "merged", "dropped", "unknown", "changed", "bytes")


class WhitespaceTally(Tally):
    """Occurrences, tokens spent and fates of each kind of run (``COLUMNS``)."""

    def __init__(self, kinds: tuple[str, ...]) -> None:
        self.kinds = kinds
        self._rows: dict[tuple[str, int], list[int]] = {}

    @property
    def settings(self) -> State:
        return {"kinds": list(self.kinds), "columns": list(COLUMNS)}

    def add(self, kind_of: Ints, table: Ints, document_of: Ints, groups: list[Grouping]) -> None:
        """Add runs: ``kind_of`` (runs,), ``table`` (runs, columns), ``document_of`` (runs,)."""
        width = len(self.kinds)
        for group in groups:
            codes = group.codes[document_of] * width + kind_of
            for code, row in summed(codes, table):
                self._take((group.keys[code // width], code % width), row.tolist())

    def _take(self, place: tuple[str, int], row: list[int]) -> None:
        held = self._rows.get(place)
        self._rows[place] = row if held is None else [a + b for a, b in zip(held, row, strict=True)]

    def _add(self, other: WhitespaceTally) -> None:
        for place, row in other._rows.items():
            self._take(place, list(row))

    def counts(self) -> State:
        found: State = {}
        for (key, kind), row in sorted(self._rows.items()):
            found.setdefault(key, {})[self.kinds[kind]] = row
        return found

    def fill(self, counts: State) -> None:
        for key, kinds in counts.items():
            for kind, row in kinds.items():
                self._take((key, self.kinds.index(kind)), list(row))

    def rows(self, key: str) -> list[tuple[str, dict[str, int]]]:
        """Return (kind, columns) of the kinds that occur in the slice, in the order of kinds."""
        found = [(kind, self._rows.get((key, place))) for place, kind in enumerate(self.kinds)]
        return [(kind, dict(zip(COLUMNS, row, strict=True))) for kind, row in found if row]
