"""What the oracle asks of a vocabulary, whichever library opens it."""

from __future__ import annotations

from abc import ABC, abstractmethod
from typing import NamedTuple

SPACE_MARKER = "▁"
BYTE_LEVEL_SPACE_MARKER = "Ġ"


class Reported(NamedTuple):
    """A token as its library reports it: the id and a range of code points of the document."""

    id: int
    start: int
    stop: int


class OracleVocabulary(ABC):
    """An opened vocabulary; one document at a time, never a cache, never a batch."""

    entries: int
    overhead: int = 0
    unknown_id: int | None = None
    control_ids: frozenset[int] = frozenset()
    byte_ids: frozenset[int] = frozenset()  # ids that stand for bytes, not for whole characters
    missing_bytes: frozenset[int] = frozenset()  # byte-level only: no entry is that byte alone
    is_byte_level: bool = False
    parses_control_strings: bool = False  # whether its library turns them into control tokens
    has_decoder: bool = True

    @abstractmethod
    def encode(self, text: str, control_strings: str) -> list[Reported]:
        """Encode one text; ``control_strings`` is "parse" or "text"."""

    @abstractmethod
    def decode(self, ids: list[int]) -> str:
        """Decode with control tokens kept and any cleaning up off."""

    @abstractmethod
    def entry(self, token_id: int) -> str:
        """Return the entry in the spelling of its vocabulary."""

    @abstractmethod
    def entry_bytes(self, token_id: int) -> bytes:
        """Return the bytes of the text that the entry stands for."""

    def normalise(self, word: str) -> str:
        """Return what the vocabulary's normaliser makes of a word that stands alone."""
        return word

    def is_space_marker(self, token_id: int) -> bool:
        """Tell whether the entry is nothing but space markers."""
        markers = {SPACE_MARKER}
        if self.is_byte_level:
            markers.add(BYTE_LEVEL_SPACE_MARKER)
        entry = self.entry(token_id)
        return entry != "" and set(entry) <= markers


def is_valid_utf8(data: bytes) -> bool:
    try:
        data.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return True
