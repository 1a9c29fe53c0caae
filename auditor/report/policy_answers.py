"""The plain sentences that say whether the bounds of a policy hold."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from auditor.figures.lengths import QUANTILES
from auditor.report.answers import Excerpt, Sentence
from auditor.report.formatting import (
    SHARES,
    clean,
    count,
    plain_name,
    plural,
    quantile,
    ranged_or_why,
)

Json = Mapping[str, Any]

VERDICTS = {"pass": "holds", "fail": "FAILS", "undecided": "undecided"}
_OUTCOME = {
    "pass": "every bound holds",
    "fail": "not met",
    "undecided": "no bound fails, but not all are decided",
}


def headline(policy: Json) -> Sentence:
    """Return the outcome in one sentence."""
    counts = policy["counts"]
    told = ", ".join(
        f"{count(counts[name])} {word}"
        for name, word in (
            ("fail", "failed"), ("undecided", "undecided"), ("pass", "held"),
        )
    )  # fmt: skip
    bounds = plural(sum(counts.values()), "bound")
    return (
        "Policy ", Excerpt(clean(policy["policy"], 60)),
        f": {_OUTCOME[policy['outcome']]} ({bounds}: {told}).",
    )  # fmt: skip


def ordered(policy: Json) -> list[Json]:
    """Return the verdicts, failed ones first, then undecided ones."""
    rank = {"fail": 0, "undecided": 1, "pass": 2}
    return sorted(policy["verdicts"], key=lambda own: rank[own["verdict"]])


def told(verdict: Json, *, several: bool) -> Sentence:
    """Return one verdict as a sentence; ``several`` says that the vocabulary must be named."""
    place: list[str] = [Excerpt(clean(verdict["slice"], 60))]
    if several:
        place += [" under ", Excerpt(clean(verdict["vocabulary"], 60))]
    on = " for further documents" if verdict["on"] == "interval" else ""
    return (
        f"{VERDICTS[verdict['verdict']]}: {plain_name(verdict['figure'])} in ", *place,
        f": {measured(verdict)}, {bound(verdict)}{on}{_further(verdict)}.",
    )  # fmt: skip


def several_vocabularies(policy: Json) -> bool:
    """Whether verdicts speak of more than one vocabulary."""
    return len({own["vocabulary"] for own in policy["verdicts"]}) > 1


def meaning(verdict: Json) -> str:
    """Return the name that the figure's definition stands under on the page."""
    return "quantiles" if verdict["figure"] in QUANTILES else str(verdict["figure"])


def measured(verdict: Json) -> str:
    """Return the value with its interval, or why there is none."""
    if verdict["figure"] in QUANTILES:
        return quantile(verdict)
    return ranged_or_why(verdict["figure"], verdict)


def bound(verdict: Json) -> str:
    """Return what the bound says, in words."""
    name = verdict["figure"]
    ends = (("at least {} required", verdict["min"]), ("at most {} allowed", verdict["max"]))
    return ", ".join(how.format(_plainly(name, end)) for how, end in ends if end is not None)


def _plainly(name: str, number: float) -> str:
    """Return a bound as it was written, shares as percentages."""
    return f"{100 * number:.10g}%" if name in SHARES else f"{number:.10g}"


def reason(verdict: Json) -> str:
    """Return why a verdict is undecided and what would settle it; empty for the others."""
    if verdict["verdict"] != "undecided":
        return ""
    if verdict["more_documents"] is not None:
        return f"about {plural(verdict['more_documents'], 'more document')} would settle it"
    return str(verdict["note"] or "")


def _further(verdict: Json) -> str:
    said = reason(verdict)
    return f"; {said}" if said and verdict["value"] is not None else ""


def assumption(policy: Json) -> Iterable[str]:
    """Return the assumption behind numbers of documents, where there are any."""
    if any(own["more_documents"] is not None for own in policy["verdicts"]):
        yield f"Numbers of documents assume that {policy['assumption']}."
