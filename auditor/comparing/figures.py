"""Every figure of every slice that two audits have in common, and its difference."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.comparing.pairs import Pair
from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS, Figure
from auditor.figures.differences import Estimate, holm, interval_of_difference, p_value
from auditor.figures.intervals import CONFIDENCE

Json = Mapping[str, Any]

_DECLARED = {figure.name: figure for figure in (*CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS)}
HIGHER, LOWER, NOT_SHOWN = "higher", "lower", "no difference shown"
_DIGITS = 6

NOT_DEFINED = "not defined {when}: {why}"
NONE_SEEN = "none seen {when}, so that the interval has no upper end there"
NO_INTERVAL = "no interval {when}: {why}"
OTHER_REFERENCE = "the audits' first vocabularies differ, so that it counts other tokens"
FIRST = "1 for the first vocabulary, by definition"
OF_THE_CORPUS = "it depends on the size of a corpus: no interval"


def differences(pair: Pair, origin: str | None, references: tuple[Json, Json]) -> list[Json]:
    """Return one entry a slice and figure in common; those with both ends carry a p-value.

    ``origin`` is the field whose values are the sampling units, if any; ``references`` are the
    first vocabularies of the two audits.
    """
    held = pair.before["slices"], pair.after["slices"]
    return [
        {
            "before_vocabulary": pair.before["name"],
            "after_vocabulary": pair.after["name"],
            "slice": key,
            "figure": name,
            **found,
        }
        for key in held[0]
        if key in held[1]
        for name, found in _of_slice(held[0][key], held[1][key], pair, origin, references)
    ]


def _of_slice(
    before: Json, after: Json, pair: Pair, origin: str | None, references: tuple[Json, Json]
) -> Iterator[tuple[str, Json]]:
    figures = before["figures"], after["figures"]
    for name in figures[0]:
        if name not in figures[1]:
            continue
        why = _incomparable(pair, references) if name == RELATIVE_TOKENS.name else None
        declared = _DECLARED[name]
        wilson = declared.of_documents and (origin is None or name == REPEATED_DOCUMENTS.name)
        yield name, _difference(figures[0][name], figures[1][name], declared, why, wilson=wilson)
    usage = before.get("usage", {}), after.get("usage", {})
    for name in usage[0]:
        if name in usage[1]:
            yield name, _difference(usage[0][name], usage[1][name], None, None, wilson=False)


def _incomparable(pair: Pair, references: tuple[Json, Json]) -> str | None:
    first, other = references
    if first["digest"] != other["digest"]:
        return OTHER_REFERENCE
    return FIRST if pair.before["digest"] == pair.after["digest"] == first["digest"] else None


def _difference(
    before: Json, after: Json, figure: Figure | None, why: str | None, *, wilson: bool
) -> Json:
    sides = {"before": _kept(before), "after": _kept(after)}
    undefined = {
        when: own["note"]
        for when, own in (("before", before), ("after", after))
        if own["value"] is None
    }
    if undefined:
        return {**sides, "difference": None, **_nothing(why or _undefined(undefined))}
    difference = after["value"] - before["value"]
    if why is not None or figure is None:
        return {**sides, "difference": difference, **_nothing(why or OF_THE_CORPUS)}
    estimates = [_estimate(own, figure, wilson=wilson) for own in (before, after)]
    low, high = interval_of_difference(*estimates)
    if low is None or high is None:
        ends = {"low": low, "high": high}
        return {**sides, "difference": difference, **_nothing(_open(before, after)), **ends}
    p = float(f"{p_value(*estimates):.{_DIGITS}g}")
    return {
        **sides, "difference": difference, "low": low, "high": high,
        "verdict": verdict(low, high), "p_value": p, "adjusted_p_value": None,
        "shown_after_adjustment": None, "note": None,
    }  # fmt: skip


def _undefined(notes: Mapping[str, str]) -> str:
    if len(notes) == len(set(notes.values())):
        return "; ".join(NOT_DEFINED.format(when=when, why=why) for when, why in notes.items())
    return NOT_DEFINED.format(when="on either side", why=next(iter(notes.values())))


def _kept(figure: Json) -> dict[str, Any]:
    return {end: figure[end] for end in ("value", "low", "high")}


def _nothing(note: str) -> Json:
    """Return what stands where no difference can be told, and why."""
    return {
        "low": None, "high": None, "verdict": None, "p_value": None, "adjusted_p_value": None,
        "shown_after_adjustment": None, "note": note,
    }  # fmt: skip


def _open(before: Json, after: Json) -> str:
    """Return why an end is missing; both sides may be to blame, one is told."""
    sides = {"before": before, "after": after}
    unseen = [when for when, own in sides.items() if own["numerator"] == 0]
    if len(unseen) == len(sides):
        return NONE_SEEN.format(when="on either side")
    if unseen:
        return NONE_SEEN.format(when=unseen[0])
    when = next(when for when, own in sides.items() if own["low"] is None or own["high"] is None)
    return NO_INTERVAL.format(when=when, why=sides[when]["note"])


def _estimate(found: Json, figure: Figure, *, wilson: bool) -> Estimate:
    counted = (found["numerator"], found["denominator"]) if wilson else None
    return Estimate(found["value"], found["low"], found["high"], counted, figure.share)


def verdict(low: float, high: float) -> str:
    """Return which way the difference goes: its interval must leave 0 out."""
    return HIGHER if low > 0 else LOWER if high < 0 else NOT_SHOWN


def adjusted(found: list[Json]) -> list[Json]:
    """Return the entries with p-values adjusted for the number of all comparisons, by Holm."""
    compared = [own for own in found if own["p_value"] is not None]
    after = iter(holm([own["p_value"] for own in compared]))
    return [own if own["p_value"] is None else {**own, **_marked(next(after))} for own in found]


def _marked(p: float) -> Json:
    held = float(f"{p:.{_DIGITS}g}")
    return {"adjusted_p_value": held, "shown_after_adjustment": p < 1 - CONFIDENCE}


def counts(found: list[Json]) -> dict[str, Any]:
    """Return how many comparisons there are, and how many would differ by chance alone."""
    compared = [own for own in found if own["verdict"] is not None]
    return {
        "figures": len(found),
        "compared": len(compared),
        "differ": sum(own["verdict"] != NOT_SHOWN for own in compared),
        "expected_by_chance": round((1 - CONFIDENCE) * len(compared), 2),
        "adjustment": "Holm (1979)",
        "differ_after_adjustment": sum(own["shown_after_adjustment"] for own in compared),
    }
