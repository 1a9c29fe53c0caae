"""One process's share of the work: a batch of documents in, tallies and rows out."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from auditor.corpus import Batch, Flaw
from auditor.encoding.measures import Columns, text_columns
from auditor.encoding.whole import WholeDocuments
from auditor.errors import AuditError
from auditor.runs.plan import Plan
from auditor.runs.tallied import AuditTallies, VocabularyTallies, reference
from auditor.tallies.characters import Place
from auditor.tallies.corpus import DigestTally, FlawPlace
from auditor.tallies.groups import groupings
from auditor.text.stretch import Stretch
from auditor.text.whitespace import find_runs
from auditor.text.words import count_graphemes
from auditor.vocabulary import Vocabulary, VocabularyFacts, facts_of, open_vocabulary

# The columns of documents.parquet that every vocabulary adds.
ROW_COLUMNS = ("tokens", "unknown_tokens", "byte_spelled_characters", "lossless_documents")


@dataclass
class Outcome:
    """What a batch comes to: its tallies, and a row for each document that was measured."""

    batch: Batch
    tallies: AuditTallies
    text_rows: Columns
    rows: list[Columns]


class Measurer:
    """Measures batches under every vocabulary of a plan; opens them once."""

    def __init__(self, plan: Plan) -> None:
        self._plan = plan
        self._vocabularies = [open_vocabulary(spec) for spec in plan.vocabularies]
        self._facts = [facts_of(vocabulary) for vocabulary in self._vocabularies]
        self._encoders = [
            WholeDocuments(vocabulary, parse_control=plan.parse_control)
            for vocabulary in self._vocabularies
        ]

    @property
    def vocabularies(self) -> list[Vocabulary]:
        """The opened vocabularies."""
        return self._vocabularies

    @property
    def facts(self) -> list[VocabularyFacts]:
        """The facts of each vocabulary."""
        return self._facts

    def empty(self) -> AuditTallies:
        """Return empty tallies for this plan."""
        return empty_tallies(self._plan, self._facts)

    def measure(self, batch: Batch, source_number: int) -> Outcome:
        """Return the outcome of ``batch``; a document that an engine fails on is set aside."""
        try:
            return self._measure(batch, source_number)
        except (KeyboardInterrupt, SystemExit, MemoryError, AuditError):
            raise
        except BaseException:
            return self._measure(self._without_failing(batch), source_number)

    def _without_failing(self, batch: Batch) -> Batch:
        faults = {
            place: fault
            for place in range(len(batch))
            if (fault := self._fault(batch.texts[place]))
        }
        flaws = [
            Flaw(batch.source, batch.lines[place], "the engine fails on it", fault)
            for place, fault in faults.items()
        ]
        return without(batch, set(faults), flaws)

    def _fault(self, text: str) -> str | None:
        for vocabulary in self._vocabularies:
            try:
                vocabulary.engine.decode(vocabulary.engine.encode([text]).ids_by_document())
            except (KeyboardInterrupt, SystemExit, MemoryError):
                raise
            except BaseException as fault:
                return f"{vocabulary.name}: {type(fault).__name__}"
        return None

    def _measure(self, batch: Batch, source_number: int) -> Outcome:
        stretch = Stretch(batch.texts, words=self._plan.words)
        tallies = self.empty()
        tallies.digest.add(batch.texts)
        tallies.set_aside.add(_place(flaw, source_number) for flaw in batch.set_aside)
        tallies.mended.add(_place(flaw, source_number) for flaw in batch.mended)
        text_rows = text_columns(stretch, graphemes=self._graphemes(batch.texts))
        if not batch.texts:
            return Outcome(batch, tallies, text_rows, [])
        runs = find_runs(stretch)
        measured = [encoder.measure(stretch, runs) for encoder in self._encoders]
        rows = reference([found.columns for found in measured])
        groups = groupings(len(batch), batch.slices)
        places = [Place(source_number, line) for line in batch.lines]
        once = np.ones(len(batch), dtype=np.int64)
        for tally, own, found in zip(tallies.vocabularies, rows, measured, strict=True):
            tally.add_documents({**text_rows, **own}, found.runs, groups, batch.origins)
            tally.add_contents(found, once, places)
        return Outcome(batch, tallies, text_rows, [_kept(own) for own in rows])

    def _graphemes(self, texts: list[str]) -> np.ndarray[tuple[int], np.dtype[np.int64]] | None:
        if not self._plan.graphemes:
            return None
        return np.array([count_graphemes(text) for text in texts], dtype=np.int64)


def empty_tallies(plan: Plan, facts: list[VocabularyFacts]) -> AuditTallies:
    """Return empty tallies for ``plan`` and the vocabularies it names."""
    return AuditTallies(
        [
            VocabularyTallies.empty(
                overhead=own.overhead[0],
                size=own.size,
                graphemes=plan.graphemes,
                origins=plan.read.origin is not None,
            )
            for own in facts
        ],
        DigestTally(distinct=plan.repeats),
    )


def without(batch: Batch, places: set[int], flaws: list[Flaw]) -> Batch:
    """Return ``batch`` without the documents at ``places``, which are set aside as ``flaws``."""
    kept = [place for place in range(len(batch)) if place not in places]

    def only(values: list[str]) -> list[str]:
        return [values[place] for place in kept]

    return replace(
        batch,
        texts=only(batch.texts),
        lines=[batch.lines[place] for place in kept],
        slices={field: only(keys) for field, keys in batch.slices.items()},
        origins=None if batch.origins is None else only(batch.origins),
        identifiers=None if batch.identifiers is None else only(batch.identifiers),
        set_aside=[*batch.set_aside, *flaws],
    )


def _kept(columns: Columns) -> Columns:
    return {name: columns[name] for name in ROW_COLUMNS}


def _place(flaw: Flaw, source_number: int) -> FlawPlace:
    line = -1 if flaw.line is None else flaw.line
    return FlawPlace(source_number, line, flaw.reason, flaw.detail)
