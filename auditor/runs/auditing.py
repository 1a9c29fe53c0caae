"""The main job: a corpus and vocabularies in, a written audit out."""

from __future__ import annotations

import resource
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import Any

from auditor.corpus import find_sources, resolve_fields
from auditor.encoding.documents import SeparationError, Tale
from auditor.errors import SettingsError
from auditor.policy import Policy, judge, refuse_unknown_fields, refuse_unknown_vocabularies
from auditor.report import contract, page, tables
from auditor.report.details import Details, details_of
from auditor.runs.assembling import assemble
from auditor.runs.measuring import Measurer, empty_tallies
from auditor.runs.output import DocumentRows, OutputFolder
from auditor.runs.plan import Plan
from auditor.runs.processes import Processes, choose_workers
from auditor.runs.reading import (
    Progress,
    Reading,
    batches,
    default_name,
    named_apart,
    refuse_empty,
    with_conversations,
)
from auditor.runs.tallied import AuditTallies
from auditor.tallies.words import BrokenWord
from auditor.vocabulary import VocabularyFacts

Json = dict[str, Any]
WorstWords = list[tuple[str, list[tuple[BrokenWord, int]]]]


@dataclass(frozen=True)
class Written:
    """A finished audit: the document of `audit.json` and the files that were written.

    ``verdicts`` is the document of `policy.json`, ``None`` without a policy.
    """

    audit: Json
    worst_words: WorstWords
    details: list[Details]
    folder: Path
    files: list[Path]
    verdicts: Json | None = None


def assess(
    plan: Plan,
    out: Path | None = None,
    *,
    overwrite: bool = False,
    progress: Callable[[Progress], None] | None = None,
    policy: Policy | None = None,
) -> Written:
    """Audit the corpus of ``plan`` against its vocabularies and write the audit to ``out``.

    With ``policy``, whether its bounds hold is written too. Raises AuditError for whatever the
    user can mend; then nothing is written, but for the audit itself when all that is wrong is a
    slice or vocabulary that the policy names and the corpus turns out not to hold.
    """
    began = time.monotonic()
    if policy is not None:
        refuse_unknown_fields(policy, plan.read.by)
    sources = find_sources(plan.corpus)
    fields = resolve_fields(sources, plan.read)
    plan, how = with_conversations(plan, fields)
    reading = Reading(sources, fields, how, progress)
    try:
        return _audited(plan, reading, out, policy, overwrite=overwrite, began=began)
    except SeparationError as fault:
        if "-" in plan.corpus:  # it cannot be read again
            raise
        again = replace(plan, whole=True)
        told = str(fault)
        return _audited(again, reading, out, policy, overwrite=overwrite, began=began, fault=told)


def _audited(
    plan: Plan,
    reading: Reading,
    out: Path | None,
    policy: Policy | None,
    *,
    overwrite: bool,
    began: float,
    fault: str | None = None,
) -> Written:
    workers = choose_workers(plan.workers, reading.total)
    with Processes(partial(Measurer, plan), workers) as processes:
        facts = named_apart(processes.facts)
        if policy is not None:
            refuse_unknown_vocabularies(policy, ((own.name, own.source) for own in facts))
        folder = out or Path("reports") / default_name(plan, [own.name for own in facts])
        with OutputFolder(folder, overwrite=overwrite) as output:
            rows = DocumentRows(output.begun, [own.name for own in facts], plan.read.by)
            tallies, tale = empty_tallies(plan, facts), Tale()
            try:
                for outcome in processes.measured(batches(plan, reading)):
                    tallies.merge_documents(outcome.corpus, outcome.documents)
                    rows.add(outcome)
            finally:
                rows.close()
            refuse_empty(tallies.measured, tallies.corpus.set_aside, reading.names)
            for finished in processes.finished():
                tallies.merge_contents(finished.contents)
                tale.merge(finished.tale)
            settings: Json = {
                "fields": reading.fields.as_json(),
                "conversations": reading.conversations,
            }
            audit = assemble(plan, facts, tallies, reading.names, settings)
            worst = worst_words(plan, facts, tallies)
            details = [
                details_of(own.name, held.characters, held.usage.occurrences, reading.names)
                for own, held in zip(facts, tallies.contents, strict=True)
            ]
            verdicts, misnamed = _judged(policy, audit)
            _write(output, audit, worst, details, facts, tallies, reading.names, verdicts)
            run = _run(plan, tale, fault, workers, reading.total, began)
            output.write("run.json", contract.dump(run))
            files = output.finish()
    if misnamed is not None:
        raise SettingsError(
            misnamed.message,
            hint=f"{misnamed.hint} The audit itself is written to {folder}: mend the policy, and"
            " use it with `auditor check`.",
            where=misnamed.where,
        )
    return Written(audit, worst, details, folder, files, verdicts)


def _judged(policy: Policy | None, audit: Json) -> tuple[Json | None, SettingsError | None]:
    """Return the verdicts, or what the policy names and the audit does not hold.

    What took hours to measure is not thrown away for it.
    """
    if policy is None:
        return None, None
    try:
        return judge(policy, audit), None
    except SettingsError as fault:
        return None, fault


def worst_words(plan: Plan, facts: list[VocabularyFacts], tallies: AuditTallies) -> WorstWords:
    """Return the costliest words of each vocabulary; none where excerpts are not wanted."""
    if not plan.excerpts:
        return []
    pairs = zip(facts, tallies.contents, strict=True)
    return [(own.name, tables.worst_words(contents.words)) for own, contents in pairs]


def _write(
    output: OutputFolder,
    audit: Json,
    worst: WorstWords,
    details: list[Details],
    facts: list[VocabularyFacts],
    tallies: AuditTallies,
    names: list[str],
    verdicts: Json | None,
) -> None:
    pairs = zip(facts, tallies.contents, strict=True)
    characters = [(own.name, contents.characters) for own, contents in pairs]
    output.write("audit.json", contract.dump(audit))
    output.write("figures.csv", tables.as_csv(tables.figures(audit)))
    output.write("lengths.csv", tables.as_csv(tables.lengths(audit)))
    output.write("words.csv", tables.as_csv(tables.words(worst)))
    output.write("characters.csv", tables.as_csv(tables.characters(characters, names)))
    output.write("report.html", page.render(audit, worst, details, verdicts))
    if verdicts is not None:
        output.write("policy.json", contract.dump(verdicts))


def _run(
    plan: Plan, tale: Tale, fault: str | None, workers: int, total: int | None, began: float
) -> Json:
    """Return `run.json`: how it was measured, everything that may differ between runs."""
    unit = 1 if sys.platform == "darwin" else 1024
    return {
        "format": "auditor/run",
        "version": 1,
        "documents": {"whole": tale.whole, "by_pieces": tale.by_pieces},
        "pieces": {"occurrences": tale.pieces, "measured": tale.distinct_pieces},
        "encoded_whole_because": dict(sorted(tale.reasons.items())),
        "check": {"documents_encoded_both_ways": tale.checked, "fault": fault},
        "workers": workers,
        "batch_bytes": plan.read.batch_bytes,
        "seconds": round(time.monotonic() - began, 3),
        "source_bytes": total,
        "peak_memory_bytes": {
            "this_process": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * unit,
            "largest_worker": resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss * unit,
        },
    }
