"""Rank files, opened with `tiktoken`."""

from __future__ import annotations

import base64
import json
from collections.abc import Mapping
from pathlib import Path

import tiktoken

from tests.oracle.vocabularies import OracleVocabulary, Reported, is_valid_utf8


class RankVocabulary(OracleVocabulary):
    """Byte sequences and their ranks; special tokens exist as entries, never from the text.

    ``first_id`` is the id of rank 0: some forms put their special tokens before the ranks.
    """

    is_byte_level = True

    def __init__(
        self,
        ranks: Mapping[bytes, int],
        pattern: str,
        special_ids: frozenset[int],
        first_id: int = 0,
    ) -> None:
        self._encoding = tiktoken.Encoding(
            name="oracle", pat_str=pattern, mergeable_ranks=dict(ranks), special_tokens={}
        )
        self._first_id = first_id
        self._bytes_of = {rank + first_id: data for data, rank in ranks.items()}
        self.entries = len(self._bytes_of.keys() | special_ids)
        self.control_ids = special_ids
        self.byte_ids = frozenset(
            number for number, data in self._bytes_of.items() if not is_valid_utf8(data)
        )
        self.missing_bytes = frozenset(b for b in range(256) if bytes([b]) not in ranks)

    def encode(self, text: str, control_strings: str) -> list[Reported]:
        del control_strings  # a rank file's special tokens are treated as text either way
        character_of_byte = [
            position for position, character in enumerate(text) for _ in character.encode("utf-8")
        ]
        tokens = []
        first = 0
        for rank in self._encoding.encode_ordinary(text):
            number = rank + self._first_id
            last = first + len(self._bytes_of[number]) - 1
            tokens.append(Reported(number, character_of_byte[first], character_of_byte[last] + 1))
            first = last + 1
        if first != len(character_of_byte):
            raise AssertionError("the tokens' bytes do not add up to the document's")
        return tokens

    def decode(self, ids: list[int]) -> str:
        return b"".join(self._bytes_of[number] for number in ids).decode("utf-8", "replace")

    def entry(self, token_id: int) -> str:
        return self._bytes_of[token_id].decode("utf-8", "backslashreplace")

    def entry_bytes(self, token_id: int) -> bytes:
        return self._bytes_of[token_id]

    def is_space_marker(self, token_id: int) -> bool:
        """Nothing is ever inserted: each token holds bytes of the document."""
        del token_id
        return False


def open_ranks(
    path: str | Path, pattern: str, special_tokens: Mapping[str, int] | None = None
) -> RankVocabulary:
    """Open a rank file: a line holds the bytes in base64, a space, and the rank."""
    ranks = {}
    for line in Path(path).read_bytes().split(b"\n"):
        if line.strip():
            data, rank = line.split()
            ranks[base64.b64decode(data)] = int(rank)
    return RankVocabulary(ranks, pattern, frozenset((special_tokens or {}).values()))


def open_tekken_json(path: str | Path) -> RankVocabulary:
    """Open the JSON form that holds its own pattern and its special tokens before the ranks.

    As `mistral_common` 1.13.1 reads it (`tokens/tokenizers/tekken.py`): the first
    `default_vocab_size - default_num_special_tokens` ranks are used, the rest is cut off; a
    rank's id is the rank plus the number of special tokens.
    """
    parts = json.loads(Path(path).read_text(encoding="utf-8"))
    special = parts["config"]["default_num_special_tokens"]
    used = parts["config"]["default_vocab_size"] - special
    ranks = {
        base64.b64decode(entry["token_bytes"]): entry["rank"] for entry in parts["vocab"][:used]
    }
    pattern = parts["config"]["pattern"]
    return RankVocabulary(ranks, pattern, frozenset(range(special)), first_id=special)
