"""Spans: which characters of a document each token holds, by the rules of FIGURES."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from auditor.text.stretch import Stretch
from auditor.vocabulary.engine import Bools, Encoding, Ints, Inventory


@dataclass(frozen=True, slots=True)
class Spans:
    """Tokens of a stretch with their corrected spans.

    ``ids``, ``starts`` and ``ends`` have shape (tokens,); positions count from the start of the
    stretch, and an empty span has ``starts == ends``. ``bounds`` and ``exact`` are as in
    ``Encoding``; spans that are exact and were not corrected leave no character uncovered.
    """

    ids: Ints
    starts: Ints
    ends: Ints
    bounds: Ints
    exact: bool = False


def correct(encoding: Encoding, stretch: Stretch, inventory: Inventory) -> Spans:
    """Return the spans of ``encoding`` after the three corrections.

    (a) a token of nothing but an inserted space marker has an empty span; (b) a reported empty
    range at ``p`` covers character ``p``; (c) combining marks that no token covers belong to the
    tokens that cover the character before them.
    """
    token_counts = np.diff(encoding.bounds)
    shift = np.repeat(stretch.bounds[:-1], token_counts)
    if encoding.exact:
        starts, ends = encoding.starts + shift, encoding.ends + shift
        marks = np.flatnonzero(inventory.marker_only[encoding.ids])
        if _holds_whitespace(stretch, starts[marks], ends[marks]).all():
            return Spans(encoding.ids, starts, ends, encoding.bounds, exact=True)
    limit = np.repeat(stretch.bounds[1:], token_counts)
    starts = encoding.starts + shift
    ends = np.where(encoding.starts == encoding.ends, starts + 1, encoding.ends + shift)
    starts, ends = np.minimum(starts, limit), np.minimum(ends, limit)
    inserted = inventory.marker_only[encoding.ids] & ~_holds_whitespace(stretch, starts, ends)
    ends = np.where(inserted, starts, ends)
    return Spans(encoding.ids, starts, _with_marks(stretch, starts, ends), encoding.bounds)


def _holds_whitespace(stretch: Stretch, starts: Ints, ends: Ints) -> Bools:
    ink = stretch.ink_before
    return np.asarray(ink[ends] - ink[starts] < ends - starts)


def _with_marks(stretch: Stretch, starts: Ints, ends: Ints) -> Ints:
    """Return ``ends`` moved over the uncovered combining marks that follow."""
    bare = stretch.marks & (coverage(starts, ends, len(stretch.points)) == 0)
    if not bare.any():
        return ends
    size = len(bare)
    places = np.arange(size + 1)
    stops = np.concatenate((~bare, [True]))
    stops[stretch.bounds] = True
    # The next position at or after each one that is no uncovered mark of the same document.
    following = np.where(stops, places, size)
    following = np.minimum.accumulate(following[::-1])[::-1]
    begins = np.zeros(size + 1, dtype=np.bool_)
    begins[stretch.bounds] = True
    extend = (ends > starts) & ~begins[ends]
    return np.where(extend, following[ends], ends)


def coverage(starts: Ints, ends: Ints, size: int) -> Ints:
    """Return by how many of the spans each of ``size`` characters is covered."""
    opened = np.bincount(starts, minlength=size + 1)
    closed = np.bincount(ends, minlength=size + 1)
    return np.cumsum(opened - closed)[:size].astype(np.int64)
