"""The tables beside `audit.json`, as CSV text."""

from __future__ import annotations

import csv
import heapq
import io
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

import regex

from auditor.tallies.characters import CharactersTally
from auditor.tallies.words import BrokenWord, WordsTally
from auditor.text.scripts import script

Json = dict[str, Any]
Row = Sequence[object]

WORST = 1000
FIGURE_COLUMNS = ("vocabulary", "slice", "figure", "value", "low", "high", "numerator", "denominator", "note")
WORD_COLUMNS = ("vocabulary", "word", "count", "pieces", "extra_tokens", "broken", "unknown")
CHARACTER_COLUMNS = (
    "vocabulary", "character", "code_point", "name", "script", "count", "fate",
    "first_source", "first_line",
)  # fmt: skip


def as_csv(columns: Sequence[str], rows: Iterable[Row]) -> str:
    """Return a CSV text with a header; an absent value is an empty cell."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    writer.writerows(rows)
    return text.getvalue()


def figures(audit: Json) -> str:
    """Return one row a vocabulary, slice and figure."""
    return as_csv(FIGURE_COLUMNS, _figure_rows(audit))


def _figure_rows(audit: Json) -> Iterator[Row]:
    for vocabulary in audit["vocabularies"]:
        for key, found in vocabulary["slices"].items():
            for name, figure in found["figures"].items():
                yield vocabulary["name"], key, name, *(figure[column] for column in FIGURE_COLUMNS[3:])


def lengths(audit: Json) -> str:
    """Return the exact histogram: one row a vocabulary, slice and length."""
    rows = (
        (vocabulary["name"], key, length, documents)
        for vocabulary in audit["vocabularies"]
        for key, found in vocabulary["slices"].items()
        for length, documents in found["lengths"]["histogram"]
    )
    return as_csv(("vocabulary", "slice", "length", "documents"), rows)


def worst_words(tally: WordsTally) -> list[tuple[BrokenWord, int]]:
    """Return the words that cost most, then the words lost most often that are not among them.

    A word's cost is its extra tokens, count × (pieces − 1); ties go by the word.
    """
    costly = heapq.nsmallest(WORST, tally.rows(), key=lambda item: (-_extra(*item), *item[0]))
    named = {row for row, _ in costly}
    lost = (item for item in tally.rows() if item[0].unknown and item[0] not in named)
    return [*costly, *heapq.nsmallest(WORST, lost, key=lambda item: (-item[1], *item[0]))]


def _extra(row: BrokenWord, count: int) -> int:
    return count * (row.pieces - 1)


def words(named: Iterable[tuple[str, list[tuple[BrokenWord, int]]]]) -> str:
    """Return the worst words of each vocabulary, given as (vocabulary, words)."""
    rows = (
        (name, row.word, count, row.pieces, _extra(row, count), row.broken, bool(row.unknown))
        for name, worst in named
        for row, count in worst
    )
    return as_csv(WORD_COLUMNS, rows)


def characters(named: Iterable[tuple[str, CharactersTally]], sources: list[str]) -> str:
    """Return every character that did not come through whole, most frequent first."""
    return as_csv(CHARACTER_COLUMNS, _character_rows(named, sources))


def _character_rows(named: Iterable[tuple[str, CharactersTally]], sources: list[str]) -> Iterator[Row]:
    for name, tally in named:
        ordered = sorted(tally.seen.items(), key=lambda item: (-item[1].count, item[0]))
        for (character, fate), seen in ordered:
            first = sources[seen.first.source], seen.first.line
            code = f"U+{ord(character):04X}"
            yield name, character, code, character_name(character), script(character), seen.count, fate, *first


def character_name(character: str) -> str:
    """Return the Unicode name of a character, empty where it has none."""
    import unicodedata  # noqa: PLC0415 - `regex` knows properties but no names

    return unicodedata.name(character, "")


def printable(text: str) -> str:
    """Return ``text`` with control, format and unassigned characters written as code points."""
    return str(regex.sub(r"[\p{C}--\p{Co}]", lambda m: f"⟨U+{ord(m[0]):04X}⟩", text, flags=regex.V1))
