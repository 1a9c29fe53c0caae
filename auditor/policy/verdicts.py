"""Whether the bounds of a policy hold for an audit: pass, fail, or undecided and why."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from decimal import Decimal
from fractions import Fraction
from typing import Any

from auditor.errors import SettingsError
from auditor.figures.catalogue import CATALOGUE, REPEATED_DOCUMENTS
from auditor.figures.intervals import Z
from auditor.figures.lengths import QUANTILES
from auditor.policy.reading import (
    EVERY,
    USAGE,
    Bound,
    Policy,
    nearest,
    refuse_unknown_vocabularies,
)
from auditor.tallies.groups import ALL

Json = Mapping[str, Any]

FORMAT = "auditor/policy"
VERSION = 1
ASSUMPTION = (
    "further documents are like these: the value stays, and half the width of its interval shrinks"
    " with 1/sqrt(documents), that of a proportion of documents as Wilson's does"
)
PASS, FAIL, UNDECIDED = "pass", "fail", "undecided"
_NO_OTHER = "needs a second vocabulary: name one with --vocab"
_NOT_COUNTED = "not counted: ask with --repeats"
_PROPORTIONS = {figure.name for figure in CATALOGUE if figure.of_documents}
_ON_THE_BOUND = "the value lies on the bound: no number of documents settles it"


def judge(policy: Policy, audit: Json) -> dict[str, Any]:
    """Return the document of `policy.json` for an `audit.json` document.

    Raises SettingsError for a slice or vocabulary that the audit does not hold.
    """
    held = audit["vocabularies"]
    refuse_unknown_vocabularies(policy, ((own["name"], own["source"]) for own in held))
    verdicts = [
        _verdict(bound, vocabulary, key, wilson=_is_wilson(bound.figure, audit))
        for bound in policy.bounds
        for vocabulary in _vocabularies(bound, audit)
        for key in _keys(bound, vocabulary, audit)
    ]
    found = [own["verdict"] for own in verdicts]
    return {
        "format": FORMAT,
        "version": VERSION,
        "policy": policy.source,
        "corpus": {name: audit["corpus"][name] for name in ("digest", "documents")},
        "outcome": next((own for own in (FAIL, UNDECIDED) if own in found), PASS),
        "counts": {name: found.count(name) for name in (PASS, FAIL, UNDECIDED)},
        "assumption": ASSUMPTION,
        "verdicts": verdicts,
    }


def _vocabularies(bound: Bound, audit: Json) -> list[Json]:
    held: list[Json] = audit["vocabularies"]
    wanted = bound.vocabulary
    return [own for own in held if wanted in (None, own["name"], own["source"])]


def _keys(bound: Bound, vocabulary: Json, audit: Json) -> list[str]:
    """Return the slices that a bound speaks of, in the order of the audit."""
    keys = list(vocabulary["slices"])
    if bound.slices.endswith(EVERY):
        fields = list(audit["settings"].get("by") or [])
        wanted = bound.slices.removesuffix(EVERY)
        found = [key for key in keys if key != ALL and _field(key, fields) == wanted]
    else:
        found = [key for key in keys if key == bound.slices]
    if not found:
        raise SettingsError(
            f"the audit holds no slice {bound.slices!r}.",
            hint=nearest(bound.slices, keys),
            where=bound.where,
        )
    return found


def _field(key: str, fields: list[str]) -> str | None:
    """Return the longest field that ``key`` begins with: a field's name may hold a sign =."""
    return max((own for own in fields if key.startswith(f"{own}=")), key=len, default=None)


def _is_wilson(name: str, audit: Json) -> bool:
    """Whether the interval is Wilson's over documents; over origins it is the ratio estimator's."""
    if audit["settings"].get("origin") is not None:
        return name == REPEATED_DOCUMENTS.name
    return name in _PROPORTIONS or name == REPEATED_DOCUMENTS.name


def _verdict(bound: Bound, vocabulary: Json, key: str, *, wilson: bool) -> dict[str, Any]:
    held = vocabulary["slices"][key]
    figure = _figure(bound.figure, held)
    documents: int = held["counts"]["documents"]
    verdict, note = _judged(bound, figure)
    more = None
    if verdict == UNDECIDED:
        more = _more_documents(bound, figure, documents, wilson=wilson)
    if verdict == UNDECIDED and note is None and more is None:
        note = _ON_THE_BOUND
    return {
        "vocabulary": vocabulary["name"],
        "slice": key,
        "figure": bound.figure,
        "on": bound.on,
        "min": _as_float(bound.least),
        "max": _as_float(bound.most),
        "verdict": verdict,
        "value": figure["value"],
        "low": figure["low"],
        "high": figure["high"],
        "documents": documents,
        "more_documents": more,
        "note": note,
    }


def _as_float(number: Decimal | None) -> float | None:
    return None if number is None else float(number)


def _figure(name: str, held: Json) -> Json:
    if name in QUANTILES:
        return {"numerator": None, "denominator": None, "note": None,
                **held["lengths"]["quantiles"][name]}  # fmt: skip
    if name in USAGE:
        found: Json = held["usage"][name]
        return found
    missing = _NO_OTHER if name == "relative_tokens" else _NOT_COUNTED
    absent = dict.fromkeys(("value", "low", "high", "numerator", "denominator"))
    figure: Json = held["figures"].get(name, {**absent, "note": missing})
    return figure


def _judged(bound: Bound, figure: Json) -> tuple[str, str | None]:
    """Return the verdict, and the reason where the audit itself leaves it undecided."""
    if figure["value"] is None:
        return UNDECIDED, figure["note"]
    if bound.on == "value":
        value = _exactly(figure)
        below = bound.least is not None and value < Fraction(bound.least)
        above = bound.most is not None and value > Fraction(bound.most)
        return (FAIL if below or above else PASS), None
    low, high = figure["low"], figure["high"]
    sides = [side for side in _sides(bound, low, high) if side is not PASS]
    if not sides:
        return PASS, None
    if FAIL in sides:
        return FAIL, None
    unknown = low is None or high is None
    return UNDECIDED, (figure["note"] or "it has no interval") if unknown else None


def _sides(bound: Bound, low: float | None, high: float | None) -> Iterator[str]:
    """Yield the verdict on each end of the bound; an end of the interval may be unknown."""
    if bound.most is not None:
        if low is not None and low > bound.most:
            yield FAIL
        else:
            yield PASS if high is not None and high <= bound.most else UNDECIDED
    if bound.least is not None:
        if high is not None and high < bound.least:
            yield FAIL
        else:
            yield PASS if low is not None and low >= bound.least else UNDECIDED


def _exactly(figure: Json) -> Fraction:
    """Return the value as the ratio of its two totals, where it is one."""
    if figure["numerator"] is not None and figure["denominator"]:
        return Fraction(figure["numerator"], figure["denominator"])
    return Fraction(figure["value"])


def _more_documents(bound: Bound, figure: Json, documents: int, *, wilson: bool) -> int | None:
    """Return how many more documents would settle it under ``ASSUMPTION``; ``None`` if none do."""
    value, low, high = figure["value"], figure["low"], figure["high"]
    if value is None or low is None or high is None:
        return None
    ends = [float(end) for end in (bound.least, bound.most) if end is not None]
    straddled = [end for end in ends if low <= end <= high]
    if not straddled or value in straddled:
        return None
    in_all = (
        _by_wilson(value, end) if wilson else _by_root(figure, end, documents) for end in straddled
    )
    return max(1, math.ceil(max(in_all)) - documents)


def _by_wilson(value: float, end: float) -> float:
    """Return the documents at which an end of Wilson's interval reaches ``end``.

    Wilson's limits are the roots b of (b - p)² = z²·b·(1 - b)/n (Newcombe 1998, method 3).
    """
    return Z * Z * end * (1 - end) / (value - end) ** 2


def _by_root(figure: Json, end: float, documents: int) -> float:
    """Return the documents at which half the width, on the side of ``end``, is its distance."""
    value = figure["value"]
    half = figure["high"] - value if end > value else value - figure["low"]
    return documents * float((half / (end - value)) ** 2)
