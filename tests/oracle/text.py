"""Units of a text, straight from their definitions: whitespace, words, runs of whitespace."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import groupby

import regex
from icu4py.breakers import WordBreaker

ZERO_WIDTH = frozenset("\u200b\u200c\u200d\u2060\ufeff")
LINE_ENDS = frozenset("\n\r\v\f\u0085\u2028\u2029")
NO_BREAK_SPACES = frozenset("\u00a0\u202f\u2007")
IDEOGRAPHIC_SPACES = frozenset("\u3000")

KINDS = (
    "document edge",
    "CRLF",
    "blank line",
    "line end",
    "tab",
    "space run",
    "single space",
    "no-break space",
    "ideographic space",
    "other",
    "zero-width",
)


@dataclass(frozen=True)
class Run:
    """One maximal run of whitespace, or of zero-width characters; ``stop`` is exclusive."""

    start: int
    stop: int
    text: str
    kind: str
    position: str  # "start", "middle" or "end" of the document


@cache
def is_whitespace(character: str) -> bool:
    return regex.fullmatch(r"\p{White_Space}", character) is not None


@cache
def is_mark(character: str) -> bool:
    return regex.fullmatch(r"\p{M}", character) is not None


@cache
def is_letter_or_number(character: str) -> bool:
    return regex.fullmatch(r"[\p{L}\p{N}]", character) is not None


def strip_whitespace(text: str) -> str:
    return regex.sub(r"^\p{White_Space}+|\p{White_Space}+$", "", text)


def words_of(text: str, rule: str) -> list[tuple[int, int]]:
    """Return the words' ranges in code points, under the rule "icu" or "whitespace"."""
    if rule == "icu":
        segments = _segments_between_word_boundaries(text)
    elif rule == "whitespace":
        segments = [match.span() for match in regex.finditer(r"\P{White_Space}+", text)]
    else:
        raise ValueError(f"words by what rule? {rule!r}")
    return [
        (start, stop)
        for start, stop in segments
        if any(is_letter_or_number(character) for character in text[start:stop])
    ]


def _segments_between_word_boundaries(text: str) -> list[tuple[int, int]]:
    """ICU counts UTF-16 units: a character beyond U+FFFF is two of them, so offsets are mapped."""
    code_point_at = {}
    units = 0
    for position, character in enumerate(text):
        code_point_at[units] = position
        units += 2 if ord(character) > 0xFFFF else 1
    code_point_at[units] = len(text)
    return [
        (code_point_at[start], code_point_at[stop])
        for start, stop in WordBreaker(text, "en").segments()
    ]


def runs_of(text: str) -> list[Run]:
    """Return every maximal run of whitespace and of zero-width characters, in order."""
    runs = []
    for name, group in groupby(range(len(text)), key=lambda position: _class(text[position])):
        if name == "other":
            continue
        positions = list(group)
        start, stop = positions[0], positions[-1] + 1
        at_an_edge = start == 0 or stop == len(text)
        written = text[start:stop]
        kind = "zero-width" if name == "zero-width" else kind_of(written, at_an_edge=at_an_edge)
        runs.append(Run(start, stop, written, kind, _position(start, stop, len(text))))
    return runs


def _class(character: str) -> str:
    if is_whitespace(character):
        return "whitespace"
    return "zero-width" if character in ZERO_WIDTH else "other"


def _position(start: int, stop: int, length: int) -> str:
    if start == 0:
        return "start"
    return "end" if stop == length else "middle"


def kind_of(run: str, *, at_an_edge: bool) -> str:
    """Return the first kind that fits a run of whitespace."""
    line_ends = sum(character in LINE_ENDS for character in run.replace("\r\n", "\n"))
    if at_an_edge:
        return "document edge"
    if "\r\n" in run:
        return "CRLF"
    if line_ends >= 2:
        return "blank line"
    if line_ends == 1:
        return "line end"
    if "\t" in run:
        return "tab"
    if set(run) == {" "}:
        return "single space" if len(run) == 1 else "space run"
    if set(run) <= NO_BREAK_SPACES:
        return "no-break space"
    if set(run) <= IDEOGRAPHIC_SPACES:
        return "ideographic space"
    return "other"
