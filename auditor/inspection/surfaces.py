"""What each entry of a vocabulary stands for in a text, and what kind of entry it is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import regex

from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.sentencepiece_engine import SentencePieceEngine
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# In this order; the first that holds is the kind of an entry.
KINDS = (
    "unused", "control", "added", "byte piece", "part of a character", "whitespace", "digits",
    "punctuation", "word start", "continuation",
)  # fmt: skip
# Kinds that are no text by themselves.
TEXTLESS = frozenset({"unused", "control", "byte piece", "part of a character"})
# Kinds that are no text by themselves.
TEXTLESS = frozenset({"unused", "control", "byte piece", "part of a character"})
_UNUSED = regex.compile(
    r"[\[<|_]+(?:unused|reserved|extra_id|special|pad_token|dummy)[\w ]*[\]>|_]*", regex.IGNORECASE
)
_PLAIN_UNUSED = regex.compile(r"(?:unused|reserved)[-_ ]?\w*\d+", regex.IGNORECASE)
_BYTE_PIECE = regex.compile(r"<0x[0-9A-F]{2}>")
_WHITESPACE = regex.compile(r"\p{White_Space}+")
_DIGITS = regex.compile(r"\p{N}+")
_INK_ONLY = regex.compile(r"[\p{P}\p{S}\p{M}\p{C}]+")


@dataclass(frozen=True, slots=True)
class Surface:
    """One entry: its id, how the file writes it, and the text that it stands for.

    ``text`` is ``None`` for what is no text by itself: byte pieces and parts of characters.
    ``starts`` says that it begins a word (a space stands before it, or its file writes what goes on
    otherwise), ``ends`` that it ends one where the file marks ends.
    """

    number: int
    entry: str
    text: str | None
    kind: str
    starts: bool
    ends: bool


def surfaces_of(vocabulary: Vocabulary) -> list[Surface]:
    """Return every entry of ``vocabulary``, in the order of ids."""
    spelling = _Spelling.of(vocabulary)
    found = []
    for number, entry in enumerate(vocabulary.inventory.entries):
        if entry is not None:
            found.append(spelling.surface(number, entry))
    return found


def model_of(vocabulary: Vocabulary) -> dict[str, Any]:
    """Return the settings of the model in a `tokenizer.json`; empty for other forms."""
    engine = vocabulary.engine
    return dict(engine.description["model"]) if isinstance(engine, TokenizersEngine) else {}


def added_of(vocabulary: Vocabulary) -> dict[int, bool]:
    """Return the ids of added tokens, each with whether it matches whole words only."""
    engine, entries = vocabulary.engine, vocabulary.inventory.entries
    if isinstance(engine, TokenizersEngine):
        numbers = {entry: n for n, entry in enumerate(entries) if entry is not None}
        added = engine.description.get("added_tokens") or []
        return {numbers[t["content"]]: bool(t.get("single_word")) for t in added
                if t["content"] in numbers}  # fmt: skip
    if isinstance(engine, SentencePieceEngine):
        return {n: False for n, piece in enumerate(engine.proto.pieces) if piece.type == 4}
    return {}


@dataclass(frozen=True)
class _Spelling:
    vocabulary: Vocabulary
    prefix: str
    suffix: str
    added: dict[int, bool]

    @classmethod
    def of(cls, vocabulary: Vocabulary) -> _Spelling:
        model = model_of(vocabulary)
        return cls(
            vocabulary,
            model.get("continuing_subword_prefix") or "",
            model.get("end_of_word_suffix") or "",
            added_of(vocabulary),
        )

    def surface(self, number: int, entry: str) -> Surface:
        inventory = self.vocabulary.inventory
        control = bool(inventory.control[number]) or number == inventory.unknown
        literal = control or number in self.added
        text, starts, ends = (entry, False, False) if literal else self._text(number, entry)
        kind = self._kind(number, entry, text, starts=starts, control=control)
        return Surface(number, entry, text, kind, starts, ends)

    def _text(self, number: int, entry: str) -> tuple[str | None, bool, bool]:
        inventory = self.vocabulary.inventory
        if inventory.entry_bytes is not None:
            spelled = inventory.entry_bytes[number]
            if spelled is None or inventory.stands_for_bytes[number]:
                return None, False, False
            text = spelled.decode()
            return text, text[:1] == " ", False
        if inventory.stands_for_bytes[number]:
            return None, False, False
        if self.prefix:
            begins = not entry.startswith(self.prefix)
            return entry.removeprefix(self.prefix), begins, False
        if self.suffix:
            return entry.removesuffix(self.suffix), False, entry.endswith(self.suffix)
        marked = bool(inventory.marker) and entry.startswith(inventory.marker)
        text = entry.replace(inventory.marker, " ") if inventory.marker else entry
        return text, marked, False

    def _kind(
        self, number: int, entry: str, text: str | None, *, starts: bool, control: bool
    ) -> str:
        bare = entry.strip()
        if _UNUSED.fullmatch(bare) or _PLAIN_UNUSED.fullmatch(bare):
            return "unused"
        if control:
            return "control"
        if number in self.added:
            return "added"
        spelled = self.vocabulary.inventory.entry_bytes
        if text is None:
            single = len(spelled[number] or b"") == 1 if spelled else _BYTE_PIECE.fullmatch(entry)
            return "byte piece" if single else "part of a character"
        ink = text.strip()
        if not ink:
            return "whitespace"
        if _DIGITS.fullmatch(ink):
            return "digits"
        if _INK_ONLY.fullmatch(ink):
            return "punctuation"
        return "word start" if starts else "continuation"
