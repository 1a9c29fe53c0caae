"""Earlier audits, read back: their figures are used without reading the corpus again."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import orjson

from auditor.errors import CorpusError, SettingsError
from auditor.report import contract

Json = dict[str, Any]

NAME = "audit.json"
# A file of another kind shows it early; an audit may be many megabytes.
_LOOKED_AT = 4096


@dataclass(frozen=True)
class Audit:
    """The document of an `audit.json`, and where it came from."""

    document: Json
    path: Path

    @property
    def name(self) -> str:
        """What to call the audit: its folder's name."""
        return self.path.resolve().parent.name

    def vocabulary(self, name: str | None) -> Json:
        """Return the part of one vocabulary; SettingsError when ``name`` does not tell which."""
        held: list[Json] = self.document["vocabularies"]
        if name is None and len(held) == 1:
            return held[0]
        found = [own for own in held if name in (own["name"], own["source"])]
        if len(found) == 1:
            return found[0]
        there = ", ".join(own["name"] for own in held)
        told = "which of its vocabularies?" if name is None else f"it holds no vocabulary {name}."
        raise SettingsError(told, hint=f"Name one with --vocab: {there}.", where=str(self.path))


def demanded_audit(argument: str) -> Audit:
    """Return the audit that lies at ``argument``; CorpusError where none does."""
    found = audit_at(argument)
    if found is None:
        raise CorpusError(
            "there is no audit.",
            hint="Name an audit.json, or the folder of one that `auditor assess` wrote.",
            where=argument,
        )
    return found


def audit_at(argument: str) -> Audit | None:
    """Return the audit that lies at ``argument``, a file or its folder; ``None`` where none does.

    Raises CorpusError for an audit of another version, or one that is cut off.
    """
    path = Path(argument)
    path = path / NAME if path.is_dir() else path
    if not path.is_file() or not _begins_as_audit(path):
        return None
    try:
        document = orjson.loads(path.read_bytes())
    except orjson.JSONDecodeError as fault:
        raise CorpusError(
            f"the audit cannot be read ({fault}).",
            hint="Make it again with `auditor assess`.",
            where=str(path),
        ) from None
    if document.get("version") != contract.VERSION:
        raise CorpusError(
            f"the audit is of version {document.get('version')}; this program reads version"
            f" {contract.VERSION}.",
            hint="Make it again with `auditor assess`.",
            where=str(path),
        )
    return Audit(document, path)


def _begins_as_audit(path: Path) -> bool:
    with path.open("rb") as stream:
        begun = stream.read(_LOOKED_AT)
    return f'"{contract.FORMAT}"'.encode() in begun[:100]
