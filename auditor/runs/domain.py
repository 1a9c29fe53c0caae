"""Vetting vocabularies for a domain: a corpus and candidates in, a written comparison out."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import Any

from auditor.corpus import Glossary, Named, find_sources, read_glossary, resolve_fields
from auditor.encoding.constructed import Constructed
from auditor.encoding.documents import SeparationError
from auditor.errors import SettingsError
from auditor.figures.terms import terms_as_json
from auditor.report import contract, domain_page, domain_tables, tables
from auditor.runs import yardstick
from auditor.runs.auditing import WorstWords, worst_words
from auditor.runs.audits import Audit, audit_at
from auditor.runs.measuring import empty_tallies
from auditor.runs.output import DOMAIN_FILES, OutputFolder
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
from auditor.runs.vetted import DomainWishes, Vetting, try_out
from auditor.runs.vetting import DomainFinished, DomainMeasurer, DomainOutcome, DomainTallies
from auditor.tallies.terms import TermsTally
from auditor.tallies.wordcounts import WordCountsTally
from auditor.vocabulary import VocabularyFacts

Json = dict[str, Any]
Tell = Callable[[Progress], None] | None


@dataclass(frozen=True)
class WrittenDomain:
    """A finished vetting: the document of `domain.json` and the files that were written."""

    document: Json
    worst_words: WorstWords
    folder: Path
    files: list[Path]


def vet_domain(
    plan: Plan,
    wishes: DomainWishes,
    out: Path | None = None,
    *,
    overwrite: bool = False,
    progress: Tell = None,
) -> WrittenDomain:
    """Vet the vocabularies of ``plan`` for its corpus and write what was found to ``out``.

    Raises AuditError for whatever the user can mend; then nothing is written.
    """
    if "-" in plan.corpus and "-" in wishes.general:
        raise SettingsError(
            "standard input cannot be both the domain and the general text.",
            hint="Write one of them to a file.",
        )
    try:
        return _vetted(plan, wishes, out, overwrite=overwrite, progress=progress)
    except SeparationError:
        if "-" in (*plan.corpus, *wishes.general):  # it cannot be read again
            raise
        again = replace(plan, whole=True)
        return _vetted(again, wishes, out, overwrite=overwrite, progress=progress)


def _vetted(
    plan: Plan, wishes: DomainWishes, out: Path | None, *, overwrite: bool, progress: Tell
) -> WrittenDomain:
    sources = find_sources(plan.corpus)
    fields = resolve_fields(sources, plan.read)
    plan, how = with_conversations(plan, fields)
    reading = Reading(sources, fields, how, progress)
    workers = choose_workers(plan.workers, reading.total)
    audit, texts = _split(wishes.general)
    glossary = None if wishes.terms is None else read_glossary(wishes.terms)
    with Processes(partial(DomainMeasurer, plan, glossary), workers) as processes:
        facts = named_apart(processes.facts)
        general = None if audit is None else yardstick.from_audit(audit, plan, facts)
        named = default_name(plan, [own.name for own in facts])
        folder = out or Path("reports") / f"{named}--domain"
        with OutputFolder(folder, overwrite=overwrite, files=DOMAIN_FILES) as output:
            tallies, own, terms, words = _measured(plan, facts, glossary, processes, reading)
            tried = try_out(plan, facts, words, wishes.seed)
            if texts:
                other = yardstick.general_plan(plan, texts, wishes.general_text)
                general = yardstick.measured(other, progress)
            worst = worst_words(plan, facts, tallies)
            vetting = Vetting(
                plan, wishes, reading, facts, tallies, own, general, terms, words, tried
            )
            document = vetting.document()
            _write(output, document, worst)
            return WrittenDomain(document, worst, folder, output.finish())


def _split(
    general: tuple[str | Named | Audit, ...],
) -> tuple[Audit | None, tuple[str | Named, ...]]:
    """Return the one audit that is named, or the texts to measure."""
    texts = tuple(own for own in general if not isinstance(own, Audit))
    audits: list[Audit] = [own for own in general if isinstance(own, Audit)]
    if not audits and len(texts) == 1 and isinstance(texts[0], str):
        found = audit_at(texts[0])
        return (None, texts) if found is None else (found, ())
    if audits and len(general) > 1:
        raise SettingsError(
            "the general text is either one audit or texts to measure.", where="--general"
        )
    return (audits[0] if audits else None), texts


def _measured(
    plan: Plan,
    facts: list[VocabularyFacts],
    glossary: Glossary | None,
    processes: Processes[DomainOutcome, DomainFinished],
    reading: Reading,
) -> tuple[AuditTallies, DomainTallies, list[Json], WordCountsTally]:
    """Return the tallies of the whole corpus, what each vocabulary makes of terms, and words."""
    tallies, own = empty_tallies(plan, facts), DomainTallies.empty(len(facts))
    for found in processes.measured(batches(plan, reading)):
        tallies.merge_documents(found.corpus, found.audit)
        own.merge(found.own)
    refuse_empty(tallies.measured, tallies.corpus.set_aside, reading.names)
    terms: list[TermsTally] = []
    constructed: list[list[Constructed]] = []
    words = WordCountsTally()
    for finished in processes.finished():
        tallies.merge_contents(finished.audit.contents)
        constructed = finished.constructed
        words.merge(finished.words)
        for ours, theirs in zip(terms, finished.terms, strict=bool(terms)):
            ours.merge(theirs)
        terms = terms or finished.terms
    if glossary is None:
        return tallies, own, [], words
    pairs = zip(constructed, terms, strict=True)
    return tallies, own, [terms_as_json(glossary, *pair) for pair in pairs], words


def _write(output: OutputFolder, document: Json, worst: WorstWords) -> None:
    output.write("domain.json", contract.dump(document))
    output.write("candidates.csv", tables.as_csv(domain_tables.candidates(document)))
    output.write("penalty.csv", tables.as_csv(domain_tables.penalty(document)))
    output.write("kinds.csv", tables.as_csv(domain_tables.kinds(document)))
    output.write("terms.csv", tables.as_csv(domain_tables.terms(document)))
    output.write("words.csv", tables.as_csv(tables.words(worst)))
    output.write("report.html", domain_page.render(document, worst))
