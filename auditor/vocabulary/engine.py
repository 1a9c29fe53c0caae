"""What every engine offers, whatever library stands behind it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
import numpy.typing as npt

Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Encoding:
    """Tokens of several documents, as the library reports them.

    ``ids``, ``starts`` and ``ends`` have shape (tokens,); starts and ends are code points counted
    from the start of the token's own document. Tokens ``bounds[i]`` up to ``bounds[i + 1]`` belong
    to document ``i``. ``exact`` says that the bytes of the tokens, in order, are the bytes of the
    documents, and that each span is every character its token holds a byte of.
    """

    ids: Ints
    starts: Ints
    ends: Ints
    bounds: Ints
    exact: bool = False

    def ids_by_document(self) -> list[list[int]]:
        """Return the ids of each document."""
        flat, bounds = self.ids.tolist(), self.bounds.tolist()
        return [flat[bounds[i] : bounds[i + 1]] for i in range(len(bounds) - 1)]


class Engine(Protocol):
    """A library that encodes with one opened vocabulary: untruncated, unpadded, no template."""

    @property
    def has_decoder(self) -> bool:
        """Whether ids can be turned back into text by rules of the vocabulary's own."""

    @property
    def alters(self) -> bool:
        """Whether there is a normaliser that may alter words."""

    @property
    def unaltered(self) -> Bools | None:
        """Which characters the normaliser leaves alone whatever stands beside them, by code point.

        ``None`` where that is not known.
        """

    @property
    def spells_bytes(self) -> bool:
        """Whether decoding is nothing but joining the bytes of the entries."""

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``. May raise whatever the library raises."""

    def ids_of(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``texts`` end to end, and the bounds of each text among them."""

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for, control tokens kept, clean-up off."""

    def normalize(self, word: str) -> str:
        """Return what the normaliser makes of ``word`` when it stands alone."""


@dataclass(frozen=True, slots=True)
class Inventory:
    """The entries of a vocabulary, as look-up tables by id.

    All tables have shape (highest id + 1,). ``entry_bytes`` holds the bytes an entry stands for in
    byte-level vocabularies and rank files, else ``None``; ``lacking`` the byte values for which
    there is no entry of one byte (only in those). ``marker`` is the character that stands for a
    space, or empty.
    """

    entries: list[str | None]
    entry_bytes: list[bytes | None] | None
    marker: str
    marker_only: Bools
    stands_for_bytes: Bools
    control: Bools
    unknown: int | None
    unknown_text: str | None
    byte_kind: str
    lacking: tuple[int, ...]


def interleaved(count: int, parts: list[tuple[Ints, Encoding]]) -> Encoding:
    """Return one encoding of ``count`` documents from those of some, given with their places."""
    places = np.concatenate([own for own, _ in parts])
    lengths = np.concatenate([np.diff(part.bounds) for _, part in parts])
    document = np.repeat(places, lengths)
    order = np.argsort(document, kind="stable")
    ids, starts, ends = (
        np.concatenate([getattr(part, name) for _, part in parts])[order]
        for name in ("ids", "starts", "ends")
    )
    bounds = bounds_of(np.bincount(document, minlength=count))
    return Encoding(ids, starts, ends, bounds, all(part.exact for _, part in parts))


def flags(size: int, ids: list[int]) -> Bools:
    """Return a table of ``size`` booleans, true at ``ids``."""
    found = np.zeros(size, dtype=np.bool_)
    found[ids] = True
    return found


def bounds_of(lengths: list[int] | Ints) -> Ints:
    """Return the running sum of ``lengths`` with a leading zero."""
    bounds = np.zeros(len(lengths) + 1, dtype=np.int64)
    np.cumsum(lengths, out=bounds[1:])
    return bounds
