"""Where a document may be cut so that its parts, encoded apart, give the tokens of the whole.

There are two kinds of cut, and none but these:

- *before a single space*: a character that is neither whitespace nor control, then U+0020, then a
  letter or a number;
- *after a word*: a letter or a number, then U+0020, a tab or a line end.

For each vocabulary it must be proved that no token, no merge and no rule reaches across; one for
which it is not is encoded whole. UAX #29 has a word boundary at both.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from typing import Any

import numpy as np

from auditor.text import properties
from auditor.vocabulary.engine import Bools, Engine
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.patterns import splits_after_word, splits_before_single_space
from auditor.vocabulary.ranks_engine import RanksEngine
from auditor.vocabulary.sentencepiece_engine import SentencePieceEngine
from auditor.vocabulary.tokenizers_engine import (
    METASPACE,
    TokenizersEngine,
    rejoined,
    steps_of,
)

# Normalisers that act on each character, or on a character and the marks after it: a space is
# neither joined to what stands before it nor moved.
_LOCAL_NORMALIZERS = frozenset(
    {"NFC", "NFD", "NFKC", "NFKD", "Lowercase", "StripAccents", "BertNormalizer"}
)
# The whitespace before which a cut after a word is made.
WHITESPACE_AFTER_WORDS = " \t\r\n"
# Pre-tokenisers that always split before a single space, and those that at least keep to parts.
_SPLITTING = frozenset({"BertPreTokenizer", "Whitespace", "WhitespaceSplit"})
_LOCAL_SPLITTERS = frozenset({"Digits", "Punctuation"})
# The pattern of the byte-level pre-tokeniser (openai/gpt-2, src/encoder.py).
_BYTE_LEVEL = r"'s|'t|'re|'ve|'m|'ll|'d| ?\p{L}+| ?\p{N}+| ?[^\s\p{L}\p{N}]+|\s+(?!\S)|\s+"


@dataclass(frozen=True)
class Separation:
    """How the parts of a document are encoded.

    ``later`` encodes the parts that do not begin a document; ``lost_space`` is what such a part
    lacks at its start, once decoded, when it begins with a space. ``closed`` marks the characters
    after which there is no cut before a single space, ``open_words`` those after which there is one
    before each kind of whitespace. A document that holds one of ``whole_for`` is encoded whole.
    """

    later: Engine
    lost_space: str
    closed: Bools
    open_words: dict[str, Bools]
    whole_for: tuple[str, ...]


@cache
def closed_to_all() -> Bools:
    """Return the characters after which no cut before a single space is made for any vocabulary."""
    found = properties.table(r"\p{C}") | properties.table(r"\p{Z}")
    found = found | properties.table(properties.WHITESPACE)
    # A prepended mark holds on to what follows it (UAX #29, GB9b).
    found = found | properties.table(r"\p{Grapheme_Cluster_Break=Prepend}")
    found[ord(METASPACE)] = True
    found.setflags(write=False)
    return found


@cache
def settled_words() -> Bools:
    """Return the letters and numbers that every engine takes for such.

    Engines follow different versions of Unicode; these were letters or numbers in version 3.2,
    which the standard library keeps for comparison, and still are.
    """
    found = properties.table(properties.WORD_CHARACTER) & ~closed_to_all()
    for point in np.flatnonzero(found).tolist():
        found[point] = unicodedata.ucd_3_2_0.category(chr(point))[0] in "LN"
    found.setflags(write=False)
    return found


def _words_open_to_all() -> dict[str, Bools]:
    return dict.fromkeys(WHITESPACE_AFTER_WORDS, settled_words())


def _no_words_open() -> dict[str, Bools]:
    return dict.fromkeys(WHITESPACE_AFTER_WORDS, np.zeros(properties.CODE_POINTS, dtype=np.bool_))


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
    words = _words_open_to_all() if splits_after_word(engine.pattern) else _no_words_open()
    return Separation(engine, "", closed_to_all(), words, ())


def _sentencepiece(engine: SentencePieceEngine, entries: list[str | None]) -> Separation | str:
    spec = engine.proto.normalizer_spec
    if engine.family != "bpe":
        return f"scores of a {engine.family} model are decided over the whole document"
    if spec.precompiled_charsmap or spec.remove_extra_whitespaces or not spec.escape_whitespaces:
        return "its normaliser is not proved to act part by part"
    if engine.proto.trainer_spec.treat_whitespace_as_suffix:
        return "it writes the space after the word"
    later = engine.without_prefix()
    closed, words = _by_entries(entries)
    return Separation(later, _lost_space(later), closed, words, ())


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
    splitters = steps_of(description, "pre_tokenizer")
    if _splits(splitters, splits_before_single_space):
        if any(step["type"] not in _LOCAL_NORMALIZERS for step in steps):
            return "its normaliser is not proved to act part by part"
        after = _splits(splitters, splits_after_word)
        words = _words_open_to_all() if after else _no_words_open()
        later = _without_prefix(engine, splitters)
        return Separation(later, _lost_space(later), closed_to_all(), words, contents)
    return _without_splitter(engine, steps, entries, contents)


def _splits(steps: list[dict[str, Any]], proves: Callable[[str], bool]) -> bool:
    """Return whether every step keeps to parts and one always splits, as ``proves`` says."""
    answers = [_step_splits(step, proves) for step in steps]
    return all(answer is not None for answer in answers) and any(answers)


def _step_splits(step: dict[str, Any], proves: Callable[[str], bool]) -> bool | None:
    """Return whether a step always splits there; ``None`` when nothing is proved of it."""
    kind = step["type"]
    if kind == "ByteLevel":
        return bool(step.get("use_regex", True)) and proves(_BYTE_LEVEL)
    if kind == "Metaspace":
        # It splits at spaces alone.
        return True if step.get("split", True) and proves is splits_before_single_space else None
    if kind == "Split":
        pattern = step["pattern"].get("Regex")
        keeps = (step["behavior"], step.get("invert", False)) in {
            ("Isolated", False),
            ("Removed", True),
        }
        return True if pattern and keeps and proves(pattern) else None
    if kind in _SPLITTING:
        return True
    return False if kind in _LOCAL_SPLITTERS else None


def _without_prefix(engine: TokenizersEngine, splitters: list[dict[str, Any]]) -> TokenizersEngine:
    """Return the engine without the space that a byte-level first step sets before the text.

    As a later step it sets one before every part, wherever the part stands: that is left alone. A
    part that begins with a space never gets one.
    """
    first = splitters[0]
    if first["type"] != "ByteLevel" or not first.get("add_prefix_space", True):
        return engine
    changed = [{**first, "add_prefix_space": False}, *splitters[1:]]
    return engine.changed("pre_tokenizer", rejoined(changed, "pretokenizers"))


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
    later = engine.changed("normalizer", marks)
    closed, words = _by_entries(entries)
    return Separation(later, _lost_space(later), closed, words, contents)


def _by_entries(entries: list[str | None]) -> tuple[Bools, dict[str, Bools]]:
    """Return what is closed, and open after words, when entries alone decide what is joined.

    A merge can join two characters only if some entry holds them side by side.
    """
    before = {mark: set[str]() for mark in (METASPACE, *WHITESPACE_AFTER_WORDS[1:])}
    for entry in entries:
        for left, right in pairwise(entry or ""):
            if right in before:
                before[right].add(left)
    closed = np.array(closed_to_all())
    closed[[ord(left) for left in before[METASPACE]]] = True
    closed.setflags(write=False)
    words = {}
    for mark, lefts in before.items():
        table = np.array(settled_words())
        table[[ord(left) for left in lefts]] = False
        words[" " if mark == METASPACE else mark] = table
    return closed, words


def _lost_space(engine: Engine) -> str:
    """Return what `` a`` lacks at its start when it has been encoded and decoded."""
    if not engine.has_decoder:
        return ""
    returned = engine.decode(engine.encode([" a"]).ids_by_document())[0]
    return " " if returned == "a" else ""
