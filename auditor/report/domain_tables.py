"""The tables beside `domain.json`, as data frames."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pandas as pd

from auditor.report.tables import frame

Json = dict[str, Any]

_VALUES = ("value", "low", "high", "numerator", "denominator", "note")
CANDIDATE_COLUMNS = ("vocabulary", "other", "figure", *_VALUES)
PENALTY_COLUMNS = (
    "vocabulary", "slice", "figure", "domain", "domain_low", "domain_high", "general",
    "general_low", "general_high", "ratio", "ratio_low", "ratio_high", "note",
)  # fmt: skip
TERM_COLUMNS = (
    "vocabulary", "term", "weight", "form", "position", "count", "state", "tokens", "broken",
)  # fmt: skip
KIND_COLUMNS = (
    "vocabulary", "kind", "text", "count", "characters", "tokens", "tokens_per_character", "low",
    "high", "broken",
)  # fmt: skip
_ENDS = ("value", "low", "high")


def candidates(document: Json) -> pd.DataFrame:
    """Return one row a vocabulary and figure; paired ones name the other vocabulary."""
    rows = (row for own in document["candidates"] for row in _candidate(own))
    return frame(CANDIDATE_COLUMNS, rows)


def _candidate(own: Json) -> Iterator[tuple[object, ...]]:
    def row(other: str | None, name: str, held: Json) -> tuple[object, ...]:
        return (own["name"], other, name, *(held[column] for column in _VALUES))

    for name, held in own["figures"].items():
        yield row(None, name, held)
    yield row(None, "lost_characters", own["lost_characters"])
    for pair in own["paired"]:
        for name in ("tokens_ratio", "loss_difference"):
            yield row(pair["other"], name, pair[name])
    for name, value in own["price"].items():
        yield (own["name"], None, name, value, *[None] * 5)


def terms(document: Json) -> pd.DataFrame:
    """Return one row a vocabulary, term and form: in the corpus, and in constructed positions.

    ``position`` is "running text" for forms of the corpus, which alone have a count.
    """
    rows = (row for term in document["terms"] for row in _term(term))
    return frame(TERM_COLUMNS, rows)


def _term(term: Json) -> Iterator[tuple[object, ...]]:
    head = (term["vocabulary"], term["term"], term["weight"])
    for form in term["forms"]:
        for way in form["ways"]:
            yield (*head, form["form"], "running text", way["count"], way["state"], way["tokens"],
                   way["broken"])  # fmt: skip
    for own in term["constructed"]:
        for position, way in own["positions"].items():
            told = f"{position}, {own['case']}"
            yield (*head, own["form"], told, None, way["state"], way["tokens"], way["broken"])


def kinds(document: Json) -> pd.DataFrame:
    """Return one row a vocabulary and kind, and one each costly stretch of it."""
    rows = (row for own in document["kinds"] for row in _kind(own))
    return frame(KIND_COLUMNS, rows)


def _kind(own: Json) -> Iterator[tuple[object, ...]]:
    cost = own["tokens_per_character"] or dict.fromkeys(_ENDS)
    yield (own["vocabulary"], own["kind"], None, None, own["characters"], own["tokens"],
           *(cost[end] for end in _ENDS), None)  # fmt: skip
    for row in own["worst"]:
        yield (own["vocabulary"], own["kind"], row["text"], row["count"], len(row["text"]),
               row["pieces"], None, None, None, row["broken"])  # fmt: skip


def penalty(document: Json) -> pd.DataFrame:
    """Return one row a vocabulary, slice and figure; none without a general text."""
    rows = (
        (
            row["vocabulary"], row["slice"], row["figure"],
            *(row[side][end] for side in ("domain", "general", "ratio") for end in _ENDS),
            row["ratio"]["note"],
        )
        for row in document["penalty"]
    )  # fmt: skip
    return frame(PENALTY_COLUMNS, rows)
