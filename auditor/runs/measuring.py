"""One process's share of the work: a batch of documents in, tallies and rows out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np

from auditor.corpus import Batch, Flaw
from auditor.encoding.documents import Documents, Tale
from auditor.encoding.measures import Columns, derived_columns
from auditor.errors import AuditError
from auditor.runs import memory
from auditor.runs.plan import Plan
from auditor.runs.tallied import (
    AuditTallies,
    ContentTallies,
    CorpusTallies,
    DocumentTallies,
    reference,
)
from auditor.tallies.corpus import DigestTally, FlawPlace
from auditor.tallies.groups import groupings
from auditor.tallies.usage import UsageTally
from auditor.text.stretch import Stretch
from auditor.vocabulary import Vocabulary, VocabularyFacts, facts_of, open_vocabulary

Kept = TypeVar("Kept")
# The columns of documents.parquet that every vocabulary adds.
ROW_COLUMNS = ("tokens", "unknown_tokens", "byte_spelled_characters", "lossless_documents")


@dataclass
class Outcome:
    """What a batch comes to: its tallies, and a row for each document that was measured."""

    batch: Batch
    corpus: CorpusTallies
    documents: list[DocumentTallies]
    text_rows: Columns
    rows: list[Columns]


@dataclass
class Finished:
    """What a process hands over when all batches are measured."""

    contents: list[ContentTallies]
    tale: Tale


class Measurer:
    """Measures batches under every vocabulary of a plan; opens them once.

    ``kept`` names the columns of each document that an outcome holds; with ``kinds`` they may be
    those of kinds of text.
    """

    def __init__(
        self, plan: Plan, kept: tuple[str, ...] = ROW_COLUMNS, *, kinds: bool = False
    ) -> None:
        self._plan = plan
        self._kept = kept
        self.vocabularies = [open_vocabulary(spec) for spec in plan.vocabularies]
        self.facts = [facts_of(vocabulary) for vocabulary in self.vocabularies]
        self._batches = 0
        memory.give_back()
        self._contents = [ContentTallies(UsageTally(own.size)) for own in self.facts]
        self._documents = Documents(
            self.vocabularies,
            lambda place, contents: self._contents[place].add(contents),
            words=plan.words,
            graphemes=plan.graphemes,
            parse_control=plan.parse_control,
            whole=plan.whole,
            kinds=kinds,
        )

    def finish(self) -> Finished:
        """Return what texts held and how they were encoded, once all batches are measured."""
        self._documents.finish()
        return Finished(self._contents, self._documents.tale)

    def measure(self, batch: Batch, source_number: int) -> Outcome:
        """Return the outcome of ``batch``; a document that an engine fails on is set aside."""
        try:
            return self._measure(batch, source_number)
        except (KeyboardInterrupt, SystemExit, MemoryError, AuditError):
            raise
        except BaseException:
            return self._measure(without_failing(batch, self.vocabularies), source_number)

    def _measure(self, batch: Batch, source_number: int) -> Outcome:
        self._batches += 1
        if self._batches % memory.EVERY == 0:
            memory.give_back()
        corpus = corpus_tallies(self._plan, batch, source_number)
        if not batch.texts:
            return Outcome(batch, corpus, [], {}, [])
        stretch = Stretch(batch.texts, words=self._plan.words)
        lines = np.array(batch.lines, dtype=np.int64)
        counted = self._documents.measure(stretch, source_number, lines)
        rows = reference(
            [
                {**own, **derived_columns(own, facts.room)}
                for own, facts in zip(counted.columns, self.facts, strict=True)
            ]
        )
        groups = groupings(len(batch), batch.slices)
        documents = empty_documents(self._plan, self.facts)
        for tally, own, runs in zip(documents, rows, counted.runs, strict=True):
            tally.add({**counted.text, **own}, runs, groups, batch.origins)
        kept = [{name: own[name] for name in self._kept} for own in rows]
        return Outcome(batch, corpus, documents, counted.text, kept)


def without_failing(batch: Batch, vocabularies: Sequence[Vocabulary]) -> Batch:
    """Return ``batch`` without the documents that an engine fails on, which are set aside."""
    faults = {
        place: fault
        for place in range(len(batch))
        if (fault := _fault(_texts(batch, place), vocabularies))
    }
    flaws = [
        Flaw(batch.source, batch.lines[place], "the engine fails on it", fault)
        for place, fault in faults.items()
    ]
    return without(batch, set(faults), flaws)


def _texts(batch: Batch, place: int) -> list[str]:
    pair = [] if batch.pairs is None else [batch.pairs[place]]
    return [batch.texts[place], *pair]


def _fault(texts: list[str], vocabularies: Sequence[Vocabulary]) -> str | None:
    for vocabulary in vocabularies:
        try:
            vocabulary.engine.decode(vocabulary.engine.encode(texts).ids_by_document())
        except (KeyboardInterrupt, SystemExit, MemoryError):
            raise
        except BaseException as fault:
            return f"{vocabulary.name}: {type(fault).__name__}"
    return None


def corpus_tallies(plan: Plan, batch: Batch, source_number: int) -> CorpusTallies:
    """Return what ``batch`` adds to what is known of the corpus without a vocabulary."""
    corpus = CorpusTallies(DigestTally(distinct=plan.repeats))
    corpus.digest.add(batch.texts)
    corpus.set_aside.add(_place(flaw, source_number) for flaw in batch.set_aside)
    corpus.mended.add(_place(flaw, source_number) for flaw in batch.mended)
    return corpus


def empty_documents(plan: Plan, facts: list[VocabularyFacts]) -> list[DocumentTallies]:
    """Return empty tallies of documents for each vocabulary."""
    clustered = plan.read.origin is not None
    return [
        DocumentTallies.empty(overhead=own.overhead[0], graphemes=plan.graphemes, origins=clustered)
        for own in facts
    ]


def empty_tallies(plan: Plan, facts: list[VocabularyFacts]) -> AuditTallies:
    """Return empty tallies for ``plan`` and the vocabularies it names."""
    return AuditTallies(
        CorpusTallies(DigestTally(distinct=plan.repeats)),
        empty_documents(plan, facts),
        [ContentTallies(UsageTally(own.size)) for own in facts],
    )


def without(batch: Batch, places: set[int], flaws: list[Flaw]) -> Batch:
    """Return ``batch`` without the documents at ``places``, which are set aside as ``flaws``."""
    kept = [place for place in range(len(batch)) if place not in places]

    def only(values: list[Kept]) -> list[Kept]:
        return [values[place] for place in kept]

    return replace(
        batch,
        texts=only(batch.texts),
        lines=[batch.lines[place] for place in kept],
        slices={field: only(keys) for field, keys in batch.slices.items()},
        origins=None if batch.origins is None else only(batch.origins),
        identifiers=None if batch.identifiers is None else only(batch.identifiers),
        pairs=None if batch.pairs is None else only(batch.pairs),
        contents=None if batch.contents is None else only(batch.contents),
        set_aside=[*batch.set_aside, *flaws],
    )


def _place(flaw: Flaw, source_number: int) -> FlawPlace:
    line = -1 if flaw.line is None else flaw.line
    return FlawPlace(source_number, line, flaw.reason, flaw.detail)
