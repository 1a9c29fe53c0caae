"""Where lengths stand on a chart: bars that stay readable from a few tokens to millions."""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Iterable
from dataclasses import dataclass

Histogram = Iterable[tuple[int, int]]

# A range as narrow as this is drawn evenly, one bar a length.
_EVEN = 64
_MOST_TICKS = 7


@dataclass(frozen=True, slots=True)
class Bar:
    """Documents with ``first`` to ``last`` tokens, those beyond the limit counted apart."""

    first: int
    last: int
    within: int
    beyond: int


@dataclass(frozen=True, slots=True)
class Scale:
    """A horizontal scale from ``edges[0]`` (left out) to ``edges[-1]`` (included).

    A bar stands between two edges and holds the lengths above the lower one, so that a limit lies
    at the end of the last bar it allows. Evenly spaced, or ``doubling``: each doubling of length
    takes the same width and is cut into bars of one size.
    """

    edges: tuple[int, ...]
    doubling: bool

    def position(self, length: int) -> float:
        """Return the place of ``length``, 0 at the left end and 1 at the right one."""
        low, high = self._place(self.edges[0]), self._place(self.edges[-1])
        return (self._place(length) - low) / (high - low)

    def _place(self, length: int) -> float:
        if not self.doubling or length < 1:
            return float(length - 1) if self.doubling else float(length)
        octave = length.bit_length() - 1
        return octave - 1 + length / (1 << octave)

    def bars(self, histogram: Histogram, limit: int | None) -> list[Bar]:
        """Return the bars that hold a document, shortest first."""
        held: dict[int, list[int]] = {}
        for length, documents in histogram:
            counts = held.setdefault(bisect_left(self.edges, length), [0, 0])
            counts[limit is not None and length > limit] += documents
        return [
            Bar(self.edges[place - 1] + 1, self.edges[place], *counts)
            for place, counts in sorted(held.items())
        ]

    def ticks(self) -> list[int]:
        """Return a few round lengths within the scale."""
        low, high = self.edges[0], self.edges[-1]
        if not self.doubling:
            step = max(1, int(round_step((high - low) / _MOST_TICKS)))
            return list(range(-(-max(low, 0) // step) * step, high + 1, step))
        first, last = max(low, 1).bit_length() - 1, high.bit_length() - 1
        every = -(-(last - first + 1) // _MOST_TICKS)
        ticks = (2**octave for octave in range(first, last + 1, every))
        return [tick for tick in ticks if low <= tick <= high]


def scale_for(shortest: int, longest: int) -> Scale:
    """Return a scale that shows lengths from ``shortest`` to ``longest``."""
    if longest - shortest <= _EVEN or longest <= 4 * shortest:
        step = max(1, int(round_step((longest - shortest + 1) / _EVEN)))
        first = (shortest - 1) // step * step
        return Scale(tuple(range(first, longest + step, step)), doubling=False)
    octaves = longest.bit_length() - max(shortest, 1).bit_length() + 1
    return Scale(_doubling_edges(shortest, longest, 8 if octaves <= 6 else 4), doubling=True)


def _doubling_edges(shortest: int, longest: int, parts: int) -> tuple[int, ...]:
    edges = [-1, 0, 1]
    while edges[-1] < longest:
        base = edges[-1]
        step = max(1, base // parts)
        edges += range(base + step, 2 * base + 1, step)
    first = bisect_left(edges, shortest) - 1
    return tuple(edges[max(first, 0) : bisect_left(edges, longest) + 1])


def round_step(least: float) -> float:
    """Return the smallest of …, 0.1, 0.2, 0.5, 1, 2, 5, 10, … that is not below ``least``."""
    power: float = 10.0 ** math.floor(math.log10(least))
    return next((times * power for times in (1, 2, 5) if times * power >= least), 10 * power)
