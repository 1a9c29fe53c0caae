"""The summary of a length plan that a terminal shows."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from rich import box
from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

from auditor.report import answers
from auditor.report.formatting import clean, count, plural, proportion, value
from auditor.report.plan_answers import candidate
from auditor.report.terminal import line, rendered, written

Json = Mapping[str, Any]

_AROUND = 4


def summary(plan: Json, *, files: Sequence[Path], width: int = 80, colour: bool) -> str:
    """Return the plan as text for a terminal ``width`` cells wide, with colours if asked."""
    return rendered(_parts(plan, files), width=width, colour=colour)


def _parts(plan: Json, files: Sequence[Path]) -> Iterable[RenderableType]:
    advice = plan["recommended"]
    named = clean(plan["vocabulary"]["name"], 60)
    yield Text(f"{plural(plan['corpus']['documents'], 'document')} under {named}.", "bold")
    yield Text(f"Recommended length: {plural(advice['length'], 'position')}.", "bold")
    yield Text(answers.HOW_TO_READ, "dim")
    yield Text()
    for told in advice["because"]:
        yield line((told,))
    yield Text()
    yield _table(plan)
    for note in plan["notes"]:
        yield Text(f"Note: {note}.", "italic")
    if candidate(plan, advice["length"])["truncated_documents"]["numerator"]:
        yield Text(answers.CUT_IS_LOST, "italic")
    if advice["slices_beyond_accepted"]:
        yield Text(answers.LANGUAGES_DIFFER, "italic")
    yield from written(files)


def _table(plan: Json) -> Table:
    """Return the recommended length among its neighbours."""
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False, show_edge=False)
    for title in ("length", "documents cut", "tokens cut", *_PADDINGS.values()):
        table.add_column(title, justify="right")
    held = plan["candidates"]
    chosen = next(i for i, c in enumerate(held) if c["length"] == plan["recommended"]["length"])
    first = max(0, min(chosen - _AROUND, len(held) - 2 * _AROUND - 1))
    for own in held[first : first + 2 * _AROUND + 1]:
        marked = own is held[chosen]
        shares = (proportion(own["padding"][name]["share"]) for name in _PADDINGS)
        table.add_row(
            f"{'→ ' if marked else ''}{count(own['length'])}",
            value("truncated_documents", own["truncated_documents"]),
            value("truncated_tokens", own["truncated_tokens"]),
            *shares,
            style="bold" if marked else "",
        )
    table.caption = "Shares of documents and tokens that are cut, and of positions that are padding"
    return table


_PADDINGS = {
    "fixed": "padded",
    "random_batches": "batches",
    "grouped_batches": "grouped",
    "packed": "packed",
}
