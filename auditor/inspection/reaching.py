"""Entries that can never be produced, and why (Land & Bartolo 2024, arXiv 2405.05417).

An entry is tried in two ways. *In the model*: its own spelling, with nothing before the model that
alters or splits it. *Through the whole pipeline*: its text in some contexts, with everything the
file says. Control tokens, bytes and parts of characters are no text by themselves: they are not
tried.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

import numpy as np

from auditor.inspection.surfaces import TEXTLESS, Surface, model_of
from auditor.vocabulary.engine import Engine
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.sentencepiece_engine import SentencePieceEngine
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# Texts in which an entry is tried: {} is its text, L a letter that the vocabulary writes.
CONTEXTS = {
    "start of text": "{}",
    "after a space": "L {}",
    "inside a word": "L{}",
    "before a letter": "{}L",
    "between letters": "L{}L",
    "after a line end": "L\n{}",
    "after a digit": "1{}",
    "in parentheses": "({})",
}
NORMALISER, SPLITTER, MERGES = (
    "the normaliser rewrites it",
    "the splitter takes it apart",
    "other entries win",
)
# What these leave is tried beside more letters, which single out what other entries hide.
_MORE = ("L{}", "{}L", "L{}L", "L {}L")
_LETTERS = 40
_TOGETHER = 20_000


@dataclass(frozen=True, slots=True)
class Unreachable:
    """An entry that was never produced: by the model alone, by the pipeline, or by neither.

    ``becomes`` are the entries that stand in its place at the start of a text.
    """

    surface: Surface
    in_model: bool | None
    in_pipeline: bool
    cause: str
    becomes: tuple[str, ...]


def unreachable(vocabulary: Vocabulary, surfaces: Iterable[Surface]) -> list[Unreachable]:
    """Return the entries that the model or the pipeline never produces, in the order of ids."""
    surfaces = list(surfaces)
    tried = [own for own in surfaces if own.kind not in TEXTLESS and own.text]
    by_model = _by_model(vocabulary, tried)
    missing = _not_in_pipeline(vocabulary.engine, contexts_of(vocabulary, surfaces), tried)
    found = []
    for own in tried:
        held = by_model.get(own.number)
        reached = own.number not in missing
        if reached and held is not False:
            continue
        found.append(_explained(vocabulary, own, held=held, reached=reached))
    return found


def contexts_of(vocabulary: Vocabulary, surfaces: Iterable[Surface]) -> list[str]:
    """Return the texts that entries are tried in, ``{}`` being an entry's, in their order."""
    first = vocabulary.letters[0]
    usual = [context.replace("L", first) for context in CONTEXTS.values()]
    more = [c.replace("L", letter) for letter in letters_of(surfaces) for c in _MORE]
    return list(dict.fromkeys([*usual, *more]))


def letters_of(surfaces: Iterable[Surface]) -> list[str]:
    """Return up to 40 letters that are entries of their own, spread over the vocabulary."""
    held = (own.text.strip() for own in surfaces if own.text and own.kind not in TEXTLESS)
    single = list(dict.fromkeys(text for text in held if len(text) == 1 and text.isalpha()))
    return single[:: max(1, len(single) // _LETTERS)][:_LETTERS]


def _not_in_pipeline(engine: Engine, contexts: list[str], tried: list[Surface]) -> set[int]:
    """Return the ids that no context brings out; each context is tried on what is left."""
    left = tried
    for context in contexts:
        if not left:
            break
        reached: set[int] = set()
        for begin in range(0, len(left), _TOGETHER):
            some = left[begin : begin + _TOGETHER]
            ids, bounds = engine.ids_of([_placed(context, own) for own in some])
            owners = np.repeat(np.array([own.number for own in some]), np.diff(bounds))
            reached |= set(owners[ids == owners].tolist())
        left = [own for own in left if own.number not in reached]
    return {own.number for own in left}


def _placed(context: str, own: Surface) -> str:
    """Return the text of a context; a space that the entry brings is not set twice."""
    text = own.text or ""
    return context.replace("{}", text.removeprefix(" ") if " {}" in context else text)


def _by_model(vocabulary: Vocabulary, tried: list[Surface]) -> dict[int, bool]:
    """Return whether the model alone gives each entry back; empty where it cannot be asked."""
    engine = vocabulary.engine
    if isinstance(engine, SentencePieceEngine):
        ids, bounds = engine.plain().ids_of([own.text or "" for own in tried])
        return {
            own.number: bool(stop - begin == 1 and ids[begin] == own.number)
            for own, begin, stop in zip(tried, bounds[:-1], bounds[1:], strict=True)
        }
    if isinstance(engine, TokenizersEngine):
        gives_back = _gives_back(vocabulary, engine, letters_of(tried))
        return {own.number: gives_back(own) for own in tried if own.kind != "added"}
    return {}


def _gives_back(
    vocabulary: Vocabulary, engine: TokenizersEngine, letters: list[str]
) -> Callable[[Surface], bool]:
    model = engine.model_alone
    prefix = model_of(vocabulary).get("continuing_subword_prefix") or ""

    def tokens(spelled: str) -> list[int]:
        return [token.id for token in model.tokenize(spelled)]

    def whole(own: Surface) -> bool:
        if prefix and own.entry.startswith(prefix):
            # It goes on with a word: some letter stands before it.
            rest = own.entry.removeprefix(prefix)
            return any(tokens(letter + rest)[1:] == [own.number] for letter in letters)
        return tokens(own.entry) == [own.number]

    return whole


def _explained(
    vocabulary: Vocabulary, own: Surface, *, held: bool | None, reached: bool
) -> Unreachable:
    engine, entries = vocabulary.engine, vocabulary.inventory.entries
    text = own.text or ""
    ids, _ = engine.ids_of([text])
    becomes = tuple(entries[number] or "" for number in ids.tolist()[:8])
    bare = text.strip(" ")
    if bare and engine.normalize(bare) != bare:
        cause = NORMALISER
    elif held is False:
        cause = MERGES
    else:
        cause = SPLITTER
    return Unreachable(own, held, reached, cause, becomes)
