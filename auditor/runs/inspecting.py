"""Inspecting vocabularies: no corpus, everything by their files and by trial."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

from auditor.inspection.composition import composition
from auditor.inspection.findings import findings
from auditor.inspection.reaching import Unreachable, contexts_of, unreachable
from auditor.inspection.surfaces import TEXTLESS, Surface, surfaces_of
from auditor.planning import cost
from auditor.planning.model import ModelShape
from auditor.report import contract, inspection_answers, inspection_page, inspection_tables, tables
from auditor.runs.assembling import facts_as_json
from auditor.runs.output import INSPECTION_FILES, OutputFolder
from auditor.runs.reading import cleaned, named_apart
from auditor.vocabulary import Vocabulary, VocabularySpec, facts_of, open_vocabulary
from auditor.vocabulary.facts import VocabularyFacts

Json = dict[str, Any]

_DIFFERENCES_SHOWN = 50


@dataclass(frozen=True)
class WrittenInspection:
    """A finished inspection: the document of `inspection.json` and the files that were written."""

    document: Json
    folder: Path
    files: list[Path]


def inspect(
    specs: Sequence[VocabularySpec],
    out: Path | None = None,
    *,
    width: int | None = None,
    shape: ModelShape | None = None,
    overwrite: bool = False,
) -> WrittenInspection:
    """Inspect the vocabularies that ``specs`` name and write what was found to ``out``.

    ``width``, or that of ``shape``, is the model's. Raises AuditError for whatever the user can
    mend; then nothing is written.
    """
    opened = [open_vocabulary(spec) for spec in specs]
    facts = named_apart([facts_of(vocabulary) for vocabulary in opened])
    folder = out or Path("reports") / f"{cleaned(facts[0].name)}--inspection"
    surfaces = [surfaces_of(vocabulary) for vocabulary in opened]
    lost = [unreachable(v, s) for v, s in zip(opened, surfaces, strict=True)]
    with OutputFolder(folder, overwrite=overwrite, files=INSPECTION_FILES) as output:
        parts = [
            _part(*row, width=width, shape=shape)
            for row in zip(opened, facts, surfaces, lost, strict=True)
        ]
        document: Json = {
            "format": "auditor/vocabulary",
            "version": 1,
            "settings": {
                "control_strings": specs[0].control_strings,
                "pattern": specs[0].pattern,
                "limit": specs[0].limit,
                "width": width,
                "model": None if shape is None else asdict(shape),
            },
            "made_with": contract.made_with(),
            "vocabularies": parts,
            "differences": [
                _difference(facts[0], facts[place], surfaces[0], surfaces[place])
                for place in range(1, len(facts))
            ],
        }
        for part in parts:
            part["answers"] = inspection_answers.answers(part)
        named = [(own.name, held) for own, held in zip(facts, surfaces, strict=True)]
        missing = [(own.name, held) for own, held in zip(facts, lost, strict=True)]
        output.write("inspection.json", contract.dump(document))
        output.write("entries.csv", tables.as_csv(inspection_tables.entries(named, missing)))
        output.write("unreachable.csv", tables.as_csv(inspection_tables.unreachable(missing)))
        output.write("report.html", inspection_page.render(document))
        return WrittenInspection(document, folder, output.finish())


def _part(
    vocabulary: Vocabulary,
    facts: VocabularyFacts,
    surfaces: list[Surface],
    lost: list[Unreachable],
    *,
    width: int | None,
    shape: ModelShape | None,
) -> Json:
    return {
        **facts_as_json(facts),
        "ids": facts.size,
        **composition(vocabulary, surfaces),
        "unreachable": _unreachable(vocabulary, surfaces, lost),
        "findings": [asdict(own) for own in findings(vocabulary, facts, surfaces)],
        "price": _price(facts, width, shape),
    }


def _unreachable(vocabulary: Vocabulary, surfaces: list[Surface], lost: list[Unreachable]) -> Json:
    """Return how many entries are never produced, in the model and through all, and why."""
    causes = Counter(own.cause for own in lost if not own.in_pipeline)
    return {
        "tried": sum(own.kind not in TEXTLESS and bool(own.text) for own in surfaces),
        "not_tried": sum(own.kind in TEXTLESS or not own.text for own in surfaces),
        "contexts": len(contexts_of(vocabulary, surfaces)),
        "in_model": None
        if all(own.in_model is None for own in lost) and vocabulary.family == "ranks"
        else sum(own.in_model is False for own in lost),
        "through_pipeline": sum(not own.in_pipeline for own in lost),
        "causes": dict(sorted(causes.items())),
        "first": [
            {
                "id": own.surface.number,
                "entry": own.surface.entry,
                "text": own.surface.text,
                "in_model": own.in_model,
                "through_pipeline": own.in_pipeline,
                "cause": own.cause,
                "becomes": list(own.becomes),
            }
            for own in lost[:_DIFFERENCES_SHOWN]
        ],
    }


def _price(facts: VocabularyFacts, width: int | None, shape: ModelShape | None) -> Json:
    """Return the parameters of the tables, tied and with an output table of its own."""
    own = shape.width if shape is not None else width
    embedding = None if own is None else facts.size * own
    layers = None if shape is None else shape.layers * cost.layer_parameters(shape)
    whole = None if layers is None or embedding is None else layers + embedding
    return {
        "rows": facts.size,
        "width": own,
        "tied": embedding,
        "untied": None if embedding is None else 2 * embedding,
        "layers": layers,
        "share_of_model": embedding / whole if whole and embedding is not None else None,
    }


def _difference(
    first: VocabularyFacts, second: VocabularyFacts, ours: list[Surface], theirs: list[Surface]
) -> Json:
    """Return what one vocabulary has and the other lacks, and entries whose ids differ.

    Entries are compared by the text that they stand for and whether they begin or end a word, so
    that vocabularies that write spaces in different ways compare.
    """
    mine = {_key(own): own for own in ours}
    yours = {_key(own): own for own in theirs}
    only_mine = [own for key, own in mine.items() if key not in yours]
    only_yours = [own for key, own in yours.items() if key not in mine]
    moved = [key for key in mine.keys() & yours.keys() if mine[key].number != yours[key].number]
    return {
        "vocabularies": [first.name, second.name],
        "shared": len(mine.keys() & yours.keys()),
        "with_other_ids": len(moved),
        "only_in_first": _named(only_mine),
        "only_in_second": _named(only_yours),
    }


def _key(own: Surface) -> tuple[str, bool, bool]:
    return (own.text or own.entry, own.starts, own.ends)


def _named(surfaces: list[Surface]) -> Json:
    kinds = Counter(own.kind for own in surfaces)
    return {
        "entries": len(surfaces),
        "kinds": dict(sorted(kinds.items())),
        "first": [own.entry for own in surfaces[:_DIFFERENCES_SHOWN]],
    }
