"""Unicode properties as look-up tables over code points; `regex` is the one authority."""

from __future__ import annotations

from functools import cache

import numpy as np
import numpy.typing as npt
import regex

CODE_POINTS = 0x110000
BoolTable = npt.NDArray[np.bool_]

WHITESPACE = r"\p{White_Space}"
WORD_CHARACTER = r"[\p{L}\p{N}]"
MARK = r"\p{M}"
ZERO_WIDTH = frozenset("\u200b\u200c\u200d\u2060\ufeff")


@cache
def every_character() -> str:
    """Return every code point in order; surrogates, which no text holds, stand as U+0000."""
    before, after = map(chr, range(0xD800)), map(chr, range(0xE000, CODE_POINTS))
    return "".join(before) + "\0" * 0x800 + "".join(after)


@cache
def table(property_class: str) -> BoolTable:
    """Return a table of 0x110000 booleans: which code points match ``property_class``.

    ``property_class`` is a class in `regex` syntax such as ``\\p{L}``.
    """
    found = np.zeros(CODE_POINTS, dtype=np.bool_)
    for match in regex.finditer(f"{property_class}+", every_character()):
        found[match.start() : match.end()] = True
    found.setflags(write=False)
    return found


@cache
def zero_width_table() -> BoolTable:
    """Return the table of the characters that are counted as zero-width."""
    found = np.zeros(CODE_POINTS, dtype=np.bool_)
    found[[ord(character) for character in ZERO_WIDTH]] = True
    return found
