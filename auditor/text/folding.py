"""Text as terms are sought in it: case folded, each run of whitespace one character."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
import numpy.typing as npt
import regex

from auditor.text import properties
from auditor.text.slices import Ints, Points
from auditor.text.stretch import Stretch

Bools = npt.NDArray[np.bool_]

SPACE, LINE_END = ord(" "), ord("\n")
# Characters of whitespace that end a line (UAX #14: BK, CR, LF, NL).
_ENDS_LINE = "\n\r\v\f\u0085\u2028\u2029"
_WHITESPACE = regex.compile(rf"{properties.WHITESPACE}+")


def one_spaced(text: str) -> str:
    """Return ``text`` with each run of whitespace as one space, and none at its ends."""
    spaced: str = _WHITESPACE.sub(" ", text)
    return spaced.strip(" ")


def folded_phrase(text: str) -> str:
    """Return ``text`` as it is sought: `one_spaced`, in full case folding (Unicode, section 3.13).

    No normal form is made: a composed and a decomposed spelling stay two.
    """
    return one_spaced(text).casefold()


# In the table of folds: a character that becomes several.
_SEVERAL = properties.CODE_POINTS


@dataclass(frozen=True, slots=True)
class Folded:
    """The folded characters of a stretch, ``points`` (characters,).

    A run of whitespace is one space, or one line feed where it holds the end of a line. Runs are
    not parted at the bounds of documents.
    """

    points: Points
    _dropped: Ints
    _several: _Several
    _size: int

    def origins(self, places: Ints) -> Ints:
        """Return the positions in the stretch at which the characters at ``places`` begin.

        Before the first character it is -1, behind the last the length of the stretch.
        """
        shifted = self._dropped - np.arange(len(self._dropped))
        held = places + np.searchsorted(shifted, places, side="right")
        held = self._several.origins(held)
        last = len(self.points) - 1
        return np.where(places < 0, -1, np.where(places > last, self._size, held))

    def places(self, origins: Ints) -> Ints:
        """Return where the characters at ``origins`` of the stretch, or what follows, begin."""
        held = self._several.folded(origins)
        return np.asarray(held - np.searchsorted(self._dropped, held, side="left"))


@dataclass(frozen=True, slots=True)
class _Several:
    """Folded characters, those from ``places[i]`` on being ``1 + more[i]`` of one character."""

    places: Ints
    more: Ints

    def folded(self, origins: Ints) -> Ints:
        """Return where the characters at ``origins`` are after folding."""
        before = np.concatenate(([0], np.cumsum(self.more)))
        own = self.places - before[:-1]
        return np.asarray(origins + before[np.searchsorted(own, origins, side="left")])

    def origins(self, folded: Ints) -> Ints:
        """Return the positions before folding of the characters at ``folded``."""
        if not len(self.places):
            return folded
        last = np.searchsorted(self.places, folded, side="right") - 1
        before = np.cumsum(self.more) - self.more
        own = np.minimum(folded - self.places[last], self.more[last])
        return np.where(last < 0, folded, folded - before[last] - own)


def fold(stretch: Stretch) -> Folded:
    """Return the folded characters of ``stretch``."""
    points, several = _characters(stretch)
    ends = points == LINE_END
    blank = (points == SPACE) | ends
    again = blank[1:] & blank[:-1]
    dropped = np.flatnonzero(again) + 1
    if len(dropped):
        heads = dropped[~again[dropped - 2] | (dropped == 1)] - 1
        late = dropped[ends[dropped]]
        points[heads[np.searchsorted(heads, late, side="left") - 1]] = LINE_END
        points = points[np.concatenate(([True], ~again))]
    return Folded(points, dropped, several, len(stretch.points))


def _characters(stretch: Stretch) -> tuple[Points, _Several]:
    """Return the folded characters, none dropped, and which of them are parts of one."""
    points = _folds()[stretch.points]
    places = np.flatnonzero(points == _SEVERAL)
    folded = [chr(point).casefold() for point in stretch.points[places].tolist()]
    more = np.array([len(text) - 1 for text in folded], dtype=np.int64)
    if len(places):
        points[places] = [ord(text[0]) for text in folded]
        points = np.insert(
            points, np.repeat(places + 1, more), [ord(c) for text in folded for c in text[1:]]
        )
    return points, _Several(places + np.cumsum(more) - more, more)


@cache
def _folds() -> Points:
    """Return what each code point becomes: ``_SEVERAL`` where that is several characters."""
    folded = [character.casefold() for character in properties.every_character()]
    found = np.array([ord(t) if len(t) == 1 else _SEVERAL for t in folded], dtype=np.uint32)
    found[properties.table(properties.WHITESPACE)] = SPACE
    found[[ord(character) for character in _ENDS_LINE]] = LINE_END
    return found
