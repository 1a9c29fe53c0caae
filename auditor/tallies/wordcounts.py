"""All distinct words of a corpus with their counts, in bounded memory."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

import numpy as np
import pyarrow as pa

from auditor.tallies.base import State, Tally
from auditor.tallies.words import Ints, WordsTally, row_table


class WordCountsTally(Tally):
    """Occurrences of each word as written; about ``in_memory`` of them are held in memory.

    Past that they go to temporary files in sorted order, as `WordsTally` keeps its rows.
    """

    def __init__(self, in_memory: int = 200_000) -> None:
        self._held = WordsTally(in_memory)

    @property
    def settings(self) -> State:
        return {}

    def add(self, words: pa.Array, counts: Ints) -> None:
        """Add ``counts`` (words,) occurrences of ``words``, an Arrow array of strings."""
        self._held.add_table(row_table(words), counts)

    def _add(self, other: WordCountsTally) -> None:
        self._held.merge(other._held)

    def counts(self) -> State:
        return {"words": [[word, count] for word, count in self.rows()]}

    def fill(self, counts: State) -> None:
        words = pa.array([word for word, _ in counts["words"]], pa.string())
        self.add(words, np.array([count for _, count in counts["words"]], dtype=np.int64))

    def rows(self) -> Iterator[tuple[str, int]]:
        """Yield every word with its count, in sorted order."""
        for row, count in self._held.rows():
            yield row.word, count

    def frequencies(self) -> dict[int, int]:
        """Return how many words occur so often, by how often, in rising order."""
        found: Counter[int] = Counter()
        for table in self._held.tables():
            times, words = np.unique(np.asarray(table["count"]), return_counts=True)
            found.update(dict(zip(times.tolist(), words.tolist(), strict=True)))
        return dict(sorted(found.items()))

    def drawn(self, draws: int, total: int, start: float) -> list[tuple[str, int]]:
        """Return words drawn in proportion to their counts, each with how often it was drawn.

        ``draws`` places are taken at equal distances among the ``total`` occurrences of all words
        in sorted order, the first at ``start`` (from 0 up to 1) of a distance: a systematic sample
        (Cochran 1977, chapter 8). All words with their counts when there are no more occurrences
        than draws. The same words and counts give the same sample, however they came in.
        """
        if total <= draws:
            return list(self.rows())
        places = ((np.arange(draws) + start) * (total / draws)).astype(np.int64)
        found: list[tuple[str, int]] = []
        before = 0
        for table in self._held.tables():
            ends = before + np.cumsum(np.asarray(table["count"]))
            held = np.searchsorted(ends, places[(places >= before) & (places < ends[-1])], "right")
            rows, times = np.unique(held, return_counts=True)
            words = table["word"].take(rows).to_pylist()
            found += zip(words, times.tolist(), strict=True)
            before = int(ends[-1])
        return found
