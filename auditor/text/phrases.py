"""Where phrases stand in a text: whole words, whatever the case and the whitespace in between.

A phrase occurs where the folded text (`folding`) holds it from one UAX #29 word boundary to
another, inside one line of one document. Of occurrences that overlap the longest counts, in folded
characters; among equally long ones the leftmost; the others are none.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np

from auditor.text import properties
from auditor.text.boundaries import segment_starts
from auditor.text.folding import Bools, fold, folded_phrase
from auditor.text.slices import Ints, Points, ranges
from auditor.text.stretch import Stretch

# A step of the walk: the number of a node, and a code point in as many bits.
_BITS = 21
_END = properties.CODE_POINTS
# Steps are looked up in this many marks before they are searched for.
_MARK_BITS = 18
_SCATTER = np.uint64(0x9E3779B97F4A7C15)
# Below this, letters are of scripts in which no word ends between two of them (UAX #29 WB5).
_PLAIN_LETTERS = 0x530


@dataclass(frozen=True, slots=True)
class Occurrences:
    """Characters ``starts[i]`` up to ``ends[i]`` spell phrase ``phrases[i]``; by rising start."""

    starts: Ints
    ends: Ints
    phrases: Ints

    def __len__(self) -> int:
        return len(self.starts)

    def chosen(self, which: Bools | Ints) -> Occurrences:
        """Return some of the occurrences."""
        return Occurrences(self.starts[which], self.ends[which], self.phrases[which])


class Phrases:
    """Finds phrases, all of them in one walk; each must hold a letter or digit.

    No two may be equal when folded. The folded phrases form a tree of characters; all places of a
    text that may begin a word walk down it together, and few get far.
    """

    def __init__(self, phrases: Sequence[str]) -> None:
        folded = list(map(folded_phrase, phrases))
        tree = _Tree(folded)
        self._steps, self._phrase_of = _Steps(tree.targets), np.array(tree.phrases, dtype=np.int64)
        self._deepest = max(map(len, folded), default=0)
        # What a first character leads to, 0 for nothing: no step leads to the root.
        self._first = np.zeros(properties.CODE_POINTS, dtype=np.int32)
        firsts = {step: node for step, node in tree.targets.items() if step < _END}
        self._first[list(firsts)] = list(firsts.values())

    def find(self, stretch: Stretch) -> Occurrences:
        """Return the occurrences in ``stretch``; UAX #29 decides whatever rule its words have."""
        folded = fold(stretch)
        starts, lengths, phrases = self._walk(folded.points, folded.places(stretch.bounds))
        begins, ends = folded.origins(starts), folded.origins(starts + lengths)
        # A character that folds to several is not taken in part.
        whole = folded.origins(starts - 1) < begins
        whole &= folded.origins(starts + lengths - 1) < ends
        whole &= ends <= stretch.bounds[1:][stretch.document_of(begins)]
        starts, lengths = starts[whole], lengths[whole]
        found = Occurrences(begins[whole], ends[whole], phrases[whole])
        bounded = _at_boundaries(stretch, found)
        found, lengths = found.chosen(bounded), lengths[bounded]
        return found.chosen(_longest(found, lengths))

    def _walk(self, points: Points, bounds: Ints) -> tuple[Ints, Ints, Ints]:
        """Return where phrases may stand in the folded ``points``: starts, lengths, numbers.

        Documents begin and end at ``bounds``.
        """
        inner = _inner(points)
        inner[bounds] = False
        first = self._first[points]
        alive = np.flatnonzero((first > 0) & ~inner[:-1])
        nodes = first[alive].astype(np.int64)
        padded = np.append(points, np.uint32(_END))
        found = [(alive[:0], alive[:0], alive[:0])]
        for length in range(1, self._deepest + 1):
            phrase = self._phrase_of[nodes]
            done = np.flatnonzero((phrase >= 0) & ~inner[alive + length])
            found.append((alive[done], np.full(len(done), length), phrase[done]))
            reached = padded[np.minimum(alive + length, len(points))]
            held, nodes = self._steps.taken(nodes << _BITS | reached)
            alive = alive[held]
        starts, lengths, phrases = map(np.concatenate, zip(*found, strict=True))
        order = np.argsort(starts, kind="stable")
        return starts[order], lengths[order], phrases[order]


class _Tree:
    """Phrases as a tree of characters; node 0 is the root, ``phrases`` has -1 for most nodes."""

    def __init__(self, phrases: list[str]) -> None:
        self.targets: dict[int, int] = {}
        self.phrases = [-1]
        for number, phrase in enumerate(phrases):
            self._add(phrase, number)

    def _add(self, phrase: str, number: int) -> None:
        node = 0
        for character in phrase:
            step = node << _BITS | ord(character)
            node = self.targets.setdefault(step, len(self.phrases))
            if node == len(self.phrases):
                self.phrases.append(-1)
        if self.phrases[node] >= 0:
            raise ValueError(f"two phrases are {phrase!r} when folded")
        self.phrases[node] = number


class _Steps:
    """The steps of a tree, looked up many at a time.

    They are laid out by a mark of some bits, so that those of one mark are neighbours.
    """

    def __init__(self, targets: dict[int, int]) -> None:
        steps = np.array(list(targets), dtype=np.int64)
        marks = _mark(steps)
        order = np.argsort(marks, kind="stable")
        self._steps = np.append(steps[order], -1)
        self._targets = np.append(np.array(list(targets.values()), dtype=np.int64)[order], -1)
        self._crowd = int(np.bincount(marks, minlength=1).max())
        self._first = np.full(1 << _MARK_BITS, len(steps), dtype=np.int32)
        self._first[marks[order][::-1]] = np.arange(len(steps), dtype=np.int32)[::-1]

    def taken(self, steps: Ints) -> tuple[Ints, Ints]:
        """Return the places of the ``steps`` that there are, in rising order, and their nodes."""
        begins = self._first[_mark(steps)]
        marked = np.flatnonzero(begins < len(self._steps) - 1)
        steps, places = steps[marked], begins[marked].astype(np.int64)
        held = self._steps[places] == steps
        for _ in range(1, self._crowd):
            places = np.where(held, places, np.minimum(places + 1, len(self._steps) - 1))
            held = self._steps[places] == steps
        return marked[held], self._targets[places[held]]


def _mark(steps: Ints) -> Ints:
    scattered = (steps.astype(np.uint64) * _SCATTER) >> np.uint64(64 - _MARK_BITS)
    return scattered.astype(np.int64)


def _inner(points: Points) -> Bools:
    """Return the places, (characters + 1,), that surely are no boundaries: between two letters."""
    letter = _plain_letters()[points]
    found = np.zeros(len(points) + 1, dtype=np.bool_)
    found[1:-1] = letter[1:] & letter[:-1]
    return found


@cache
def _plain_letters() -> Bools:
    found = properties.table(r"\p{Word_Break=ALetter}").copy()
    found[_PLAIN_LETTERS:] = False
    found[[ord(digit) for digit in "0123456789"]] = True
    return found


def _at_boundaries(stretch: Stretch, found: Occurrences) -> Bools:
    """Return which occurrences begin and end at word boundaries; only their lines are looked at."""
    if not len(found):
        return np.zeros(0, dtype=np.bool_)
    first = np.zeros(len(stretch.points) + 1, dtype=np.bool_)
    first[1:] = stretch.points == ord("\n")
    first[stretch.bounds] = True
    edges = np.flatnonzero(first)
    lines = np.unique(np.searchsorted(edges, found.starts, side="right") - 1)
    begins, ends = edges[lines], edges[lines + 1]
    lengths = ends - begins
    texts = [stretch.joined[a:b] for a, b in zip(begins.tolist(), ends.tolist(), strict=True)]
    bounds = np.concatenate(([0], np.cumsum(lengths)))
    starts = segment_starts(texts, bounds, stretch.points[ranges(begins, lengths)])
    line = np.searchsorted(bounds, starts, side="right") - 1
    boundary = np.zeros(len(stretch.points) + 1, dtype=np.bool_)
    boundary[starts - bounds[line] + begins[line]] = True
    boundary[ends] = True
    return np.asarray(boundary[found.starts] & boundary[found.ends])


def _longest(found: Occurrences, lengths: Ints) -> Ints:
    """Return the places of the occurrences that count, in rising order."""
    reached = np.maximum.accumulate(found.ends)
    apart = np.ones(len(found) + 1, dtype=np.bool_)
    apart[1:-1] = found.starts[1:] >= reached[:-1]
    edges = np.flatnonzero(apart)
    sizes = np.diff(edges)
    kept = edges[:-1][sizes == 1].tolist()
    for begin, end in zip(
        edges[:-1][sizes > 1].tolist(), edges[1:][sizes > 1].tolist(), strict=True
    ):
        group = slice(begin, end)
        kept += [
            begin + place
            for place in _longest_first(
                lengths[group].tolist(), found.starts[group].tolist(), found.ends[group].tolist()
            )
        ]
    return np.array(sorted(kept), dtype=np.int64)


def _longest_first(lengths: list[int], starts: list[int], ends: list[int]) -> list[int]:
    """Return the places of those taken: the longest first, each that touches none taken before."""
    origin = starts[0]
    taken = bytearray(max(ends) - origin)
    kept = []
    for place in sorted(range(len(starts)), key=lambda place: (-lengths[place], starts[place])):
        own = slice(starts[place] - origin, ends[place] - origin)
        if not any(taken[own]):
            taken[own] = b"\1" * (own.stop - own.start)
            kept.append(place)
    return kept
