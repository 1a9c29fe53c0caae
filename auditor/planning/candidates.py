"""Which maximum lengths are weighed, and why each of them is."""

from __future__ import annotations

from collections.abc import Iterable
from fractions import Fraction

from auditor.errors import SettingsError
from auditor.figures.lengths import QUANTILES
from auditor.planning.histogram import LengthHistogram

STEP, ROUNDED = 64, 8
_FEWEST = 64

Candidates = dict[int, list[str]]


def given(lengths: Iterable[int], overhead: int) -> Candidates:
    """Return the lengths that were asked for; SettingsError for one without room for a token."""
    found: Candidates = {length: ["asked for"] for length in sorted(lengths)}
    small = next((length for length in found if length <= overhead), None)
    if small is not None:
        raise SettingsError(
            f"a length of {small} has no room for a token beside the template's {overhead}.",
            hint=f"Name lengths above {overhead} with --candidates.",
        )
    return found


def usual(
    histogram: LengthHistogram, overhead: int, limit: int | None, accepted: Fraction
) -> Candidates:
    """Return the lengths worth weighing, in rising order, each with the reasons for it.

    The powers of two up to the first that cuts nothing, the multiples of 64 on both sides of each
    quantile, the smallest length that cuts at most ``accepted`` of the documents, the smallest that
    cuts none (both rounded up to a multiple of 8), and the limit; none beyond the limit.
    """
    longest = int(histogram.lengths[-1])
    found: Candidates = {}

    def weigh(length: int, reason: str) -> None:
        if length > overhead and (limit is None or length <= limit):
            found.setdefault(length, []).append(reason)

    whole = rounded(longest)
    weigh(whole, "cuts nothing")
    weigh(rounded(smallest(histogram, accepted)), "accepted share")
    for power in _powers(_shortest_power(histogram), whole):
        weigh(power, "power of two")
    for name, (part, parts) in QUANTILES.items():
        at = smallest(histogram, 1 - Fraction(part, parts))
        for length in dict.fromkeys((at // STEP * STEP, -(-at // STEP) * STEP)):
            if length <= whole:
                weigh(length, f"beside {name}")
    if limit is not None and limit > overhead:
        found.setdefault(limit, []).append("the limit")
    if not found:  # a limit that has no room, or documents without a token
        found[max(whole, overhead + 1)] = ["cuts nothing"]
    return dict(sorted(found.items()))


def smallest(histogram: LengthHistogram, accepted: Fraction) -> int:
    """Return the smallest observed length that at most ``accepted`` of the documents exceed."""
    most = histogram.total_documents * accepted
    beyond = histogram.total_documents - histogram.documents.cumsum()
    place = next(i for i, count in enumerate(beyond.tolist()) if count <= most)
    return int(histogram.lengths[place])


def rounded(length: int) -> int:
    """Return ``length`` rounded up to a multiple of 8."""
    return max(ROUNDED, -(-length // ROUNDED) * ROUNDED)


def _shortest_power(histogram: LengthHistogram) -> int:
    """Return the largest power of two that half of the documents exceed, 64 at least."""
    median = smallest(histogram, Fraction(1, 2))
    return max(_FEWEST, 1 << (max(1, median).bit_length() - 1))


def _powers(first: int, whole: int) -> Iterable[int]:
    power = first
    while power <= whole:
        yield power
        power *= 2
