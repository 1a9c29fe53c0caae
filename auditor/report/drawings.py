"""What the page of an audit draws beside lengths and slices."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from markupsafe import Markup

from auditor.report import row_charts
from auditor.report.details import Details
from auditor.report.formatting import clean
from auditor.report.slices import whole
from auditor.report.tables import words as word_rows
from auditor.tallies.words import BrokenWord

Json = Mapping[str, Any]

_WORDS = 20
_LOSSES = {
    "unknown_characters": "unknown characters",
    "dropped_characters": "dropped characters",
    "byte_spelled_characters": "spelled in bytes",
    "unknown_words": "unknown words",
    "changed_words": "changed words",
    "case_folded_words": "words without case",
}


def losses(vocabularies: Sequence[Json]) -> list[tuple[str, Markup]]:
    """Draw what each vocabulary loses by kind, where anything is lost; with its name."""
    drawn = []
    for number, own in enumerate(vocabularies):
        figures = whole(own)["figures"]
        rows = [(told, figures[name]) for name, told in _LOSSES.items() if name in figures]
        if any(figure["value"] for _, figure in rows):
            title = f"Losses by kind, {clean(own['name'], 60)}"
            drawing = row_charts.points(f"losses-{number}", title, rows, None)
            drawn.append((own["name"], drawing))
    return drawn


def beside(vocabularies: Sequence[Json]) -> Markup | None:
    """Draw the tokens of each vocabulary over those of the first, paired by document."""
    rows = [
        (own["name"], whole(own)["figures"]["relative_tokens"])
        for own in vocabularies
        if "relative_tokens" in whole(own)["figures"]
    ]
    if len(rows) < 2:
        return None
    return row_charts.points("beside", "Tokens over those of the first vocabulary", rows, 1.0)


def costly(number: int, name: str, rows: list[tuple[BrokenWord, int]]) -> Markup:
    """Draw the words that cost most, by the tokens that they take beyond one each."""
    shown = word_rows([(name, rows[:_WORDS])]).to_dict("records")
    held = [(row["word"], row["extra_tokens"], f"broken as {row['broken']}") for row in shown]
    title = f"The words that cost most, {clean(name, 60)}"
    return row_charts.bars(f"words-{number}", title, held, "extra tokens")


def scripts(number: int, own: Details) -> Markup:
    """Draw characters that did not come through whole, by script."""
    held = [
        (script, sum(fates.values()), ", ".join(f"{f} {n:,}" for f, n in sorted(fates.items())))
        for script, fates in own.scripts
    ]
    title = f"Characters that did not come through whole, {clean(own.name, 60)}"
    return row_charts.bars(f"scripts-{number}", title, held, "characters")


def ranks(number: int, own: Details) -> Markup:
    """Draw how often each used entry occurs, most frequent first."""
    title = f"Use of entries by rank, {clean(own.name, 60)}"
    return row_charts.by_rank(f"ranks-{number}", title, own.ranks)
