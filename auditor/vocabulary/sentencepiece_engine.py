"""SentencePiece models, encoded by the `sentencepiece` library."""

from __future__ import annotations

from itertools import chain

import numpy as np
import regex
import sentencepiece
from sentencepiece import sentencepiece_model_pb2

from auditor.errors import VocabularyError
from auditor.vocabulary.engine import Bools, Encoding, Ints, Inventory, bounds_of, flags

METASPACE = "\u2581"
_BYTE_PIECE = regex.compile(r"<0x[0-9A-F]{2}>")
_NORMAL, _UNKNOWN, _CONTROL, _USER, _UNUSED, _BYTE = 1, 2, 3, 4, 5, 6
FAMILIES = {1: "unigram", 2: "bpe", 3: "words", 4: "characters"}


class SentencePieceEngine:
    """Encodes with `sentencepiece`; ``model`` is the file's content.

    Control pieces are text for this library: no control string is ever found.
    """

    has_decoder = True
    spells_bytes = False
    # The character map is not looked into.
    unaltered: Bools | None = None
    overhead = (0, 0)

    def __init__(self, model: bytes, *, where: str) -> None:
        self._where = where
        self._library = sentencepiece.SentencePieceProcessor()
        try:
            self.proto = sentencepiece_model_pb2.ModelProto.FromString(model)
            self._library.LoadFromSerializedProto(model)
        except Exception as fault:
            raise VocabularyError(
                f"the sentencepiece library cannot open this model ({fault}).",
                hint="The file may be damaged or cut short; fetch it again.",
                where=where,
            ) from fault

    def without_prefix(self) -> SentencePieceEngine:
        """Return the same model without the space that is added before the first word."""
        changed = sentencepiece_model_pb2.ModelProto()
        changed.CopyFrom(self.proto)
        changed.normalizer_spec.add_dummy_prefix = False
        return SentencePieceEngine(changed.SerializeToString(), where=self._where)

    def plain(self) -> SentencePieceEngine:
        """Return the same pieces without whatever alters text before they apply."""
        changed = sentencepiece_model_pb2.ModelProto()
        changed.CopyFrom(self.proto)
        changed.normalizer_spec.add_dummy_prefix = False
        changed.normalizer_spec.remove_extra_whitespaces = False
        changed.normalizer_spec.precompiled_charsmap = b""
        return SentencePieceEngine(changed.SerializeToString(), where=self._where)

    @property
    def family(self) -> str:
        """The family that the model names."""
        return FAMILIES[self.proto.trainer_spec.model_type]

    @property
    def alters(self) -> bool:
        """Whether the model holds a character map."""
        return bool(self.proto.normalizer_spec.precompiled_charsmap)

    def encode(self, texts: list[str]) -> Encoding:
        """Return the tokens of ``texts``."""
        protos = self._library.encode(texts, return_type="proto")
        bounds = bounds_of([len(proto.pieces) for proto in protos])
        triples = ((p.id, p.begin, p.end) for proto in protos for p in proto.pieces)
        flat = np.fromiter(chain.from_iterable(triples), np.int64, 3 * int(bounds[-1])).reshape(
            -1, 3
        )
        starts, ends = (
            _bytes_to_points(texts, flat[:, 1], bounds),
            _bytes_to_points(texts, flat[:, 2], bounds),
        )
        return Encoding(flat[:, 0], starts, ends, bounds)

    def ids_of(self, texts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``texts`` end to end, and the bounds of each text among them."""
        found = self._library.encode(texts)
        bounds = bounds_of([len(ids) for ids in found])
        return np.fromiter(chain.from_iterable(found), np.int64, int(bounds[-1])), bounds

    def decode(self, ids: list[list[int]]) -> list[str]:
        """Return the texts that ``ids`` stand for."""
        return [str(text) for text in self._library.decode(ids)]

    def normalize(self, word: str) -> str:
        """Return what the character map makes of ``word``."""
        return str(self._library.normalize(word))

    def inventory(self) -> Inventory:
        """Return the pieces as tables by id."""
        pieces = self.proto.pieces
        entries: list[str | None] = [piece.piece for piece in pieces]
        size = len(entries)
        byte_ids = [i for i, piece in enumerate(pieces) if piece.type == _BYTE]
        unknown = next((i for i, piece in enumerate(pieces) if piece.type == _UNKNOWN), None)
        return Inventory(
            entries=entries,
            entry_bytes=None,
            marker=METASPACE,
            marker_only=flags(
                size, [i for i, e in enumerate(entries) if e and not e.strip(METASPACE)]
            ),
            stands_for_bytes=flags(size, byte_ids),
            control=flags(size, [i for i, piece in enumerate(pieces) if piece.type == _CONTROL]),
            unknown=unknown,
            unknown_text=None if unknown is None else entries[unknown],
            byte_kind="fallback" if byte_ids else "none",
            lacking=(),
        )


def _bytes_to_points(texts: list[str], offsets: Ints, bounds: Ints) -> Ints:
    """Return UTF-8 offsets within each document as code point offsets within it."""
    joined = np.frombuffer("".join(texts).encode(), dtype=np.uint8)
    begins = np.concatenate(([0], np.cumsum((joined & 0xC0) != 0x80)))
    lengths = bounds_of([len(text.encode()) for text in texts])
    shift = np.repeat(lengths[:-1], np.diff(bounds))
    return np.asarray(begins[offsets + shift] - begins[shift], dtype=np.int64)
