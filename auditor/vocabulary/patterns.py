"""Does a splitting pattern always split at some places? Proved from the pattern itself.

Two claims are asked. *Before a space*: a match that holds a character which is no whitespace
ends before a U+0020 that follows it. *Between two classes* (`adjoining`), *x* and *y*: a match that
holds an *x* ends before a *y* that follows it. In both, neither side of the place looks across it.

The first holds when every alternative of the pattern is of one of two forms:

- whitespace only: nothing in it matches anything but whitespace, `(?!\\S)` or `$` may end it;
- a body that cannot match U+0020, after at most one optional element that may;

for then U+0020 can only come first in a match, or among whitespace. The second holds when besides,
in no alternative, an element that matches *x* stands before one that matches *y*, or is repeated
and matches both. What an element matches is tried with every character of the classes.

A look-ahead stands only behind whitespace, so that it never sees past a place after anything else.
After a line end it does, and decides: `\\s+(?!\\S)` takes two line ends before the end of a text,
and one before a letter. So *x* may be a line end only when no other whitespace stands before it
(where one character is left to match, one is matched), or when an alternative like `\\s*[\\r\\n]+`
comes first and takes all whitespace up to the last line end, whatever follows.

Every character must be matched by some alternative, or what no alternative matches would stay
together, and none may match nothing, or it would keep the others from being tried. Anything this
reader does not know is not proved, and such a pattern is never relied on.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache

import numpy as np
import regex

from auditor.text import properties
from auditor.vocabulary import adjoining
from auditor.vocabulary.adjoining import Bools

_ELEMENT = regex.compile(
    r"(?P<look>\(\?!\\S\)|\$)|(?P<group>\((?:\?i:|\?:)(?P<body>[^()]*)\))"
    r"|(?P<unit>\[\^?(?:\\.\{[^}]*\}|\\.|[^\]\\])+\]|\\[pP]\{[^}]*\}|\\[sSdDwWrntfv\W]"
    r"|[^\\()\[\]|*+?{}^$.])"
)
# What engines read differently within a class: sets taken from sets, and classes within classes.
_SETS = regex.compile(r"&&|--|~~|.\[")
_ESCAPED = regex.compile(r"\\.")
# Engines disagree on which numbers and rare letters these match.
_VAGUE = regex.compile(r"\\[wW]")
_QUANTIFIER = regex.compile(r"(?:[?*+]|\{\d+(?:,\d*)?\})[+?]?")
_WHITESPACE_SAMPLE = " \t\n\r\v\f\x85\u00a0\u1680\u2003\u2028\u2029\u202f\u205f\u3000"


@dataclass(frozen=True, slots=True)
class Part:
    """An element of an alternative, with how often it is matched; ``look`` matches no character."""

    source: str
    quantifier: str
    look: bool

    @property
    def optional(self) -> bool:
        """Whether it is matched once or not at all."""
        return self.quantifier in {"?", "?+"}

    @property
    def repeated(self) -> bool:
        """Whether it may be matched more than once."""
        return self.quantifier[:1] in {"*", "+", "{"}

    def matches(self, text: str) -> bool:
        """Return whether it matches all of ``text``, taken once."""
        return regex.fullmatch(self.source, text, flags=regex.V0) is not None


@cache
def splits_before_space(pattern: str) -> bool:
    """Return whether the first claim is proved for ``pattern``."""
    alternatives = alternatives_of(pattern)
    return alternatives is not None and all(map(_is_admitted, alternatives))


@cache
def splits_between(pattern: str) -> Bools:
    """Return between which classes a split is proved, shape (CLASSES, CLASSES): *x*, then *y*."""
    alternatives = alternatives_of(pattern)
    if alternatives is None or not all(map(_is_admitted, alternatives)):
        return np.zeros((adjoining.CLASSES, adjoining.CLASSES), dtype=np.bool_)
    joined = np.zeros((adjoining.CLASSES, adjoining.CLASSES), dtype=np.bool_)
    for parts in alternatives:
        for left, right in _following(parts, ignore_case=False):
            joined |= np.outer(_matched(*left), _matched(*right))
    return ~joined


@cache
def takes_line_ends(pattern: str) -> bool:
    """Return whether *x* may be a line end with other whitespace before it."""
    looked = False
    for parts in alternatives_of(pattern) or []:
        if _takes_all_to_line_end(parts):
            return True
        looks = any(part.look for part in parts)
        if looks and not _takes_all_to_text_end(parts):
            return False
        looked = looked or looks
    return not looked


def _takes_all_to_line_end(parts: list[Part]) -> bool:
    """Return whether ``parts`` are `\\s*[\\r\\n]+`, or that with another class of line ends."""
    if len(parts) != 2 or (parts[0].source, parts[0].quantifier) != ("\\s", "*"):
        return False
    last = parts[1]
    return is_whitespace_only(last) and last.matches("\n") and last.quantifier in {"", "+", "++"}


def _takes_all_to_text_end(parts: list[Part]) -> bool:
    """Return whether ``parts`` are `\\s++$`: the same whitespace, when nothing stands after it."""
    return [(part.source, part.quantifier) for part in parts] == [("\\s", "++"), ("$", "")]


# An element, and whether it is matched in either case.
_Atom = tuple[str, bool]


def _following(parts: list[Part], *, ignore_case: bool) -> Iterator[tuple[_Atom, _Atom]]:
    """Yield each two elements of which the second may match after the first in one match."""
    held = [list(_atoms(part, ignore_case=ignore_case)) for part in parts]
    for place, (part, lefts) in enumerate(zip(parts, held, strict=True)):
        rights = [atom for later in held[place + 1 :] for atom in later]
        rights += lefts if part.repeated else []
        yield from ((left, right) for left in lefts for right in rights)
        for branch in branches_within(part):
            insensitive = ignore_case or part.source.startswith("(?i:")
            yield from _following(branch, ignore_case=insensitive)


def _atoms(part: Part, *, ignore_case: bool) -> Iterator[_Atom]:
    if part.look:
        return
    if not part.source.startswith("("):
        yield part.source, ignore_case
        return
    insensitive = ignore_case or part.source.startswith("(?i:")
    for branch in branches_within(part):
        for inner in branch:
            yield from _atoms(inner, ignore_case=insensitive)


def branches_within(part: Part) -> list[list[Part]]:
    """Return the alternatives within a group; none of anything else."""
    element = _ELEMENT.match(part.source)
    if part.look or element is None or element["group"] is None:
        return []
    return [_parts(branch) for branch in _branches(element["body"])]


@cache
def _matched(source: str, ignore_case: bool) -> Bools:  # noqa: FBT001 - a key of the cache
    """Return the classes of which an element matches some character, shape (CLASSES,)."""
    compiled = regex.compile(source, regex.V0 | (regex.IGNORECASE if ignore_case else 0))
    matched = [compiled.search(members) is not None for members in _members()]
    found = np.array(matched, dtype=np.bool_)
    if _VAGUE.search(source):
        found[[adjoining.NUMBER, adjoining.SPECIAL]] = True
    if ignore_case and found[list(adjoining.ASCII_WORDS)].any():
        # Some engines match `ss` with ß.
        found[[adjoining.LETTER, adjoining.SPECIAL]] = True
    return found


@cache
def _members() -> tuple[str, ...]:
    """Return the characters of each class; of those that are never *x* nor *y*, none."""
    table = adjoining.classes()
    ascii_characters = [chr(point) for point in range(128)]
    lasting = (adjoining.LETTER, adjoining.NUMBER, adjoining.SPECIAL)
    beyond = [
        "".join(map(chr, np.flatnonzero(table == number).tolist())) if number in lasting else ""
        for number in range(128, adjoining.CLASSES)
    ]
    return (*ascii_characters, *beyond)


def alternatives_of(pattern: str) -> list[list[Part]] | None:
    """Return the parts of each alternative; ``None`` when the pattern cannot be read."""
    try:
        found = [_parts(branch) for branch in _branches(pattern)]
        return found if _covers_everything(pattern) else None
    except (ValueError, regex.error):
        return None


def _branches(pattern: str) -> list[str]:
    """Return the alternatives at the top level of ``pattern``."""
    found, depth, bracket, begin, place = [], 0, False, 0, 0
    while place < len(pattern):
        character = pattern[place]
        if character == "\\":
            place += 1
        elif bracket:
            bracket = character != "]"
        elif character == "[":
            bracket = True
        elif character in "()":
            depth += 1 if character == "(" else -1
        elif character == "|" and depth == 0:
            found.append(pattern[begin:place])
            begin = place + 1
        place += 1
    return [*found, pattern[begin:]]


def _parts(branch: str) -> list[Part]:
    parts, place = [], 0
    while place < len(branch):
        element = _ELEMENT.match(branch, place)
        if element is None or _SETS.search(_ESCAPED.sub("", element["unit"] or "")):
            raise ValueError(branch)
        place = element.end()
        quantifier = _QUANTIFIER.match(branch, place)
        if quantifier is not None:
            place = quantifier.end()
        times = "" if quantifier is None else quantifier[0]
        parts.append(Part(element[0], times, element["look"] is not None))
    if not parts:
        raise ValueError(branch)
    return parts


def _is_admitted(parts: list[Part]) -> bool:
    if all(part.look or is_whitespace_only(part) for part in parts):
        looks = [part for part in parts if part.look]
        return not looks or (len(looks) == 1 and parts[-1].look and len(parts) > 1)
    if any(map(looks_ahead, parts)):
        return False
    body = parts[1:] if parts[0].optional else parts
    return bool(body) and not any(may_hold(part, " ") for part in body)


def looks_ahead(part: Part) -> bool:
    """Return whether an element looks ahead, or one within a group does."""
    return part.look or any(inner.look for branch in branches_within(part) for inner in branch)


def may_hold(part: Part, sample: str) -> bool:
    """Return whether an element can match a character of ``sample``; of a group, any element."""
    if part.look:
        return False
    if not part.source.startswith("("):
        return any(part.matches(character) for character in sample)
    return any(may_hold(inner, sample) for branch in branches_within(part) for inner in branch)


def is_whitespace_only(part: Part) -> bool:
    """Return whether an element, no group, matches nothing but whitespace."""
    if part.look or part.source.startswith("("):
        return False
    if part.source in {"\\s", "\\r", "\\n", "\\t", " "}:
        return True
    if not part.source.startswith("[") or part.source.startswith("[^"):
        return False
    return not regex.search(part.source, _ink())


@cache
def _ink() -> str:
    """Return a sample of non-whitespace: ASCII, and the first of each general category."""
    return "".join(c for c in _sample() if c not in _WHITESPACE_SAMPLE)


@cache
def _sample() -> tuple[str, ...]:
    """Return all of ASCII and the first and last character of each general category."""
    found = [chr(point) for point in range(128)]
    every = properties.every_character()
    for category in _CATEGORIES:
        ends = (regex.search(f"{way}\\p{{{category}}}", every) for way in ("", "(?r)"))
        points = [end.start() for end in ends if end is not None]
        found += [chr(point) for point in points if not 0xD800 <= point < 0xE000]
    return tuple(dict.fromkeys(found))


_CATEGORIES = regex.findall("..", "LuLlLtLmLoMnMcMeNdNlNoPcPdPsPePiPfPoSmScSkSoZsZlZpCcCfCoCn")


def _covers_everything(pattern: str) -> bool:
    compiled = regex.compile(pattern)
    if compiled.fullmatch("") is not None:
        return False
    return all(compiled.fullmatch(character) for character in _sample())
