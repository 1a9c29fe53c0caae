"""How the distribution of lengths moved: its distance, and the shift of each quantile."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from auditor.comparing.figures import verdict
from auditor.comparing.pairs import Pair
from auditor.figures.differences import Estimate, interval_of_difference
from auditor.figures.distances import critical_distance, distance
from auditor.tallies.groups import ALL

Json = Mapping[str, Any]

DIFFER, NOT_SHOWN = "differ", "no difference shown"
SAME_DOCUMENTS = (
    "both audits measured the same documents, and the critical value is for separate samples"
)
OVER_ORIGINS = "documents were drawn together by origin, and the critical value is for single ones"


def lengths(pair: Pair, why_not: str | None) -> list[Json]:
    """Return one entry a slice in common; ``why_not`` says why a critical value has no meaning."""
    held = pair.before["slices"], pair.after["slices"]
    return [
        {
            "before_vocabulary": pair.before["name"],
            "after_vocabulary": pair.after["name"],
            "slice": key,
            **_distance(held[0][key]["lengths"], held[1][key]["lengths"], why_not),
            "quantiles": _quantiles(held[0][key]["lengths"], held[1][key]["lengths"]),
        }
        for key in held[0]
        if key in held[1]
    ]


def _distance(before: Json, after: Json, why_not: str | None) -> Json:
    apart, at = distance(before["histogram"], after["histogram"])
    documents = {
        when: sum(count for _, count in own["histogram"])
        for when, own in (("before", before), ("after", after))
    }
    critical = None if why_not else critical_distance(documents["before"], documents["after"])
    told = None if critical is None else DIFFER if apart > critical else NOT_SHOWN
    return {
        "documents": documents,
        "mean": {"before": before["mean"], "after": after["mean"]},
        "distance": float(apart),
        "at_length": at,
        "critical_distance": critical,
        "verdict": told,
        "note": why_not,
    }


def _quantiles(before: Json, after: Json) -> Json:
    pairs = ((name, before["quantiles"][name], after["quantiles"][name])
             for name in before["quantiles"])  # fmt: skip
    return {name: _shift(one, other) for name, one, other in pairs}


def _shift(before: Json, after: Json) -> Json:
    one, other = (Estimate(own["value"], own["low"], own["high"]) for own in (before, after))
    low, high = interval_of_difference(one, other)
    known = low is not None and high is not None
    note = None if known else before.get("note") or after.get("note")
    return {
        "before": before["value"],
        "after": after["value"],
        "difference": after["value"] - before["value"],
        "low": low,
        "high": high,
        "verdict": verdict(low, high) if low is not None and high is not None else None,
        "note": note,
    }


def counts(found: list[Json]) -> dict[str, Any]:
    """Return how many slices were compared by the distance of their lengths, and differ."""
    compared = [own for own in found if own["verdict"] is not None]
    return {
        "slices": len(found),
        "compared": len(compared),
        "differ": sum(own["verdict"] == DIFFER for own in compared),
        "expected_by_chance": round(0.05 * len(compared), 2),
    }


def of_the_whole(found: list[Json]) -> list[Json]:
    """Return the entries of the slice that holds every document."""
    return [own for own in found if own["slice"] == ALL]
