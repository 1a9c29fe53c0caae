"""Encodes many short parts in few strings: each between places where tokens are proved to part."""

from __future__ import annotations

import re

import numpy as np

from auditor.text.slices import ranges
from auditor.vocabulary.engine import Bools, Ints, bounds_of
from auditor.vocabulary.splits import Splits
from auditor.vocabulary.tokenizers_engine import TokenizersEngine

# Parts that are laid into one string.
_TOGETHER = 512
# What stands between two parts: a space after ink and blanks, and then ink. Before a letter that is
# a number, as patterns keep letters together.
_FENCES = ("a", "1", " a", " 1")


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

    def tokens(self, parts: list[str]) -> tuple[Ints, Ints]:
        """Return the ids of ``parts`` end to end, and the bounds of each part among them."""
        laid = [self.laid(parts[i : i + _TOGETHER]) for i in range(0, len(parts), _TOGETHER)]
        strings = [string for string, _, _ in laid]
        ids, bounds = self._engine.unaltered_tokens(strings)
        spelled = self._engine.spelling.spells(ids, bounds, strings)
        before = bounds_of([len(string.encode()) for string in strings])[:-1].tolist()
        edges = np.concatenate([own + at for (_, own, _), at in zip(laid, before, strict=True)])
        begins, stops = edges.T
        ends = bounds_of(self._engine.spelling.lengths[ids])
        sound = np.concatenate([flags for _, _, flags in laid])
        sound &= spelled[np.arange(len(parts)) // _TOGETHER]
        # Without bytes that are lacking, tokens end where parts do.
        firsts, lasts = np.searchsorted(ends, begins), np.searchsorted(ends, stops)
        within = np.minimum(firsts, len(ends) - 1), np.minimum(lasts, len(ends) - 1)
        sound &= (ends[within[0]] == begins) & (ends[within[1]] == stops)
        return self._with_others(parts, sound, ids, firsts, lasts - firsts)

    def _with_others(
        self, parts: list[str], sound: Bools, ids: Ints, firsts: Ints, lengths: Ints
    ) -> tuple[Ints, Ints]:
        """Return the tokens of the ``sound`` parts from ``ids``, and of the others alone."""
        alone = np.flatnonzero(~sound)
        if len(alone):
            others, bounds = self._engine.unaltered_tokens(
                [parts[place] for place in alone.tolist()]
            )
            firsts[alone] = len(ids) + bounds[:-1]
            lengths[alone] = np.diff(bounds)
            ids = np.concatenate((ids, others))
        return ids[ranges(firsts, lengths)], bounds_of(lengths)

    def laid(self, parts: list[str]) -> tuple[str, Ints, Bools]:
        """Return parts as one string, where each stands in its bytes, and which may stand there.

        The second has the shape (parts, 2): begins and ends; the third (parts,).
        """
        fences = [_fence("\n", parts[0]), *map(_fence, parts, parts[1:]), _fence(parts[-1], "a")]
        pieces = [fences[0]]
        for part, fence in zip(parts, fences[1:], strict=True):
            pieces += (part, fence)
        string = "".join(pieces)
        edges = bounds_of([len(piece) for piece in pieces])
        points = np.frombuffer(string.encode("utf-32-le"), dtype=np.uint32)
        places = self._splits.within(points, edges[[0, -1]])
        sound = places[edges[1:-1:2]] & places[edges[2::2]]
        if self._added is not None and self._added.search(string):
            sound[:] = False
        if not string.isascii():
            edges = bounds_of([len(piece.encode()) for piece in pieces])
        return string, np.stack((edges[1:-1:2], edges[2::2]), axis=1), sound


def _fence(before: str, after: str) -> str:
    """Return what is likely to set two parts apart."""
    return _FENCES[2 * (before[-1] != "\n") + after[0].isalpha()]
