"""Integers of each document under one vocabulary: the columns that every figure is summed from."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from auditor.encoding.alterations import CASE_ONLY, MORE_THAN_CASE, Alterations
from auditor.encoding.touching import SpanIndex
from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Engine, Ints, Inventory
from auditor.vocabulary.spans import Spans, coverage

Columns = dict[str, Ints]


def text_columns(stretch: Stretch, *, graphemes: Ints | None = None) -> Columns:
    """Return the columns that no vocabulary changes, each of shape (documents,)."""
    bounds = stretch.bounds
    columns = {
        "documents": np.ones(len(stretch), dtype=np.int64),
        "bytes": stretch.bytes_before[bounds[1:]] - stretch.bytes_before[bounds[:-1]],
        "characters": np.diff(bounds),
        "ink_characters": stretch.ink_before[bounds[1:]] - stretch.ink_before[bounds[:-1]],
        "words": stretch.per_document(stretch.words.starts),
    }
    return columns if graphemes is None else {**columns, "graphemes": graphemes}


@dataclass
class Reading:
    """One vocabulary's tokens of one stretch, and the flags that measures share."""

    stretch: Stretch
    spans: Spans
    engine: Engine
    inventory: Inventory
    parse_control: bool

    @cached_property
    def control(self) -> Bools:
        """Tokens that a control string of the text produced, shape (tokens,).

        The model itself emits the unknown entry and byte pieces, which a file may mark special too:
        they count only where the text spells them.
        """
        inventory, ids = self.inventory, self.spans.ids
        if not self.parse_control:
            return np.zeros(len(ids), dtype=np.bool_)
        found = inventory.control[ids].copy()
        emitted = inventory.stands_for_bytes[ids]
        if inventory.unknown is not None:
            emitted = emitted | (ids == inventory.unknown)
        for token in np.flatnonzero(found & emitted).tolist():
            found[token] = self._text_of(token).strip() == inventory.entries[ids[token]]
        return found

    def _text_of(self, token: int) -> str:
        return self.stretch.joined[self.spans.starts[token] : self.spans.ends[token]]

    @cached_property
    def unknown(self) -> Bools:
        """Tokens with the unknown id that no control string produced, shape (tokens,)."""
        unknown = self.inventory.unknown
        if unknown is None:
            return np.zeros(len(self.spans.ids), dtype=np.bool_)
        return np.asarray((self.spans.ids == unknown) & ~self.control)

    @cached_property
    def inked(self) -> Bools:
        """Tokens whose span holds a character that is not whitespace, shape (tokens,)."""
        ink = self.stretch.ink_before
        return ink[self.spans.ends] > ink[self.spans.starts]

    @cached_property
    def byte_tokens(self) -> Bools:
        """Byte tokens, shape (tokens,)."""
        return np.asarray(self.inventory.stands_for_bytes[self.spans.ids] & self.inked)

    @cached_property
    def touches(self) -> Ints:
        """The number of tokens that touch each word, shape (words,)."""
        return SpanIndex.of(self.spans).touching(self.stretch.words)

    @cached_property
    def unknown_touches(self) -> Ints:
        """The number of unknown tokens that touch each word, shape (words,)."""
        return SpanIndex.of(self.spans, self.unknown).touching(self.stretch.words)

    def characters_under(self, tokens: Bools) -> Bools:
        """Return which non-whitespace characters lie in the span of a chosen token."""
        if not tokens.any():
            return np.zeros(len(self.stretch.points), dtype=np.bool_)
        covered = coverage(
            self.spans.starts[tokens], self.spans.ends[tokens], len(self.stretch.points)
        )
        return (covered > 0) & self.stretch.ink

    @cached_property
    def unknown_characters(self) -> Bools:
        """Non-whitespace characters under unknown tokens, shape (characters,)."""
        return self.characters_under(self.unknown)

    @cached_property
    def byte_spelled_characters(self) -> Bools:
        """Non-whitespace characters under byte tokens, shape (characters,)."""
        return self.characters_under(self.byte_tokens)

    @cached_property
    def dropped_characters(self) -> Bools:
        """Non-whitespace characters that nothing stands for, shape (characters,)."""
        if self.spans.exact:
            return np.zeros(len(self.stretch.points), dtype=np.bool_)
        every = np.ones(len(self.spans.ids), dtype=np.bool_)
        bare = self.stretch.ink & ~self.characters_under(every)
        lacking = self.inventory.lacking
        return bare | self._with_lacking_bytes(lacking) if lacking else bare

    def _with_lacking_bytes(self, lacking: tuple[int, ...]) -> Bools:
        """Return the characters with a byte that has no entry and that no token over them holds."""
        found = np.zeros(len(self.stretch.points), dtype=np.bool_)
        missing = {bytes([byte]) for byte in lacking}
        for place in np.flatnonzero(self.stretch.ink).tolist():
            spelled = self.stretch.joined[place].encode()
            wanted = [byte for byte in missing if byte in spelled]
            if wanted:
                held = self._bytes_over(place)
                found[place] = any(byte not in held for byte in wanted)
        return found

    def _bytes_over(self, place: int) -> bytes:
        over = np.flatnonzero((self.spans.starts <= place) & (self.spans.ends > place))
        spelled = self.inventory.entry_bytes or []
        return b"".join(spelled[number] or b"" for number in self.spans.ids[over].tolist())


def token_columns(reading: Reading) -> Columns:
    """Return the columns of tokens, each of shape (documents,)."""
    spans, bounds = reading.spans, reading.spans.bounds
    return {
        "tokens": np.diff(bounds),
        "unknown_tokens": _sums(reading.unknown, bounds),
        "byte_tokens": _sums(reading.byte_tokens, bounds),
        "whitespace_tokens": _sums((spans.ends > spans.starts) & ~reading.inked, bounds),
        "control_strings": _sums(reading.control, bounds),
    }


def derived_columns(columns: Columns, room: int | None) -> Columns:
    """Return the columns that follow from others of the whole document; ``room`` in tokens."""
    tokens = columns["tokens"]
    beyond = 0 * tokens if room is None else np.maximum(0, tokens - room)
    counted = {**columns, "truncated_tokens": beyond}
    flags = {flag: (counted[name] > 0).astype(np.int64) for flag, name in _FLAGS.items()}
    return {"truncated_tokens": beyond, **flags}


_FLAGS = {
    "documents_with_unknown": "unknown_tokens",
    "documents_with_byte_tokens": "byte_tokens",
    "documents_with_control_strings": "control_strings",
    "truncated_documents": "truncated_tokens",
}


def word_columns(reading: Reading, alterations: Alterations) -> Columns:
    """Return the columns of words, each of shape (documents,)."""
    stretch, touches = reading.stretch, reading.touches
    known = reading.unknown_touches == 0
    altered = np.zeros(len(stretch.words), dtype=np.int64)
    if reading.engine.alters:
        altered = alterations.of_words(stretch)
    edges = np.searchsorted(stretch.words.starts, stretch.bounds)
    return {
        "pieces": _sums(touches, edges),
        "known_words": _sums(known, edges),
        "known_pieces": _sums(touches * known, edges),
        "continued_words": _sums(touches >= 2, edges),
        "unknown_words": _sums(~known, edges),
        "case_folded_words": _sums(altered == CASE_ONLY, edges),
        "changed_words": _sums(altered == MORE_THAN_CASE, edges),
    }


def character_columns(reading: Reading) -> Columns:
    """Return the columns of characters, each of shape (documents,)."""
    return {
        "unknown_characters": reading.stretch.sum_per_document(reading.unknown_characters),
        "byte_spelled_characters": reading.stretch.sum_per_document(
            reading.byte_spelled_characters
        ),
        "dropped_characters": reading.stretch.sum_per_document(reading.dropped_characters),
    }


def lossless_column(reading: Reading, anchor: tuple[int, ...]) -> Columns:
    """Return the column of texts that come back exactly; all 0 without a decoder.

    Texts that do not begin a document are decoded behind the tokens ``anchor``: decoders treat the
    first token otherwise than later ones.
    """
    engine, texts = reading.engine, reading.stretch.texts
    if not engine.has_decoder:
        return {"lossless_documents": np.zeros(len(texts), dtype=np.int64)}
    if engine.spells_bytes and (reading.spans.exact or _spelled_alike(reading)):
        return {"lossless_documents": np.ones(len(texts), dtype=np.int64)}
    flat, bounds = reading.spans.ids.tolist(), reading.spans.bounds.tolist()
    ids = [[*anchor, *flat[bounds[i] : bounds[i + 1]]] for i in range(len(texts))]
    before = engine.decode([list(anchor)])[0] if anchor else ""
    same = [before + text == back for text, back in zip(texts, engine.decode(ids), strict=True)]
    return {"lossless_documents": np.array(same, dtype=np.int64)}


def _spelled_alike(reading: Reading) -> bool:
    """Return whether the bytes of the tokens are the bytes of the texts, text by text."""
    spelled = reading.inventory.entry_bytes
    if spelled is None:
        return False
    ids = reading.spans.ids.tolist()
    lengths = np.array([len(spelled[number] or b"") for number in ids], dtype=np.int64)
    stretch = reading.stretch
    if not np.array_equal(
        _sums(lengths, reading.spans.bounds), np.diff(stretch.bytes_before[stretch.bounds])
    ):
        return False
    return b"".join([spelled[number] or b"" for number in ids]) == stretch.joined.encode()


def _sums(values: Ints | Bools, bounds: Ints) -> Ints:
    """Return the sum of ``values`` between consecutive ``bounds``."""
    before = np.zeros(len(values) + 1, dtype=np.int64)
    np.cumsum(values, out=before[1:])
    return before[bounds[1:]] - before[bounds[:-1]]
