"""Profiles of whitespace: the few ways in which pieces hold runs, each numbered once."""

from __future__ import annotations

from math import prod

import numpy as np

from auditor.encoding.whole import RunTable
from auditor.vocabulary.engine import Ints

Row = tuple[int, ...]


class RunProfiles:
    """Numbers the runs that a piece holds: a profile is the rows (kind, columns) of its runs."""

    def __init__(self) -> None:
        self._numbers: dict[tuple[Row, ...], int] = {}

    def of(self, runs: RunTable, pieces: int) -> Ints:
        """Return the profile of each of ``pieces`` pieces, given the runs in them."""
        rows = np.concatenate((runs.kind_of[:, None], runs.table), axis=1)
        known, row_of = _distinct_rows(rows)
        times = np.bincount(runs.document_of, minlength=pieces)
        found = np.full(pieces, self._number(()), dtype=np.int64)
        alone = times[runs.document_of] == 1
        by_row = np.array([self._number((row,)) for row in known], dtype=np.int64)
        found[runs.document_of[alone]] = by_row[row_of[alone]]
        held: dict[int, tuple[int, ...]] = {}
        pairs = zip(runs.document_of[~alone].tolist(), row_of[~alone].tolist(), strict=True)
        for piece, row in pairs:
            held[piece] = (*held.get(piece, ()), row)
        numbered = {
            places: self._number(tuple(sorted(known[place] for place in places)))
            for places in set(held.values())
        }
        for piece, places in held.items():
            found[piece] = numbered[places]
        return found

    def _number(self, profile: tuple[Row, ...]) -> int:
        return self._numbers.setdefault(profile, len(self._numbers))

    def expand(self, profile_of: Ints, document_of: Ints) -> RunTable:
        """Return the runs of pieces, given the profile and the document of each piece."""
        width = len(self._numbers)
        codes, times = _counted(document_of * width + profile_of)
        documents, profiles = np.divmod(codes, max(1, width))
        begins, table = self._flat()
        lengths = np.diff(begins)[profiles]
        places = np.repeat(begins[profiles] - np.cumsum(lengths) + lengths, lengths)
        places += np.arange(len(places))
        rows = table[places]
        counted = rows[:, 1:] * np.repeat(times, lengths)[:, None]
        return RunTable(rows[:, 0], counted, np.repeat(documents, lengths))

    def _flat(self) -> tuple[Ints, Ints]:
        """Return where each profile begins among all rows, and these rows."""
        lengths = [len(profile) for profile in self._numbers]
        begins = np.zeros(len(lengths) + 1, dtype=np.int64)
        np.cumsum(lengths, out=begins[1:])
        rows = [row for profile in self._numbers for row in profile]
        width = len(rows[0]) if rows else 9
        return begins, np.array(rows, dtype=np.int64).reshape(-1, width)


def _distinct_rows(rows: Ints) -> tuple[list[Row], Ints]:
    """Return the distinct rows of small counts, and which of them each row is.

    A row is written as one number, its columns as digits; where that takes more than a machine's
    integer, rows are compared as they are.
    """
    digits = [int(top) + 1 for top in rows.max(axis=0, initial=0)]
    if prod(digits) >= 1 << 62:
        distinct, row_of = np.unique(rows, axis=0, return_inverse=True)
        return [tuple(row) for row in distinct.tolist()], row_of.reshape(-1)
    codes = np.zeros(len(rows), dtype=np.int64)
    for column, base in zip(rows.T, digits, strict=True):
        codes = codes * base + column
    _, firsts, row_of = np.unique(codes, return_index=True, return_inverse=True)
    return [tuple(row) for row in rows[firsts].tolist()], row_of


def _counted(codes: Ints) -> tuple[Ints, Ints]:
    """Return the distinct codes and how often each occurs; without sorting where they are dense."""
    if not len(codes) or int(codes.max()) > 8 * len(codes) + 65_536:
        distinct, times = np.unique(codes, return_counts=True)
        return distinct, times.astype(np.int64)
    counts = np.bincount(codes)
    distinct = np.flatnonzero(counts)
    return distinct, counts[distinct]
