"""The tables beside `audit.json`, as data frames, and their CSV form."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator, Sequence
from itertools import islice
from typing import Any, Literal

import numpy as np
import numpy.typing as npt
import pandas as pd
import pyarrow as pa
import regex

from auditor.tallies.characters import CharactersTally
from auditor.tallies.words import BrokenWord, WordsTally
from auditor.text.scripts import script

Json = dict[str, Any]
Row = Sequence[object]

WORST = 1000
# What makes a spreadsheet compute a cell, when more follows.
_FORMULAS = frozenset("=+-@\t\r")
FIGURE_COLUMNS = (
    "vocabulary",
    "slice",
    "figure",
    "value",
    "low",
    "high",
    "numerator",
    "denominator",
    "note",
)
WORD_COLUMNS = ("vocabulary", "word", "count", "pieces", "extra_tokens", "broken", "unknown")
CHARACTER_COLUMNS = (
    "vocabulary", "character", "code_point", "name", "script", "count", "fate",
    "first_source", "first_line",
)  # fmt: skip


def frame(columns: Sequence[str], rows: Iterable[Row]) -> pd.DataFrame:
    """Return a data frame of Python values: integers stay integers beside what is absent."""
    return pd.DataFrame(list(rows), columns=list(columns), dtype=object)


def as_csv(table: pd.DataFrame) -> str:
    """Return a CSV text with a header; an absent value is an empty cell.

    A text that a spreadsheet would take for a formula comes behind an apostrophe, which makes it
    one (common practice, no source).
    """
    rows = [[_unarmed(cell) for cell in row] for row in table.itertuples(index=False, name=None)]
    # A carriage return by itself ends a row too for whoever reads it, unless it is quoted.
    returns = any(isinstance(cell, str) and "\r" in cell for row in rows for cell in row)
    quoting: Literal[0, 2] = csv.QUOTE_NONNUMERIC if returns else csv.QUOTE_MINIMAL
    return str(
        frame(list(table.columns), rows).to_csv(index=False, lineterminator="\n", quoting=quoting)
    )


def _unarmed(cell: object) -> object:
    armed = isinstance(cell, str) and len(cell) > 1 and cell[0] in _FORMULAS
    return f"'{cell}" if armed else cell


def figures(audit: Json) -> pd.DataFrame:
    """Return one row a vocabulary, slice and figure."""
    return frame(FIGURE_COLUMNS, _figure_rows(audit))


def _figure_rows(audit: Json) -> Iterator[Row]:
    for vocabulary in audit["vocabularies"]:
        for key, found in vocabulary["slices"].items():
            for name, figure in found["figures"].items():
                yield (
                    vocabulary["name"],
                    key,
                    name,
                    *(figure[column] for column in FIGURE_COLUMNS[3:]),
                )


def lengths(audit: Json) -> pd.DataFrame:
    """Return the exact histogram: one row a vocabulary, slice and length."""
    rows = (
        (vocabulary["name"], key, length, documents)
        for vocabulary in audit["vocabularies"]
        for key, found in vocabulary["slices"].items()
        for length, documents in found["lengths"]["histogram"]
    )
    return frame(("vocabulary", "slice", "length", "documents"), rows)


def worst_words(tally: WordsTally) -> list[tuple[BrokenWord, int]]:
    """Return the words that cost most, then the words lost most often that are not among them.

    A word's cost is its extra tokens, count × (pieces − 1); ties go by the word.
    """
    costly = tally.largest(WORST, _costs)
    named = {row for row, _ in costly}
    lost = (item for item in tally.largest(2 * WORST, _losses) if item[0] not in named)
    return [*costly, *islice(lost, WORST)]


def saved_at_most(tally: WordsTally, entries: int = WORST) -> tuple[int, int]:
    """Return how many broken words were taken, costliest first, and their extra tokens together.

    That is at most what is saved were each of them an entry; at most ``entries`` words are taken. A
    word that is broken in several ways takes one place for each.
    """
    costly = [item for item in tally.largest(entries, _costs) if _extra(*item)]
    return len({row.word for row, _ in costly}), sum(_extra(*item) for item in costly)


def _costs(rows: pa.Table) -> npt.NDArray[np.int64]:
    return np.asarray(np.asarray(rows["count"]) * (np.asarray(rows["pieces"]) - 1))


def _losses(rows: pa.Table) -> npt.NDArray[np.int64]:
    return np.where(np.asarray(rows["unknown"]) > 0, np.asarray(rows["count"]), -1)


def _extra(row: BrokenWord, count: int) -> int:
    return count * (row.pieces - 1)


def words(named: Iterable[tuple[str, list[tuple[BrokenWord, int]]]]) -> pd.DataFrame:
    """Return the worst words of each vocabulary, given as (vocabulary, words)."""
    rows = (
        (name, row.word, count, row.pieces, _extra(row, count), row.broken, bool(row.unknown))
        for name, worst in named
        for row, count in worst
    )
    return frame(WORD_COLUMNS, rows)


def characters(named: Iterable[tuple[str, CharactersTally]], sources: list[str]) -> pd.DataFrame:
    """Return every character that did not come through whole, most frequent first."""
    return frame(CHARACTER_COLUMNS, _character_rows(named, sources))


def _character_rows(
    named: Iterable[tuple[str, CharactersTally]], sources: list[str]
) -> Iterator[Row]:
    for name, tally in named:
        ordered = sorted(tally.seen.items(), key=lambda item: (-item[1].times, item[0]))
        for (character, fate), seen in ordered:
            first = sources[seen.first.source], seen.first.line
            code = f"U+{ord(character):04X}"
            yield (
                name,
                character,
                code,
                character_name(character),
                script(character),
                seen.times,
                fate,
                *first,
            )


def character_name(character: str) -> str:
    """Return the Unicode name of a character, empty where it has none."""
    import unicodedata

    return unicodedata.name(character, "")


def printable(text: str) -> str:
    """Return ``text`` with control, format and unassigned characters written as code points."""
    return str(
        regex.sub(r"[\p{C}--\p{Co}]", lambda m: f"⟨U+{ord(m[0]):04X}⟩", text, flags=regex.V1)
    )
