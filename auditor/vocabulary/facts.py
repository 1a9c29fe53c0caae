"""The facts of an opened vocabulary that an audit reports, apart from the engine that gave them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from auditor.vocabulary.engine import Bools, Inventory
from auditor.vocabulary.limits import PositionLimit
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.probing import SpaceFacts


@dataclass(frozen=True)
class VocabularyFacts:
    """What does not need the engine any more; cheap to send between processes.

    ``rankable`` has shape (highest id + 1,): entries that are neither control nor byte pieces.
    """

    name: str
    source: str
    digest: str
    family: str
    entries: int
    rankable: Bools
    spaces: SpaceFacts
    overhead: tuple[int, int]
    limit: PositionLimit
    has_decoder: bool
    unknown: dict[str, Any] | None
    byte_pieces: dict[str, Any]
    control: list[str]
    notes: tuple[str, ...]

    @property
    def size(self) -> int:
        """The highest id + 1."""
        return len(self.rankable)

    @property
    def room(self) -> int | None:
        """The tokens that fit beside the template's own, ``None`` without a limit."""
        return None if self.limit.value is None else self.limit.value - self.overhead[0]

    @property
    def lacks(self) -> frozenset[str]:
        """What figures may need and this vocabulary has not."""
        missing = {
            "unknown": self.unknown is None,
            "limit": self.limit.value is None,
            "decoder": not self.has_decoder,
        }
        return frozenset(name for name, absent in missing.items() if absent)


def facts_of(vocabulary: Vocabulary) -> VocabularyFacts:
    """Return the facts of ``vocabulary``."""
    inventory = vocabulary.inventory
    held = np.array([entry is not None for entry in inventory.entries], dtype=np.bool_)
    return VocabularyFacts(
        name=vocabulary.name,
        source=vocabulary.source,
        digest=vocabulary.digest,
        family=vocabulary.family,
        entries=int(held.sum()),
        rankable=held & ~inventory.control & ~inventory.stands_for_bytes,
        spaces=vocabulary.spaces,
        overhead=vocabulary.overhead,
        limit=vocabulary.limit,
        has_decoder=vocabulary.engine.has_decoder,
        unknown=_unknown(inventory),
        byte_pieces=_byte_pieces(inventory),
        control=[inventory.entries[i] or "" for i in np.flatnonzero(inventory.control).tolist()],
        notes=vocabulary.notes,
    )


def _unknown(inventory: Inventory) -> dict[str, Any] | None:
    if inventory.unknown is None:
        return None
    return {"id": inventory.unknown, "entry": inventory.unknown_text}


def _byte_pieces(inventory: Inventory) -> dict[str, Any]:
    """Return how single bytes are written (``fallback``, ``byte-level``, ``none``) and gaps."""
    if inventory.byte_kind == "none":
        return {"kind": "none", "complete": False, "missing": []}
    missing = list(inventory.lacking)
    if inventory.byte_kind == "fallback":
        held = set(inventory.entries)
        missing = [byte for byte in range(256) if f"<0x{byte:02X}>" not in held]
    shown = [f"0x{byte:02X}" for byte in missing]
    return {"kind": inventory.byte_kind, "complete": not missing, "missing": shown}
