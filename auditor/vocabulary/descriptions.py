"""Reads `tokenizer.json`, and writes the same description for vocabularies in older forms."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import orjson
import regex

from auditor.errors import VocabularyError
from auditor.vocabulary import bytelevel

Description = dict[str, Any]
_FAMILIES = {"BPE": "bpe", "WordPiece": "wordpiece", "Unigram": "unigram", "WordLevel": "wordlevel"}
# Without a file that names them, only these are taken for control entries (common practice).
_USUAL_CONTROL = ("<s>", "</s>", "<pad>", "<unk>", "<mask>", "<|endoftext|>")
_UPPER = regex.compile(r"\p{Lu}")


def read_json(path: Path) -> Any:  # noqa: ANN401 - a JSON value
    """Return the JSON value of a file; a BOM is passed over; VocabularyError when it is none."""
    try:
        return orjson.loads(path.read_bytes().removeprefix(b"\xef\xbb\xbf"))
    except orjson.JSONDecodeError as fault:
        raise VocabularyError(
            f"not valid JSON ({fault}).",
            hint="The file may be cut short; fetch it again.",
            where=str(path),
        ) from fault


def from_tokenizer_json(path: Path) -> tuple[Description, list[str]]:
    """Return the description in ``path`` and notes on what is switched off before measuring."""
    data = read_json(path)
    model = data.get("model") if isinstance(data, dict) else None
    if not isinstance(model, dict) or "vocab" not in model:
        raise VocabularyError(
            "no `model` with a `vocab` in this file.",
            hint="Is it a tokenizer.json?",
            where=str(path),
        )
    model.setdefault("type", _guess_type(model))
    if model["type"] not in _FAMILIES:
        raise VocabularyError(
            f"a model of type {model['type']!r} is not known.",
            hint=f"Known: {', '.join(_FAMILIES)}.",
            where=str(path),
        )
    notes = [
        f"{part} is stored in the file and was switched off before measuring: {_brief(data[part])}"
        for part in ("truncation", "padding")
        if data.get(part)
    ]
    if model.get("dropout"):
        notes.append(f"dropout {model['dropout']} makes counts random and was switched off")
    return data, notes


def family_of(description: Description) -> str:
    """Return the family that the model's type names."""
    return _FAMILIES[description["model"]["type"]]


def from_vocab_txt(path: Path) -> tuple[Description, list[str]]:
    """Return the description of a WordPiece vocabulary given as one entry a line.

    Normaliser, splitting and template are those of the BERT release (google-research/bert,
    tokenization.py); whether it folds case is read from `tokenizer_config.json`, else inferred.
    """
    lines = path.read_bytes().removeprefix(b"\xef\xbb\xbf").decode("utf-8", "replace").split("\n")
    entries = [line.removesuffix("\r") for line in lines]
    if entries and not entries[-1]:
        entries.pop()
    vocab = {entry: number for number, entry in enumerate(entries)}
    folds, reason = _folds_case(path.parent, entries)
    unknown = _unknown_entry(vocab)
    if unknown is None:
        raise VocabularyError(
            "no [UNK] entry: a WordPiece vocabulary cannot do without.",
            hint="Is it a word list, or another form of vocabulary?",
            where=str(path),
        )
    special = [name for name in ("[PAD]", "[UNK]", "[CLS]", "[SEP]", "[MASK]") if name in vocab]
    description: Description = {
        "version": "1.0",
        "added_tokens": [_added(vocab[name], name) for name in special],
        "normalizer": {
            "type": "BertNormalizer", "clean_text": True, "handle_chinese_chars": True,
            "strip_accents": None, "lowercase": folds,
        },
        "pre_tokenizer": {"type": "BertPreTokenizer"},
        "post_processor": _bert_template(vocab),
        "decoder": {"type": "WordPiece", "prefix": "##", "cleanup": False},
        "model": {
            "type": "WordPiece", "unk_token": unknown, "continuing_subword_prefix": "##",
            "max_input_chars_per_word": 100, "vocab": vocab,
        },
    }  # fmt: skip
    return description, [f"case folding {'on' if folds else 'off'}: {reason}"]


def _folds_case(folder: Path, entries: list[str]) -> tuple[bool, str]:
    config = folder / "tokenizer_config.json"
    declared = read_json(config).get("do_lower_case") if config.is_file() else None
    if isinstance(declared, bool):
        return declared, "tokenizer_config.json says so"
    cased = any(_UPPER.search(entry) for entry in entries if not entry.startswith("["))
    return not cased, f"{'some entries hold' if cased else 'no entry holds'} an upper-case letter"


def _bert_template(vocab: dict[str, int]) -> Description | None:
    if "[CLS]" not in vocab or "[SEP]" not in vocab:
        return None
    return {
        "type": "BertProcessing",
        "sep": ["[SEP]", vocab["[SEP]"]],
        "cls": ["[CLS]", vocab["[CLS]"]],
    }


def _added(number: int, content: str) -> Description:
    return {
        "id": number, "content": content, "single_word": False, "lstrip": False, "rstrip": False,
        "normalized": False, "special": True,
    }  # fmt: skip


def from_vocab_json(path: Path) -> tuple[Description, list[str]]:
    """Return the description of `vocab.json`, with `merges.txt` beside it or alone (words)."""
    vocab = read_json(path)
    if not isinstance(vocab, dict) or not all(isinstance(number, int) for number in vocab.values()):
        raise VocabularyError("not a JSON object of entries and ids.", where=str(path))
    merges = path.parent / "merges.txt"
    if not merges.is_file():
        return _words_only(vocab, path), [
            "no merges.txt beside vocab.json: measured as whole words"
        ]
    special = [name for name in _USUAL_CONTROL if name in vocab]
    byte_level = sum(c in vocab for c in bytelevel.BYTE_OF_CHARACTER) >= 200
    suffix = "</w>" if not byte_level and any(entry.endswith("</w>") for entry in vocab) else None
    split = {
        "type": "ByteLevel",
        "add_prefix_space": False,
        "trim_offsets": False,
        "use_regex": True,
    }
    ending = {"type": "BPEDecoder", "suffix": suffix} if suffix else None
    description: Description = {
        "version": "1.0",
        "added_tokens": [_added(vocab[name], name) for name in special],
        "pre_tokenizer": split if byte_level else {"type": "WhitespaceSplit"},
        "decoder": split if byte_level else ending,
        "model": {
            "type": "BPE", "vocab": vocab, "merges": _read_merges(merges), "dropout": None,
            "unk_token": None if byte_level else _unknown_entry(vocab),
            "end_of_word_suffix": suffix,
        },
    }  # fmt: skip
    kind = (
        "byte-level with the GPT-2 pattern"
        if byte_level
        else "character-level, split at whitespace"
    )
    return description, [f"vocab.json and merges.txt name no rules: read as {kind}, overhead 0"]


def _unknown_entry(vocab: dict[str, int]) -> str | None:
    return next((name for name in ("[UNK]", "<unk>") if name in vocab), None)


def _words_only(vocab: dict[str, int], path: Path) -> Description:
    unknown = _unknown_entry(vocab)
    if unknown is None:
        raise VocabularyError(
            "vocab.json has no merges.txt beside it and no [UNK] or <unk> entry.",
            hint="A BPE vocabulary needs its merges.txt in the same folder.",
            where=str(path),
        )
    model = {"type": "WordLevel", "vocab": vocab, "unk_token": unknown}
    split = {"type": "WhitespaceSplit"}
    return {"version": "1.0", "added_tokens": [], "pre_tokenizer": split, "model": model}


def _read_merges(path: Path) -> list[list[str]]:
    merges = []
    lines = path.read_bytes().removeprefix(b"\xef\xbb\xbf").decode("utf-8").split("\n")
    for number, line in enumerate(lines, start=1):
        if not line.strip() or (number == 1 and line.startswith("#version")):
            continue
        pair = line.removesuffix("\r").split(" ")
        if len(pair) != 2:
            raise VocabularyError(
                "not a merge of the form `left right`.",
                hint="The file may be cut short; fetch it again.",
                where=f"{path}:{number}",
            )
        merges.append(pair)
    return merges


def _guess_type(model: Description) -> str:
    if "merges" in model:
        return "BPE"
    if isinstance(model["vocab"], list):
        return "Unigram"
    return "WordPiece" if "continuing_subword_prefix" in model else "WordLevel"


def _brief(value: Any) -> str:  # noqa: ANN401 - a JSON value
    return orjson.dumps(value, option=orjson.OPT_SORT_KEYS).decode()
