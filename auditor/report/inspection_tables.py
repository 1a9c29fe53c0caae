"""The tables beside `inspection.json`, as data frames."""

from __future__ import annotations

from collections.abc import Sequence

import pandas as pd

from auditor.inspection.reaching import Unreachable
from auditor.inspection.surfaces import Surface
from auditor.report.tables import frame

ENTRY_COLUMNS = (
    "vocabulary",
    "id",
    "entry",
    "text",
    "kind",
    "begins_word",
    "ends_word",
    "produced",
)
UNREACHABLE_COLUMNS = (
    "vocabulary", "id", "entry", "text", "in_model", "through_pipeline", "cause", "becomes",
)  # fmt: skip


def entries(
    named: Sequence[tuple[str, list[Surface]]], lost: Sequence[tuple[str, list[Unreachable]]]
) -> pd.DataFrame:
    """Return one row an entry; ``produced`` says whether some context brought it out."""
    missing = {
        (name, own.surface.number) for name, held in lost for own in held if not own.in_pipeline
    }
    rows = (
        (
            name, own.number, own.entry, own.text, own.kind, own.starts, own.ends,
            (name, own.number) not in missing,
        )
        for name, held in named
        for own in held
    )  # fmt: skip
    return frame(ENTRY_COLUMNS, rows)


def unreachable(lost: Sequence[tuple[str, list[Unreachable]]]) -> pd.DataFrame:
    """Return one row an entry that the model, or the whole pipeline, never produces."""
    rows = (
        (
            name, own.surface.number, own.surface.entry, own.surface.text, own.in_model,
            own.in_pipeline, own.cause, " ".join(own.becomes),
        )
        for name, held in lost
        for own in held
    )  # fmt: skip
    return frame(UNREACHABLE_COLUMNS, rows)
