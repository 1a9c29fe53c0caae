"""Differences of two separate estimates: intervals and p-values from theirs alone.

The method of variance estimates recovery: the distance from each estimate to its own limit stands
for its variance near that limit. Newcombe (1998), Statistics in Medicine 17, 873-890, method 10,
for two proportions with Wilson's intervals; Zou & Donner (2008), Statistics in Medicine 27,
1693-1702, in general. The two estimates are taken as independent.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from auditor.figures.intervals import Interval, Z, wilson

# Beyond this a p-value is below the smallest float.
_FARTHEST = 38.0
_STEPS = 60


@dataclass(frozen=True, slots=True)
class Estimate:
    """A value with its 95 % interval, either end ``None`` when unknown.

    ``counted`` is (successes, n) when the interval is Wilson's; otherwise half its width grows
    with the normal quantile, and ``share`` says that it is clamped to [0, 1].
    """

    value: float
    low: float | None
    high: float | None
    counted: tuple[int, int] | None = None
    share: bool = False

    def distances(self, z: float) -> tuple[float, float]:
        """Return how far the limits lie below and above the value at the normal quantile ``z``."""
        if self.counted is not None:
            low, high = wilson(*self.counted, z)
            return self.value - (low or 0.0), (1.0 if high is None else high) - self.value
        ends = [abs(end - self.value) for end in (self.low, self.high) if end is not None]
        half = max(ends, default=0.0) * z / Z
        if self.share:
            return min(half, self.value), min(half, 1.0 - self.value)
        return half, half


def interval_of_difference(before: Estimate, after: Estimate) -> Interval:
    """Return the 95 % interval of ``after`` - ``before``.

    An end is ``None`` where an end of theirs that it needs is unknown: the lower one needs the
    lower end of ``after`` and the upper end of ``before``.
    """
    difference = after.value - before.value
    down = _apart(after.value, after.low, before.value, before.high)
    up = _apart(after.value, after.high, before.value, before.low)
    return (
        None if down is None else difference - down,
        None if up is None else difference + up,
    )


def _apart(one: float, end: float | None, other: float, opposite: float | None) -> float | None:
    if end is None or opposite is None:
        return None
    return math.hypot(one - end, other - opposite)


def p_value(before: Estimate, after: Estimate) -> float:
    """Return the two-sided p-value: the confidence at which the interval just reaches 0.

    Both estimates need both ends. Intervals at other confidences are Wilson's own where counts are
    known, and normal around the value otherwise, so that p < 0.05 exactly when the 95 % interval
    leaves 0 out.
    """
    difference = after.value - before.value
    if not difference:
        return 1.0

    def leaves_0_out(z: float) -> bool:
        (after_down, after_up), (before_down, before_up) = after.distances(z), before.distances(z)
        apart = (after_down, before_up) if difference > 0 else (after_up, before_down)
        return abs(difference) > math.hypot(*apart)

    if leaves_0_out(_FARTHEST):
        return 0.0
    within, beyond = 0.0, _FARTHEST
    for _ in range(_STEPS):
        middle = (within + beyond) / 2
        within, beyond = (middle, beyond) if leaves_0_out(middle) else (within, middle)
    return math.erfc(within / math.sqrt(2))


def holm(p_values: Sequence[float]) -> list[float]:
    """Return p-values adjusted for their number, in the order given.

    Holm (1979), Scandinavian Journal of Statistics 6, 65-70: the chance of one false difference or
    more among all is kept, however the comparisons depend on each other.
    """
    order = sorted(range(len(p_values)), key=lambda place: p_values[place])
    adjusted, reached = [0.0] * len(p_values), 0.0
    for rank, place in enumerate(order):
        reached = max(reached, min(1.0, (len(order) - rank) * p_values[place]))
        adjusted[place] = reached
    return adjusted
