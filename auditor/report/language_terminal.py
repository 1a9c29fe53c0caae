"""The summary of a comparison of languages that a terminal shows."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from rich import box
from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

from auditor.report import answers, language_answers
from auditor.report.formatting import clean, count, figure, plural, proportion, value
from auditor.report.terminal import line, rendered, written

Json = Mapping[str, Any]

_COSTLIEST, _CHEAPEST = 10, 3


def summary(document: Json, *, files: Sequence[Path], width: int = 80, colour: bool) -> str:
    """Return the comparison as text for a terminal ``width`` cells wide."""
    return rendered(_parts(document, files), width=width, colour=colour)


def _parts(document: Json, files: Sequence[Path]) -> Iterable[RenderableType]:
    corpus, vocabularies = document["corpus"], document["vocabularies"]
    languages = len(vocabularies[0]["languages"])
    yield Text(
        f"{plural(corpus['documents'], 'document')} in {plural(languages, 'language')}.", "bold"
    )
    yield Text(answers.HOW_TO_READ, "dim")
    labels = language_answers.label_answers(document)
    for vocabulary in vocabularies:
        yield Text()
        yield Text(clean(vocabulary["name"], 60), "bold")
        for told in vocabulary["answers"]:
            if told not in labels:
                yield line((told,))
        yield Text()
        yield _table(vocabulary)
    yield Text()
    yield Text("Labels", "bold")
    for told in labels:
        yield line((told,))
    yield Text(f"{language_answers.SAME_SCRIPT} {language_answers.NO_GUESSING}", "dim")
    yield Text()
    yield Text(language_answers.COST_IS_NOT_QUALITY, "italic")
    yield from written(files)


def _table(vocabulary: Json) -> Table:
    paired = vocabulary["ranked_by"] == "premium"
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False, show_edge=False)
    table.add_column("language", max_width=14, overflow="ellipsis", no_wrap=True)
    for title in ("documents", "premium" if paired else "tokens/grapheme", "tokens/word"):
        table.add_column(title, justify="right", no_wrap=True)
    for title in ("bytes", "cut"):
        table.add_column(title, justify="right", no_wrap=True)
    rows = vocabulary["languages"]
    left = len(rows) - _COSTLIEST - _CHEAPEST
    shown = rows if left <= 1 else [*rows[:_COSTLIEST], None, *rows[-_CHEAPEST:]]
    for row in shown:
        if row is None:
            table.add_row(f"… {count(left)} more", *[""] * 5)
            continue
        figures = row["figures"]
        cost = row["premium"]["ratio_of_totals"] if paired else figures["tokens_per_grapheme"]
        table.add_row(
            clean(row["language"], 60) or "(empty)",
            count(row["documents"]),
            figure(cost),
            value("fertility", figures["fertility"]),
            proportion(figures["byte_spelled_characters"]["value"]),
            proportion(figures["truncated_documents"]["value"]),
        )
    return table
