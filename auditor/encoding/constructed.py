"""How terms are broken in constructed positions: found by encoding them there."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from auditor.corpus.glossary import Glossary
from auditor.encoding.breaking import Breaking, Breakings
from auditor.text.cases import cases_of
from auditor.text.stretch import Stretch
from auditor.vocabulary.opening import Vocabulary

# What stands before and after the term; `x` is a letter that the vocabulary writes, so that no
# position but the first begins a document.
ALONE, LINE_START, AFTER_SPACE, IN_PARENTHESES = (
    "alone",
    "line start",
    "after space",
    "in parentheses",
)
POSITIONS = {
    ALONE: ("", ""),
    LINE_START: ("x\n", ""),
    AFTER_SPACE: ("x ", ""),
    IN_PARENTHESES: ("x (", ")"),
}
_TOGETHER = 4096


class Constructed(NamedTuple):
    """A spelling of the glossary in one case, ``form``, and how it is broken by position."""

    spelling: str
    case: str
    form: str
    breakings: dict[str, Breaking]


def construct(
    vocabulary: Vocabulary, glossary: Glossary, *, parse_control: bool = True
) -> list[Constructed]:
    """Return every spelling of ``glossary`` in each case, in the order of the glossary."""
    forms = [
        (spelling, case, form)
        for term in glossary.terms
        for spelling in term.spellings
        for case, form in cases_of(spelling).items()
    ]
    distinct = list(dict.fromkeys(form for _, _, form in forms))
    breakings = Breakings(vocabulary, parse_control=parse_control)
    letter = vocabulary.letters[0]
    found: dict[str, dict[str, Breaking]] = {}
    for begin in range(0, len(distinct), _TOGETHER):
        some = distinct[begin : begin + _TOGETHER]
        by_position = [_broken(breakings, some, letter, place) for place in POSITIONS]
        for form, *own in zip(some, *by_position, strict=True):
            found[form] = dict(zip(POSITIONS, own, strict=True))
    return [Constructed(*row, found[row[2]]) for row in forms]


def _broken(breakings: Breakings, forms: list[str], letter: str, position: str) -> list[Breaking]:
    before, after = (side.replace("x", letter) for side in POSITIONS[position])
    stretch = Stretch([f"{before}{form}{after}" for form in forms])
    starts = stretch.bounds[:-1] + len(before)
    lengths = np.array([len(form) for form in forms], dtype=np.int64)
    return breakings.of(stretch, starts, starts + lengths)
