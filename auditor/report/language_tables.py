"""The tables beside `languages.json`, as data frames."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pandas as pd

from auditor.report.tables import frame

Json = dict[str, Any]

COLUMNS = (
    "vocabulary", "language", "reference", "figure", "value", "low", "high", "numerator",
    "denominator", "note",
)  # fmt: skip
SCRIPT_COLUMNS = (
    "vocabulary", "language", "script", "characters", "share", "tokens", "tokens_per_character",
    "byte_spelled_characters", "byte_spelled_share", "entries",
)  # fmt: skip
_VALUES = COLUMNS[4:]
_PREMIUMS = ("ratio_of_totals", "mean_of_ratios")


def languages(document: Json) -> pd.DataFrame:
    """Return one row a vocabulary, language and figure; premiums name their reference."""
    rows = (
        (vocabulary["name"], language["language"], *row)
        for vocabulary in document["vocabularies"]
        for language in vocabulary["languages"]
        for row in _rows(language)
    )
    return frame(COLUMNS, rows)


def _rows(language: Json) -> Iterator[tuple[object, ...]]:
    for name, figure in language["figures"].items():
        yield (None, name, *(figure[column] for column in _VALUES))
    premiums = [own for own in (language["premium"], *language["further_premiums"]) if own]
    for premium in premiums:
        for name in _PREMIUMS:
            yield (premium["reference"], name, *(premium[name][column] for column in _VALUES))
        for name in ("pairs", "missing", "missing_in_reference", "ambiguous"):
            yield (premium["reference"], name, premium[name], *[None] * 5)
    for weaker in language["relative"]:
        for name, figure in weaker.items():
            if name != "reference":
                values = (figure[column] for column in _VALUES)
                yield (weaker["reference"], f"relative_{name}", *values)
    for name, tokens in language["cost"].items():
        yield (None, f"tokens_spent_on_{name}", tokens, *[None] * 5)


def scripts(document: Json) -> pd.DataFrame:
    """Return one row a vocabulary, language and script."""
    rows = (
        (vocabulary["name"], language["language"], *(row[name] for name in SCRIPT_COLUMNS[2:]))
        for vocabulary in document["vocabularies"]
        for language in vocabulary["languages"]
        for row in language["scripts"]
    )
    return frame(SCRIPT_COLUMNS, rows)
