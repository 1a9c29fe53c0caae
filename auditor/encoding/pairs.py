"""Two-part inputs cut to a number of tokens, simulated on integers."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from auditor.encoding.measures import Columns
from auditor.encoding.truncation import Candidate
from auditor.vocabulary.engine import Ints

# Where the tokens that are too many are taken: from the longer text token by token, or from one.
PAIR_WAYS = ("longest_first", "first_only", "second_only")
PAIR_LOSSES = ("lost_first_tokens", "lost_second_tokens")
PAIR_PLACES = ("pairs_cut_in_first", "pairs_cut_in_second", "pairs_that_cannot_fit")


def pair_columns(candidates: Sequence[Candidate], first: Ints, second: Ints) -> Columns:
    """Return what each candidate and each way of cutting takes from pairs.

    ``first`` and ``second`` are tokens of the two texts, shape (pairs,), as is every column. A pair
    cannot fit when the one text that may be cut would have no token left; nothing is taken from it
    (as `tokenizers` refuses to cut it).
    """
    found: Columns = {}
    for candidate in candidates:
        excess = np.maximum(0, first + second - candidate.room)
        for way in PAIR_WAYS:
            lost = _lost(way, first, second, excess, candidate.room)
            unfit = (excess > 0) & (lost[0] + lost[1] == 0)
            values = (*lost, lost[0] > 0, lost[1] > 0, unfit)
            for name, column in zip((*PAIR_LOSSES, *PAIR_PLACES), values, strict=True):
                found[candidate.column(name, way)] = column.astype(np.int64)
    return found


def _lost(way: str, first: Ints, second: Ints, excess: Ints, room: int) -> tuple[Ints, Ints]:
    nothing = np.zeros_like(excess)
    if way == "first_only":
        return np.where(excess < first, excess, 0), nothing
    if way == "second_only":
        return nothing, np.where(excess < second, excess, 0)
    kept = _longest_first(first, second, room)
    cut = excess > 0
    return np.where(cut, first - kept[0], 0), np.where(cut, second - kept[1], 0)


def _longest_first(first: Ints, second: Ints, room: int) -> tuple[Ints, Ints]:
    """Return what is kept of each when the longer text gives, until both are equally long.

    The longer of the two keeps the odd token; the second one when they are equally long.
    """
    shorter = np.minimum(np.minimum(first, second), room // 2)
    longer = room - shorter
    first_is_longer = first > second
    return np.where(first_is_longer, longer, shorter), np.where(first_is_longer, shorter, longer)
