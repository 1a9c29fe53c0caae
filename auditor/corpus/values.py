"""Fields of a record: reaching them, their text, and the key of a slice."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from typing import Any

from auditor.corpus.options import NONE
from auditor.corpus.rows import Damage

MISSING = object()
Reach = Callable[[Mapping[str, Any]], Any]


def reach(record: object, name: str) -> Any:  # noqa: ANN401 - whatever the record holds
    """Return the value of field ``name``, MISSING without one.

    A field of the whole name comes first; without one a dot reaches into an object.
    """
    if not isinstance(record, dict):
        return MISSING
    if name in record:
        return record[name]
    dot = name.find(".")
    while dot >= 0:
        found = reach(record.get(name[:dot]), name[dot + 1 :])
        if found is not MISSING:
            return found
        dot = name.find(".", dot + 1)
    return MISSING


def reaching(name: str) -> Reach:
    """Return the function that reaches field ``name``, the quickest there is."""
    if "." in name:
        return lambda record: reach(record, name)
    return lambda record: record.get(name, MISSING)


def spelled(value: object) -> str:
    """Return ``value`` as a slice spells it: text as it is, else compact JSON, null as (none)."""
    if type(value) is str:
        return value
    if value is None or value is MISSING:
        return NONE
    if type(value) is int:
        return str(value)
    if isinstance(value, bytes):
        return value.decode("utf-8", "replace")
    return json.dumps(value, ensure_ascii=False, separators=(",", ":"), default=str)


def not_text(value: object, name: str) -> Damage:
    """Return why ``value`` of field ``name`` is no text."""
    if value is MISSING:
        return Damage("field missing", name)
    kinds: list[tuple[type | tuple[type, ...], str]] = [
        (type(None), "null"),
        (bool, "a boolean"),
        ((int, float), "a number"),
        (list, "a list"),
        (dict, "an object"),
    ]
    kind = next((told for types, told in kinds if isinstance(value, types)), "no text")
    return Damage(f"field is {kind}", name)
