"""How steadily words are broken: in how many ways one form is, and what small changes cost.

Words come with weights, as drawn from the corpus (`tallies/wordcounts.py`), and are encoded in
stated contexts. Nothing here depends on how they were drawn.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from auditor.encoding.breaking import Breaking, Breakings
from auditor.text.cases import titled
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.opening import Vocabulary

# Contexts by what they vary; {} is the word, L a letter that the vocabulary writes.
POSITION = {"start of text": "{}", "after a space": "L {}", "after a line end": "L\n{}"}
PUNCTUATION = {
    "after a space": "L {}", "after (": "L ({}", "before .": "L {}.", "before ,": "L {},",
}  # fmt: skip
CASES: dict[str, Callable[[str], str]] = {
    "as written": str, "lower case": str.lower, "title case": titled, "upper case": str.upper,
}  # fmt: skip
SPACING = {"two spaces before": "L  {}", "a no-break space before": "L\u00a0{}"}
_BASE = "L {}"

Words = Sequence[tuple[str, int]]
# Ways by what is varied, then by context.
Ways = dict[str, dict[str, Breaking]]


@dataclass(frozen=True, slots=True)
class Cost:
    """The words that a change alters, with their tokens before and after; shape (words,) each.

    ``unknown`` says where an unknown token appears that was not there before.
    """

    weights: Ints
    before: Ints
    after: Ints
    unknown: Ints
    unaltered: int


def ways_of(vocabulary: Vocabulary, words: Words, *, parse_control: bool) -> list[Ways]:
    """Return how each word is broken in each context, by what is varied."""
    breakings = Breakings(vocabulary, parse_control=parse_control)
    letter = vocabulary.letters[0]
    found: list[Ways] = [{} for _ in words]
    forms = [word for word, _ in words]
    for about, contexts in (("position", POSITION), ("punctuation", PUNCTUATION)):
        for name, context in contexts.items():
            _put(found, about, name, _broken(breakings, forms, context.replace("L", letter)))
    for name, case in CASES.items():
        cased = [case(word) for word in forms]
        _put(found, "case", name, _broken(breakings, cased, _BASE.replace("L", letter)))
    return found


def _put(found: list[Ways], about: str, name: str, breakings: list[Breaking]) -> None:
    for own, breaking in zip(found, breakings, strict=True):
        own.setdefault(about, {})[name] = breaking


def _broken(breakings: Breakings, forms: list[str], context: str) -> list[Breaking]:
    before, after = context.split("{}")
    stretch = Stretch([f"{before}{form}{after}" for form in forms])
    starts = stretch.bounds[:-1] + len(before)
    lengths = np.array([len(form) for form in forms], dtype=np.int64)
    return breakings.of(stretch, starts, starts + lengths)


def costs_of(
    vocabulary: Vocabulary, words: Words, changes: Mapping[str, Callable[[str], str]]
) -> dict[str, Cost]:
    """Return what each of ``changes``, and each way of spacing, does to the tokens of the words.

    Tokens are those of a letter, a space and the word, less the letter's own.
    """
    letter = vocabulary.letters[0]
    base = _BASE.replace("L", letter)
    weights = np.array([weight for _, weight in words], dtype=np.int64)
    texts = [base.replace("{}", word) for word, _ in words]
    before, unknown = _counts(vocabulary, texts, letter)
    found: dict[str, Cost] = {}
    altered = {
        name: [base.replace("{}", change(word)) for word, _ in words]
        for name, change in changes.items()
    }
    for name, context in SPACING.items():
        held = context.replace("L", letter)
        altered[name] = [held.replace("{}", word) for word, _ in words]
    for name, others in altered.items():
        differs = np.array([a != b for a, b in zip(texts, others, strict=True)], dtype=np.bool_)
        chosen = np.flatnonzero(differs)
        after, lost = _counts(vocabulary, [others[i] for i in chosen.tolist()], letter)
        new = (lost > unknown[chosen]).astype(np.int64)
        found[name] = Cost(
            weights[chosen], before[chosen], after, new, int(weights[~differs].sum())
        )
    return found


def _counts(vocabulary: Vocabulary, texts: list[str], letter: str) -> tuple[Ints, Ints]:
    """Return the tokens of each text less those of the letter, and its unknown ones."""
    own = len(vocabulary.engine.ids_of([letter])[0])
    ids, bounds = vocabulary.engine.ids_of(texts) if texts else (_NONE, np.zeros(1, np.int64))
    unknown = vocabulary.inventory.unknown
    flagged = np.zeros(len(ids) + 1, dtype=np.int64)
    if unknown is not None:
        np.cumsum(ids == unknown, out=flagged[1:])
    return np.diff(bounds) - own, flagged[bounds[1:]] - flagged[bounds[:-1]]


_NONE = np.zeros(0, dtype=np.int64)
