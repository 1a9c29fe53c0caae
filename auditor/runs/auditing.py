"""The main job: a corpus and vocabularies in, a written audit out."""

from __future__ import annotations

import resource
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from auditor.corpus import Batch, Fields, Source, find_sources, read, resolve_fields
from auditor.encoding.documents import SeparationError, Tale
from auditor.errors import CorpusError, SettingsError
from auditor.report import contract, page, tables
from auditor.runs.assembling import assemble
from auditor.runs.measuring import empty_tallies
from auditor.runs.output import DocumentRows, OutputFolder
from auditor.runs.plan import Plan
from auditor.runs.processes import Processes, choose_workers
from auditor.runs.tallied import AuditTallies
from auditor.tallies.words import BrokenWord
from auditor.vocabulary import VocabularyFacts
from auditor.vocabulary.conversation import Renderer, chat_template
from auditor.vocabulary.locate import locate

Json = dict[str, Any]
WorstWords = list[tuple[str, list[tuple[BrokenWord, int]]]]


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a run is: bytes read of the files, of how many (``None``: unknown), documents."""

    read_bytes: int
    total_bytes: int | None
    documents: int


@dataclass(frozen=True)
class Written:
    """A finished audit: the document of `audit.json` and the files that were written."""

    audit: Json
    worst_words: WorstWords
    folder: Path
    files: list[Path]


def assess(
    plan: Plan,
    out: Path | None = None,
    *,
    overwrite: bool = False,
    progress: Callable[[Progress], None] | None = None,
) -> Written:
    """Audit the corpus of ``plan`` against its vocabularies and write the audit to ``out``.

    Raises AuditError for whatever the user can mend; then nothing is written.
    """
    began = time.monotonic()
    sources = find_sources(plan.corpus)
    fields = resolve_fields(sources, plan.read)
    plan, how = _with_conversations(plan, fields)
    reading = _Reading(sources, fields, how, progress)
    try:
        return _audited(plan, reading, out, overwrite=overwrite, began=began)
    except SeparationError as fault:
        if "-" in plan.corpus:  # it cannot be read again
            raise
        again = replace(plan, whole=True)
        return _audited(again, reading, out, overwrite=overwrite, began=began, fault=str(fault))


@dataclass(frozen=True)
class _Reading:
    sources: list[Source]
    fields: Fields
    conversations: str | None
    progress: Callable[[Progress], None] | None

    @property
    def names(self) -> list[str]:
        return [source.name for source in self.sources]

    @property
    def total(self) -> int | None:
        sizes = [source.size for source in self.sources]
        return None if any(size is None for size in sizes) else sum(size or 0 for size in sizes)


def _audited(
    plan: Plan,
    reading: _Reading,
    out: Path | None,
    *,
    overwrite: bool,
    began: float,
    fault: str | None = None,
) -> Written:
    workers = choose_workers(plan.workers, reading.total)
    with Processes(plan, workers) as processes:
        facts = _named_apart(processes.facts)
        folder = out or Path("reports") / default_name(plan, facts)
        with OutputFolder(folder, overwrite=overwrite) as output:
            rows = DocumentRows(output.begun, [own.name for own in facts], plan.read.by)
            tallies, tale = empty_tallies(plan, facts), Tale()
            try:
                for outcome in processes.measured(_batches(plan, reading)):
                    tallies.merge_documents(outcome.corpus, outcome.documents)
                    rows.add(outcome)
            finally:
                rows.close()
            _refuse_empty(tallies, reading.names)
            for finished in processes.finished():
                tallies.merge_contents(finished.contents)
                tale.merge(finished.tale)
            settings: Json = {
                "fields": reading.fields.as_json(),
                "conversations": reading.conversations,
            }
            audit = assemble(plan, facts, tallies, reading.names, settings)
            worst = _worst_words(plan, facts, tallies)
            _write(output, audit, worst, facts, tallies, reading.names)
            run = _run(plan, tale, fault, workers, reading.total, began)
            output.write("run.json", contract.dump(run))
            return Written(audit, worst, folder, output.finish())


def default_name(plan: Plan, facts: list[VocabularyFacts]) -> str:
    """Return the name of the folder for ``plan``: <corpus>--<vocabulary>."""
    first = plan.corpus[0]
    corpus = "stdin" if first == "-" else Path(first.rstrip("/*?")).name.split(".")[0] or "corpus"
    more = f"-and-{len(plan.corpus) - 1}-more" if len(plan.corpus) > 1 else ""
    vocabulary = facts[0].name if len(facts) == 1 else f"{facts[0].name}-and-{len(facts) - 1}-more"
    return _cleaned(f"{corpus}{more}--{vocabulary}")


def _cleaned(name: str) -> str:
    return "".join(c if c.isalnum() or c in "-_." else "-" for c in name).strip(".") or "audit"


def _named_apart(facts: list[VocabularyFacts]) -> list[VocabularyFacts]:
    """Return the facts, those that share a name renamed to what the user wrote."""
    names = [own.name for own in facts]
    apart = [own if names.count(own.name) == 1 else replace(own, name=own.source) for own in facts]
    repeated = next(
        (own.name for own in apart if [o.name for o in apart].count(own.name) > 1), None
    )
    if repeated is not None:
        raise SettingsError("one vocabulary is named twice.", hint="Name it once.", where=repeated)
    return apart


def _with_conversations(plan: Plan, fields: Fields) -> tuple[Plan, str | None]:
    """Return the plan with the way to render conversations, and how it is called in the settings.

    All vocabularies must see one text: with several, a template is used only if they share it.
    """
    if not fields.conversation:
        return plan, None
    folders = [locate(spec.argument)[0] for spec in plan.vocabularies]
    roots = [folder if folder.is_dir() else folder.parent for folder in folders]
    templates = {chat_template(root) for root in roots}
    if len(templates) == 1 and None not in templates:
        renderer = Renderer.from_folder(roots[0])
        return replace(plan, read=replace(plan.read, render=renderer.render)), "chat template"
    reason = "the vocabularies' templates differ" if len(templates) > 1 else "no chat template"
    return plan, f"contents joined by line feeds ({reason})"


def _batches(plan: Plan, reading: _Reading) -> Iterator[tuple[Batch, int]]:
    numbers = {name: number for number, name in enumerate(reading.names)}
    reached = documents = 0

    def note(read_bytes: int) -> None:
        nonlocal reached
        reached = read_bytes

    for batch in read(reading.sources, plan.read, reading.fields, progress=note):
        documents += len(batch)
        yield batch, numbers[batch.source]
        if reading.progress is not None:
            reading.progress(Progress(reached, reading.total, documents))


def _refuse_empty(tallies: AuditTallies, names: list[str]) -> None:
    if tallies.measured:
        return
    aside = tallies.corpus.set_aside.reasons.total()
    raise CorpusError(
        f"no document to measure; {aside} records were set aside."
        if aside
        else "no document to measure: the corpus is empty.",
        hint=f"Most frequent reason: {tallies.corpus.set_aside.reasons.most_common(1)[0][0]}."
        if aside
        else None,
        where=", ".join(names[:3]),
    )


def _worst_words(plan: Plan, facts: list[VocabularyFacts], tallies: AuditTallies) -> WorstWords:
    if not plan.excerpts:
        return []
    pairs = zip(facts, tallies.contents, strict=True)
    return [(own.name, tables.worst_words(contents.words)) for own, contents in pairs]


def _write(
    output: OutputFolder,
    audit: Json,
    worst: WorstWords,
    facts: list[VocabularyFacts],
    tallies: AuditTallies,
    names: list[str],
) -> None:
    pairs = zip(facts, tallies.contents, strict=True)
    characters = [(own.name, contents.characters) for own, contents in pairs]
    output.write("audit.json", contract.dump(audit))
    output.write("figures.csv", tables.as_csv(tables.figures(audit)))
    output.write("lengths.csv", tables.as_csv(tables.lengths(audit)))
    output.write("words.csv", tables.as_csv(tables.words(worst)))
    output.write("characters.csv", tables.as_csv(tables.characters(characters, names)))
    output.write("report.html", page.render(audit, worst))


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
