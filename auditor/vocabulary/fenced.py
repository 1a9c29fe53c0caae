"""Encodes many short parts in few strings: each between places where tokens are proved to part."""

from __future__ import annotations

import re
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from auditor.text.slices import integers, ranges
from auditor.vocabulary.engine import Bools, Ints, bounds_of
from auditor.vocabulary.splits import Splits
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# Parts that are laid into one string.
_TOGETHER = 512
# What stands between two parts: a space after ink and blanks, and then ink. Before a letter that is
# a number, as patterns keep letters together.
_FENCES = pa.array(["a", "1", " a", " 1"], pa.large_string())
_NOTHING = pa.scalar("", pa.large_string())
_LETTERS = np.array([chr(octet).isalpha() for octet in range(0x100)])


@dataclass(frozen=True, slots=True)
class Laid:
    """Parts in strings, ``_TOGETHER`` in each; arrays of shape (parts,).

    ``begins`` and ``ends`` are in bytes of all strings end to end; ``sound`` tells for which parts
    both are proved places.
    """

    strings: list[str]
    begins: Ints
    ends: Ints
    sound: Bools


class FencedParts:
    """Gives the tokens of parts of texts, which no normaliser alters and no added token is in.

    Between two parts stands a fence. Which one is a guess: what is relied on is that `Splits` finds
    a place on both sides of a part in the string that was made. Parts for which it does not, and
    all of a string that an added token came about in, are encoded alone.
    """

    def __init__(self, engine: TokenizersEngine, splits: Splits, added: tuple[str, ...]) -> None:
        self._engine = engine
        self._splits = splits
        self._added = re.compile("|".join(map(re.escape, added))) if added else None

    def tokens(self, parts: pa.LargeStringArray) -> tuple[Ints, Ints]:
        """Return the ids of ``parts`` end to end, and the bounds of each part among them."""
        laid = self.laid(parts)
        ids, bounds = self._engine.unaltered_tokens(laid.strings)
        spelled = self._engine.spelling.spells(ids, bounds, laid.strings)
        ends = bounds_of(self._engine.spelling.lengths[ids])
        sound = laid.sound & spelled[np.arange(len(parts)) // _TOGETHER]
        # Without bytes that are lacking, tokens end where parts do.
        firsts, lasts = np.searchsorted(ends, laid.begins), np.searchsorted(ends, laid.ends)
        within = np.minimum(firsts, len(ends) - 1), np.minimum(lasts, len(ends) - 1)
        sound &= (ends[within[0]] == laid.begins) & (ends[within[1]] == laid.ends)
        return self._with_others(parts, sound, ids, firsts, lasts - firsts)

    def _with_others(
        self, parts: pa.LargeStringArray, sound: Bools, ids: Ints, firsts: Ints, lengths: Ints
    ) -> tuple[Ints, Ints]:
        """Return the tokens of the ``sound`` parts from ``ids``, and of the others alone."""
        alone = np.flatnonzero(~sound)
        if len(alone):
            texts = parts.take(integers(alone)).to_pylist()
            others, bounds = self._engine.unaltered_tokens(texts)
            firsts[alone] = len(ids) + bounds[:-1]
            lengths[alone] = np.diff(bounds)
            ids = np.concatenate((ids, others))
        return ids[ranges(firsts, lengths)], bounds_of(lengths)

    def laid(self, parts: pa.LargeStringArray) -> Laid:
        """Return ``parts``, one or more, in strings."""
        widths = np.diff(_offsets(parts))
        octets = pc.binary_join_element_wise(parts, _fences(parts), _NOTHING)
        edges = _offsets(octets) - _offsets(octets)[0]
        data = np.frombuffer(octets.buffers()[2], dtype=np.uint8)[_offsets(octets)[0] :]
        cuts = [*range(0, len(parts), _TOGETHER), len(parts)]
        text = data[: edges[-1]].tobytes()
        at = edges[cuts].tolist()
        strings = [text[begin:end].decode() for begin, end in pairwise(at)]
        joined = "".join(strings)
        points = np.frombuffer(joined.encode("utf-32-le"), dtype=np.uint32)
        begins, ends, bounds = edges[:-1], edges[:-1] + widths, edges[cuts]
        # The place of the character that begins at, or the end after, each byte.
        number = bounds_of((data[: edges[-1]] & 0xC0) != 0x80)
        places = self._splits.within(points, number[bounds])
        sound = places[number[begins]] & places[number[ends]]
        if self._added is not None:
            odd = [self._added.search(string) is not None for string in strings]
            sound &= ~np.array(odd, dtype=np.bool_)[np.arange(len(parts)) // _TOGETHER]
        return Laid(strings, begins, ends, sound)


def _offsets(strings: pa.LargeStringArray) -> Ints:
    return np.frombuffer(strings.buffers()[1], dtype=np.int64)[
        strings.offset : strings.offset + len(strings) + 1
    ]


def _fences(parts: pa.LargeStringArray) -> pa.LargeStringArray:
    """Return for each part what is likely to set it apart from the next."""
    offsets = _offsets(parts)
    octets = np.frombuffer(parts.buffers()[2], dtype=np.uint8)
    firsts, lasts = octets[offsets[1:-1]], octets[offsets[1:] - 1]
    # Most characters beyond ASCII are letters.
    letters = np.append((firsts >= 0x80) | _LETTERS[firsts], False)
    return _FENCES.take(integers(2 * (lasts != ord("\n")) + letters))
