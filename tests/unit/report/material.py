"""A small invented audit: inspection notes of a coastal buoy service, some of them hostile."""

from __future__ import annotations

from typing import Any

from auditor.figures import lengths
from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS, WHY_UNDEFINED
from auditor.tallies.words import BrokenWord

Json = dict[str, Any]

HOSTILE = "</style><script>alert('buoy')</script>"
UNSAFE = "bell\x07 escape\x1b[31m override\u202e zero\u200b mark\u0301 surrogate\ud800 end"
WIDE = "浮标点検記録の長い名前が続きますがここで切られます"
COMBINING = "टोकन" * 30
SLICES = ("lang=pt", "lang=th", f"lang={HOSTILE}", f"lang={UNSAFE}", f"lang={WIDE}",
          f"lang={COMBINING}", "station=3", "station=(none)")  # fmt: skip
NONE_SEEN = "none seen; it may still occur in up to 1.9300% of further documents (Wilson)"

WORDS = [
    (BrokenWord("calibration", "cal·ib·ration", 3, 0), 40),
    (BrokenWord("浮标校准", "浮·标·⟨E6 A0⟩·⟨A1⟩·准", 5, 0), 12),
    (BrokenWord(HOSTILE, "</style>·<script>", 2, 0), 9),
    (BrokenWord("mooring\x1b[2J", "mooring·⟨[UNK]⟩", 2, 1), 3),
]


def value(number: float | None, low: float | None, high: float | None, note: str | None = None):
    """Return one figure as `audit.json` holds it."""
    known = number is not None
    return {
        "value": number, "low": low, "high": high, "numerator": 120 if number else 0,
        "denominator": 1000 if known else None, "note": note,
    }  # fmt: skip


def figures(cost: float, *, relative: bool = False, **replaced: Json) -> Json:
    """Return every figure: ratios at ``cost``, shares at 0.12, then what is ``replaced``."""
    catalogue = (*CATALOGUE, RELATIVE_TOKENS) if relative else CATALOGUE
    found = {
        figure.name: value(0.12, 0.101, 0.139)
        if figure.share
        else value(cost, cost - 0.05, cost + 0.05)
        for figure in catalogue
    }
    return {**found, **replaced}


def a_slice(cost: float, *, relative: bool = False, **replaced: Json) -> Json:
    """Return one slice of 160 documents."""
    histogram = [(length, 10 + length % 3) for length in (3, 5, 8, 40, 41, 90, 130, 200, 512)]
    row = {"kind": "space run", "occurrences": 30, "tokens": 20, "bytes": 4}
    fates = {"kept": 10, "merged": 20, "dropped": 0, "unknown": 0, "changed": 0}
    return {
        "counts": {"documents": 98, "bytes": 90210, "characters": 81234, "words": 1000,
                   "tokens": 1840},
        "figures": figures(cost, relative=relative, **replaced),
        "lengths": lengths.describe(histogram),
        "whitespace": [{**row, "fates": fates}],
    }  # fmt: skip


def vocabulary(name: str, *, limit: int | None = 128, relative: bool = False) -> Json:
    """Return one vocabulary on every slice; the slice of Thai notes is undefined."""
    slices = {"all": a_slice(1.84, relative=relative)}
    for number, key in enumerate(SLICES):
        slices[key] = a_slice(1.5 + number, relative=relative)
    slices["lang=th"] = a_slice(
        2.0, relative=relative, fertility=value(None, None, None, "no words in this slice")
    )
    slices["all"]["figures"]["dropped_characters"] = value(0.0, 0.0, None, NONE_SEEN)
    slices["all"]["figures"]["lossless_documents"] = value(
        None, None, None, WHY_UNDEFINED["decoder"]
    )
    number = value(0.5, None, None)
    slices["all"]["usage"] = {
        "used_entries": {**number, "note": "a count of this corpus: no interval"},
        "entropy": {**number, "value": 7.25, "numerator": None, "denominator": None},
        "renyi_efficiency": {**number, "numerator": None, "denominator": None},
        "rank_95_frequency": {**number, "value": 3, "numerator": None, "denominator": None},
    }
    return {
        "name": name, "source": f"models/{name}", "digest": "sha256:" + "0" * 64, "family": "bpe",
        "entries": 1000, "space_convention": "leading marker", "prefix_added": True,
        "overhead": {"single": 2, "pair": 3},
        "limit": {"value": limit, "declared": [{"file": "tokenizer_config.json",
                  "key": "model_max_length", "value": 128, "usable": 128, "note": ""}],
                  "notes": []},
        "unknown": {"id": 0, "entry": "[UNK]"},
        "byte_pieces": {"kind": "none", "complete": False, "missing": []},
        "control_strings": ["[CLS]"], "decoder": False, "notes": [], "slices": slices,
    }  # fmt: skip


def audit(*names: str, limit: int | None = 128) -> Json:
    """Return an audit with the vocabularies ``names``, one called ``harbour`` unless given."""
    several = len(names) > 1
    first = {"source": f"notes/{HOSTILE}.jsonl", "line": 7, "reason": "not UTF-8",
             "detail": f"byte 0xFF {UNSAFE}"}  # fmt: skip
    return {
        "format": "auditor/audit", "version": 1,
        "settings": {"text": ["note"], "by": ["lang", "station"], "origin": None,
                     "unit": "record", "encoding": None, "words": "icu",
                     "control_strings": "parse", "pattern": None, "limit": limit,
                     "graphemes": False, "repeats": False,
                     "fields": {"text": ["note"], "conversation": False, "identifier": None},
                     "conversations": None},
        "made_with": {"auditor": "0.1.0", "tokenizers": "0.22.1", "sentencepiece": "0.2.1",
                      "tiktoken": "0.12.0", "regex": "2026.11.9", "icu": "78.1",
                      "unicode": None},
        "corpus": {"sources": [f"notes/{HOSTILE}.jsonl", "notes/my spring notes.txt"],
                   "digest": "blake2b-128-sum:" + "0" * 32, "documents": 98, "bytes": 90210,
                   "characters": 81234, "words": 1000,
                   "set_aside": {"records": 2, "reasons": {"empty": 1, "not UTF-8": 1},
                                 "first": [first]},
                   "mended": {"records": 0, "reasons": {}, "first": []}},
        "vocabularies": [vocabulary(name, limit=limit, relative=several)
                         for name in names or ("harbour",)],
    }  # fmt: skip


def worst(*names: str) -> list[tuple[str, list[tuple[BrokenWord, int]]]]:
    """Return the costliest words of the vocabularies ``names``."""
    return [(name, WORDS) for name in names or ("harbour",)]
