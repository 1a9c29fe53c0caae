"""Rank files (bytes and their rank), encoded by the `tiktoken` library."""

from __future__ import annotations

import base64
import binascii

import numpy as np
import orjson
import tiktoken

from auditor.errors import VocabularyError
from auditor.vocabulary import bytelevel
from auditor.vocabulary.engine import Bools, Encoding, Ints, Inventory, bounds_of, flags


class RanksEngine:
    """Encodes with `tiktoken`: ``pattern`` splits the text, ``ranks`` merge the bytes of a part.

    Control strings are text; a rank file has no template and no unknown entry.
    """

    has_decoder = True
    alters = False
    unaltered: Bools | None = None
    spells_bytes = True
    overhead = (0, 0)
    family = "ranks"

    def __init__(
        self, ranks: dict[bytes, int], pattern: str, *, special: dict[str, int], where: str
    ) -> None:
        self.pattern = pattern
        self._ranks = ranks
        self._special = special
        lacking = [byte for byte in range(256) if bytes([byte]) not in ranks]
        if lacking:
            raise VocabularyError(
                f"{len(lacking)} of the 256 single bytes have no rank (first: 0x{lacking[0]:02X}).",
                hint="The engine cannot encode text that holds them; the file is cut or damaged.",
                where=where,
            )
        try:
            self._library = tiktoken.Encoding(
                "ranks", pat_str=pattern, mergeable_ranks=ranks, special_tokens=special
            )
        except Exception as fault:
            raise VocabularyError(
                f"the tiktoken library refuses this pattern or these ranks ({fault}).",
                hint="Check the file named by --pattern: one regular expression.",
                where=where,
            ) from fault
        self._lengths = np.zeros(max(ranks.values()) + 1, dtype=np.int64)
        for spelled, rank in ranks.items():
            self._lengths[rank] = len(spelled)

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``; a span is every character a token holds a byte of."""
        found = self._library.encode_ordinary_batch(texts)
        bounds = bounds_of([len(ids) for ids in found])
        ids = np.fromiter((i for document in found for i in document), np.int64, int(bounds[-1]))
        ends = np.cumsum(self._lengths[ids])
        joined = np.frombuffer("".join(texts).encode(), dtype=np.uint8)
        if (int(ends[-1]) if len(ends) else 0) != len(joined):
            raise VocabularyError("the bytes of the tokens are not the bytes of the text.")
        character = np.cumsum((joined & 0xC0) != 0x80) - 1
        shift = np.repeat(bounds_of([len(text) for text in texts])[:-1], np.diff(bounds))
        starts = character[ends - self._lengths[ids]] - shift
        return Encoding(ids, starts, character[ends - 1] + 1 - shift, bounds)

    def ids_of(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``texts`` end to end, and the bounds of each text among them."""
        found = self._library.encode_ordinary_batch(texts)
        bounds = bounds_of([len(ids) for ids in found])
        return np.fromiter((i for own in found for i in own), np.int64, int(bounds[-1])), bounds

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return list(self._library.decode_batch(ids))

    def normalize(self, word: str) -> str:
        """Return ``word``: rank files have no normaliser."""
        return word

    def inventory(self) -> Inventory:
        """Return the entries as tables by id."""
        size = max([*self._ranks.values(), *self._special.values()]) + 1
        entries: list[str | None] = [None] * size
        spelled: list[bytes | None] = [None] * size
        for entry, rank in self._ranks.items():
            spelled[rank] = entry
            entries[rank] = "".join(bytelevel.CHARACTER_OF_BYTE[byte] for byte in entry)
        for text, number in self._special.items():
            entries[number], spelled[number] = text, text.encode()
        partial = [r for entry, r in self._ranks.items() if not bytelevel.is_whole_text(entry)]
        return Inventory(
            entries=entries,
            entry_bytes=spelled,
            marker=bytelevel.SPACE,
            marker_only=flags(
                size, [r for entry, r in self._ranks.items() if not entry.strip(b" ")]
            ),
            stands_for_bytes=flags(size, partial),
            control=flags(size, list(self._special.values())),
            unknown=None,
            unknown_text=None,
            byte_kind="byte-level",
            lacking=(),
        )


def parse_ranks(content: bytes, where: str) -> dict[bytes, int]:
    """Return bytes and ranks of a rank file; raises VocabularyError with the line that is off."""
    ranks: dict[bytes, int] = {}
    for number, line in enumerate(content.split(b"\n"), start=1):
        if not line.strip():
            continue
        try:
            spelled, rank = line.split()
            ranks[base64.b64decode(spelled, validate=True)] = int(rank)
        except (ValueError, binascii.Error) as fault:
            raise VocabularyError(
                "not a line of the form `base64 rank`.",
                hint="A rank file holds one entry a line; the file may be cut or of another form.",
                where=f"{where}:{number}",
            ) from fault
    return ranks


def parse_json_ranks(content: bytes, where: str) -> tuple[dict[bytes, int], str, dict[str, int]]:
    """Return ranks, pattern and special tokens of the JSON form that holds its own pattern.

    Only the entries that its configuration counts are kept: ``default_vocab_size`` less
    ``default_num_special_tokens`` of the lowest rank; special tokens take the ids after them.
    """
    try:
        data = orjson.loads(content)
        config = data["config"]
        kept = config["default_vocab_size"] - config["default_num_special_tokens"]
        rows = [row for row in data["vocab"] if row["rank"] < kept]
        ranks = {base64.b64decode(row["token_bytes"]): int(row["rank"]) for row in rows}
        named = [row["token_str"] for row in data.get("special_tokens") or []]
        count = config["default_num_special_tokens"]
        names = [*named[:count], *(f"<special-{i}>" for i in range(len(named), count))]
        return ranks, str(config["pattern"]), {n: kept + i for i, n in enumerate(names)}
    except (KeyError, TypeError, ValueError) as fault:
        raise VocabularyError(
            f"a rank file in JSON form lacks what it should hold ({fault!r}).",
            hint="It needs `config` (pattern, sizes) and `vocab` (rank, token_bytes).",
            where=where,
        ) from fault
