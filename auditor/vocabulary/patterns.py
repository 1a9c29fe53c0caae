"""Does a splitting pattern always split at some places? Proved from the pattern itself.

Two claims. *Before a single space*: a match that holds a character which is no whitespace ends
before a U+0020 that follows it. *After a word*: a match that holds a letter or digit ends before
the whitespace that follows it. In both, neither side of the place looks across it.

The first holds when every alternative of the pattern is of one of two forms:

- whitespace only: nothing in it matches anything but whitespace, `(?!\\S)` or `$` may end it;
- a body that cannot match U+0020, after at most one optional element that may;

for then U+0020 can only come first in a match, or among whitespace. The second holds when besides,
in every alternative, no element at or after one that matches a letter or digit matches whitespace.
A look-ahead stands only behind whitespace, so that it never sees past the place. And every
character must be matched by some alternative, or what no alternative matches would stay together.
Anything this reader does not know is not proved, and such a pattern is never relied on.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import regex

from auditor.text import properties

_ELEMENT = regex.compile(
    r"(?P<look>\(\?!\\S\)|\$)|(?P<group>\((?:\?i:|\?:)(?P<body>[^()]*)\))"
    r"|(?P<unit>\[\^?(?:\\.\{[^}]*\}|\\.|[^\]\\])+\]|\\[pP]\{[^}]*\}|\\.|[^\\()\[\]|*+?{}^$.])"
)
_QUANTIFIER = regex.compile(r"(?:[?*+]|\{\d+(?:,\d*)?\})[+?]?")
_WORD_SAMPLE = "aZ09éßǅʰªЖωאسकก中あ가Ⅷ²½٣"
_WHITESPACE_SAMPLE = " \t\n\r\v\f\x85\u00a0\u1680\u2003\u2028\u2029\u202f\u205f\u3000"


@dataclass(frozen=True, slots=True)
class _Part:
    source: str
    optional: bool
    look: bool

    def matches(self, text: str) -> bool:
        return regex.fullmatch(self.source, text, flags=regex.V0) is not None


@cache
def splits_before_single_space(pattern: str) -> bool:
    """Return whether the first claim is proved for ``pattern``."""
    alternatives = _alternatives(pattern)
    return alternatives is not None and all(map(_is_admitted, alternatives))


@cache
def splits_after_word(pattern: str) -> bool:
    """Return whether both claims are proved for ``pattern``."""
    alternatives = _alternatives(pattern)
    return alternatives is not None and all(
        _is_admitted(parts) and _ends_with_word(parts) for parts in alternatives
    )


def _alternatives(pattern: str) -> list[list[_Part]] | None:
    """Return the parts of each alternative; ``None`` when the pattern cannot be read."""
    try:
        found = [_parts(branch) for branch in _branches(pattern)]
        return found if _covers_everything(pattern) else None
    except (ValueError, regex.error):
        return None


def _ends_with_word(parts: list[_Part]) -> bool:
    """Return whether nothing at or after an element that matches a word character matches space."""
    reached = False
    for part in parts:
        reached = reached or _may_hold(part, _WORD_SAMPLE)
        if reached and _may_hold(part, _WHITESPACE_SAMPLE):
            return False
    return True


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


def _parts(branch: str) -> list[_Part]:
    parts, place = [], 0
    while place < len(branch):
        element = _ELEMENT.match(branch, place)
        if element is None:
            raise ValueError(branch)
        place = element.end()
        quantifier = _QUANTIFIER.match(branch, place)
        if quantifier is not None:
            place = quantifier.end()
        optional = quantifier is not None and quantifier[0] in {"?", "?+"}
        parts.append(_Part(element[0], optional, element["look"] is not None))
    if not parts:
        raise ValueError(branch)
    return parts


def _is_admitted(parts: list[_Part]) -> bool:
    if all(part.look or _is_whitespace_only(part) for part in parts):
        looks = [part for part in parts if part.look]
        return not looks or (len(looks) == 1 and parts[-1].look and len(parts) > 1)
    if any(part.look for part in parts):
        return False
    body = parts[1:] if parts[0].optional else parts
    return bool(body) and not any(_may_hold(part, " ") for part in body)


def _may_hold(part: _Part, sample: str) -> bool:
    """Return whether an element can match a character of ``sample``; of a group, any element."""
    if part.look:
        return False
    if not part.source.startswith("("):
        return any(part.matches(character) for character in sample)
    body = _ELEMENT.match(part.source)["body"]
    return any(_may_hold(inner, sample) for branch in _branches(body) for inner in _parts(branch))


def _is_whitespace_only(part: _Part) -> bool:
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
    for category in _CATEGORIES:
        # Not kept: each of these tables is a megabyte, and each is looked at once.
        held = properties.table.__wrapped__(rf"\p{{{category}}}").nonzero()[0].tolist()
        found += [chr(point) for point in (held[0], held[-1]) if not 0xD800 <= point < 0xE000]
    return tuple(dict.fromkeys(found))


_CATEGORIES = regex.findall("..", "LuLlLtLmLoMnMcMeNdNlNoPcPdPsPePiPfPoSmScSkSoZsZlZpCcCfCoCn")


def _covers_everything(pattern: str) -> bool:
    compiled = regex.compile(pattern)
    return all(compiled.fullmatch(character) for character in _sample())
