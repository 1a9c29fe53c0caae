"""The summary of a vetting that a terminal shows."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from rich import box
from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

from auditor.report import answers, domain_answers
from auditor.report.domain_answers import named, ordered, penalty_of
from auditor.report.formatting import count, figure, number, plural, proportion, size, value
from auditor.report.terminal import line, rendered, written

Json = Mapping[str, Any]


def summary(document: Json, *, files: Sequence[Path], width: int = 80, colour: bool) -> str:
    """Return the vetting as text for a terminal ``width`` cells wide, with colours if asked."""
    return rendered(_parts(document, files), width=width, colour=colour)


def _parts(document: Json, files: Sequence[Path]) -> Iterable[RenderableType]:
    corpus, general = document["corpus"], document["general"]
    yield Text(f"{_told(corpus)}.", "bold")
    if general is not None:
        yield Text(f"General text: {_told(general)}.", "bold")
    yield Text(answers.HOW_TO_READ, "dim")
    yield Text()
    yield Text("Verdict", "bold")
    for sentences in document["verdict"].values():
        for told in sentences:
            yield line((told,))
    if general is None:
        yield line((domain_answers.NO_GENERAL,))
    yield Text()
    yield _table(document)
    yield Text()
    for caution in (domain_answers.NOT_QUALITY, answers.EXCERPTS):
        yield Text(caution, "italic")
    yield from written(files)


def _told(corpus: Json) -> str:
    documents, words = plural(corpus["documents"], "document"), plural(corpus["words"], "word")
    return f"{documents}, {size(corpus['bytes'])}, {words}"


def _table(document: Json) -> Table:
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False, show_edge=False)
    table.add_column("best first", max_width=20, overflow="ellipsis", no_wrap=True)
    for title in ("tokens/word", "÷ general", "lost", "cut", "entries", "score"):
        table.add_column(title, justify="right", no_wrap=True)
    scores = {row["vocabulary"]: row["score"] for row in document["ranking"]["order"]}
    for own in ordered(document):
        figures = own["figures"]
        row = penalty_of(document, own["name"], "fertility")
        table.add_row(
            named(own),
            value("fertility", figures["fertility"]),
            "–" if row is None else figure({**row["ratio"], "low": None}),
            proportion(own["lost_characters"]["value"]),
            proportion(figures["truncated_documents"]["value"]),
            count(own["entries"]),
            number(scores[own["name"]]),
        )
    return table
