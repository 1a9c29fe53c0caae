"""Lays a comparison out as `comparison.json` holds it; its schema ships beside this module."""

from __future__ import annotations

from typing import Any

from auditor.report import contract

Json = dict[str, Any]

FORMAT = "auditor/comparison"
VERSION = 1


def document(parts: Json) -> Json:
    """Return the whole document; ``parts`` are its other keys, in their order."""
    settings = {"settings": parts["settings"], "made_with": contract.made_with()}
    return {"format": FORMAT, "version": VERSION, **settings, **parts}
