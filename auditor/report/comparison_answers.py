"""The plain sentences of a comparison; terminal and page say the same words."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from auditor.report.answers import Excerpt, Sentence
from auditor.report.formatting import (
    DASH,
    FIGURES,
    SHARES,
    clean,
    count,
    difference,
    difference_interval,
    plain_name,
    plural,
    value,
)
from auditor.tallies.groups import ALL

Json = Mapping[str, Any]

HOW_TO_READ = (
    "Values are exact for each corpus; a range in brackets is the 95% interval of a difference for"
    " further documents from the two sources."
)
MANY = (
    "Where nothing differs, one comparison in twenty still shows a difference by chance. A star"
    " marks what differs with the number of all comparisons reckoned with (Holm 1979): that holds"
    " however figures and slices depend on each other, and is strict."
)
METHOD = (
    "Intervals of differences come from the two estimates and their own intervals (Newcombe 1998,"
    " method 10; Zou & Donner 2008), taken as independent. Paired intervals, which are narrower"
    " for the same documents, exist only within one run."
)
NOT_SHOWN = "no difference shown"
_SHOWN = 12


def subject(document: Json) -> Sentence:
    """Return what was compared."""
    before, after = (document[side]["corpus"]["documents"] for side in ("before", "after"))
    if document["same_corpus"]:
        return (f"The same {plural(before, 'document')}, measured twice.",)
    return (f"{plural(before, 'document')} before, {count(after)} after.",)


def vocabularies(pair: Json) -> Sentence:
    """Return the one vocabulary of a pair, or both."""
    before, after = (Excerpt(clean(pair[side]["name"], 60)) for side in ("before", "after"))
    if pair["same_vocabulary"]:
        renamed = () if before == after else (" (before: ", before, ")")
        return ("Under ", after, *renamed, ".")
    if before == after:
        return ("Under two vocabularies that are both called ", after, ".")
    return ("Under ", before, " before and ", after, " after.")


def counted(document: Json) -> list[Sentence]:
    """Return how many figures and lengths differ, and how many would by chance."""
    figures, lengths = (document["comparisons"][name] for name in ("figures", "lengths"))
    first = (
        f"{count(figures['differ'])} of {plural(figures['compared'], 'figure')} with an interval"
        f" differ; about {figures['expected_by_chance']:.0f} would by chance alone."
        f" {count(figures['differ_after_adjustment'])} still differ when their number is reckoned"
        " with."
    )
    told: list[Sentence] = [(first,)]
    without = figures["figures"] - figures["compared"]
    if without:
        told.append((f"{plural(without, 'figure')} cannot be compared: differences.csv says why.",))
    if lengths["compared"]:
        far = f"Lengths differ in {count(lengths['differ'])} of"
        slices = plural(lengths["compared"], "slice")
        chance = f"about {lengths['expected_by_chance']:.1f} would by chance."
        told.append((f"{far} {slices} (Kolmogorov-Smirnov, 5%); {chance}",))
    return told


def settings(document: Json) -> list[Sentence]:
    """Return the settings that differ, each as a sentence."""
    return [
        (
            f"The two audits differ in {own['what']}: ", Excerpt(clean(str(own["before"]))),
            " before, ", Excerpt(clean(str(own["after"]))),
            " after. A difference may come of this alone.",
        )
        for own in document["settings"]["different_settings"]
    ]  # fmt: skip


def notes(document: Json) -> list[str]:
    """Return what a reader must know, as sentences."""
    return [f"{note[:1].upper()}{note[1:]}." for note in document["notes"]]


def of_pair(document: Json, pair: Json, slices: Iterable[str] | None = None) -> list[Json]:
    """Return the differences of one pair of vocabularies, all or those of some slices."""
    names = pair["before"]["name"], pair["after"]["name"]
    wanted = None if slices is None else set(slices)
    return [
        own
        for own in document["differences"]
        if (own["before_vocabulary"], own["after_vocabulary"]) == names
        and (wanted is None or own["slice"] in wanted)
    ]


def lengths_of(document: Json, pair: Json) -> list[Json]:
    """Return the lengths of one pair of vocabularies, a slice each."""
    names = pair["before"]["name"], pair["after"]["name"]
    return [
        own
        for own in document["lengths"]
        if (own["before_vocabulary"], own["after_vocabulary"]) == names
    ]


def surest(found: Sequence[Json]) -> list[Json]:
    """Return those that differ, the surest first, then by slice and figure."""
    held = [own for own in found if own["verdict"] not in (None, NOT_SHOWN)]
    return sorted(held, key=lambda own: (own["p_value"], own["slice"] != ALL, own["slice"],
                                         own["figure"]))  # fmt: skip


def moved(own: Json) -> Sentence:
    """Return one difference as a sentence."""
    name = own["figure"]
    ends = difference_interval(name, own)
    sign = "*" if own["shown_after_adjustment"] else ""
    return (
        f"{plain_name(name)} in ", Excerpt(clean(own["slice"], 60)),
        f": {value(name, own['before'])} before, {value(name, own['after'])} after;"
        f" {difference(name, own)}{points(name)}" + (f" ({ends})" if ends else "")
        + f": {effect(own)}{sign}.",
    )  # fmt: skip


def points(name: str) -> str:
    """Return the unit of a difference of shares, else nothing."""
    return " points" if name in SHARES else ""


def effect(own: Json) -> str:
    """Return the verdict, and whether it is for the better where the figure has a direction."""
    if own["verdict"] is None:
        return "not defined" if own["difference"] is None else "not decided"
    figure = FIGURES.get(own["figure"])
    if own["verdict"] == NOT_SHOWN or figure is None or figure.better == "neither":
        return str(own["verdict"])
    return f"{own['verdict']}, {'better' if figure.better == own['verdict'] else 'worse'}"


def only_one(pair: Json) -> list[Sentence]:
    """Return the slices that one audit alone has."""
    told: list[Sentence] = []
    for side, when in (("only_before", "before"), ("only_after", "after")):
        keys = pair["slices"][side]
        if keys:
            listed = ", ".join(clean(key, 60) for key in keys[:_SHOWN])
            more = f" and {count(len(keys) - _SHOWN)} more" if len(keys) > _SHOWN else ""
            told.append((f"Only {when} ({count(len(keys))}): ", Excerpt(listed), f"{more}."))
    return told


def distance(own: Json) -> Sentence:
    """Return how far the lengths of one slice lie apart."""
    critical = own["critical_distance"]
    bound = "" if critical is None else f" (5% critical value {critical:.3f})"
    told = own["verdict"] or f"{DASH} ({own['note']})"
    far = f": distance {own['distance']:.3f}{bound}, widest at {count(own['at_length'])} positions"
    return ("Lengths in ", Excerpt(clean(own["slice"], 60)), f"{far}: {told}.")


def shift(found: Json) -> str:
    """Return a quantile before and after with the interval of its shift."""
    ends = difference_interval("length", found)
    moved_by = difference("length", found) + (f" ({ends})" if ends else "")
    return f"{count(found['before'])} → {count(found['after'])}: {moved_by}"
