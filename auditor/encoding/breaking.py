"""How parts of texts are broken under one vocabulary: terms, wherever they stand."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from auditor.encoding.dotted import DOT, Held, Touching
from auditor.encoding.measures import Reading
from auditor.encoding.shown import Shown, parts_of
from auditor.text.slices import ranges
from auditor.text.stretch import Stretch
from auditor.text.words import Words
from auditor.vocabulary.engine import Bools, Engine, Ints
from auditor.vocabulary.joined import JoinedParts
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.separation import Separation
from auditor.vocabulary.spans import correct

_REMEMBERED = 50_000
# A part and its tokens, as bytes.
Key = tuple[str, bytes]


class Breaking(NamedTuple):
    """How a part of a text is broken, as `TermRow` has it."""

    broken: str
    tokens: int
    broken_words: int
    unknown: int
    byte_spelled: int
    dropped: int


class Breakings:
    """Breaks parts of texts under one vocabulary.

    ``separation`` is given for texts that are later parts of documents, as in `WholeTexts`.
    """

    def __init__(
        self, vocabulary: Vocabulary, *, parse_control: bool, separation: Separation | None = None
    ) -> None:
        self._engine: Engine = JoinedParts(separation) if separation else vocabulary.engine
        self._inventory = vocabulary.inventory
        self._parse_control = parse_control
        self._shown = Shown(vocabulary.inventory)
        self._known: dict[Key, tuple[str, int]] = {}

    def of(self, stretch: Stretch, starts: Ints, ends: Ints) -> list[Breaking]:
        """Return how the characters from each of ``starts`` to ``ends`` are broken.

        Parts may overlap; none reaches over a bound. Raises what the engine raises on a text.
        """
        spans = correct(self._engine.encode(stretch.texts), stretch, self._inventory)
        reading = Reading(stretch, spans, self._engine, self._inventory, self._parse_control)
        held = Held.of(spans)
        texts = self._texts(stretch.joined, held, held.over(starts, ends))
        flags = (
            reading.unknown_characters,
            reading.byte_spelled_characters,
            reading.dropped_characters,
        )
        columns = [
            _broken_words(reading, starts, ends),
            *((_within(flag, starts, ends) > 0).astype(np.int64) for flag in flags),
        ]
        rows = zip(texts, *(column.tolist() for column in columns), strict=True)
        return [Breaking(*text, *numbers) for text, *numbers in rows]

    def _texts(self, joined: str, held: Held, over: Touching) -> list[tuple[str, int]]:
        """Return each part with dots between its pieces, and the number of these."""
        counts = over.stops - over.firsts
        lengths = over.ends - over.begins
        table = _tokens_of(held, over, counts)
        edges = np.concatenate(([0], np.cumsum(counts))).tolist()
        found = []
        for place, (begin, length) in enumerate(
            zip(over.begins.tolist(), lengths.tolist(), strict=True)
        ):
            word, tokens = joined[begin : begin + length], table[edges[place] : edges[place + 1]]
            key = (word, tokens.tobytes())
            found.append(self._known.get(key) or self._remember(key, tokens))
        return found

    def _remember(self, key: Key, tokens: Ints) -> tuple[str, int]:
        if len(self._known) >= _REMEMBERED:
            self._known.clear()
        word, _ = key
        parts = parts_of(word, 0, tokens.T.tolist())
        self._known[key] = DOT.join(self._shown.pieces(word, parts)), len(parts)
        return self._known[key]


def _tokens_of(held: Held, over: Touching, counts: Ints) -> Ints:
    """Return id, start and end of the tokens of each part, one part after another, (tokens, 3).

    Positions count from the part's start; those outside the part are drawn to its edges.
    """
    places = ranges(over.firsts, counts)
    begins, lengths = (np.repeat(v, counts) for v in (over.begins, over.ends - over.begins))
    spans = [np.clip(own[places] - begins, -1, lengths + 1) for own in (held.starts, held.ends)]
    return np.ascontiguousarray(np.stack([held.ids[places], *spans], axis=1), dtype=np.int64)


def _broken_words(reading: Reading, starts: Ints, ends: Ints) -> Ints:
    """Return how many words of each part two tokens or more touch."""
    words: Words = reading.stretch.words
    before = np.concatenate(([0], np.cumsum(reading.touches >= 2)))
    first = np.searchsorted(words.starts, starts, side="left")
    stop = np.searchsorted(words.starts, ends, side="left")
    return np.asarray(before[stop] - before[first])


def _within(flags: Bools, starts: Ints, ends: Ints) -> Ints:
    """Return how many characters of each part are flagged."""
    before = np.concatenate(([0], np.cumsum(flags)))
    return np.asarray(before[ends] - before[starts])
