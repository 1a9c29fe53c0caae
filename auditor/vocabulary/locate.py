"""Where a vocabulary lies and in which forms: by what the files hold, not by their names alone."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from auditor.errors import VocabularyError

FormKind = Literal[
    "tokenizer.json", "sentencepiece", "vocab.json", "vocab.txt", "ranks", "json ranks"
]
# When a folder holds several forms of one vocabulary, the first of these is measured.
PRECEDENCE: tuple[FormKind, ...] = (
    "tokenizer.json", "sentencepiece", "vocab.json", "vocab.txt", "ranks", "json ranks",
)  # fmt: skip
_LOOKED_FOR = (
    "tokenizer.json, a SentencePiece model (*.model), vocab.json (+ merges.txt), vocab.txt or a "
    "rank file (*.tiktoken)"
)


@dataclass(frozen=True, slots=True)
class Form:
    """One form of a vocabulary: the file that holds it and what kind of file it is."""

    kind: FormKind
    path: Path


def locate(argument: str) -> tuple[Path, list[Form]]:
    """Return the path that ``argument`` names and the forms found there, best first.

    Raises VocabularyError with what was looked for and what was found.
    """
    path = _cached(argument) if argument.startswith("hub:") else Path(argument)
    if not path.exists():
        near = sorted(p.name for p in path.parent.glob("*")) if path.parent.is_dir() else []
        raise VocabularyError(
            "there is no such file or folder.",
            hint=f"Beside it lie: {', '.join(near[:8]) or 'nothing'}.",
            where=argument,
        )
    if path.is_dir():
        return path, _forms_in(path, argument)
    return path, [Form(_kind_of(path), path)]


def _forms_in(folder: Path, argument: str) -> list[Form]:
    names = sorted(p for p in folder.iterdir() if p.is_file())
    forms = [Form(kind, path) for path in names if (kind := _kind_if_any(path)) is not None]
    if not forms:
        found = ", ".join(path.name for path in names[:12]) or "no file"
        raise VocabularyError(
            f"no vocabulary in this folder: looked for {_LOOKED_FOR}; found {found}.",
            hint=_code_hint(folder)
            or "Name the vocabulary's own file, or the folder that holds it.",
            where=argument,
        )
    return sorted(forms, key=lambda form: PRECEDENCE.index(form.kind))


def _code_hint(folder: Path) -> str:
    config = folder / "tokenizer_config.json"
    if config.is_file() and b'"auto_map"' in config.read_bytes():
        return (
            "Its configuration asks for code of its own, which is never run: export tokenizer.json."
        )
    return ""


def _kind_if_any(path: Path) -> FormKind | None:
    name = path.name
    if name in {"tokenizer.json", "vocab.json", "vocab.txt"}:
        return name  # type: ignore[return-value]
    if path.suffix in {".model", ".tiktoken"} or name == "tekken.json" or ".model." in name:
        return _kind_of(path)
    return None


def _kind_of(path: Path) -> FormKind:
    """Return the form of a file by its content: many a rank file is called `tokenizer.model`."""
    with path.open("rb") as file:
        head = file.read(4096)
    text = head.removeprefix(b"\xef\xbb\xbf").lstrip()
    if text.startswith(b"{"):
        return _json_kind(path)
    if path.suffix == ".txt":
        return "vocab.txt"
    if _looks_like_ranks(head):
        return "ranks"
    if head[:1] == b"\n" or path.suffix in {".model", ".spm"} or ".model." in path.name:
        return "sentencepiece"
    raise VocabularyError(
        f"this file is of no known form: looked for {_LOOKED_FOR}.",
        hint=f"It begins with {head[:12]!r}.",
        where=str(path),
    )


def _json_kind(path: Path) -> FormKind:
    content = path.read_bytes()
    if b'"token_bytes"' in content[:65536]:
        return "json ranks"
    if b'"model"' in content and b'"added_tokens"' in content:
        return "tokenizer.json"
    if path.name == "tokenizer.json":
        return "tokenizer.json"
    return "vocab.json"


def _looks_like_ranks(head: bytes) -> bool:
    parts = head.split(b"\n", 1)[0].split()
    return len(parts) == 2 and parts[1].isdigit()


def _cached(argument: str) -> Path:
    """Return the newest snapshot of ``hub:ORG/NAME`` in the local cache of hub downloads."""
    name = argument.removeprefix("hub:")
    home = os.environ.get("HF_HOME", str(Path.home() / ".cache" / "huggingface"))
    cache = Path(os.environ.get("HF_HUB_CACHE", str(Path(home) / "hub")))
    entry = cache / f"models--{name.replace('/', '--')}"
    reference = entry / "refs" / "main"
    if reference.is_file():
        snapshot = entry / "snapshots" / reference.read_text().strip()
        if snapshot.is_dir():
            return snapshot
    held = sorted(p.name[8:].replace("--", "/") for p in cache.glob("models--*"))
    raise VocabularyError(
        "not in the local cache of hub downloads, and this tool does not go online.",
        hint=f"Looked in {entry}. In the cache: {', '.join(held[:8]) or 'nothing'}. Download it "
        "with your own client, or name a folder.",
        where=argument,
    )
