"""Lays figures out as `audit.json` holds them; its schema ships beside this module."""

from __future__ import annotations

import importlib.metadata
import re
from pathlib import Path
from typing import Any

import orjson

Json = dict[str, Any]

FORMAT = "auditor/audit"
VERSION = 1
_LIBRARIES = ("tokenizers", "sentencepiece", "tiktoken", "regex", "icu4py", "pyarrow")


def dump(document: Json) -> bytes:
    """Return the bytes of a JSON file: keys as laid out, two spaces, a line end at the end."""
    return orjson.dumps(document, option=orjson.OPT_INDENT_2 | orjson.OPT_APPEND_NEWLINE)


def made_with() -> Json:
    """Return the versions that a figure depends on."""
    from icu4py import icu_version

    versions: Json = {"auditor": importlib.metadata.version("subword-auditor")}
    versions.update({name: importlib.metadata.version(name) for name in _LIBRARIES})
    return {**versions, "icu": icu_version, "unicode": _unicode_of_regex()}


def _unicode_of_regex() -> str | None:
    """Return the Unicode version of `regex`, which states it nowhere but in its description."""
    text = importlib.metadata.distribution("regex").read_text("METADATA") or ""
    found = re.search(r"supports Unicode (\d+\.\d+\.\d+)", text)
    return found.group(1) if found else None


def schema(name: str = "audit") -> Json:
    """Return the JSON Schema (draft 2020-12) of the document ``name`` (`audit.json`: ``audit``)."""
    loaded: Json = orjson.loads((Path(__file__).parent / f"{name}.schema.json").read_bytes())
    return loaded


def audit(*, settings: Json, corpus: Json, vocabularies: list[Json]) -> Json:
    """Return the whole document."""
    return {
        "format": FORMAT,
        "version": VERSION,
        "settings": settings,
        "made_with": made_with(),
        "corpus": corpus,
        "vocabularies": vocabularies,
    }
