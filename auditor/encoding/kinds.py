"""Which kinds of text the characters and the tokens of documents belong to."""

from __future__ import annotations

from copy import copy

import numpy as np

from auditor.encoding.broken import Broken, BrokenWords
from auditor.encoding.measures import Columns, Reading
from auditor.text.kinds import INK_KINDS, KINDS, Kinds
from auditor.text.stretch import Stretch
from auditor.text.words import Words
from auditor.vocabulary.engine import Bools, Ints, Inventory

CHARACTERS, TOKENS = "kind_characters:", "kind_tokens:"
SEVERAL, NO_TEXT = "(several)", "(no text)"
# What a token may be of: one kind, several, or none where its span is empty.
TOKEN_KINDS = (*KINDS, SEVERAL, NO_TEXT)
CHARACTER_COLUMNS = tuple(CHARACTERS + kind for kind in KINDS)
TOKEN_COLUMNS = tuple(TOKENS + kind for kind in TOKEN_KINDS)
# Kinds whose broken stretches are listed; words are listed as broken words.
LISTED = tuple(kind for kind in INK_KINDS if kind not in ("words", "punctuation"))


def kind_columns(reading: Reading, kinds: Kinds) -> Columns:
    """Return the characters and the tokens of each document by kind, each of shape (documents,).

    ``kinds`` is the kind of each character. Characters add up to ``characters``, tokens to
    ``tokens``.
    """
    stretch = reading.stretch
    tokens = np.diff(reading.spans.bounds)
    return {
        **_counted(kinds, np.diff(stretch.bounds), CHARACTER_COLUMNS),
        **_counted(token_kinds(reading, kinds), tokens, TOKEN_COLUMNS),
    }


def token_kinds(reading: Reading, kinds: Kinds) -> Ints:
    """Return the kind of each token, a number of ``TOKEN_KINDS``, shape (tokens,).

    It is that of the characters in its span that are no whitespace, or of its whitespace when it
    holds nothing else; several when two kinds meet there.
    """
    spans, stretch = reading.spans, reading.stretch
    found = np.full(len(spans.ids), TOKEN_KINDS.index(NO_TEXT), dtype=np.int64)
    blank = (spans.ends > spans.starts) & ~reading.inked
    found[blank] = _only_kind(kinds, spans.starts[blank], spans.ends[blank])
    inked, before = reading.inked, stretch.ink_before
    begins, ends = before[spans.starts[inked]], before[spans.ends[inked]]
    found[inked] = _only_kind(kinds[stretch.ink], begins, ends)
    return found


def _only_kind(kinds: Kinds, begins: Ints, ends: Ints) -> Ints:
    """Return the one kind of each range, none of which is empty, or several."""
    if not len(begins):
        return np.zeros(0, dtype=np.int64)
    changes = np.zeros(len(kinds), dtype=np.int64)
    np.cumsum(kinds[1:] != kinds[:-1], out=changes[1:])
    same = changes[ends - 1] == changes[begins]
    return np.where(same, kinds[begins], TOKEN_KINDS.index(SEVERAL)).astype(np.int64)


def _counted(kinds: Kinds | Ints, lengths: Ints, names: tuple[str, ...]) -> Columns:
    size = len(names)
    documents = np.repeat(np.arange(len(lengths)), lengths)
    counts = np.bincount(documents * size + kinds, minlength=len(lengths) * size)
    table = counts.reshape(len(lengths), size).astype(np.int64)
    return {name: table[:, place].copy() for place, name in enumerate(names)}


class BrokenKinds:
    """Finds the stretches of one kind, such as numbers, that are broken, as words are."""

    def __init__(self, inventory: Inventory) -> None:
        self._broken = BrokenWords(inventory)

    def find(self, reading: Reading, kinds: Kinds) -> dict[str, Broken]:
        """Return the broken stretches of each kind of ``LISTED`` that occurs."""
        stretch = reading.stretch
        starts, ends = _stretches(stretch, kinds)
        found = {}
        for kind in LISTED:
            chosen = kinds[starts] == KINDS.index(kind)
            if chosen.any():
                view = copy(stretch)
                view.__dict__["words"] = Words(starts[chosen], ends[chosen])
                own = Reading(
                    view, reading.spans, reading.engine, reading.inventory, reading.parse_control
                )
                found[kind] = self._broken.find(own)
        return found


def _stretches(stretch: Stretch, kinds: Kinds) -> tuple[Ints, Ints]:
    """Return starts and ends of the maximal runs of one kind, none across a document."""
    begins: Bools = np.ones(len(kinds) + 1, dtype=np.bool_)
    begins[1:-1] = kinds[1:] != kinds[:-1]
    begins[stretch.bounds] = True
    edges = np.flatnonzero(begins)
    return edges[:-1], edges[1:]
