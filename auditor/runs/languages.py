"""Audits by language: a labelled corpus and vocabularies in, a written comparison out."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import asdict, dataclass
from functools import partial
from pathlib import Path
from typing import Any

import orjson

from auditor.corpus import find_sources, resolve_fields
from auditor.errors import SettingsError
from auditor.report import contract, language_answers, language_page, language_tables, tables
from auditor.runs.assembling import assemble
from auditor.runs.compared import VocabularyLanguages, labels_as_json
from auditor.runs.measuring import empty_tallies
from auditor.runs.output import LANGUAGE_FILES, OutputFolder
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
from auditor.runs.tongues import (
    LanguageMeasurer,
    LanguageOutcome,
    LanguageTallies,
    Mismatch,
)
from auditor.tallies.groups import ALL
from auditor.vocabulary import VocabularyFacts
from auditor.vocabulary.forms import FormPair

Json = dict[str, Any]

MISMATCHES_SHOWN = 50


@dataclass(frozen=True)
class WrittenLanguages:
    """A finished comparison: the document of `languages.json` and the files that were written."""

    document: Json
    folder: Path
    files: list[Path]


def compare_languages(
    plan: Plan,
    references: tuple[str, ...] = (),
    out: Path | None = None,
    *,
    overwrite: bool = False,
    progress: Callable[[Progress], None] | None = None,
) -> WrittenLanguages:
    """Measure the languages that the one field of ``plan.read.by`` names; write to ``out``.

    ``references`` are labels to compare with; with ``plan.read.parallel`` on the same content.
    Raises AuditError for whatever the user can mend; then nothing is written.
    """
    _refuse_settings(plan, references)
    sources = find_sources(plan.corpus)
    fields = resolve_fields(sources, plan.read)
    plan, how = with_conversations(plan, fields)
    reading = Reading(sources, fields, how, progress)
    workers = choose_workers(plan.workers, reading.total)
    with Processes(partial(LanguageMeasurer, plan), workers) as processes:
        facts = named_apart(processes.facts)
        name = default_name(plan, [own.name for own in facts])
        folder = out or Path("reports") / f"{name}--languages"
        with OutputFolder(folder, overwrite=overwrite, files=LANGUAGE_FILES) as output:
            audit, own = empty_tallies(plan, facts), LanguageTallies.empty(len(facts))
            with (output.begun / "doubtful_labels.jsonl").open("wb") as stream:
                first: list[Mismatch] = []
                for found in processes.measured(batches(plan, reading)):
                    _merge(audit, own, found)
                    first += found.mismatches[: MISMATCHES_SHOWN - len(first)]
                    for mismatch in found.mismatches:
                        stream.write(orjson.dumps(asdict(mismatch)) + b"\n")
            refuse_empty(audit.measured, audit.corpus.set_aside, reading.names)
            asked: list[tuple[dict[str, int], list[FormPair]]] = []
            for finished in processes.finished():
                audit.merge_contents(finished.audit.contents)
                asked = list(zip(finished.entries_by_script, finished.normal_forms, strict=True))
            settings: Json = {
                "fields": fields.as_json(),
                "conversations": how,
                "parallel": plan.read.parallel,
                "references": list(references),
            }
            assembled = assemble(plan, facts, audit, reading.names, settings)
            document = _document(plan, facts, assembled, audit, own, first, references, asked)
            output.write("languages.json", contract.dump(document))
            output.write("languages.csv", tables.as_csv(language_tables.languages(document)))
            output.write("scripts.csv", tables.as_csv(language_tables.scripts(document)))
            output.write("report.html", language_page.render(document))
            return WrittenLanguages(document, folder, output.finish())


def _refuse_settings(plan: Plan, references: tuple[str, ...]) -> None:
    if len(plan.read.by) != 1:
        raise SettingsError(
            "one field must say which language a record is in.", hint="Name it with --by."
        )
    if plan.read.parallel and not references:
        raise SettingsError(
            "translations are compared with a reference.", hint="Name its label with --reference."
        )


def _merge(audit: AuditTallies, own: LanguageTallies, found: LanguageOutcome) -> None:
    audit.merge_documents(found.outcome.corpus, found.outcome.documents)
    own.merge(found.tallies)


def _document(
    plan: Plan,
    facts: list[VocabularyFacts],
    audit: Json,
    tallies: AuditTallies,
    own: LanguageTallies,
    first: list[Mismatch],
    references: tuple[str, ...],
    asked: list[tuple[dict[str, int], list[FormPair]]],
) -> Json:
    field = plan.read.by[0]
    keys = [key for key in audit["vocabularies"][0]["slices"] if key != ALL]
    named = {key: key.removeprefix(f"{field}=") for key in keys}
    known = _references(references, named)
    vocabularies = [
        VocabularyLanguages(
            plan,
            place,
            facts[place],
            audit["vocabularies"][place],
            tallies,
            own,
            named,
            *asked[place],
        )
        for place in range(len(facts))
    ]
    parts = [own_vocabulary.compare(known) for own_vocabulary in vocabularies]
    document = {
        "format": "auditor/languages",
        "version": 1,
        "settings": audit["settings"],
        "made_with": audit["made_with"],
        "corpus": audit["corpus"],
        "labels": labels_as_json(named, own, first),
        "parallel": {
            "contents": own.parallel.contents,
            "records_without_content": own.parallel.without,
        }
        if plan.read.parallel
        else None,
        "vocabularies": parts,
    }
    for part in parts:
        part["answers"] = language_answers.answers(document, part)
    return document


def _references(references: tuple[str, ...], named: Mapping[str, str]) -> list[str]:
    labelled = {label: key for key, label in named.items()}
    missing = next((name for name in references if name not in labelled), None)
    if missing is not None:
        there = ", ".join(sorted(labelled)[:20])
        raise SettingsError(
            f"no record is labelled {missing}.",
            hint=f"Labels there: {there}.",
            where="--reference",
        )
    return [labelled[name] for name in references]
