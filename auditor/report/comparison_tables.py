"""The table beside `comparison.json`, as a data frame."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pandas as pd

from auditor.report.tables import frame

Json = dict[str, Any]

COLUMNS = (
    "before_vocabulary", "after_vocabulary", "slice", "figure", "before", "before_low",
    "before_high", "after", "after_low", "after_high", "difference", "low", "high", "verdict",
    "p_value", "adjusted_p_value", "shown_after_adjustment", "note",
)  # fmt: skip
_ENDS = ("value", "low", "high")


def differences(document: Json) -> pd.DataFrame:
    """Return one row a pair of vocabularies, slice and figure, then distances and quantiles."""
    return frame(COLUMNS, _rows(document))


def _rows(document: Json) -> Iterator[tuple[object, ...]]:
    for own in document["differences"]:
        sides = (own[when][end] for when in ("before", "after") for end in _ENDS)
        yield (*(own[name] for name in COLUMNS[:4]), *sides, *(own[name] for name in COLUMNS[10:]))
    for own in document["lengths"]:
        place = tuple(own[name] for name in COLUMNS[:3])
        distance = (own["distance"], None, None, own["verdict"])
        yield (*place, "length_distance", *[None] * 6, *distance, *[None] * 3, own["note"])
        for name, shift in own["quantiles"].items():
            ends = (shift["before"], None, None, shift["after"], None, None)
            found = (shift[end] for end in ("difference", "low", "high", "verdict"))
            yield (*place, name, *ends, *found, *[None] * 3, shift["note"])
