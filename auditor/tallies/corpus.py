"""What was read: documents, a digest that does not depend on order, and what was set aside."""

from __future__ import annotations

import hashlib
from collections import Counter
from collections.abc import Iterable
from typing import NamedTuple

from auditor.tallies.base import State, Tally

_DIGEST_BYTES = 16
_FIRST = 20


class FlawPlace(NamedTuple):
    """A flawed record: its source's place in the list of sources, line (-1: unknown), reason."""

    source: int
    line: int
    reason: str
    detail: str


class FlawsTally(Tally):
    """Flawed records by reason, and the first of them in reading order."""

    def __init__(self) -> None:
        self.reasons: Counter[str] = Counter()
        self.first: list[FlawPlace] = []

    @property
    def settings(self) -> State:
        return {"first": _FIRST}

    def add(self, flaws: Iterable[FlawPlace]) -> None:
        """Add flawed records."""
        found = list(flaws)
        self.reasons.update(flaw.reason for flaw in found)
        self.first = sorted([*self.first, *found])[:_FIRST]

    def _add(self, other: FlawsTally) -> None:
        self.reasons.update(other.reasons)
        self.first = sorted([*self.first, *other.first])[:_FIRST]

    def counts(self) -> State:
        return {
            "reasons": dict(sorted(self.reasons.items())),
            "first": [list(f) for f in self.first],
        }

    def fill(self, counts: State) -> None:
        self.reasons.update(counts["reasons"])
        self.first = sorted([*self.first, *(FlawPlace(*flaw) for flaw in counts["first"])])[:_FIRST]


class DigestTally(Tally):
    """The sum of 128-bit record hashes (BLAKE2b), and with ``distinct`` the distinct texts.

    A sum does not depend on order, so that shares merge. Counting distinct texts keeps 16 bytes
    for each: memory then grows with the corpus.
    """

    def __init__(self, *, distinct: bool = False) -> None:
        self._distinct = distinct
        self._sum = 0
        self.seen: set[bytes] = set()

    @property
    def settings(self) -> State:
        return {"distinct": self._distinct}

    def add(self, texts: Iterable[str]) -> None:
        """Add documents by their text."""
        for text in texts:
            hashed = hashlib.blake2b(text.encode(), digest_size=_DIGEST_BYTES).digest()
            self._sum += int.from_bytes(hashed, "big")
            if self._distinct:
                self.seen.add(hashed)
        self._sum %= 1 << (8 * _DIGEST_BYTES)

    @property
    def digest(self) -> str:
        """The sum as hexadecimal digits, named by the hash."""
        return f"blake2b-128-sum:{self._sum:0{2 * _DIGEST_BYTES}x}"

    def _add(self, other: DigestTally) -> None:
        self._sum = (self._sum + other._sum) % (1 << (8 * _DIGEST_BYTES))
        self.seen |= other.seen

    def counts(self) -> State:
        return {"sum": f"{self._sum:x}", "seen": sorted(hashed.hex() for hashed in self.seen)}

    def fill(self, counts: State) -> None:
        self._sum = (self._sum + int(counts["sum"], 16)) % (1 << (8 * _DIGEST_BYTES))
        self.seen |= {bytes.fromhex(text) for text in counts["seen"]}
