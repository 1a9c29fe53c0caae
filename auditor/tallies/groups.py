"""Slices of a batch: which documents belong to which key."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

Ints = npt.NDArray[np.int64]
ALL = "all"


@dataclass(frozen=True, slots=True)
class Grouping:
    """The documents of a batch by one field: ``codes`` (documents,) index into ``keys``."""

    keys: list[str]
    codes: Ints

    def sums(self, table: npt.NDArray[Any]) -> Iterator[tuple[str, npt.NDArray[Any]]]:
        """Yield each key with the sums of its rows of ``table``, shape (documents, columns)."""
        for code, row in summed(self.codes, table):
            yield self.keys[code], row


def summed(codes: Ints, table: npt.NDArray[Any]) -> Iterator[tuple[int, npt.NDArray[Any]]]:
    """Yield each code that occurs with the sums of its rows of ``table``, in rising order."""
    if not len(codes):
        return
    order = np.argsort(codes, kind="stable")
    present, begins = np.unique(codes[order], return_index=True)
    totals = np.add.reduceat(table[order], begins, axis=0)
    yield from zip(present.tolist(), totals, strict=True)


def groupings(documents: int, slices: dict[str, list[str]]) -> list[Grouping]:
    """Return the grouping into the one slice ``all``, then one for each field of ``slices``."""
    whole = Grouping([ALL], np.zeros(documents, dtype=np.int64))
    return [whole, *(_grouped(keys) for keys in slices.values())]


def _grouped(keys: list[str]) -> Grouping:
    numbers: dict[str, int] = {}
    codes = [numbers.setdefault(key, len(numbers)) for key in keys]
    return Grouping(list(numbers), np.array(codes, dtype=np.int64))
