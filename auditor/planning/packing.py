"""Packing: several whole documents in one sequence, worked out on documents by length.

Longest documents come first. Sequences that are alike, with the same room left and as many
documents, are one group with a count, so that no document is ever looked at by itself.
"""

from __future__ import annotations

from bisect import bisect_left, insort
from dataclasses import dataclass

from auditor.errors import SettingsError
from auditor.planning.histogram import LengthHistogram


@dataclass(frozen=True)
class Packing:
    """``packs`` sequences of ``length`` positions that hold all documents."""

    documents: int
    positions: int
    packs: int
    length: int
    most_documents: int

    @property
    def efficiency(self) -> float | None:
        """The share of positions that hold a document's own (Krell et al. 2021)."""
        return self.positions / (self.packs * self.length) if self.packs else None

    @property
    def factor(self) -> float | None:
        """Documents in one sequence, on average (Krell et al. 2021)."""
        return self.documents / self.packs if self.packs else None


def worst_fit(histogram: LengthHistogram, length: int, depth: int | None = None) -> Packing:
    """Return the packing in which each document goes where most room is left, if it fits there.

    ``depth`` is the most documents in a sequence, ``None`` for no bound. Shortest-pack-first
    histogram packing of Krell et al. 2021 (arXiv 2107.02027, section 3.2). Raises SettingsError for
    a document longer than ``length``.
    """
    return _packed(histogram, length, depth, most_room=True)


def best_fit(histogram: LengthHistogram, length: int, depth: int | None = None) -> Packing:
    """Return the packing in which each document goes where least room is left, and it still fits.

    Best-fit decreasing. ``depth`` and errors as for ``worst_fit``.
    """
    return _packed(histogram, length, depth, most_room=False)


def fewest_packs(histogram: LengthHistogram, length: int) -> int:
    """Return a number of sequences below which no packing can go.

    The greater of two bounds: all positions over ``length``, rounded up; and the documents longer
    than half of it, of which no two share a sequence, together with what those of exactly half
    need (Martello & Toth 1990, Knapsack Problems, section 8.3).
    """
    _refuse_longer(histogram, length)
    twice = 2 * histogram.lengths
    longer = int(histogram.documents[twice > length].sum())
    half = int(histogram.documents[twice == length].sum())
    return max(-(-histogram.total_positions // length), longer + -(-half // 2))


def _refuse_longer(histogram: LengthHistogram, length: int) -> None:
    if int(histogram.lengths[-1]) > length:
        raise SettingsError(
            f"a document of {int(histogram.lengths[-1])} positions does not fit into {length}.",
            hint="Cut or drop longer documents before packing.",
        )


def _packed(
    histogram: LengthHistogram, length: int, depth: int | None, *, most_room: bool
) -> Packing:
    _refuse_longer(histogram, length)
    packs = _Packs(length, depth)
    place = packs.place_widest if most_room else packs.place_tightest
    pairs = zip(histogram.lengths.tolist(), histogram.documents.tolist(), strict=True)
    for size, documents in reversed(list(pairs)):
        place(size, documents)
    return Packing(
        histogram.total_documents, histogram.total_positions, packs.count, length, packs.deepest
    )


class _Packs:
    """Sequences that can take a further document, by the room left in them."""

    def __init__(self, length: int, depth: int | None) -> None:
        self._length = length
        self._depth = depth
        # Room left → documents held → how many sequences; and the rooms in rising order.
        self._alike: dict[int, dict[int, int]] = {}
        self._rooms: list[int] = []
        self.count = 0
        self.deepest = 0

    def place_widest(self, size: int, documents: int) -> None:
        """Place documents of one size where most room is left, one in each sequence at a time.

        When no sequence has room for one, each of those left begins a sequence of its own.
        """
        while documents and self._rooms and self._rooms[-1] >= size:
            room = self._rooms[-1]
            held, times = self._take(room, documents)
            self._add(room - size, held + 1, times)
            documents -= times
        if documents:
            self.count += documents
            self._add(self._length - size, 1, documents)

    def place_tightest(self, size: int, documents: int) -> None:
        """Place documents of one size where least room is left, which that makes tighter still."""
        while documents:
            place = bisect_left(self._rooms, size)
            if place == len(self._rooms):
                self._begin(size, documents)
                return
            room = self._rooms[place]
            held = next(iter(self._alike[room]))
            each = self._fitting(room, held, size)
            # As many sequences as take all they can, else the one that takes what is left.
            _, times = self._take(room, max(1, documents // each))
            taken = min(each, documents)
            self._add(room - taken * size, held + taken, times)
            documents -= taken * times

    def _begin(self, size: int, documents: int) -> None:
        each = self._fitting(self._length, 0, size)
        full, left = divmod(documents, each)
        for times, taken in ((full, each), (1 if left else 0, left)):
            if times:
                self.count += times
                self._add(self._length - taken * size, taken, times)

    def _fitting(self, room: int, held: int, size: int) -> int:
        """Return how many documents of ``size`` a sequence can take."""
        by_depth = None if self._depth is None else self._depth - held
        if size == 0:
            return by_depth if by_depth is not None else 2**62
        return room // size if by_depth is None else min(room // size, by_depth)

    def _take(self, room: int, most: int) -> tuple[int, int]:
        """Take out up to ``most`` sequences of ``room``; return what they hold, and how many."""
        alike = self._alike[room]
        held = next(iter(alike))
        times = min(most, alike[held])
        alike[held] -= times
        if not alike[held]:
            del alike[held]
        if not alike:
            del self._alike[room]
            del self._rooms[bisect_left(self._rooms, room)]
        return held, times

    def _add(self, room: int, held: int, times: int) -> None:
        self.deepest = max(self.deepest, held)
        if held == self._depth:
            return
        if room not in self._alike:
            insort(self._rooms, room)
        alike = self._alike.setdefault(room, {})
        alike[held] = alike.get(held, 0) + times
