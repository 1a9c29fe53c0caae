"""Picks and orders the slices of an audit for a person; nothing is computed here."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from auditor.tallies.groups import ALL

Json = Mapping[str, Any]

RANKED_BY = "fertility"


def costliest_first(vocabulary: Json, keys: Sequence[str]) -> list[str]:
    """Return ``keys`` by falling fertility; undefined ones come last, ties go by key."""

    def rank(key: str) -> tuple[bool, float, str]:
        value = vocabulary["slices"][key]["figures"][RANKED_BY]["value"]
        return value is None, -(value or 0.0), key

    return sorted(keys, key=rank)


def sets(audit: Json) -> list[tuple[str, list[str]]]:
    """Return (field, keys of its slices, costliest first) for each field that was asked for.

    The first vocabulary ranks. Slices of no known field stand together under an empty name.
    """
    vocabulary = audit["vocabularies"][0]
    fields = list(audit["settings"].get("by") or [])
    keys_of: dict[str, list[str]] = {field: [] for field in [*fields, ""]}
    for key in vocabulary["slices"]:
        if key != ALL:
            keys_of[_field(key, fields)].append(key)
    return [(field, costliest_first(vocabulary, keys)) for field, keys in keys_of.items() if keys]


def _field(key: str, fields: Sequence[str]) -> str:
    """Return the longest field that ``key`` begins with: a field's name may hold a sign =."""
    return max((field for field in fields if key.startswith(f"{field}=")), key=len, default="")


def whole(vocabulary: Json) -> Json:
    """Return the slice that holds every document."""
    found: Json = vocabulary["slices"][ALL]
    return found


def anything_cut(vocabulary: Json, keys: Sequence[str] = (ALL,)) -> bool:
    """Whether a document of one of the slices is longer than the limit."""
    held = vocabulary["slices"]
    return any(held[key]["figures"]["truncated_documents"]["numerator"] for key in keys)
