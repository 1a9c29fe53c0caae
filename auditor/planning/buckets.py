"""Buckets of lengths that pad least: the exact optimum for one, two, … boundaries.

Let L be the distinct lengths, C the documents up to each, and best[k][j] the fewest positions
computed for the documents up to L[j] in k buckets. The last bucket starts after some i < j:

    best[k][j] = min over i of best[k-1][i] + L[j] * (C[j] - C[i])

Each i is a line in L[j] of slope -C[i]; slopes fall with i and the lengths asked for rise with j,
so that the lower hull of the lines is kept in a queue and each line enters and leaves it once:
time grows with distinct lengths × buckets. All arithmetic is on Python's integers.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from auditor.errors import SettingsError
from auditor.planning.histogram import LengthHistogram


@dataclass(frozen=True)
class Buckets:
    """Boundaries, in positions, and what they cost.

    A document goes to the first boundary that is at least its length and is padded to it.
    ``boundaries`` rise and end with the longest length; ``documents`` counts those of each bucket;
    ``positions`` are those of all documents, ``padded`` those computed, padding included.
    """

    boundaries: tuple[int, ...]
    documents: tuple[int, ...]
    positions: int
    padded: int

    @property
    def share(self) -> float | None:
        """The share of padding in the positions computed; None when none are."""
        return (self.padded - self.positions) / self.padded if self.padded else None


def best_buckets(histogram: LengthHistogram, most: int = 8) -> list[Buckets]:
    """Return the boundaries that pad least for 1, 2, … ``most`` buckets, in that order.

    There are fewer when there are fewer distinct lengths. Of boundaries that pad equally the
    smallest are returned: no other best choice has any of its boundaries lower (two best choices
    of boundaries stay best when the lower of each pair is taken, because L[j] * (C[j] - C[i])
    satisfies the quadrangle inequality). Raises SettingsError when ``most`` is below 1.
    """
    if most < 1:
        raise SettingsError(
            f"{most} buckets hold no document.", hint="Ask for at least one bucket."
        )
    lengths: list[int] = histogram.lengths.tolist()
    reached: list[int] = np.cumsum(histogram.documents).tolist()
    best = [length * count for length, count in zip(lengths, reached, strict=True)]
    choices: list[list[int]] = []
    found = [_bucketed(histogram, reached, _ends(choices, len(lengths)), best[-1])]
    for _ in range(2, min(most, len(lengths)) + 1):
        best, choice = _one_more(lengths, reached, best, len(choices) + 1)
        choices.append(choice)
        found.append(_bucketed(histogram, reached, _ends(choices, len(lengths)), best[-1]))
    return found


def _one_more(
    lengths: list[int], reached: list[int], before: list[int], first: int
) -> tuple[list[int], list[int]]:
    """Return best[k] and, for each j, the i it comes from, given best[k-1] in ``before``.

    ``first`` is the lowest j that has k distinct lengths; what lies below it is left 0. On equal
    positions the smallest i stays: a line replaces an earlier one only where it is lower.
    """
    best, choice = [0] * len(lengths), [0] * len(lengths)
    hull: list[int] = []
    above: list[int] = []  # hull[n] is lower than hull[n-1] at every length above above[n]
    head = 0
    for j in range(first, len(lengths)):
        _enter(j - 1, hull, above, head, reached, before)
        length = lengths[j]
        while head + 1 < len(hull) and length > above[head + 1]:
            head += 1
        i = hull[head]
        best[j] = before[i] + length * (reached[j] - reached[i])
        choice[j] = i
    return best, choice


def _enter(
    new: int, hull: list[int], above: list[int], head: int, reached: list[int], before: list[int]
) -> None:
    """Append line ``new`` to the hull, and drop lines from its end that it makes useless.

    A line is useless when ``new`` is lower already where it would itself become lower than the
    line before it. Lengths are integers, so the floor of a crossing decides exactly.
    """
    crossing = -1
    while len(hull) > head:
        last = hull[-1]
        crossing = (before[new] - before[last]) // (reached[new] - reached[last])
        if len(hull) == head + 1 or crossing > above[-1]:
            break
        hull.pop()
        above.pop()
    hull.append(new)
    above.append(crossing)


def _ends(choices: list[list[int]], distinct: int) -> list[int]:
    """Return the index of each bucket's longest length, by following the choices back."""
    ends = [distinct - 1]
    for choice in reversed(choices):
        ends.append(choice[ends[-1]])
    return ends[::-1]


def _bucketed(
    histogram: LengthHistogram, reached: list[int], ends: list[int], padded: int
) -> Buckets:
    counts = [reached[end] for end in ends]
    return Buckets(
        boundaries=tuple(int(histogram.lengths[end]) for end in ends),
        documents=tuple(high - low for high, low in zip(counts, [0, *counts], strict=False)),
        positions=histogram.total_positions,
        padded=padded,
    )
