"""Small vocabularies, written to a folder in the forms of the field and opened; and measures."""

from __future__ import annotations

import io
import json
from pathlib import Path

import sentencepiece
from sentencepiece import sentencepiece_model_pb2

from auditor.encoding.measures import text_columns
from auditor.encoding.whole import WholeTexts
from auditor.text.stretch import Stretch
from auditor.text.whitespace import find_runs
from auditor.vocabulary import Vocabulary, VocabularySpec, open_vocabulary
from auditor.vocabulary.bytelevel import CHARACTER_OF_BYTE

Merge = tuple[str, str]
_NORMAL, _UNKNOWN, _CONTROL, _BYTE = 1, 2, 3, 6


def wordpiece(folder: Path, entries: list[str]) -> Vocabulary:
    """Return the vocabulary whose `vocab.txt` has one entry a line, in this order."""
    (folder / "vocab.txt").write_text("\n".join(entries) + "\n", encoding="utf-8")
    return open_vocabulary(VocabularySpec(str(folder)))


def merging(folder: Path, symbols: list[str], merges: list[Merge]) -> Vocabulary:
    """Return the vocabulary of `vocab.json` and `merges.txt`: symbols first, then the merges."""
    entries = dict.fromkeys([*symbols, *(left + right for left, right in merges)])
    vocab = {entry: number for number, entry in enumerate(entries)}
    lines = ["#version: 0.2", *(f"{left} {right}" for left, right in merges)]
    (folder / "vocab.json").write_text(json.dumps(vocab), encoding="utf-8")
    (folder / "merges.txt").write_text("\n".join(lines) + "\n", encoding="utf-8")
    return open_vocabulary(VocabularySpec(str(folder)))


def byte_level(folder: Path, merges: list[Merge]) -> Vocabulary:
    """Return a byte-level vocabulary: all 256 bytes, then ``merges`` in byte-level spelling."""
    return merging(folder, list(CHARACTER_OF_BYTE.values()), merges)


def described(folder: Path, **parts: object) -> Vocabulary:
    """Return the vocabulary of a `tokenizer.json` with these parts."""
    text = json.dumps({"version": "1.0", "added_tokens": [], **parts})
    (folder / "tokenizer.json").write_text(text, encoding="utf-8")
    return open_vocabulary(VocabularySpec(str(folder)))


def trained(folder: Path, lines: list[str], **options: object) -> Vocabulary:
    """Return a SentencePiece model trained on ``lines``; ``options`` are the trainer's own."""
    model = io.BytesIO()
    sentencepiece.SentencePieceTrainer.train(
        sentence_iterator=iter(lines), model_writer=model, hard_vocab_limit=False,
        num_threads=1, minloglevel=2, **options,
    )  # fmt: skip
    (folder / "small.model").write_bytes(model.getvalue())
    return open_vocabulary(VocabularySpec(str(folder)))


def byte_fallback(folder: Path, pieces: list[str]) -> Vocabulary:
    """Return a SentencePiece model of the usual three, 256 byte pieces, and ``pieces``.

    Its normaliser is the identity, with a space put before the text.
    """
    proto = sentencepiece_model_pb2.ModelProto()
    proto.trainer_spec.model_type = 1
    proto.trainer_spec.byte_fallback = True
    proto.normalizer_spec.name = "identity"
    proto.normalizer_spec.remove_extra_whitespaces = False
    kinds = [("<unk>", _UNKNOWN), ("<s>", _CONTROL), ("</s>", _CONTROL)]
    kinds += [(f"<0x{byte:02X}>", _BYTE) for byte in range(256)]
    kinds += [(piece, _NORMAL) for piece in pieces]
    for place, (piece, kind) in enumerate(kinds):
        proto.pieces.add(piece=piece, score=-float(place), type=kind)
    (folder / "small.model").write_bytes(proto.SerializeToString())
    return open_vocabulary(VocabularySpec(str(folder)))


def entries_of(vocabulary: Vocabulary, text: str) -> list[str | None]:
    """Return the entries that ``text`` is written with."""
    ids = vocabulary.engine.encode([text]).ids.tolist()
    return [vocabulary.inventory.entries[number] for number in ids]


def decoded(vocabulary: Vocabulary, text: str) -> str:
    """Return what comes back of ``text``."""
    return vocabulary.engine.decode([vocabulary.engine.encode([text]).ids.tolist()])[0]


def measured(vocabulary: Vocabulary, texts: list[str], **words: str) -> dict[str, list[int]]:
    """Return all columns of ``texts``, text and tokens, one number a document."""
    stretch = Stretch(texts, **words)
    found = WholeTexts(vocabulary, parse_control=True).measure(stretch, find_runs(stretch))
    columns = {**text_columns(stretch), **found.columns}
    return {name: values.tolist() for name, values in columns.items()}
