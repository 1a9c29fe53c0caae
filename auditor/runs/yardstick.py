"""The general text that a domain is compared with: measured now, or read from an earlier audit."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from typing import Any

from auditor.corpus import Fields, Named, Source, find_sources, resolve_fields
from auditor.errors import CorpusError, SettingsError
from auditor.figures import independent
from auditor.figures.values import undefined
from auditor.runs.assembling import assemble
from auditor.runs.audits import Audit
from auditor.runs.measuring import Measurer, empty_tallies
from auditor.runs.plan import Plan
from auditor.runs.processes import Processes, choose_workers
from auditor.runs.reading import Progress, Reading, batches, refuse_empty, with_conversations
from auditor.vocabulary import VocabularyFacts

Json = dict[str, Any]

# Settings that must be the same on both sides for figures to be compared.
_MUST_AGREE = ("words", "control_strings", "pattern")
# Figures that depend on the limit, which may differ between the sides.
_BY_LIMIT = ("truncated_tokens", "truncated_documents")
# Figures of one run alone.
_LEFT_OUT = ("relative_tokens", "repeated_documents")


@dataclass(frozen=True)
class Yardstick:
    """What is known of the general text; ``slices`` has one item a vocabulary of the domain."""

    about: Json
    limits: list[int | None]
    slices: list[Json]


def measured(plan: Plan, progress: Callable[[Progress], None] | None) -> Yardstick:
    """Measure the general text that ``plan`` names."""
    sources = find_sources(plan.corpus)
    plan, fields = _with_fields(plan, sources)
    plan, how = with_conversations(plan, fields)
    reading = Reading(sources, fields, how, progress)
    workers = choose_workers(plan.workers, reading.total)
    with Processes(partial(Measurer, plan), workers) as processes:
        facts = processes.facts
        tallies = empty_tallies(plan, facts)
        for outcome in processes.measured(batches(plan, reading)):
            tallies.merge_documents(outcome.corpus, outcome.documents)
        refuse_empty(tallies.measured, tallies.corpus.set_aside, reading.names)
        for finished in processes.finished():
            tallies.merge_contents(finished.contents)
        settings: Json = {"fields": fields.as_json(), "conversations": how}
        audit = assemble(plan, facts, tallies, reading.names, settings)
    return _of(audit, audit["vocabularies"], "corpus")


def _with_fields(plan: Plan, sources: list[Source]) -> tuple[Plan, Fields]:
    """Return the plan by slices where the general text has these fields, else without slices."""
    try:
        return plan, resolve_fields(sources, plan.read)
    except CorpusError:
        whole = replace(plan, read=replace(plan.read, by=()))
        return whole, resolve_fields(sources, whole.read)


def from_audit(audit: Audit, plan: Plan, facts: list[VocabularyFacts]) -> Yardstick:
    """Return what ``audit`` says of the same vocabularies, told by their digests.

    SettingsError when it lacks one, or was made with settings that change figures.
    """
    where, settings = str(audit.path), plan.numeric_settings()
    held = audit.document["settings"]
    differing = [name for name in _MUST_AGREE if held.get(name) != settings[name]]
    if differing:
        raise SettingsError(
            f"the audit was made with another setting of {', '.join(differing)}.",
            hint="Name the general corpus itself with --general, or audit it again.",
            where=where,
        )
    by_digest = {own["digest"]: own for own in audit.document["vocabularies"]}
    lacking = next((own for own in facts if own.digest not in by_digest), None)
    if lacking is not None:
        there = ", ".join(own["name"] for own in audit.document["vocabularies"])
        raise SettingsError(
            f"the audit does not hold {lacking.name} (it holds {there}; files are compared by"
            " their digest).",
            hint="Name the general corpus itself with --general, or audit it with this vocabulary.",
            where=where,
        )
    return _of(audit.document, [by_digest[own.digest] for own in facts], "audit")


def _of(document: Json, vocabularies: list[Json], measured_from: str) -> Yardstick:
    corpus = document["corpus"]
    names = (
        "sources",
        "digest",
        "documents",
        "bytes",
        "characters",
        "words",
        "set_aside",
        "mended",
    )
    return Yardstick(
        {"measured": measured_from, **{name: corpus[name] for name in names}},
        [own["limit"]["value"] for own in vocabularies],
        [own["slices"] for own in vocabularies],
    )


def general_plan(plan: Plan, corpus: tuple[str | Named, ...], text: tuple[str, ...] | None) -> Plan:
    """Return the plan that measures ``corpus`` as the domain is measured.

    ``text`` names its own text fields; ``None``: those of the domain.
    """
    read = replace(plan.read, text=plan.read.text if text is None else text)
    return replace(plan, corpus=corpus, read=read, repeats=False)


def penalty(vocabulary: Json, slices: Json, limit: int | None) -> list[Json]:
    """Return every figure of the domain beside the general text's, and their ratio.

    One row a slice that both hold and a figure. ``limit`` is the general side's.
    """
    return [
        {
            "vocabulary": vocabulary["name"],
            "slice": key,
            "figure": name,
            "domain": own,
            "general": slices[key]["figures"][name],
            "ratio": _ratio(name, own, slices[key]["figures"][name], vocabulary, limit),
        }
        for key, held in vocabulary["slices"].items()
        if key in slices
        for name, own in held["figures"].items()
        if name in slices[key]["figures"] and name not in _LEFT_OUT
    ]


def _ratio(name: str, ours: Json, theirs: Json, vocabulary: Json, limit: int | None) -> Json:
    if name in _BY_LIMIT and limit != vocabulary["limit"]["value"]:
        return undefined("the two sides were measured at different limits").as_json()
    return independent.ratio(ours, theirs).as_json()
