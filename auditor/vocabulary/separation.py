"""Where a document may be cut so that its parts, encoded apart, give the tokens of the whole.

There are two kinds of cut, and none but these:

- *before a space*: a character that is neither whitespace nor control, then U+0020;
- *between two classes* of characters (`adjoining`): letters and numbers, punctuation, line ends.

For each vocabulary it must be proved that no token, no merge and no rule reaches across; one for
which it is not is encoded whole. UAX #29 has a word boundary at all of them.
"""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from itertools import chain, pairwise
from typing import Any

import numpy as np

from auditor.vocabulary import adjoining
from auditor.vocabulary.adjoining import Bytes
from auditor.vocabulary.engine import Engine
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.patterns import (
    splits_before_space,
    splits_between,
    takes_line_ends,
)
from auditor.vocabulary.ranks_engine import RanksEngine
from auditor.vocabulary.sentencepiece_engine import SentencePieceEngine
from auditor.vocabulary.splits import Splits
from auditor.vocabulary.steps import METASPACE, rejoined, steps_of
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# Normalisers that act on each character, or on a character and the marks after it: a space is
# neither joined to what stands before it nor moved.
_LOCAL_NORMALIZERS = frozenset(
    {"NFC", "NFD", "NFKC", "NFKD", "Lowercase", "StripAccents", "BertNormalizer"}
)
# Pre-tokenisers that do nothing but split, as patterns: each punctuation character, or each word,
# or whatever is no whitespace, is one part (tokenizers, src/pre_tokenizers: bert, whitespace).
_ASCII_PUNCTUATION = r"!-/:-@\[-`{-~"
_WORD = r"\p{Alphabetic}\p{M}\p{Nd}\p{Pc}\p{Join_Control}"
_SPLITTING = {
    "BertPreTokenizer": rf"[{_ASCII_PUNCTUATION}\p{{P}}]|[^\s{_ASCII_PUNCTUATION}\p{{P}}]+|\s+",
    "Whitespace": rf"[{_WORD}]+|[^\s{_WORD}]+|\s+",
    "WhitespaceSplit": r"\S+|\s+",
}
# Pre-tokenisers that at least keep to parts.
_LOCAL_SPLITTERS = frozenset({"Digits", "Punctuation"})
# The pattern of the byte-level pre-tokeniser (openai/gpt-2, src/encoder.py).
_BYTE_LEVEL = r"'s|'t|'re|'ve|'m|'ll|'d| ?\p{L}+| ?\p{N}+| ?[^\s\p{L}\p{N}]+|\s+(?!\S)|\s+"

# The steps that set spaces apart: each begins a part.
_METASPACE = " ?[^ ]+| "
_BYTE_PIECES = frozenset(f"<0x{byte:02X}>" for byte in range(256))


@dataclass(frozen=True)
class Separation:
    """How the parts of a document are encoded.

    ``later`` encodes the parts that do not begin a document; ``anchor`` are the tokens of a letter,
    to be decoded before those of such a part, as something always stands before it. ``classes``
    gives the class of each code point, ``asked`` what is asked of a place between two classes (see
    `adjoining`). A document that holds one of ``whole_for`` is encoded whole.
    ``splits`` are the places where tokens alone are proved to part, ``None`` where that is not
    known: there are more of them.
    """

    later: Engine
    anchor: tuple[int, ...]
    classes: Bytes
    asked: Bytes
    whole_for: tuple[str, ...]
    splits: Splits | None = None


def in_common(separations: list[Separation]) -> tuple[Bytes, Bytes]:
    """Return the classes and what is asked where all of ``separations`` allow a cut."""
    first = separations[0].classes
    differ = np.logical_or.reduce([s.classes != first for s in separations])
    closed = np.logical_or.reduce([s.classes == adjoining.CLOSED for s in separations])
    classes = adjoining.demoted(first, np.flatnonzero(differ))
    classes[closed] = adjoining.CLOSED
    every = np.logical_and.reduce([s.asked > 0 for s in separations])
    return classes, np.where(every, np.bitwise_or.reduce([s.asked for s in separations]), 0)


def _separation(
    vocabulary: Vocabulary,
    later: Engine,
    classes: Bytes,
    asked: Bytes,
    whole_for: tuple[str, ...] = (),
    splits: Splits | None = None,
) -> Separation:
    anchor = later.encode([vocabulary.letters[0]]).ids.tolist() if later.has_decoder else []
    return Separation(later, tuple(anchor), classes, asked, whole_for, splits)


def separate(vocabulary: Vocabulary) -> Separation | str:
    """Return how parts are encoded under ``vocabulary``, or the reason why it is encoded whole."""
    engine = vocabulary.engine
    if isinstance(engine, RanksEngine):
        return _ranks(vocabulary, engine)
    if isinstance(engine, SentencePieceEngine):
        return _sentencepiece(vocabulary, engine)
    if isinstance(engine, TokenizersEngine):
        return _tokenizers(vocabulary, engine)
    return "the engine is not known"


def _ranks(vocabulary: Vocabulary, engine: RanksEngine) -> Separation | str:
    if not splits_before_space(engine.pattern):
        return "the splitting pattern is not proved to split before a space"
    return _separation(vocabulary, engine, adjoining.classes(), _by_pattern(engine.pattern))


def _by_pattern(pattern: str) -> Bytes:
    """Return what is asked between two classes when ``pattern`` splits the text."""
    asked = np.where(splits_between(pattern), adjoining.allowed_by_text(), 0).astype(np.uint8)
    if not takes_line_ends(pattern):
        row = asked[adjoining.LINE_END]
        row[row > 0] |= adjoining.LONE
    asked[:, adjoining.SPACE] = adjoining.allowed_by_text()[:, adjoining.SPACE]
    return asked


def _sentencepiece(vocabulary: Vocabulary, engine: SentencePieceEngine) -> Separation | str:
    spec = engine.proto.normalizer_spec
    if engine.family != "bpe":
        return f"scores of a {engine.family} model are decided over the whole document"
    if spec.precompiled_charsmap or spec.remove_extra_whitespaces or not spec.escape_whitespaces:
        return "its normaliser is not proved to act part by part"
    if engine.proto.trainer_spec.treat_whitespace_as_suffix:
        return "it writes the space after the word"
    later = engine.without_prefix()
    return _separation(vocabulary, later, *_by_entries(vocabulary.inventory.entries))


def _tokenizers(vocabulary: Vocabulary, engine: TokenizersEngine) -> Separation | str:
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
    asked = _by_splitters(splitters)
    if asked is None:
        return _without_splitter(vocabulary, engine, steps, contents)
    if any(step["type"] not in _LOCAL_NORMALIZERS for step in steps):
        return "its normaliser is not proved to act part by part"
    classes = _still_words(adjoining.classes(), steps)
    later = _without_prefix(engine, splitters)
    splits = _splits(later)
    return _separation(vocabulary, later, classes, asked, contents, splits)


def _splits(later: TokenizersEngine) -> Splits | None:
    """Return where the first step always splits, when it is a pattern: no later step joins parts.

    Only where nothing but patterns and merges of bytes decides.
    """
    steps = steps_of(later.description, "pre_tokenizer")
    if not later.splits_bytes or any(s["type"] not in {"Split", "ByteLevel"} for s in steps):
        return None
    pattern = _pattern_of(steps[0])
    return Splits.of(pattern) if pattern and splits_before_space(pattern) else None


def _by_splitters(steps: list[dict[str, Any]]) -> Bytes | None:
    """Return what is asked between two classes, or ``None`` when not even spaces are proved.

    Every step must keep to parts, and one at least be a pattern that is proved.
    """
    patterns = [_pattern_of(step) for step in steps]
    proved = [pattern for pattern in patterns if pattern]
    if None in patterns or not proved or not all(map(splits_before_space, proved)):
        return None
    every = [_by_pattern(pattern) for pattern in proved]
    asked = np.where(np.all(every, axis=0), np.bitwise_or.reduce(every), 0).astype(np.uint8)
    if any(map(_adds_space_to_parts, steps[1:])):
        asked[:, np.arange(adjoining.CLASSES) != adjoining.SPACE] = 0
    return asked


def _pattern_of(step: dict[str, Any]) -> str | None:
    """Return the pattern that splits as a step does; empty for one that only keeps to parts."""
    kind = step["type"]
    if kind == "ByteLevel":
        return _BYTE_LEVEL if step.get("use_regex", True) else ""
    if kind == "Metaspace":
        return _METASPACE if step.get("split", True) else None
    if kind == "Split":
        keeps = (step["behavior"], step.get("invert", False)) in {
            ("Isolated", False),
            ("Removed", True),
        }
        return step["pattern"].get("Regex") if keeps else None
    return "" if kind in _LOCAL_SPLITTERS else _SPLITTING.get(kind)


def _adds_space_to_parts(step: dict[str, Any]) -> bool:
    """Return whether a later step sets a space before a part, which a cut would make two of."""
    splits = step["type"] == "ByteLevel" and step.get("use_regex", True)
    return bool(splits and step.get("add_prefix_space", True))


def _still_words(classes: Bytes, steps: list[dict[str, Any]]) -> Bytes:
    """Return the classes, without the letters and numbers that normalisers make anything else of.

    A part of one may be a mark, and a splitting pattern take it for what it is no longer.
    """
    points = np.flatnonzero(classes >= adjoining.LETTER)
    points = points[classes[points] <= adjoining.SPECIAL]
    made = list(map(chr, points.tolist()))
    for step in steps:
        made = _normalized(step, made)
    settled = {*map(chr, points.tolist()), *map(chr, adjoining.ASCII_WORDS)}
    lost = [text not in settled and not (text and settled.issuperset(text)) for text in made]
    return adjoining.demoted(classes, points[np.array(lost, dtype=np.bool_)])


def _normalized(step: dict[str, Any], texts: list[str]) -> list[str]:
    """Return what a normaliser makes of each text, of one character or a few."""
    kind = step["type"]
    bert = kind == "BertNormalizer"
    lowers = kind == "Lowercase" or (bert and step.get("lowercase", True))
    strips = step.get("strip_accents")
    strips = bert and (lowers if strips is None else strips)
    form = "NFD" if strips else kind
    if form in {"NFC", "NFD", "NFKC", "NFKD"}:
        texts = [unicodedata.normalize(form, text) for text in texts]  # type: ignore[arg-type]
    if strips or kind == "StripAccents":
        texts = ["".join(c for c in text if unicodedata.category(c) != "Mn") for text in texts]
    return [text.lower() for text in texts] if lowers else texts


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
    vocabulary: Vocabulary,
    engine: TokenizersEngine,
    steps: list[dict[str, Any]],
    contents: tuple[str, ...],
) -> Separation | str:
    """BPE over the whole text, spaces written as a marker: entries decide what is ever joined."""
    model = engine.description["model"]
    if engine.description.get("pre_tokenizer") is not None or model["type"] != "BPE":
        return "its pre-tokeniser is not proved to split before a space"
    if model.get("ignore_merges") or model.get("end_of_word_suffix"):
        return "its model looks at whole words, and nothing splits the text into any"
    marks = {"type": "Replace", "pattern": {"String": " "}, "content": METASPACE}
    prepends = {"type": "Prepend", "prepend": METASPACE}
    if steps not in ([prepends, marks], [marks]):
        return "its normaliser is not proved to act part by part"
    later = engine.changed("normalizer", marks)
    return _separation(vocabulary, later, *_by_entries(vocabulary.inventory.entries), contents)


def _by_entries(entries: list[str | None]) -> tuple[Bytes, Bytes]:
    """Return the classes, and what is asked of them, when entries alone decide what is joined.

    A merge can join two characters only if some entry holds them side by side. Two that have no
    entry may become one unknown token, unless every byte has an entry.
    """
    asked = adjoining.allowed_by_text().copy()
    classes = adjoining.classes()
    before_space, before_others = set(), set()
    for left, right in set(chain.from_iterable(pairwise(entry) for entry in entries if entry)):
        before, after = ord(left), ord(" " if right == METASPACE else right)
        if before < 128:
            asked[before, classes[after]] = 0
        elif after == adjoining.SPACE:
            before_space.add(before)
        elif after < 128:
            before_others.add(before)
    classes = adjoining.demoted(classes, np.array(sorted(before_others), dtype=np.int64))
    classes[sorted(before_space)] = adjoining.CLOSED
    if not _BYTE_PIECES.issubset(entries):
        classes = _beside_known(classes, asked, entries)
    return classes, asked


def _beside_known(classes: Bytes, asked: Bytes, entries: list[str | None]) -> Bytes:
    """Return the classes, and change ``asked``, so that two characters without an entry stay."""
    known = np.zeros(len(classes), dtype=np.bool_)
    known[[ord(entry) for entry in entries if entry and len(entry) == 1]] = True
    known[adjoining.SPACE] = known[ord(METASPACE)]
    words = [adjoining.LETTER, adjoining.NUMBER, adjoining.SPECIAL]
    lacking = np.flatnonzero(~known[:128])
    asked[np.ix_(lacking, [*lacking, *words])] = 0
    if len(lacking):
        classes = adjoining.demoted(classes, np.flatnonzero(~known & np.isin(classes, words)))
    if not known[adjoining.SPACE]:
        classes[128:][~known[128:]] = adjoining.CLOSED
    return classes
