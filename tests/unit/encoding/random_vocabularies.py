"""Random vocabularies: each kind fixes everything but the entries, which are drawn."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from auditor.vocabulary.bytelevel import CHARACTER_OF_BYTE

LETTERS = "abA1é.(=▁"
BYTE_LEVEL = {
    "type": "ByteLevel", "add_prefix_space": False, "trim_offsets": True, "use_regex": True,
}  # fmt: skip
PREFIXED = {**BYTE_LEVEL, "add_prefix_space": True}
META = {"type": "Metaspace", "replacement": "▁", "prepend_scheme": "always", "split": True}
MARKS = {"type": "Replace", "pattern": {"String": " "}, "content": "▁"}
PREPEND = {"type": "Sequence", "normalizers": [{"type": "Prepend", "prepend": "▁"}, MARKS]}
STRIP = {
    "type": "Sequence",
    "decoders": [
        {"type": "Replace", "pattern": {"String": "▁"}, "content": " "},
        {"type": "ByteFallback"},
        {"type": "Fuse"},
        {"type": "Strip", "content": " ", "start": 1, "stop": 0},
    ],
}
BERT = {
    "normalizer": {
        "type": "BertNormalizer", "clean_text": True, "handle_chinese_chars": True,
        "strip_accents": None, "lowercase": True,
    },
    "pre_tokenizer": {"type": "BertPreTokenizer"},
    "decoder": {"type": "WordPiece", "prefix": "##", "cleanup": True},
}  # fmt: skip
# Takes line ends after punctuation, and a character before a word.
GLUING = (
    r"(?i:'s|'t)|[^\r\n\p{L}\p{N}]?\p{L}+|\p{N}{1,3}| ?[^\s\p{L}\p{N}]+[\r\n]*|\s*[\r\n]+"
    r"|\s+(?!\S)|\s+"
)
SPLIT = {"type": "Split", "pattern": {"Regex": GLUING}, "behavior": "Isolated", "invert": False}
UNSPLIT = {**BYTE_LEVEL, "use_regex": False}
GLUED = {"type": "Sequence", "pretokenizers": [SPLIT, UNSPLIT]}
PREFIXED_PARTS = {
    "type": "Sequence",
    "pretokenizers": [{"type": "Digits", "individual_digits": False}, PREFIXED],
}
# Everything but the entries, by kind.
KINDS: dict[str, dict[str, Any]] = {
    "byte-level": {"pre_tokenizer": BYTE_LEVEL, "decoder": BYTE_LEVEL},
    "byte-level, prefix": {"pre_tokenizer": PREFIXED, "decoder": BYTE_LEVEL},
    "byte-level, NFC": {
        "normalizer": {"type": "NFC"}, "pre_tokenizer": BYTE_LEVEL, "decoder": BYTE_LEVEL,
    },
    "byte-level, glued": {"pre_tokenizer": GLUED, "decoder": BYTE_LEVEL},
    "byte-level, glued, NFKC": {
        "normalizer": {"type": "NFKC"}, "pre_tokenizer": GLUED, "decoder": BYTE_LEVEL,
    },
    "byte-level, glued, NFD": {
        "normalizer": {"type": "NFD"}, "pre_tokenizer": GLUED, "decoder": BYTE_LEVEL,
    },
    "byte-level, prefixed parts": {"pre_tokenizer": PREFIXED_PARTS, "decoder": BYTE_LEVEL},
    "metaspace": {"pre_tokenizer": META, "decoder": META},
    "no splitter": {"normalizer": PREPEND, "decoder": STRIP},
    "bert": BERT,
    "no splitter, unknown": {"normalizer": PREPEND, "decoder": STRIP},
    "whitespace": {"pre_tokenizer": {"type": "Whitespace"}},
    "whitespace, NFKC": {
        "normalizer": {"type": "NFKC"}, "pre_tokenizer": {"type": "WhitespaceSplit"},
    },
}  # fmt: skip

joins = st.lists(st.tuples(*[st.text(LETTERS, min_size=1, max_size=3)] * 2), max_size=12)


@st.composite
def descriptions(draw: st.DrawFn, kind: str) -> dict[str, Any]:
    """Draw a `tokenizer.json` of ``kind``."""
    pairs, flag, unknown = draw(joins), draw(st.booleans()), draw(st.sampled_from([None, "<unk>"]))
    added = {
        "id": 9999, "content": "<s>", "special": True, "single_word": False, "lstrip": False,
        "rstrip": draw(st.booleans()), "normalized": False,
    }  # fmt: skip
    if kind == "bert":
        model = word_pieces(pairs)
    elif kind.startswith("byte-level"):
        model = merged(list(CHARACTER_OF_BYTE.values()), [spelled(pair) for pair in pairs])
    else:
        fallback = kind == "no splitter"
        unknown = unknown or ("<unk>" if kind == "no splitter, unknown" else None)
        pieces = [f"<0x{byte:02X}>" for byte in range(256)] if fallback else []
        model = merged([*"abA1é.(▁\n\t", *pieces], pairs)
        model |= {"byte_fallback": fallback, "fuse_unk": flag, "unk_token": unknown}
    return {"version": "1.0", "added_tokens": [added], **KINDS[kind], "model": model}


def spelled(pair: tuple[str, str]) -> tuple[str, str]:
    """Return a pair of texts in byte-level spelling, a marker standing for a space."""
    left, right = (
        "".join(CHARACTER_OF_BYTE[byte] for byte in part.replace("▁", " ").encode())
        for part in pair
    )
    return left, right


def merged(symbols: list[str], pairs: list[tuple[str, str]]) -> dict[str, Any]:
    """Return a BPE model: the symbols, and a merge for each pair whose sides are entries."""
    entries = dict.fromkeys(["<unk>", *symbols])
    merges = []
    for left, right in pairs:
        if left in entries and right in entries:
            entries[left + right] = None
            merges.append([left, right])
    vocab = {entry: number for number, entry in enumerate(entries)}
    return {"type": "BPE", "vocab": vocab, "merges": merges}


def word_pieces(pairs: list[tuple[str, str]]) -> dict[str, Any]:
    """Return a WordPiece model of a few letters, their continuations and random words."""
    words = (left for left, _ in pairs)
    entries = dict.fromkeys(["[UNK]", *"ab1e.,(", "##a", "##b", "##1", *words])
    return {
        "type": "WordPiece", "unk_token": "[UNK]", "continuing_subword_prefix": "##",
        "max_input_chars_per_word": 6,
        "vocab": {entry: number for number, entry in enumerate(entries)},
    }  # fmt: skip
