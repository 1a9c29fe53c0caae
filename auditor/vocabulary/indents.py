"""Where a splitting pattern always splits within whitespace that stands before a word.

Take a run of spaces, tabs and line ends, `w1` … `wk`, that stands at the beginning of a text or
after ink, with ink after it. Ink here is what `adjoining` knows as punctuation, letters and numbers
of all engines. Two places in it are asked about:

- *the last blank*: before `wk`, when that is a space or a tab and there is more of the run;
- *the last line end*: after the last `wj` that is a line end, when there is more of the run.

The alternatives of the pattern must be of these forms:

- words: at most one optional element that may match whitespace, then elements that match none up
  to and with the first that must match, then elements that match no space and no tab;
- whitespace, in this order: `\\s*[\\r\\n]+` or none, `\\s+(?!\\S)`, and `\\s+` or `\\s`.

For then a match that begins at a `wp` before `wk` is of whitespace: a word would need ink, or no
whitespace, after it. And a word that ends in the run ends before the first space or tab. If there
is a line end from `wp` on, and `\\s*[\\r\\n]+` in the pattern, the match ends with the last line
end, whatever stands before it or after it. If there is none, the match ends before `wk`, as the
look-ahead takes one character back. So matches end at both places, and it is the same when the text
ends there: what is left of `\\s*[\\r\\n]+` does not change, and `\\s+(?!\\S)` has nothing to take
back. No element looks backwards, so that the rest is matched as a text of its own.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache
from typing import NamedTuple

from auditor.vocabulary.patterns import (
    Part,
    alternatives_of,
    branches_within,
    is_whitespace_only,
    looks_ahead,
    may_hold,
)

_BLANKS = " \t"
_LINE_ENDS = "\r\n"
_REST = [("\\s", "+"), ("(?!\\S)", "")]
_ANY = ([("\\s", "+")], [("\\s", "")])


class Indents(NamedTuple):
    """At which of the two places a pattern is proved to split."""

    last_blank: bool
    last_line_end: bool


@cache
def splits_indents(pattern: str) -> Indents:
    """Return what is proved of ``pattern``; nothing where it is not of the forms."""
    alternatives = alternatives_of(pattern) or []
    blank = [parts for parts in alternatives if _is_whitespace(parts)]
    words = [parts for parts in alternatives if not _is_whitespace(parts)]
    if not all(map(_is_word, words)):
        return Indents(last_blank=False, last_line_end=False)
    first = bool(blank) and _takes_line_ends(blank[0])
    spelled = [list(_spelled(parts)) for parts in blank[first:]]
    proved = len(spelled) == len(_ANY) and spelled[0] == _REST and spelled[1] in _ANY
    return Indents(last_blank=proved, last_line_end=proved and first)


def _spelled(parts: list[Part]) -> Iterator[tuple[str, str]]:
    return ((part.source, part.quantifier) for part in parts)


def _is_whitespace(parts: list[Part]) -> bool:
    return all(part.look or is_whitespace_only(part) for part in parts)


def _takes_line_ends(parts: list[Part]) -> bool:
    """Return whether ``parts`` are `\\s*[\\r\\n]+`, or the same with one line end."""
    if len(parts) != 2 or (parts[0].source, parts[0].quantifier) != ("\\s", "*"):
        return False
    last = parts[1]
    matched = [character for character in _BLANKS + _LINE_ENDS if last.matches(character)]
    return matched == list(_LINE_ENDS) and last.quantifier in {"", "+"}


def _is_word(parts: list[Part]) -> bool:
    """Return whether ``parts`` are a word, as the text above has it."""
    if any(map(looks_ahead, parts)):
        return False
    body = parts[1:] if parts[0].optional else parts
    for place, part in enumerate(body):
        if may_hold(part, _BLANKS + _LINE_ENDS):
            return False
        if not _may_be_absent(part):
            return not any(may_hold(later, _BLANKS) for later in body[place + 1 :])
    return False


def _may_be_absent(part: Part) -> bool:
    """Return whether an element may match nothing."""
    if part.quantifier[:1] in {"?", "*"} or part.quantifier.startswith("{0"):
        return True
    return any(all(map(_may_be_absent, branch)) for branch in branches_within(part))
