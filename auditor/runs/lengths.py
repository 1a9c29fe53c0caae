"""Length planning: a corpus, or the audit of one, in; a written plan out."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import Any

from auditor.corpus import find_sources, resolve_fields
from auditor.encoding.truncation import Candidate
from auditor.errors import SettingsError
from auditor.figures.lengths import describe
from auditor.planning.advice import advise
from auditor.planning.candidates import Candidates, given
from auditor.planning.histogram import LengthHistogram
from auditor.planning.plan import Known, Wishes, buckets_of, candidates_of, cost_model, weigh
from auditor.report import contract, plan_answers, plan_contract, plan_page, plan_tables, tables
from auditor.runs.assembling import facts_as_json, flaws_as_json
from auditor.runs.audits import Audit
from auditor.runs.cutting import LengthMeasurer, LengthTallies
from auditor.runs.output import PLAN_FILES, OutputFolder
from auditor.runs.plan import Plan
from auditor.runs.processes import Processes, choose_workers
from auditor.runs.reading import (
    Progress,
    Reading,
    batches,
    default_name,
    refuse_empty,
    with_conversations,
)
from auditor.tallies.groups import ALL
from auditor.vocabulary import VocabularyFacts

Json = dict[str, Any]
_VOCABULARY = ("name", "source", "digest", "family", "entries", "overhead", "limit")
OVER_ORIGINS = (
    "the audit's intervals are over origins; a plan knows lengths only, so that these are over"
    " documents and may be too narrow"
)


@dataclass(frozen=True)
class WrittenPlan:
    """A finished plan: the document of `plan.json` and the files that were written."""

    plan: Json
    folder: Path
    files: list[Path]


def plan_from_audit(
    audit: Audit,
    wishes: Wishes,
    *,
    vocabulary: str | None = None,
    limit: int | None = None,
    out: Path | None = None,
    overwrite: bool = False,
) -> WrittenPlan:
    """Plan from the lengths that ``audit`` holds, and write the plan to ``out``.

    ``vocabulary`` names one of the audit's, and may be left out when there is one. Raises
    AuditError for whatever the user can mend; then nothing is written.
    """
    held = audit.vocabulary(vocabulary)
    slices = held["slices"].items()
    known = Known(
        {key: LengthHistogram.of(own["lengths"]["histogram"]) for key, own in slices},
        held["overhead"]["single"],
        held["limit"]["value"] if limit is None else limit,
    )
    settings = audit.document["settings"]
    about: Json = {
        "measured": "audit",
        "settings": {**settings, "limit": limit or settings.get("limit"), "pair": None},
        "corpus": audit.document["corpus"],
        "vocabulary": {name: held[name] for name in _VOCABULARY},
        "lengths": held["slices"][ALL]["lengths"],
        "notes": [OVER_ORIGINS] if settings.get("origin") else [],
    }
    folder = out or Path("reports") / f"{audit.name}--length-plan"
    with OutputFolder(folder, overwrite=overwrite, files=PLAN_FILES) as output:
        return _write(output, known, wishes, candidates_of(known, wishes), about)


def plan_from_corpus(
    plan: Plan,
    wishes: Wishes,
    *,
    out: Path | None = None,
    overwrite: bool = False,
    progress: Callable[[Progress], None] | None = None,
) -> WrittenPlan:
    """Plan the corpus of ``plan`` under its vocabulary, and write the plan to ``out``.

    Reads the corpus once for the lengths, and, unless lengths were asked for, once more for what
    each candidate cuts. Raises AuditError for whatever the user can mend; then nothing is written.
    """
    if "-" in plan.corpus and not wishes.lengths:
        raise SettingsError(
            "standard input can be read only once, and a plan reads twice to find its candidates.",
            hint="Name them with --candidates, or write the corpus to a file.",
        )
    sources = find_sources(plan.corpus)
    fields = resolve_fields(sources, plan.read)
    plan, how = with_conversations(plan, fields)
    reading = Reading(sources, fields, how, progress)
    workers = choose_workers(plan.workers, reading.total)
    with Processes(partial(LengthMeasurer, plan), workers) as processes:
        facts = processes.facts[0]
        named = default_name(plan, [facts.name])
        folder = out or Path("reports") / f"{named}--length-plan"
        with OutputFolder(folder, overwrite=overwrite, files=PLAN_FILES) as output:
            tallies, candidates = _measured(plan, wishes, reading, processes)
            known = _known(plan, facts, tallies, cuts=True)
            about = _about(plan, reading, facts, tallies)
            return _write(output, known, wishes, candidates, about)


_Lengths = Processes[LengthTallies, None]


def _measured(
    plan: Plan, wishes: Wishes, reading: Reading, processes: _Lengths
) -> tuple[LengthTallies, Candidates]:
    """Return the tallies of all candidates, and these."""
    facts = processes.facts[0]
    if wishes.lengths:
        candidates = given(wishes.lengths, _overhead(plan, facts))
    else:
        lengths = _tallied(plan, reading, processes, ())
        candidates = candidates_of(_known(plan, facts, lengths), wishes)
    rooms = tuple(Candidate(n, n - _overhead(plan, facts)) for n in candidates)
    return _tallied(plan, reading, processes, rooms), candidates


def _tallied(
    plan: Plan, reading: Reading, processes: _Lengths, candidates: tuple[Candidate, ...]
) -> LengthTallies:
    tallies = LengthTallies.empty(plan, processes.facts[0], candidates)
    tasks = ((batch, source, candidates) for batch, source in batches(plan, reading))
    for own in processes.measured(tasks):
        tallies.merge(own)
    refuse_empty(tallies.documents, tallies.corpus.set_aside, reading.names)
    return tallies


def _overhead(plan: Plan, facts: VocabularyFacts) -> int:
    return facts.overhead[0 if plan.read.pair is None else 1]


def _known(
    plan: Plan, facts: VocabularyFacts, tallies: LengthTallies, *, cuts: bool = False
) -> Known:
    histograms = {key: LengthHistogram.of(tallies.lengths.histogram(key)) for key in tallies.slices}
    return Known(
        histograms,
        _overhead(plan, facts),
        facts.limit.value,
        tallies.cuts if cuts else None,
        paired=plan.read.pair is not None,
    )


def _about(plan: Plan, reading: Reading, facts: VocabularyFacts, tallies: LengthTallies) -> Json:
    """Return what stands in a plan beside its candidates."""
    return {
        "measured": "corpus",
        "settings": {
            **plan.numeric_settings(),
            "pair": plan.read.pair,
            "fields": reading.fields.as_json(),
            "conversations": reading.conversations,
        },
        "corpus": {
            "sources": reading.names,
            "digest": tallies.corpus.digest.digest,
            "documents": tallies.documents,
            "set_aside": flaws_as_json(tallies.corpus.set_aside, reading.names),
            "mended": flaws_as_json(tallies.corpus.mended, reading.names),
        },
        "vocabulary": {name: facts_as_json(facts)[name] for name in _VOCABULARY},
        "lengths": describe(tallies.lengths.histogram(ALL)),
        "notes": [],
    }


def _write(
    output: OutputFolder, known: Known, wishes: Wishes, candidates: Candidates, about: Json
) -> WrittenPlan:
    weighed = weigh(known, wishes, candidates)
    recommended = advise(known, wishes, weighed)
    settings = {**about["settings"], **wishes.as_json()}
    parts = {
        **about,
        "settings": settings,
        "vocabulary": {
            **about["vocabulary"],
            "limit": {**about["vocabulary"]["limit"], "value": known.limit},
        },
        "overhead": known.overhead,
        "cost_model": cost_model(wishes.model),
        "candidates": weighed,
        "buckets": buckets_of(known, recommended["length"]),
        "recommended": recommended,
    }
    plan = plan_contract.document(parts)
    plan["recommended"]["because"] = plan_answers.because(plan)
    output.write("plan.json", contract.dump(plan))
    output.write("plan.csv", tables.as_csv(plan_tables.candidates(plan)))
    output.write("report.html", plan_page.render(plan))
    return WrittenPlan(plan, output.path, output.finish())
