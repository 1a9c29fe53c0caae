"""Vocabularies of the `tokenizers` library."""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from tokenizers import Tokenizer

from tests.oracle.vocabularies import OracleVocabulary, Reported, is_valid_utf8

Json = dict[str, Any]


def byte_of_character() -> dict[str, int]:
    """Return the byte-level alphabet (Radford et al. 2019, `bytes_to_unicode`), inverted.

    Printable Latin-1 stands for itself; the other 68 bytes follow from U+0100 in order.
    """
    themselves = [*range(0x21, 0x7F), *range(0xA1, 0xAD), *range(0xAE, 0x100)]
    others = [byte for byte in range(256) if byte not in themselves]
    table = {chr(byte): byte for byte in themselves}
    table.update({chr(0x100 + number): byte for number, byte in enumerate(others)})
    return table


BYTE_OF_CHARACTER = byte_of_character()


class TokenizersVocabulary(OracleVocabulary):
    """Truncation, padding, dropout, template and the decoder's clean-up are switched off."""

    parses_control_strings = True

    def __init__(self, description: str) -> None:
        self._template = Tokenizer.from_str(description)
        self.overhead = self._template.num_special_tokens_to_add(is_pair=False)
        parts: Json = json.loads(description)
        self._tokenizer = Tokenizer.from_str(json.dumps(_bare(parts)))
        self._normaliser = _normaliser_without_spelling(parts.get("normalizer"))
        self._ids = self._tokenizer.get_vocab(with_added_tokens=True)
        self._entry_of = {number: entry for entry, number in self._ids.items()}
        added = self._tokenizer.get_added_tokens_decoder()
        self._added_content = {number: token.content for number, token in added.items()}
        self.entries = len(self._entry_of)
        self.control_ids = frozenset(number for number, token in added.items() if token.special)
        self.unknown_id = _unknown_id(parts["model"], self._ids)
        self.has_decoder = parts.get("decoder") is not None
        self.is_byte_level = any(
            step["type"] == "ByteLevel"
            for name in ("normalizer", "pre_tokenizer")
            for step in _steps(parts.get(name))
        )
        self.byte_ids = self._find_byte_ids(parts["model"])
        self.missing_bytes = self._find_missing_bytes()

    def encode(self, text: str, control_strings: str) -> list[Reported]:
        self._tokenizer.encode_special_tokens = control_strings == "text"
        encoding = self._tokenizer.encode(text, add_special_tokens=False)
        return [
            Reported(number, start, stop)
            for number, (start, stop) in zip(encoding.ids, encoding.offsets, strict=True)
        ]

    def decode(self, ids: list[int]) -> str:
        return self._tokenizer.decode(ids, skip_special_tokens=False)

    def entry(self, token_id: int) -> str:
        return self._entry_of[token_id]

    def entry_bytes(self, token_id: int) -> bytes:
        entry = self._entry_of[token_id]
        is_spelled = self.is_byte_level and token_id not in self._added_content
        if is_spelled and all(character in BYTE_OF_CHARACTER for character in entry):
            return bytes(BYTE_OF_CHARACTER[character] for character in entry)
        return entry.encode("utf-8")

    def normalise(self, word: str) -> str:
        return word if self._normaliser is None else self._normaliser.normalize_str(word)

    def _find_byte_ids(self, model: Json) -> frozenset[int]:
        found = set()
        if self.is_byte_level:
            found |= {
                number for number in self._entry_of if not is_valid_utf8(self.entry_bytes(number))
            }
        if model.get("byte_fallback"):
            pieces = [f"<0x{byte:02X}>" for byte in range(256)]
            found |= {self._ids[piece] for piece in pieces if piece in self._ids}
        return frozenset(found)

    def _find_missing_bytes(self) -> frozenset[int]:
        if not self.is_byte_level:
            return frozenset()
        supplied = {self.entry_bytes(number) for number in self._entry_of}
        return frozenset(byte for byte in range(256) if bytes([byte]) not in supplied)


def open_tokenizers(path_or_json: str | Path) -> TokenizersVocabulary:
    """Open a `tokenizer.json`, given as a path or as its text."""
    text = str(path_or_json)
    if not text.lstrip().startswith("{"):
        text = Path(path_or_json).read_text(encoding="utf-8")
    return TokenizersVocabulary(text)


def _bare(parts: Json) -> Json:
    """Return the description without whatever cuts, fills, adds, cleans up or is left to chance."""
    bare = json.loads(json.dumps(parts))
    bare["truncation"] = None
    bare["padding"] = None
    bare["post_processor"] = None
    if "dropout" in bare["model"]:
        bare["model"]["dropout"] = None
    for step in _steps(bare.get("decoder")):
        if "cleanup" in step:
            step["cleanup"] = False
    return bare


def _steps(part: Json | None) -> Iterator[Json]:
    """Give the steps of a normaliser, pre-tokeniser or decoder, sequences taken apart."""
    if part is None:
        return
    if part["type"] != "Sequence":
        yield part
        return
    for name in ("normalizers", "pretokenizers", "decoders"):
        for step in part.get(name, []):
            yield from _steps(step)


def _normaliser_without_spelling(part: Json | None) -> Any:
    """Return the normaliser without its byte-level step, which spells and alters nothing."""
    steps = [step for step in _steps(part) if step["type"] != "ByteLevel"]
    if not steps:
        return None
    carrier = {
        "version": "1.0",
        "added_tokens": [],
        "normalizer": {"type": "Sequence", "normalizers": steps},
        "model": {"type": "WordLevel", "vocab": {"?": 0}, "unk_token": "?"},
    }
    return Tokenizer.from_str(json.dumps(carrier)).normalizer


def _unknown_id(model: Json, ids: dict[str, int]) -> int | None:
    if "unk_id" in model:  # Unigram names it by number, the other models by content
        return model["unk_id"]
    content = model.get("unk_token")
    return None if content is None else ids.get(content)
