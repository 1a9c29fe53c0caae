"""The summary of an inspection that a terminal shows."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from rich.console import RenderableType
from rich.text import Text

from auditor.report import answers, inspection_answers
from auditor.report.formatting import clean, count, plural
from auditor.report.terminal import line, rendered, written

Json = Mapping[str, Any]

_SHOWN = 5


def summary(document: Json, *, files: Sequence[Path], width: int = 80, colour: bool) -> str:
    """Return the inspection as text for a terminal ``width`` cells wide, with colours if asked."""
    return rendered(_parts(document, files), width=width, colour=colour)


def _parts(document: Json, files: Sequence[Path]) -> Iterable[RenderableType]:
    for own in document["vocabularies"]:
        yield Text(f"{clean(own['name'], 60)}: {answers.headline(own)}.", "bold")
        for told in own["answers"]:
            yield line((told,))
        first = [row for row in own["unreachable"]["first"] if not row["through_pipeline"]]
        if first:
            named = ", ".join(
                f"{clean(row['text'] or row['entry'], 30)} ({row['id']})" for row in first[:_SHOWN]
            )
            yield line((f"Never produced, the first of them: {named}.",))
            yield Text(inspection_answers.NOT_A_FAULT, "italic")
        yield Text()
    for row in document["differences"]:
        one, two = (clean(name, 60) for name in row["vocabularies"])
        told = (
            f"{one} and {two} share {plural(row['shared'], 'entry', 'entries')},"
            f" {count(row['with_other_ids'])} of them under another id; only the first has"
            f" {count(row['only_in_first']['entries'])}, only the second"
            f" {count(row['only_in_second']['entries'])}."
        )
        yield line((told,))
    yield from written(files)
