"""Vocabularies in the `tokenizer.json` form, encoded by the `tokenizers` library."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from itertools import chain
from typing import Any

import numpy as np
import orjson
import regex
from tokenizers import Tokenizer

from auditor.errors import VocabularyError
from auditor.text import properties
from auditor.vocabulary import bytelevel
from auditor.vocabulary.engine import (
    Bools,
    Encoding,
    Ints,
    Inventory,
    bounds_of,
    flags,
    interleaved,
)
from auditor.vocabulary.spelling import Spelling
from auditor.vocabulary.steps import METASPACE, rejoined, steps_of

# Texts → the ids of their tokens end to end, and the bounds of each text among them.
Tokens = Callable[[list[str]], tuple[Ints, Ints]]

# Characters that Unicode's composed form leaves as they are, whatever stands beside them (UAX #15,
# section 9): what is settled of an assigned character stays so in later versions.
_COMPOSED = r"(?V1)[\p{NFC_QC=Y}&&\p{ccc=0}&&\P{Cn}]"
_ASCII = r"\p{ASCII}"
_SPLITTERS = frozenset({"ByteLevel", "Split", "Digits", "Punctuation"})
_BYTE_PIECE = regex.compile(r"<0x[0-9A-F]{2}>")


class TokenizersEngine:
    """Encodes with `tokenizers`; ``description`` is the parsed `tokenizer.json`.

    Truncation, padding and dropout are switched off, and the post-processor is taken away once its
    overhead is known: it would add the template's tokens and may trim spaces off the spans.
    """

    def __init__(self, description: dict[str, Any], *, control_strings: str, where: str) -> None:
        # Entries and merges live in the library; a second copy of them would double the memory.
        self.description = _without_entries(description)
        self._control_strings = control_strings
        self._where = where
        self._library = _load(_for_measuring(description), where)
        self.overhead = (
            self._library.num_special_tokens_to_add(False),  # noqa: FBT003 - the library's own order
            self._library.num_special_tokens_to_add(True),  # noqa: FBT003
        )
        self._library.post_processor = None
        self._library.encode_special_tokens = control_strings == "text"
        self._normalizer = _word_normalizer(description, where)

    def changed(self, part: str, step: dict[str, Any] | None) -> TokenizersEngine:
        """Return the same vocabulary with ``step`` for ``part``, and without its template."""
        description = orjson.loads(self._library.to_str())
        return TokenizersEngine(
            {**description, part: step},
            control_strings=self._control_strings,
            where=self._where,
        )

    @property
    def model_alone(self) -> Any:  # noqa: ANN401 - untyped there
        """The model without what alters or splits a text before it."""
        return self._library.model

    @property
    def has_decoder(self) -> bool:
        """Whether the file names a decoder."""
        return self._library.decoder is not None

    @property
    def alters(self) -> bool:
        """Whether the file names a normaliser that is more than a spelling."""
        return self._normalizer is not None

    @property
    def spells_bytes(self) -> bool:
        """Whether the decoder is the byte-level one alone."""
        return [step["type"] for step in steps_of(self.description, "decoder")] == ["ByteLevel"]

    def encode(self, texts: list[str], tokens: Tokens | None = None) -> Encoding:
        """Return the tokens of ``texts``.

        Where tokens spell a text that no normaliser alters, byte by byte, spans follow from that;
        else the library is asked for them, which costs it as much again as the tokens. The ids of
        such texts are asked of ``tokens`` when it is given.
        """
        chosen = self._may_be_spelled(texts)
        if not chosen.any():
            return self.encode_with_offsets(texts)
        likely = _picked(texts, chosen)
        ids, bounds = (tokens or self.ids_of)(likely)
        spelled = self.spelling.spells(ids, bounds, likely)
        if not spelled.all():
            lengths = np.diff(bounds)
            ids, bounds = ids[np.repeat(spelled, lengths)], bounds_of(lengths[spelled])
            chosen[chosen] = spelled
        found = self.spelling.encoding(ids, bounds, _picked(texts, chosen))
        if chosen.all():
            return found
        others = self.encode_with_offsets(_picked(texts, ~chosen))
        parts = [(np.flatnonzero(chosen), found), (np.flatnonzero(~chosen), others)]
        return interleaved(len(texts), parts)

    def ids_of(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``texts`` end to end, and the bounds of each text among them."""
        found = [
            encoding.ids
            for encoding in self._library.encode_batch_fast(texts, add_special_tokens=False)
        ]
        bounds = bounds_of([len(ids) for ids in found])
        return np.fromiter(chain.from_iterable(found), np.int64, int(bounds[-1])), bounds

    def unaltered_tokens(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return what ``ids_of`` does for texts that the normaliser leaves alone, sooner."""
        normalizer = self._library.normalizer
        self._library.normalizer = None
        try:
            return self.ids_of(texts)
        finally:
            self._library.normalizer = normalizer

    def _may_be_spelled(self, texts: list[str]) -> Bools:
        """Return which texts the normaliser leaves alone, none where tokens never spell."""
        unaltered = self.unaltered
        if unaltered is None or not self.splits_bytes:
            return np.zeros(len(texts), dtype=np.bool_)
        joined = "".join(texts)
        if joined.isascii():
            return np.ones(len(texts), dtype=np.bool_)
        altered = ~unaltered[np.frombuffer(joined.encode("utf-32-le"), dtype=np.uint32)]
        bounds = bounds_of([len(text) for text in texts])
        before = np.concatenate(([0], np.cumsum(altered)))[bounds]
        return np.asarray(before[1:] == before[:-1])

    @cached_property
    def unaltered(self) -> Bools | None:
        """Which characters the normaliser leaves alone, whatever stands beside them."""
        steps = {step["type"] for step in steps_of(self.description, "normalizer")} - {"ByteLevel"}
        if not steps:
            return np.ones(properties.CODE_POINTS, dtype=np.bool_)
        if not steps <= {"NFC", "NFD", "NFKC", "NFKD"}:
            return None
        return properties.table(_COMPOSED if steps == {"NFC"} else _ASCII)

    @cached_property
    def splits_bytes(self) -> bool:
        """Whether nothing but bytes, patterns and merges decides on the tokens."""
        model = self.description["model"]
        splitters = steps_of(self.description, "pre_tokenizer")
        return (
            self._is_byte_level()
            and model["type"] == "BPE"
            and all(model.get(name) is None for name in ("unk_token", "dropout"))
            and not any(model.get(n) for n in ("continuing_subword_prefix", "end_of_word_suffix"))
            and all(step["type"] in _SPLITTERS for step in splitters)
            and not any(s.get("add_prefix_space") for s in splitters if s["type"] == "ByteLevel")
        )

    @cached_property
    def spelling(self) -> Spelling:
        """The entries as bytes."""
        return Spelling.of(self._inventory.entry_bytes or [])

    def encode_with_offsets(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts`` with the spans that the library reports."""
        found = self._library.encode_batch(texts, add_special_tokens=False)
        bounds = bounds_of([len(encoding) for encoding in found])
        count = int(bounds[-1])
        ids = np.fromiter(chain.from_iterable(e.ids for e in found), np.int64, count)
        pairs = chain.from_iterable(chain.from_iterable(e.offsets for e in found))
        offsets = np.fromiter(pairs, np.int64, 2 * count).reshape(-1, 2)
        return Encoding(ids, offsets[:, 0], offsets[:, 1], bounds)

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return list(self._library.decode_batch(ids, skip_special_tokens=False))

    def normalize(self, word: str) -> str:
        """Return what the normaliser makes of ``word``."""
        return word if self._normalizer is None else str(self._normalizer.normalize_str(word))

    def inventory(self) -> Inventory:
        """Return the entries as tables by id."""
        return self._inventory

    @cached_property
    def _inventory(self) -> Inventory:
        by_entry: dict[str, int] = self._library.get_vocab(with_added_tokens=True)
        size = max(by_entry.values(), default=-1) + 1
        entries: list[str | None] = [None] * size
        for entry, number in by_entry.items():
            entries[number] = entry
        added = self.description.get("added_tokens") or []
        literal = {by_entry[token["content"]] for token in added if token["content"] in by_entry}
        control = [
            by_entry[t["content"]] for t in added if t["special"] and t["content"] in by_entry
        ]
        spelled = _spelled_bytes(entries, literal) if self._is_byte_level() else None
        unknown = self._unknown(by_entry)
        marker = bytelevel.SPACE if spelled is not None else METASPACE
        return Inventory(
            entries=entries,
            entry_bytes=spelled,
            marker=marker,
            marker_only=flags(
                size, [i for i, e in enumerate(entries) if e and not e.strip(marker)]
            ),
            stands_for_bytes=flags(size, self._byte_ids(entries, spelled)),
            control=flags(size, control),
            unknown=unknown,
            unknown_text=None if unknown is None else entries[unknown],
            byte_kind=self._byte_kind(),
            lacking=_lacking(by_entry) if spelled is not None else (),
        )

    def _is_byte_level(self) -> bool:
        steps = [
            *steps_of(self.description, "pre_tokenizer"),
            *steps_of(self.description, "normalizer"),
        ]
        return any(step["type"] == "ByteLevel" for step in steps)

    def _byte_kind(self) -> str:
        if self._is_byte_level():
            return "byte-level"
        return "fallback" if self.description["model"].get("byte_fallback") else "none"

    def _byte_ids(self, entries: list[str | None], spelled: list[bytes | None] | None) -> list[int]:
        if spelled is not None:
            return [
                i for i, b in enumerate(spelled) if b is not None and not bytelevel.is_whole_text(b)
            ]
        if self._byte_kind() == "none":
            return []
        return [i for i, entry in enumerate(entries) if entry and _BYTE_PIECE.fullmatch(entry)]

    def _unknown(self, by_entry: dict[str, int]) -> int | None:
        model = self.description["model"]
        if model["type"] == "Unigram":
            unknown = model.get("unk_id")
            return None if unknown is None else int(unknown)
        return by_entry.get(model.get("unk_token") or "")


def _picked(texts: list[str], chosen: Bools) -> list[str]:
    if chosen.all():
        return texts
    return [texts[place] for place in np.flatnonzero(chosen).tolist()]


def _without_entries(description: dict[str, Any]) -> dict[str, Any]:
    left = {k: v for k, v in description["model"].items() if k not in {"vocab", "merges"}}
    return {**description, "model": left}


def _for_measuring(description: dict[str, Any]) -> dict[str, Any]:
    changed = {**description, "truncation": None, "padding": None}
    changed["model"] = dict(description["model"])
    if changed["model"].get("dropout") is not None:
        changed["model"]["dropout"] = None
    steps = [
        {**s, **({"cleanup": False} if "cleanup" in s else {})}
        for s in steps_of(description, "decoder")
    ]
    changed["decoder"] = rejoined(steps, "decoders")
    return changed


def _load(description: dict[str, Any], where: str) -> Tokenizer:
    try:
        return Tokenizer.from_str(orjson.dumps(description).decode())
    except Exception as fault:
        raise VocabularyError(
            f"the tokenizers library cannot open this vocabulary ({fault}).",
            hint="It may have been written by another version of the library, or be damaged; "
            "save it again with the version named by `auditor --version`.",
            where=where,
        ) from fault


def _word_normalizer(description: dict[str, Any], where: str) -> Any:  # noqa: ANN401 - untyped there
    """Return the normaliser without its byte-level step, which spells and does not alter."""
    steps = [step for step in steps_of(description, "normalizer") if step["type"] != "ByteLevel"]
    if not steps:
        return None
    model = {"type": "WordLevel", "vocab": {"?": 0}, "unk_token": "?"}
    return _load({"model": model, "normalizer": rejoined(steps, "normalizers")}, where).normalizer


def _spelled_bytes(entries: list[str | None], literal: set[int]) -> list[bytes | None]:
    spelled = [None if entry is None else bytelevel.bytes_of(entry) for entry in entries]
    for number in literal:
        spelled[number] = (entries[number] or "").encode()
    return spelled


def _lacking(by_entry: dict[str, int]) -> tuple[int, ...]:
    return tuple(
        b for b, character in bytelevel.CHARACTER_OF_BYTE.items() if character not in by_entry
    )
