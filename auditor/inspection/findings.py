"""What is wrong with a vocabulary, or must be known before it is used: one finding a row."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from auditor.inspection.surfaces import Surface, added_of
from auditor.vocabulary.facts import VocabularyFacts
from auditor.vocabulary.opening import Vocabulary

# Roles of control tokens in the files beside a vocabulary.
_ROLES = (
    "unk_token",
    "bos_token",
    "eos_token",
    "pad_token",
    "cls_token",
    "sep_token",
    "mask_token",
)
_ROLE_FILES = ("tokenizer_config.json", "special_tokens_map.json")
_SHOWN = 20


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing that is wrong, or surprising: what, where (file and key), and the evidence."""

    what: str
    detail: str
    file: str | None = None
    key: str | None = None


def findings(
    vocabulary: Vocabulary, facts: VocabularyFacts, surfaces: Sequence[Surface]
) -> list[Finding]:
    """Return what is found, grouped by kind, in a fixed order."""
    files = _read(vocabulary.folder)
    return [
        *_bytes(facts),
        *_control_in_text(vocabulary, surfaces),
        *_added_in_words(vocabulary, surfaces),
        *_rows(vocabulary, files),
        *_roles(vocabulary, files),
        *_casing(vocabulary, files),
        *_limits(vocabulary),
        *(Finding("note", note) for note in vocabulary.notes),
    ]


def _read(folder: Path) -> dict[str, Mapping[str, Any]]:
    found: dict[str, Mapping[str, Any]] = {}
    for name in (*_ROLE_FILES, "config.json", "generation_config.json"):
        try:
            held = json.loads((folder / name).read_text(encoding="utf-8-sig"))
        except (OSError, ValueError):
            continue
        if isinstance(held, dict):
            found[name] = held
    return found


def _bytes(facts: VocabularyFacts) -> Iterator[Finding]:
    kind, missing = facts.byte_pieces["kind"], facts.byte_pieces["missing"]
    if kind == "none":
        if facts.unknown is None:
            yield Finding(
                "no way to write every text",
                "there are neither byte pieces nor an unknown entry: characters that have no entry"
                " are dropped",
            )
        return
    if missing:
        named = ", ".join(missing[:_SHOWN]) + (", …" if len(missing) > _SHOWN else "")
        yield Finding("missing byte pieces", f"{len(missing)} of 256: {named}")


def _control_in_text(vocabulary: Vocabulary, surfaces: Sequence[Surface]) -> Iterator[Finding]:
    """Control strings that a text may spell by accident: words, or tags as in markup."""
    letter = vocabulary.letters[0]
    for own in surfaces:
        if own.kind != "control" or not own.entry:
            continue
        ids, _ = vocabulary.engine.ids_of([f"{letter} {own.entry} {letter}"])
        if own.number not in ids.tolist() or own.number == vocabulary.inventory.unknown:
            continue
        bare = own.entry.strip("</>")
        if own.entry.isalnum() or (own.entry[:1] == "<" and bare.isalnum() and len(bare) <= 4):
            yield Finding(
                "a control string that ordinary text holds",
                f"{own.entry} in a text becomes the control token {own.number}; "
                "--control-strings text measures it as text",
            )


def _added_in_words(vocabulary: Vocabulary, surfaces: Sequence[Surface]) -> Iterator[Finding]:
    single = added_of(vocabulary)
    letter = vocabulary.letters[0]
    matched = []
    for own in surfaces:
        if own.kind != "added" or single.get(own.number) or not own.entry.strip().isalnum():
            continue
        ids, _ = vocabulary.engine.ids_of([f"{letter}{own.entry}{letter}"])
        if own.number in ids.tolist():
            matched.append(own.entry)
    if matched:
        shown = ", ".join(matched[:_SHOWN]) + (", …" if len(matched) > _SHOWN else "")
        yield Finding("added tokens that match inside words", f"{len(matched)}: {shown}")


def _rows(vocabulary: Vocabulary, files: Mapping[str, Mapping[str, Any]]) -> Iterator[Finding]:
    size = len(vocabulary.inventory.entries)
    rows = files.get("config.json", {}).get("vocab_size")
    if not isinstance(rows, int):
        return
    if size > rows:
        yield Finding(
            "ids beyond the model's rows",
            f"the highest id is {size - 1:,}, the model has {rows:,} rows: using the others fails",
            "config.json", "vocab_size",
        )  # fmt: skip
    elif rows > size:
        yield Finding(
            "rows that no entry uses",
            f"{rows - size:,} of {rows:,} rows have no entry (often rounded up on purpose)",
            "config.json", "vocab_size",
        )  # fmt: skip


def _roles(vocabulary: Vocabulary, files: Mapping[str, Mapping[str, Any]]) -> Iterator[Finding]:
    entries = {entry for entry in vocabulary.inventory.entries if entry is not None}
    for role in _ROLES:
        named = {
            name: _content(files[name][role])
            for name in _ROLE_FILES
            if name in files and files[name].get(role) is not None
        }
        for name, content in named.items():
            if content not in entries:
                yield Finding(
                    "a control token without an entry",
                    f"{role} is {content!r}, which the vocabulary does not hold", name, role,
                )  # fmt: skip
        if len(set(named.values())) > 1:
            told = "; ".join(f"{name}: {content}" for name, content in named.items())
            yield Finding("files disagree", f"{role}: {told}", ", ".join(named), role)
    unknown = vocabulary.inventory.unknown_text
    declared = _content(files.get("tokenizer_config.json", {}).get("unk_token"))
    if unknown is not None and declared not in (None, unknown):
        yield Finding(
            "files disagree",
            f"the vocabulary's unknown entry is {unknown}, the file says {declared}",
            "tokenizer_config.json", "unk_token",
        )  # fmt: skip


def _content(role: object) -> str | None:
    if isinstance(role, dict):
        role = role.get("content")
    return role if isinstance(role, str) else None


def _casing(vocabulary: Vocabulary, files: Mapping[str, Mapping[str, Any]]) -> Iterator[Finding]:
    declared = files.get("tokenizer_config.json", {}).get("do_lower_case")
    lowers = vocabulary.engine.normalize("A") == "a"
    if isinstance(declared, bool) and declared != lowers:
        does = "lower-cases" if lowers else "keeps case"
        yield Finding(
            "files disagree", f"the normaliser {does}, the file says {str(declared).lower()}",
            "tokenizer_config.json", "do_lower_case",
        )  # fmt: skip


def _limits(vocabulary: Vocabulary) -> Iterator[Finding]:
    usable = {own.usable for own in vocabulary.limit.declared if own.usable is not None}
    if len(usable) > 1:
        for own in vocabulary.limit.declared:
            if own.usable is not None:
                yield Finding(
                    "files disagree", f"positions: {own.usable:,} ({own.value:,} declared)",
                    own.file, own.key,
                )  # fmt: skip
    yield from (Finding("limit", note) for note in vocabulary.limit.notes)
