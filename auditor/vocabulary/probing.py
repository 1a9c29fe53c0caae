"""Facts about a vocabulary that are found by trying it: how it writes spaces, and its prefix."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from itertools import chain, islice
from typing import Literal

import regex

from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Engine, Inventory
from auditor.vocabulary.spans import Spans, correct

SpaceConvention = Literal[
    "leading marker",
    "trailing marker",
    "word-end marker",
    "continuation prefix",
    "own token",
    "dropped",
]

_LETTER = regex.compile(r"\p{L}")
_LETTERS = regex.compile(r"\p{L}{2,12}")
_PAIRS = 40
# Letters that most vocabularies hold whole, tried in this order; the first that comes back alone.
_CANDIDATE_LETTERS = "abeostnирαεω一のกकאا"


@dataclass(frozen=True, slots=True)
class SpaceFacts:
    """How the space between words is written, and whether one is added before the first word."""

    convention: SpaceConvention
    prefix_added: bool


def probe_spaces(engine: Engine, inventory: Inventory, *, prefix: str, suffix: str) -> SpaceFacts:
    """Return how spaces are written, by encoding pairs of words that the vocabulary holds.

    ``prefix`` continues a word (``##``) and ``suffix`` ends one (``</w>``) where the model names
    them; they decide only how a space that no token covers is called.
    """
    words = _held_words(inventory, prefix, suffix)
    pairs = list(zip(words, words[1:] + words[:1], strict=True))[:_PAIRS] or [("a", "b")]
    votes: dict[SpaceConvention, int] = {}
    for first, second in pairs:
        vote = _vote(_spans(engine, inventory, f"{first} {second}"), len(first), prefix, suffix)
        votes[vote] = votes.get(vote, 0) + 1
    # A space that stands alone beside words with a marker is a run of its own, not the convention.
    convention = max(votes, key=lambda vote: (votes[vote], vote))
    return SpaceFacts(convention, _adds_prefix(engine, inventory, pairs))


def _vote(spans: Spans, space: int, prefix: str, suffix: str) -> SpaceConvention:
    over = [
        (start, end)
        for start, end in zip(spans.starts.tolist(), spans.ends.tolist(), strict=True)
        if start <= space < end
    ]
    if any(end > space + 1 for _, end in over):
        return "leading marker"
    if any(start < space for start, _ in over):
        return "trailing marker"
    if over:
        return "own token"
    if suffix:
        return "word-end marker"
    return "continuation prefix" if prefix else "dropped"


def _adds_prefix(engine: Engine, inventory: Inventory, pairs: list[tuple[str, str]]) -> bool:
    """Return whether most words are written at the start as they are after a space."""
    same = different = 0
    for first, second in pairs:
        alone = engine.encode([second]).ids.tolist()
        spans = _spans(engine, inventory, f"{first} {second}")
        inner = [
            number
            for number, start, end in zip(spans.ids.tolist(), spans.starts, spans.ends, strict=True)
            if end > len(first) + 1 or (start == len(first) and end == start + 1)
        ]
        marked = bool(inner) and (inventory.entries[inner[0]] or "").startswith(inventory.marker)
        same += marked and alone == inner
        different += not marked or alone != inner
    return bool(inventory.marker) and same > different


def probe_letters(engine: Engine, inventory: Inventory) -> tuple[str, str]:
    """Return two letters that the vocabulary writes and gives back, to set whitespace between."""
    single = (entry for entry in inventory.entries if entry and len(entry) == 1)
    held = islice((entry for entry in single if _LETTER.fullmatch(entry)), 200)
    candidates = dict.fromkeys(chain(_CANDIDATE_LETTERS, held))
    found = (letter for letter in candidates if _comes_back(engine, inventory, letter))
    good = list(islice(found, 2)) or ["a", "b"]
    return good[0], good[-1]


def _comes_back(engine: Engine, inventory: Inventory, letter: str) -> bool:
    ids = engine.encode([letter]).ids.tolist()
    if inventory.unknown is not None and inventory.unknown in ids:
        return False
    return bool(ids) and (not engine.has_decoder or engine.decode([ids])[0].strip() == letter)


def _held_words(inventory: Inventory, prefix: str, suffix: str) -> list[str]:
    """Return up to 40 entries that are words, markers taken off, spread over the vocabulary.

    Words of ASCII letters are preferred: what is asked is how a space between words is written,
    and many scripts write none.
    """
    found = [_bare(inventory, number, prefix, suffix) for number in range(len(inventory.entries))]
    chosen = _words(word for word in found if word and word.isascii())
    if len(chosen) < 2:
        chosen = _words(word for word in found if word)
    return chosen[:: max(1, len(chosen) // _PAIRS)][:_PAIRS]


def _words(texts: Iterable[str]) -> list[str]:
    return [text for text in dict.fromkeys(texts) if _LETTERS.fullmatch(text)]


def _bare(inventory: Inventory, number: int, prefix: str, suffix: str) -> str | None:
    entry = inventory.entries[number]
    if entry is None or (prefix and entry.startswith(prefix)):
        return None
    if inventory.entry_bytes is not None:
        return (inventory.entry_bytes[number] or b"").decode("utf-8", "replace").strip(" ")
    return (entry.removesuffix(suffix) if suffix else entry).strip(inventory.marker)


def _spans(engine: Engine, inventory: Inventory, text: str) -> Spans:
    stretch = Stretch([text])
    return correct(engine.encode([text]), stretch, inventory)
