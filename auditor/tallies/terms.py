"""Occurrences of the terms of a glossary: each form with how it is broken, counted exactly."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from auditor.tallies.base import State, Tally


class TermRow(NamedTuple):
    """A term, how a text spells it, and one way in which it is broken there.

    ``tokens`` touch it; ``broken_words`` of its words are touched by two or more. ``unknown``,
    ``byte_spelled`` and ``dropped`` are 1 when it holds such a character, else 0.
    """

    term: str
    form: str
    broken: str
    tokens: int
    broken_words: int
    unknown: int
    byte_spelled: int
    dropped: int


class TermsTally(Tally):
    """Occurrences of each ``TermRow`` of one glossary, which its digest names.

    Nothing is left out: memory grows with the distinct spellings of the glossary's own terms in the
    corpus (their letters' case, the whitespace inside them) times the ways each is broken, not with
    the corpus. How many forms are shown is decided where they are.
    """

    def __init__(self, glossary: str) -> None:
        self._glossary = glossary
        self._counts: dict[TermRow, int] = {}

    @property
    def settings(self) -> State:
        return {"glossary": self._glossary}

    def add(self, row: TermRow, count: int) -> None:
        """Add ``count`` occurrences of ``row``."""
        if count:
            self._counts[row] = self._counts.get(row, 0) + count

    def rows(self) -> Iterator[tuple[TermRow, int]]:
        """Yield each row with its count, in sorted order."""
        yield from sorted(self._counts.items())

    def _add(self, other: TermsTally) -> None:
        for row, count in other._counts.items():
            self.add(row, count)

    def counts(self) -> State:
        return {"rows": [[*row, count] for row, count in self.rows()]}

    def fill(self, counts: State) -> None:
        for *row, count in counts["rows"]:
            self.add(TermRow(*row), count)
