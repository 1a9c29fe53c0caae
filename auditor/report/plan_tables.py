"""The table beside `plan.json`: every number of every candidate, one row each."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pandas as pd

from auditor.report.tables import frame

Json = dict[str, Any]

COLUMNS = (
    "vocabulary", "length", "slice", "figure", "value", "low", "high", "numerator", "denominator",
    "note",
)  # fmt: skip
_FIGURE = frozenset({"value", "low", "high", "numerator", "denominator", "note"})


def candidates(plan: Json) -> pd.DataFrame:
    """Return one row a candidate, slice and number; a figure's interval stands in its row."""
    name = plan["vocabulary"]["name"]
    rows = (
        (name, own["length"], *row) for own in plan["candidates"] for row in _rows_of_candidate(own)
    )
    return frame(COLUMNS, rows)


def _rows_of_candidate(candidate: Json) -> Iterator[tuple[object, ...]]:
    whole = {key: own for key, own in candidate.items() if key not in ("slices", "length")}
    yield from (("all", *row) for row in _rows("", whole))
    for key, held in candidate["slices"].items():
        yield from ((key, *row) for row in _rows("", held))


def _rows(prefix: str, held: Json) -> Iterator[tuple[object, ...]]:
    """Yield (figure, value, low, high, numerator, denominator, note); dots lead into parts."""
    for key, own in held.items():
        name = f"{prefix}.{key}" if prefix else key
        if isinstance(own, dict) and own.keys() >= _FIGURE:
            yield (name, *(own[column] for column in COLUMNS[4:]))
        elif isinstance(own, dict):
            yield from _rows(name, own)
        elif isinstance(own, list):
            yield (name, "; ".join(map(str, own)), *[None] * 5)
        else:
            yield (name, own, *[None] * 5)
