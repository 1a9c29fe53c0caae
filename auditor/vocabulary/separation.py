"""Where a document may be cut so that its parts, encoded apart, give the tokens of the whole.

The only cut there is stands before a single space: a character that is neither whitespace nor
control, then U+0020, then a letter or a number. For each vocabulary it must be proved that no
token, no merge and no rule reaches across; one for which it is not is encoded whole. UAX #29 has a
word boundary there too, on the side of the space that the cut is on.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from auditor.text import properties
from auditor.vocabulary.engine import Bools, Engine
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.patterns import splits_before_single_space
from auditor.vocabulary.ranks_engine import RanksEngine
from auditor.vocabulary.sentencepiece_engine import SentencePieceEngine
from auditor.vocabulary.tokenizers_engine import METASPACE, TokenizersEngine, steps_of

# Normalisers that act on each character, or on a character and the marks after it: a space is
# neither joined to what stands before it nor moved.
_LOCAL_NORMALIZERS = frozenset(
    {"NFC", "NFD", "NFKC", "NFKD", "Lowercase", "StripAccents", "BertNormalizer"}
)
# Pre-tokenisers that always split before a single space, and those that at least keep to parts.
_SPLITTING = frozenset({"BertPreTokenizer", "Whitespace", "WhitespaceSplit", "Metaspace"})
_LOCAL_SPLITTERS = frozenset({"Digits", "Punctuation"})


@dataclass(frozen=True)
class Separation:
    """How the parts of a document are encoded.

    ``later`` encodes the parts that begin with the cut's space; ``lost_space`` is what a decoded
    later part lacks at its start. No cut is made after a character that ``closed`` marks, and a
    document that holds one of ``whole_for`` is encoded whole.
    """

    later: Engine
    lost_space: str
    closed: Bools
    whole_for: tuple[str, ...]


@cache
def closed_to_all() -> Bools:
    """Return the characters after which no cut is made for any vocabulary."""
    found = properties.table(r"\p{C}") | properties.table(r"\p{Z}")
    found = found | properties.table(properties.WHITESPACE)
    # A prepended mark holds on to what follows it (UAX #29, GB9b).
    found = found | properties.table(r"\p{Grapheme_Cluster_Break=Prepend}")
    found[ord(METASPACE)] = True
    found.setflags(write=False)
    return found


def separate(vocabulary: Vocabulary) -> Separation | str:
    """Return how parts are encoded under ``vocabulary``, or the reason why it is encoded whole."""
    engine = vocabulary.engine
    if isinstance(engine, RanksEngine):
        return _ranks(engine)
    if isinstance(engine, SentencePieceEngine):
        return _sentencepiece(engine, vocabulary.inventory.entries)
    if isinstance(engine, TokenizersEngine):
        return _tokenizers(engine, vocabulary.inventory.entries)
    return "the engine is not known"


def _ranks(engine: RanksEngine) -> Separation | str:
    if not splits_before_single_space(engine.pattern):
        return "the splitting pattern is not proved to split before a single space"
    return Separation(engine, "", closed_to_all(), ())


def _sentencepiece(engine: SentencePieceEngine, entries: list[str | None]) -> Separation | str:
    spec = engine.proto.normalizer_spec
    if engine.family != "bpe":
        return f"scores of a {engine.family} model are decided over the whole document"
    if spec.precompiled_charsmap or spec.remove_extra_whitespaces or not spec.escape_whitespaces:
        return "its normaliser is not proved to act part by part"
    if engine.proto.trainer_spec.treat_whitespace_as_suffix:
        return "it writes the space after the word"
    later = engine.without_prefix()
    return Separation(later, _lost_space(later), _closed_by_entries(entries), ())


def _tokenizers(engine: TokenizersEngine, entries: list[str | None]) -> Separation | str:
    description = engine.description
    model = description["model"]
    if model["type"] == "Unigram":
        return "scores of a Unigram model are summed over the whole document"
    added = description.get("added_tokens") or []
    steps = steps_of(description, "normalizer")
    if steps and any(token["normalized"] for token in added):
        return "added tokens are sought in the normalised text"
    contents = tuple(token["content"] for token in added if token["content"])
    if _splits_before_space(steps_of(description, "pre_tokenizer")):
        if any(step["type"] not in _LOCAL_NORMALIZERS for step in steps):
            return "its normaliser is not proved to act part by part"
        return Separation(engine, _lost_space(engine), closed_to_all(), contents)
    return _without_splitter(engine, steps, entries, contents)


def _splits_before_space(steps: list[dict[str, Any]]) -> bool:
    """Return whether every step keeps to parts and one of them always splits there."""
    splits = [_step_splits(step) for step in steps]
    return all(split is not None for split in splits) and any(splits)


def _step_splits(step: dict[str, Any]) -> bool | None:
    """Return whether a step splits before a single space; ``None`` when nothing is proved."""
    kind = step["type"]
    if kind == "ByteLevel":
        return bool(step.get("use_regex", True))
    if kind == "Metaspace":
        return True if step.get("split", True) else None
    if kind == "Split":
        pattern = step["pattern"].get("Regex")
        keeps = (step["behavior"], step.get("invert", False)) in {
            ("Isolated", False),
            ("Removed", True),
        }
        return True if pattern and keeps and splits_before_single_space(pattern) else None
    if kind in _SPLITTING:
        return True
    return False if kind in _LOCAL_SPLITTERS else None


def _without_splitter(
    engine: TokenizersEngine,
    steps: list[dict[str, Any]],
    entries: list[str | None],
    contents: tuple[str, ...],
) -> Separation | str:
    """BPE over the whole text, spaces written as a marker: entries decide what is ever joined."""
    model = engine.description["model"]
    if engine.description.get("pre_tokenizer") is not None or model["type"] != "BPE":
        return "its pre-tokeniser is not proved to split before a single space"
    if model.get("ignore_merges") or model.get("end_of_word_suffix"):
        return "its model looks at whole words, and nothing splits the text into any"
    marks = {"type": "Replace", "pattern": {"String": " "}, "content": METASPACE}
    prepends = {"type": "Prepend", "prepend": METASPACE}
    if steps not in ([prepends, marks], [marks]):
        return "its normaliser is not proved to act part by part"
    later = engine.with_normalizer(marks)
    return Separation(later, _lost_space(later), _closed_by_entries(entries), contents)


def _closed_by_entries(entries: list[str | None]) -> Bools:
    """Close the characters that stand before a marker within some entry: a merge may join them."""
    found = np.array(closed_to_all())
    for entry in entries:
        if entry and METASPACE in entry[1:]:
            place = entry.find(METASPACE, 1)
            while place > 0:
                found[ord(entry[place - 1])] = True
                place = entry.find(METASPACE, place + 1)
    found.setflags(write=False)
    return found


def _lost_space(engine: Engine) -> str:
    """Return what `` a`` lacks at its start when it has been encoded and decoded."""
    if not engine.has_decoder:
        return ""
    returned = engine.decode(engine.encode([" a"]).ids_by_document())[0]
    return " " if returned == "a" else ""
