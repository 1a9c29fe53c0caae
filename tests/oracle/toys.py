"""Toy vocabularies, small enough for every figure to be worked out by hand."""

from __future__ import annotations

import base64
import json
from pathlib import Path
from typing import Any

from sentencepiece import sentencepiece_model_pb2

from tests.oracle.vocabularies import OracleVocabulary
from tests.oracle.with_ranks import open_ranks
from tests.oracle.with_sentencepiece import open_sentencepiece
from tests.oracle.with_tokenizers import BYTE_OF_CHARACTER, open_tokenizers

BERT_TEMPLATE = {"type": "BertProcessing", "sep": ["[SEP]", 2], "cls": ["[CLS]", 1]}
NORMAL, UNKNOWN, BYTE = 1, 2, 6


def tokenizers_json(model: dict[str, Any], special: tuple[str, ...] = (), **parts: object) -> str:
    """Return a `tokenizer.json` with these parts; ``special`` are entries of the model."""
    added = [
        {
            "id": model["vocab"][content],
            "content": content,
            "single_word": False,
            "lstrip": False,
            "rstrip": False,
            "normalized": False,
            "special": True,
        }
        for content in special
    ]
    return json.dumps({"version": "1.0", "added_tokens": added, "model": model, **parts})


def wordpiece(*entries: str, **parts: object) -> OracleVocabulary:
    """[UNK], [CLS] and [SEP] are ids 0, 1 and 2 and special; two of them are the template's."""
    vocab = {entry: number for number, entry in enumerate(["[UNK]", "[CLS]", "[SEP]", *entries])}
    model = {
        "type": "WordPiece",
        "vocab": vocab,
        "unk_token": "[UNK]",
        "continuing_subword_prefix": "##",
        "max_input_chars_per_word": 100,
    }
    defaults: dict[str, object] = {
        "pre_tokenizer": {"type": "BertPreTokenizer"},
        "post_processor": BERT_TEMPLATE,
        "decoder": {"type": "WordPiece", "prefix": "##", "cleanup": True},
    }
    special = ("[UNK]", "[CLS]", "[SEP]")
    return open_tokenizers(tokenizers_json(model, special, **{**defaults, **parts}))


def merging(entries: list[str], merges: list[list[str]], **parts: object) -> OracleVocabulary:
    """BPE without an unknown token."""
    vocab = {entry: number for number, entry in enumerate(entries)}
    return open_tokenizers(
        tokenizers_json({"type": "BPE", "vocab": vocab, "merges": merges}, **parts)
    )


def byte_level(without: str = "", *, prefix: bool = False) -> OracleVocabulary:
    """One entry for each byte, apart from those whose characters are ``without``."""
    step = {"type": "ByteLevel", "add_prefix_space": prefix, "trim_offsets": True}
    alphabet = [character for character in BYTE_OF_CHARACTER if character not in without]
    return merging(alphabet, [], pre_tokenizer=step, decoder=step)


def sentencepiece_bytes(folder: Path, *pieces: str) -> OracleVocabulary:
    """BPE with byte fallback and no normalisation: <unk>, 256 byte pieces, then ``pieces``."""
    model = sentencepiece_model_pb2.ModelProto()
    model.pieces.add(piece="<unk>", score=0.0, type=UNKNOWN)
    for byte in range(256):
        model.pieces.add(piece=f"<0x{byte:02X}>", score=0.0, type=BYTE)
    for rank, piece in enumerate(pieces):
        model.pieces.add(piece=piece, score=-float(rank), type=NORMAL)
    model.trainer_spec.model_type = 2
    model.trainer_spec.byte_fallback = True
    model.trainer_spec.vocab_size = len(model.pieces)
    model.normalizer_spec.name = "identity"
    model.normalizer_spec.add_dummy_prefix = False
    model.normalizer_spec.remove_extra_whitespaces = False
    (folder / "toy.model").write_bytes(model.SerializeToString())
    return open_sentencepiece(folder / "toy.model")


def ranks(folder: Path, *merged: bytes, special: tuple[str, ...] = ()) -> OracleVocabulary:
    """The 256 bytes, then ``merged``; the pattern cuts runs of letters, of blanks, of the rest."""
    data = [*(bytes([byte]) for byte in range(256)), *merged]
    lines = [base64.b64encode(one) + b" " + str(rank).encode() for rank, one in enumerate(data)]
    (folder / "toy.tiktoken").write_bytes(b"\n".join(lines) + b"\n")
    ids = {content: len(data) + number for number, content in enumerate(special)}
    return open_ranks(folder / "toy.tiktoken", r"\p{L}+|\s+|[^\p{L}\s]+", ids)
