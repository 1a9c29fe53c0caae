"""Vocabularies of the `sentencepiece` library."""

from __future__ import annotations

from pathlib import Path

from sentencepiece import SentencePieceProcessor

from tests.oracle.vocabularies import OracleVocabulary, Reported


class SentencePieceVocabulary(OracleVocabulary):
    """A bare model: no template, control strings in the text are text."""

    def __init__(self, path: str | Path) -> None:
        self._processor = SentencePieceProcessor(model_file=str(path))
        self.entries = self._processor.piece_size()
        self.unknown_id = self._processor.unk_id()
        numbers = range(self.entries)
        self.control_ids = frozenset(n for n in numbers if self._processor.is_control(n))
        self.byte_ids = frozenset(n for n in numbers if self._processor.is_byte(n))

    def encode(self, text: str, control_strings: str) -> list[Reported]:
        del control_strings  # this library treats them as text either way
        character_of_byte = _character_of_byte(text)
        tokens = []
        for piece in self._processor.encode(text, return_type="proto").pieces:
            start = character_of_byte[piece.begin]
            is_empty = piece.begin == piece.end
            stop = start if is_empty else character_of_byte[piece.end - 1] + 1
            tokens.append(Reported(piece.id, start, stop))
        return tokens

    def decode(self, ids: list[int]) -> str:
        return self._processor.decode(ids)

    def entry(self, token_id: int) -> str:
        return self._processor.id_to_piece(token_id)

    def entry_bytes(self, token_id: int) -> bytes:
        if token_id in self.byte_ids:
            return bytes([int(self.entry(token_id)[1:-1], 16)])
        return self.entry(token_id).encode("utf-8")

    def normalise(self, word: str) -> str:
        return self._processor.normalize(word)


def open_sentencepiece(path: str | Path) -> SentencePieceVocabulary:
    """Open a SentencePiece model."""
    return SentencePieceVocabulary(path)


def _character_of_byte(text: str) -> list[int]:
    """Return, for each byte of the UTF-8 form and for its end, the code point it belongs to."""
    table = []
    for position, character in enumerate(text):
        table += [position] * len(character.encode("utf-8"))
    return [*table, len(text)]
