"""How a corpus is to be read."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Literal

from auditor.errors import SettingsError

Unit = Literal["record", "line", "paragraph", "file"]
Render = Callable[[list[dict[str, Any]]], str]

# Stands in a slice key for a value that is null or not there.
NONE = "(none)"
# The name of the pseudo-field that holds the name of a document's file, unless a field has it.
SOURCE = "source"


@dataclass(frozen=True, slots=True)
class ReadOptions:
    r"""The settings of reading.

    ``text`` names the fields that hold the text, several are joined by ``\n``; empty: found by the
    rules of `resolve_fields`. ``pair`` names the field of the second text, for two-part inputs;
    ``parallel`` the one that says which records hold the same content. ``by``, ``origin`` and
    ``identifier`` name fields; a dot reaches into
    objects (``meta.lang``) where no field has the whole name. ``unit`` is what one document is in
    plain text (see `auditor.corpus.lines`). ``encoding`` is that of whole files, ``None`` is UTF-8.
    A batch holds at most ``batch_documents`` documents and ``batch_bytes`` UTF-8 bytes of text, or
    what the last document adds to it. ``strict``: the first flaw raises CorpusError. ``render``
    makes the text of a conversation; ``None``: the contents joined by ``\n``. The size of batches
    and ``strict`` change no document.
    """

    text: tuple[str, ...] = ()
    by: tuple[str, ...] = ()
    origin: str | None = None
    identifier: str | None = None
    pair: str | None = None
    parallel: str | None = None
    unit: Unit = "record"
    encoding: str | None = None
    batch_bytes: int = 1 << 21
    batch_documents: int = 4096
    strict: bool = False
    render: Render | None = None

    def check(self) -> None:
        """Raise SettingsError for an unknown encoding or a batch that can hold nothing."""
        if self.batch_bytes < 1 or self.batch_documents < 1:
            raise SettingsError("a batch must hold at least one byte and one document.")
        try:
            "".encode(self.encoding or "utf-8")
        except LookupError:
            raise SettingsError(
                f"{self.encoding} is no encoding of text.",
                hint="Name one such as utf-16, cp1252 or shift_jis.",
            ) from None
