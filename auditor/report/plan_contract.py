"""Lays a length plan out as `plan.json` holds it; its schema ships beside this module."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import orjson

from auditor.report import contract

Json = dict[str, Any]

FORMAT = "auditor/length-plan"
VERSION = 1


def schema() -> Json:
    """Return the JSON Schema (draft 2020-12) of `plan.json`."""
    loaded: Json = orjson.loads((Path(__file__).parent / "plan.schema.json").read_bytes())
    return loaded


def document(parts: Json) -> Json:
    """Return the whole document; ``parts`` are its other keys, in their order."""
    settings = {"settings": parts["settings"], "made_with": contract.made_with()}
    return {"format": FORMAT, "version": VERSION, **settings, **parts}
