"""What is lost where documents are cut to a number of tokens: characters, words, sentences."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from auditor.encoding.measures import Columns
from auditor.text.sentences import sentence_ends
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Ints
from auditor.vocabulary.spans import Spans

# What is cut off: the end of a document, its start, or its middle (head and tail are kept).
WAYS = ("end", "start", "middle")
LOSSES = ("lost_characters", "lost_words")
PLACES = ("documents_cut_inside_word", "documents_cut_inside_character")
PARTS = ("sentence_parts", "cuts_inside_sentence")


@dataclass(frozen=True, slots=True)
class Candidate:
    """A maximum length in positions, and the tokens that it has room for beside the template."""

    length: int
    room: int

    def kept(self, way: str) -> tuple[int, int]:
        """Return how many tokens of a longer document are kept at its head and at its tail.

        With the middle cut out, a quarter of the length is kept at the head (128 of 512 in Sun et
        al. 2019, "How to Fine-Tune BERT for Text Classification?", section 5.3.1), the rest at the
        tail.
        """
        if way == "end":
            return self.room, 0
        head = min(self.room, self.length // 4) if way == "middle" else 0
        return head, self.room - head

    def column(self, quantity: str, way: str = "") -> str:
        """Return the name of the column that holds ``quantity`` for this length."""
        return ":".join(part for part in (str(self.length), way, quantity) if part)

    def columns(self) -> list[str]:
        """Return the names of all columns of this length."""
        cut = [self.column(name, way) for way in WAYS for name in (*LOSSES, *PLACES)]
        return cut + [self.column(name) for name in PARTS]


class Truncation:
    """One vocabulary's tokens of one stretch, cut at any number of candidates."""

    def __init__(self, stretch: Stretch, spans: Spans) -> None:
        self._stretch = stretch
        self._bounds = spans.bounds
        held = spans.ends > spans.starts
        size = len(stretch.points)
        # The end of the furthest character reached by any token up to each one, and the start of
        # the first character of any token from each one on; empty spans reach nothing.
        self._reached = np.maximum.accumulate(np.where(held, spans.ends, 0))
        starts = np.where(held, spans.starts, size)
        self._begins = np.minimum.accumulate(starts[::-1])[::-1]

    def columns(self, candidates: Sequence[Candidate]) -> Columns:
        """Return the columns of all ``candidates``, each of shape (documents,)."""
        found: Columns = {}
        ends: dict[int, Ints] = {}
        for candidate in candidates:
            longer = np.flatnonzero(np.diff(self._bounds) > candidate.room)
            for way in WAYS:
                for name, values in self._cut(longer, *candidate.kept(way)).items():
                    found[candidate.column(name, way)] = self._spread(longer, values)
            parts = [self._parts(document, candidate.room, ends) for document in longer.tolist()]
            table = np.array(parts, dtype=np.int64).reshape(-1, 2)
            for place, name in enumerate(PARTS):
                found[candidate.column(name)] = self._spread(longer, table[:, place])
            # A document that is not cut is one part.
            found[candidate.column(PARTS[0])][found[candidate.column(PARTS[0])] == 0] = 1
        return found

    def _spread(self, documents: Ints, values: Ints | Bools) -> Ints:
        column = np.zeros(len(self._stretch), dtype=np.int64)
        column[documents] = values
        return column

    def _cut(self, documents: Ints, head: int, tail: int) -> dict[str, Ints | Bools]:
        """Return what ``documents`` lose when only ``head`` and ``tail`` tokens are kept.

        Lost are the characters from the first that is not kept whole to the last, and the words
        that hold one of them. A document is cut inside a word that is kept in part, and inside a
        character of which a kept token and a lost one hold a part.
        """
        first, last = self._stretch.bounds[documents], self._stretch.bounds[documents + 1]
        begins, ends = self._bounds[documents], self._bounds[documents + 1]
        front, front_inside = first, np.zeros(len(documents), dtype=np.bool_)
        if head:
            kept_to, lost_from = self._sides(begins + head, first, last)
            front, front_inside = np.minimum(kept_to, lost_from), lost_from < kept_to
        back, back_inside = last, np.zeros(len(documents), dtype=np.bool_)
        if tail:
            lost_to, kept_from = self._sides(ends - tail, first, last)
            back, back_inside = np.maximum(lost_to, kept_from), kept_from < lost_to
        back = np.maximum(front, back)
        words = self._stretch.words
        whole = np.searchsorted(words.ends, front, side="right")
        lost = np.searchsorted(words.starts, back, side="left") - whole
        return {
            "lost_characters": back - front,
            "lost_words": np.maximum(0, lost),
            "documents_cut_inside_word": self._inside_word(front) | self._inside_word(back),
            "documents_cut_inside_character": front_inside | back_inside,
        }

    def _sides(self, tokens: Ints, first: Ints, last: Ints) -> tuple[Ints, Ints]:
        """Return how far the tokens before ``tokens`` reach, and where those from it on begin."""
        return np.maximum(self._reached[tokens - 1], first), np.minimum(self._begins[tokens], last)

    def _inside_word(self, places: Ints) -> Bools:
        words = self._stretch.words
        if not len(words):
            return np.zeros(len(places), dtype=np.bool_)
        word = np.searchsorted(words.starts, places, side="left") - 1
        return np.asarray((word >= 0) & (words.ends[np.maximum(word, 0)] > places))

    def _parts(self, document: int, room: int, ends: dict[int, Ints]) -> tuple[int, int]:
        """Return into how many parts a document falls, and how many cuts had to break a sentence.

        Each part takes as many whole sentences as there is room for; a sentence that is too long is
        cut where the room ends.
        """
        if document not in ends:
            ends[document] = self._sentence_cuts(document)
        cuts = ends[document]
        at, end = self._bounds[document], self._bounds[document + 1]
        parts, broken = 1, 0
        while end - at > room:
            place = np.searchsorted(cuts, at + room, side="right") - 1
            if place >= 0 and cuts[place] > at:
                at = cuts[place]
            else:
                at, broken = at + room, broken + 1
            parts += 1
        return parts, broken

    def _sentence_cuts(self, document: int) -> Ints:
        """Return the tokens of a document before which a sentence ends, and no token crosses.

        The whitespace between two sentences may belong to either.
        """
        first = int(self._stretch.bounds[document])
        begin, end = self._bounds[document], self._bounds[document + 1]
        inks, starts = sentence_ends(self._stretch.texts[document])
        tokens = begin + np.searchsorted(self._begins[begin:end], first + inks, side="left")
        inner = (tokens > begin) & (tokens < end)
        tokens, starts = tokens[inner], starts[inner]
        return np.unique(tokens[self._reached[tokens - 1] <= first + starts])
