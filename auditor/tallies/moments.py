"""Sums, squares and products of document columns, per slice: all that a ratio's interval needs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np
import numpy.typing as npt

from auditor.tallies.base import State, Tally
from auditor.tallies.groups import Grouping, summed

Ints = npt.NDArray[np.int64]
Pair = tuple[str, str]
Objects = npt.NDArray[np.object_]


@dataclass(frozen=True, slots=True)
class Moments:
    """Sums over ``units`` sampling units of y, x, y·y, x·x and x·y."""

    units: int
    y: int
    x: int
    yy: int
    xx: int
    xy: int


class HoldsMoments(Protocol):
    """A tally from which the moments of two columns can be had."""

    def slices(self) -> list[str]:
        """Return the slice keys, sorted."""

    def total(self, key: str, column: str) -> int:
        """Return the sum of ``column`` over the slice."""

    def moments(self, key: str, y: str, x: str) -> Moments:
        """Return the moments of two columns over the slice's sampling units."""


class MomentsTally(Tally):
    """Sums of ``columns`` and of the products of ``pairs`` of them, documents being the units."""

    def __init__(self, columns: tuple[str, ...], pairs: tuple[Pair, ...]) -> None:
        self.columns = columns
        self.pairs = tuple(dict.fromkeys(p for y, x in pairs for p in ((y, y), (x, x), (y, x))))
        self._sums: dict[str, Objects] = {}
        self._place = {name: place for place, name in enumerate(columns)}
        self._product = {pair: len(columns) + place for place, pair in enumerate(self.pairs)}

    @property
    def settings(self) -> State:
        return {"columns": list(self.columns), "pairs": [list(pair) for pair in self.pairs]}

    def add(self, columns: dict[str, Ints], groups: list[Grouping]) -> None:
        """Add the documents of a batch, given column by column, shape (documents,)."""
        table = np.stack([columns[name] for name in self.columns], axis=1)
        products = _products(table, [(self._place[y], self._place[x]) for y, x in self.pairs])
        whole = np.concatenate((table.astype(products.dtype), products), axis=1)
        for group in groups:
            for key, row in group.sums(whole):
                self._take(key, row.astype(object))

    def _take(self, key: str, row: Objects) -> None:
        held = self._sums.get(key)
        self._sums[key] = row if held is None else held + row

    def _add(self, other: MomentsTally) -> None:
        for key, row in other._sums.items():
            self._take(key, row)

    def counts(self) -> State:
        return {key: [int(value) for value in self._sums[key]] for key in self.slices()}

    def fill(self, counts: State) -> None:
        for key, row in counts.items():
            self._take(key, np.array(row, dtype=object))

    def slices(self) -> list[str]:
        """Return the slice keys, sorted."""
        return sorted(self._sums)

    def total(self, key: str, column: str) -> int:
        """Return the sum of ``column`` over the slice; 0 for a slice never met."""
        return int(self._sums[key][self._place[column]]) if key in self._sums else 0

    def moments(self, key: str, y: str, x: str) -> Moments:
        """Return the moments of two columns over the documents of the slice."""
        row: Any = self._sums[key]
        crossed = (y, x) if (y, x) in self._product else (x, y)
        squares = (row[self._product[pair]] for pair in ((y, y), (x, x), crossed))
        documents = self.total(key, "documents")
        return Moments(documents, self.total(key, y), self.total(key, x), *map(int, squares))


def _products(table: Ints, pairs: list[tuple[int, int]]) -> npt.NDArray[Any]:
    """Return the products of column pairs; in Python integers where int64 could overflow."""
    largest = int(np.abs(table).max(initial=0))
    if largest * largest * max(1, len(table)) >= 2**62:
        table = table.astype(object)
    return np.stack([table[:, y] * table[:, x] for y, x in pairs], axis=1)


class OriginsTally(Tally):
    """Sums of ``columns`` per origin: origins being the units when documents share one.

    Memory grows with the number of origins, not of documents.
    """

    def __init__(self, columns: tuple[str, ...]) -> None:
        self.columns = columns
        self._place = {name: place for place, name in enumerate(columns)}
        self._sums: dict[str, dict[str, Objects]] = {}

    @property
    def settings(self) -> State:
        return {"columns": list(self.columns)}

    def add(self, columns: dict[str, Ints], groups: list[Grouping], origins: list[str]) -> None:
        """Add the documents of a batch; ``origins`` names the origin of each."""
        table = np.stack([columns[name] for name in self.columns], axis=1)
        numbers: dict[str, int] = {}
        codes = np.array([numbers.setdefault(o, len(numbers)) for o in origins], dtype=np.int64)
        names = list(numbers)
        for group in groups:
            for code, row in summed(group.codes * len(names) + codes, table):
                key, origin = group.keys[code // len(names)], names[code % len(names)]
                self._take(key, origin, row.astype(object))

    def _take(self, key: str, origin: str, row: Objects) -> None:
        held = self._sums.setdefault(key, {})
        held[origin] = row if origin not in held else held[origin] + row

    def _add(self, other: OriginsTally) -> None:
        for key, origins in other._sums.items():
            for origin, row in origins.items():
                self._take(key, origin, row)

    def counts(self) -> State:
        return {
            key: {origin: [int(v) for v in row] for origin, row in sorted(self._sums[key].items())}
            for key in self.slices()
        }

    def fill(self, counts: State) -> None:
        for key, origins in counts.items():
            for origin, row in origins.items():
                self._take(key, origin, np.array(row, dtype=object))

    def slices(self) -> list[str]:
        """Return the slice keys, sorted."""
        return sorted(self._sums)

    def total(self, key: str, column: str) -> int:
        """Return the sum of ``column`` over the slice; 0 for a slice never met."""
        place = self._place[column]
        return sum(int(row[place]) for row in self._sums.get(key, {}).values())

    def moments(self, key: str, y: str, x: str) -> Moments:
        """Return the moments of two columns over the origins of the slice."""
        left, right = self._place[y], self._place[x]
        pairs = [(int(row[left]), int(row[right])) for row in self._sums[key].values()]
        return Moments(
            len(pairs),
            sum(y for y, _ in pairs),
            sum(x for _, x in pairs),
            sum(y * y for y, _ in pairs),
            sum(x * x for _, x in pairs),
            sum(x * y for y, x in pairs),
        )
