"""How the terms of a glossary occur in a corpus, and how each occurrence is broken there.

An occurrence is broken as in its whole document. Where cuts are proved it is encoded with what
stands between the last cut before it and the first after it, each distinct such context once; else,
and in documents that hold an added token, with its document.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np

from auditor.corpus.glossary import Glossary
from auditor.encoding.added import AddedContents
from auditor.encoding.breaking import Breaking, Breakings
from auditor.encoding.cutting import Places
from auditor.tallies.terms import TermRow, TermsTally
from auditor.text.folding import folded_phrase
from auditor.text.phrases import Occurrences, Phrases
from auditor.text.slices import distinct
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.separation import Separation, separate

# What is remembered of contexts is forgotten past so many of them, or so many characters.
_MOST_CONTEXTS = 200_000
_MOST_CHARACTERS = 1 << 25

# A context: whether it begins its document, its text, and from where to where in it the term is.
Key = tuple[bool, str, int, int]
Rows = Counter[TermRow]


class TermFinder:
    """Finds the terms of ``glossary`` in stretches and breaks them under each vocabulary.

    ``tallies`` has one tally a vocabulary, to be merged over processes. With ``whole`` every
    document with a term is encoded whole. Words are those of UAX #29, whatever the rule of a
    stretch. Neither ``whole`` nor how documents come in stretches changes a count.
    """

    def __init__(
        self,
        vocabularies: list[Vocabulary],
        glossary: Glossary,
        *,
        parse_control: bool = True,
        whole: bool = False,
    ) -> None:
        self.tallies = [TermsTally(glossary.digest) for _ in vocabularies]
        owners = {folded_phrase(s): t.term for t in glossary.terms for s in t.spellings}
        self._terms = list(owners.values())
        self._phrases = Phrases(list(owners))
        self._whole = [Breakings(v, parse_control=parse_control) for v in vocabularies]
        found = [None if whole else separate(v) for v in vocabularies]
        held = {p: s for p, s in enumerate(found) if isinstance(s, Separation)}
        # Places in the list of vocabularies: those that contexts are encoded for, and the others.
        self._cut = list(held)
        self._uncut = [place for place in range(len(vocabularies)) if place not in held]
        self._later = [
            Breakings(vocabularies[place], parse_control=parse_control, separation=own)
            for place, own in held.items()
        ]
        self._places = Places(list(held.values())) if held else None
        self._added = AddedContents(sorted({c for s in held.values() for c in s.whole_for}))
        self._known: dict[Key, list[Breaking]] = {}
        self._characters = 0

    def measure(self, stretch: Stretch) -> None:
        """Add the terms in ``stretch`` to the tallies; all of them, or none if an engine fails."""
        found = self._phrases.find(stretch)
        if not len(found):
            return
        part, found = _only_with_terms(stretch, found)
        rows: dict[int, Rows] = {}
        if self._places is not None:
            by_context = self._in_contexts(self._places, part, found)
            rows.update(zip(self._cut, by_context, strict=True))
        for place in self._uncut:
            rows[place] = self._in_documents(place, part, found)
        for place, own in rows.items():
            for row, count in own.items():
                self.tallies[place].add(row, count)

    def merge(self, other: TermFinder | list[TermsTally]) -> None:
        """Add the tallies of another process."""
        theirs = other.tallies if isinstance(other, TermFinder) else other
        for own, tally in zip(self.tallies, theirs, strict=True):
            own.merge(tally)

    def _in_documents(self, place: int, stretch: Stretch, found: Occurrences) -> Rows:
        breakings = self._whole[place].of(stretch, found.starts, found.ends)
        spans = zip(
            found.starts.tolist(),
            found.ends.tolist(),
            found.phrases.tolist(),
            breakings,
            strict=True,
        )
        return Counter(
            TermRow(self._terms[phrase], stretch.joined[start:end], *breaking)
            for start, end, phrase, breaking in spans
        )

    def _in_contexts(self, places: Places, stretch: Stretch, found: Occurrences) -> list[Rows]:
        keys, phrases, counts = self._contexts(places, stretch, found).keys()
        known = self._broken(keys)
        rows: list[Rows] = [Counter() for _ in self._cut]
        for key, phrase, count in zip(keys, phrases, counts, strict=True):
            _, text, start, end = key
            for own, breaking in zip(rows, known[key], strict=True):
                own[TermRow(self._terms[phrase], text[start:end], *breaking)] += count
        return rows

    def _contexts(self, places: Places, stretch: Stretch, found: Occurrences) -> _Contexts:
        cuts = np.sort(np.concatenate((stretch.bounds, places.within(stretch))), kind="stable")
        begins = cuts[np.searchsorted(cuts, found.starts, side="right") - 1]
        ends = cuts[np.searchsorted(cuts, found.ends, side="left")]
        documents = stretch.document_of(found.starts)
        apart = self._added.in_texts(stretch.texts)[documents]
        begins = np.where(apart, stretch.bounds[documents], begins)
        ends = np.where(apart, stretch.bounds[documents + 1], ends)
        return _Contexts(stretch, found, begins, ends)

    def _broken(self, keys: list[Key]) -> dict[Key, list[Breaking]]:
        """Return how each of ``keys`` is broken under each vocabulary that contexts serve."""
        full = self._characters > _MOST_CHARACTERS or len(self._known) > _MOST_CONTEXTS
        if full:
            self._known, self._characters = {}, 0
        missing = [key for key in dict.fromkeys(keys) if key not in self._known]
        for begins in (False, True):
            own = [key for key in missing if key[0] is begins]
            if own:
                self._measure(own, begins=begins)
        return self._known

    def _measure(self, keys: list[Key], *, begins: bool) -> None:
        texts = list(dict.fromkeys(text for _, text, _, _ in keys))
        number = {text: place for place, text in enumerate(texts)}
        stretch = Stretch(texts)
        shifts = stretch.bounds[[number[text] for _, text, _, _ in keys]]
        starts, ends = (
            np.array([key[column] for key in keys], dtype=np.int64) + shifts for column in (2, 3)
        )
        encoders = [self._whole[place] for place in self._cut] if begins else self._later
        measured = [encoder.of(stretch, starts, ends) for encoder in encoders]
        for key, *breakings in zip(keys, *measured, strict=True):
            self._known[key] = breakings
        self._characters += len(stretch.joined)


@dataclass(frozen=True, slots=True)
class _Contexts:
    """Occurrences with the characters from ``begins`` to ``ends`` about each, (occurrences,)."""

    stretch: Stretch
    found: Occurrences
    begins: Ints
    ends: Ints

    def keys(self) -> tuple[list[Key], list[int], list[int]]:
        """Return the distinct contexts, the phrase in each, and how often each occurs."""
        # One context may hold many occurrences: its text is taken once.
        first, index = np.unique(self.begins * (self.stretch.bounds[-1] + 1) + self.ends,
                                 return_inverse=True)  # fmt: skip
        begins, ends = np.divmod(first, self.stretch.bounds[-1] + 1)
        forms, texts = distinct(self.stretch.points, begins, ends)
        heads = np.isin(self.begins, self.stretch.bounds[:-1])
        starts, stops = self.found.starts - self.begins, self.found.ends - self.begins
        rows = np.stack([heads.astype(np.int64), forms[index], starts, stops, self.found.phrases])
        order = np.lexsort(rows)
        rows = rows[:, order]
        new = np.concatenate(([True], (rows[:, 1:] != rows[:, :-1]).any(axis=0)))
        edges = np.flatnonzero(new)
        chosen = rows[:, edges].tolist()
        counts = np.diff(np.append(edges, rows.shape[1]))
        keys = [
            (head == 1, texts[form], start, stop)
            for head, form, start, stop in zip(*chosen[:4], strict=True)
        ]
        return keys, chosen[4], counts.tolist()


def _only_with_terms(stretch: Stretch, found: Occurrences) -> tuple[Stretch, Occurrences]:
    """Return the documents that hold occurrences as a stretch, and the occurrences in it."""
    holding, place = np.unique(stretch.document_of(found.starts), return_inverse=True)
    part = Stretch([stretch.texts[document] for document in holding.tolist()])
    shift = (part.bounds[:-1] - stretch.bounds[holding])[place]
    return part, Occurrences(found.starts + shift, found.ends + shift, found.phrases)
