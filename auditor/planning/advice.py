"""Which length to take: the choice, its neighbours, and what would change it."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from auditor.planning.candidates import ROUNDED, rounded, smallest
from auditor.planning.histogram import LengthHistogram
from auditor.planning.losses import losses
from auditor.planning.plan import Known, Wishes
from auditor.tallies.groups import ALL

Json = dict[str, Any]


def advise(known: Known, wishes: Wishes, weighed: list[Json]) -> Json:
    """Return the recommended length of ``weighed``, as `plan.json` holds it.

    It is the smallest candidate that cuts at most the accepted share of the documents; the longest
    one where none does.
    """
    place = _choice(weighed, wishes.accepted)
    chosen = weighed[place]
    length, meets = chosen["length"], _share(chosen) <= wishes.accepted
    below = _share_below(known, weighed, place, asked=bool(wishes.lengths))
    return {
        "length": length,
        "meets_accepted_share": meets,
        "is_the_limit": length == known.limit,
        "holds_for_accepted": {"from": float(_share(chosen)) if meets else 0.0, "below": below},
        "cheaper": _neighbour(chosen, weighed[place - 1]) if place else None,
        "safer": _neighbour(chosen, weighed[place + 1]) if place + 1 < len(weighed) else None,
        "accepted_share_needs": smallest_rounded(known.whole, wishes.accepted),
        "upper_end_needs": _upper_end_needs(known, wishes),
        "slices_beyond_accepted": _slices_beyond(chosen, wishes.accepted),
        "every_slice_needs": _every_slice_needs(known, wishes),
    }


def _choice(weighed: list[Json], accepted: Fraction) -> int:
    meeting = (place for place, own in enumerate(weighed) if _share(own) <= accepted)
    return next(meeting, len(weighed) - 1)


def _share(weighed: Json) -> Fraction:
    figure = weighed["truncated_documents"]
    return Fraction(figure["numerator"], figure["denominator"])


def smallest_rounded(histogram: LengthHistogram, accepted: Fraction) -> int:
    """Return the smallest multiple of 8 that at most ``accepted`` of the documents exceed."""
    return rounded(smallest(histogram, accepted))


def _share_below(known: Known, weighed: list[Json], place: int, *, asked: bool) -> float | None:
    """Return the share of documents that the next smaller length cuts: accepted, it would do.

    The next smaller one is a candidate when lengths were asked for, else the multiple of 8 below;
    ``None`` where nothing smaller can be chosen.
    """
    if asked:
        return float(_share(weighed[place - 1])) if place else None
    shorter = (weighed[place]["length"] - 1) // ROUNDED * ROUNDED
    return _exceeding(known.whole, shorter) if shorter > known.overhead else None


def _exceeding(histogram: LengthHistogram, length: int) -> float:
    longer = int(histogram.documents[histogram.lengths > length].sum())
    return longer / histogram.total_documents


def _neighbour(chosen: Json, other: Json) -> Json:
    """Return another candidate with its compute for a document, as a multiple of the choice's."""
    return {
        "length": other["length"],
        "compute_fixed": _compute(other, "fixed") / _compute(chosen, "fixed"),
        "compute_packed": _compute(other, "packed") / _compute(chosen, "packed"),
    }


def _compute(weighed: Json, way: str) -> float:
    """Return the compute of a document: FLOPs where a model is known, else positions."""
    model = weighed["cost"]["model"]
    if model is None:
        return float(weighed["cost"]["positions_per_document"][way])
    return float(model[way]["forward_flops_per_document"])


def _upper_end_needs(known: Known, wishes: Wishes) -> int | None:
    """Return the smallest multiple of 8 whose share has its interval's upper end accepted.

    ``None`` where no length reaches that: too few documents.
    """
    lengths = sorted({rounded(int(length)) for length in known.whole.lengths})
    low, high = 0, len(lengths)
    while low < high:  # the upper end falls as lengths rise
        middle = (low + high) // 2
        figure = losses(known.whole, known.overhead, lengths[middle])["truncated_documents"]
        if figure.high is not None and figure.high <= wishes.accepted:
            high = middle
        else:
            low = middle + 1
    return lengths[low] if low < len(lengths) else None


def _slices_beyond(chosen: Json, accepted: Fraction) -> list[Json]:
    """Return the slices that the choice cuts more of than accepted, those cut most first."""
    beyond = [
        {"slice": key, "truncated_documents": own["truncated_documents"]}
        for key, own in chosen["slices"].items()
        if _share(own) > accepted
    ]
    return sorted(beyond, key=lambda own: (-own["truncated_documents"]["value"], own["slice"]))


def _every_slice_needs(known: Known, wishes: Wishes) -> int | None:
    """Return the smallest multiple of 8 that cuts at most the accepted share of every slice."""
    needs = [
        smallest_rounded(held, wishes.accepted)
        for key, held in known.histograms.items()
        if key != ALL
    ]
    return max(needs, default=None)
