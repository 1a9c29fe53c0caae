"""One process's share of vetting vocabularies for a domain: an audit's own, and more beside."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np
import pyarrow as pa

from auditor.corpus import Batch, Glossary
from auditor.encoding.composed import COLUMNS as FORM_COLUMNS
from auditor.encoding.composed import not_composed
from auditor.encoding.constructed import Constructed, construct
from auditor.encoding.kinds import CHARACTER_COLUMNS, TOKEN_COLUMNS
from auditor.encoding.terms import TermFinder
from auditor.figures import kinds, sidebyside
from auditor.runs.measuring import Finished, Measurer, Outcome
from auditor.runs.plan import Plan
from auditor.runs.tallied import CorpusTallies, DocumentTallies
from auditor.tallies.groups import groupings
from auditor.tallies.moments import MomentsTally
from auditor.tallies.rows import RowsTally
from auditor.tallies.terms import TermsTally
from auditor.tallies.wordcounts import WordCountsTally
from auditor.text.halves import halves_of
from auditor.text.slices import ranges, strings
from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularyFacts
from auditor.vocabulary.engine import Ints

# A field that no record has: which half of the corpus a document belongs to.
HALF = "\0half"
KIND_COLUMNS = (*CHARACTER_COLUMNS, *TOKEN_COLUMNS)
NOT_NFC = "not in NFC"
_LOST = ("unknown_characters", "dropped_characters")


@dataclass
class DomainTallies:
    """What vetting needs beside an audit's own tallies; ``forms`` and ``kinds`` have one item a
    vocabulary.
    """

    side: MomentsTally
    forms: list[RowsTally] = field(default_factory=list)
    kinds: list[MomentsTally] = field(default_factory=list)

    @classmethod
    def empty(cls, vocabularies: int) -> DomainTallies:
        """Return empty tallies for so many vocabularies."""
        side = MomentsTally(sidebyside.columns(vocabularies), sidebyside.pairs(vocabularies))
        return cls(
            side,
            [RowsTally(FORM_COLUMNS) for _ in range(vocabularies)],
            [MomentsTally(kinds.COLUMNS, kinds.PAIRS) for _ in range(vocabularies)],
        )

    def merge(self, other: DomainTallies) -> None:
        """Add the counts of ``other``."""
        self.side.merge(other.side)
        for ours, theirs in zip(self.forms, other.forms, strict=True):
            ours.merge(theirs)
        for own, others in zip(self.kinds, other.kinds, strict=True):
            own.merge(others)


@dataclass
class DomainOutcome:
    """What a batch comes to; texts stay where they were measured."""

    documents: int
    corpus: CorpusTallies
    audit: list[DocumentTallies]
    own: DomainTallies


@dataclass
class DomainFinished:
    """What one process hands over: an audit's own, and of each vocabulary what terms become.

    ``constructed`` and ``terms`` are empty without a glossary.
    """

    audit: Finished
    words: WordCountsTally
    constructed: list[list[Constructed]]
    terms: list[TermsTally]


def words_of(stretch: Stretch) -> tuple[pa.Array, Ints]:
    """Return the distinct words of ``stretch`` and how often each occurs; shape (words,) each."""
    starts, lengths = stretch.words.starts, stretch.words.ends - stretch.words.starts
    counted = strings(stretch.points[ranges(starts, lengths)], lengths).value_counts()
    return counted.field("values"), np.asarray(counted.field("counts"))


class DomainMeasurer:
    """Measures batches as an audit does, and what vetting needs beside."""

    def __init__(self, plan: Plan, glossary: Glossary | None = None) -> None:
        self._plan = plan
        self._glossary = glossary
        self._audit = Measurer(plan, kept=("tokens", *_LOST, *KIND_COLUMNS), kinds=True)
        self._words = WordCountsTally()
        self._terms = (
            None
            if glossary is None
            else TermFinder(
                self._audit.vocabularies, glossary, parse_control=plan.parse_control,
                whole=plan.whole,
            )
        )  # fmt: skip

    @property
    def facts(self) -> list[VocabularyFacts]:
        """The facts of the vocabularies that are measured with."""
        return self._audit.facts

    def finish(self) -> DomainFinished:
        """Return what an audit hands over once all batches are measured, and the terms."""
        return DomainFinished(
            self._audit.finish(),
            self._words,
            self._constructed(),
            [] if self._terms is None else self._terms.tallies,
        )

    def _constructed(self) -> list[list[Constructed]]:
        if self._glossary is None:
            return []
        parse = self._plan.parse_control
        return [
            construct(vocabulary, self._glossary, parse_control=parse)
            for vocabulary in self._audit.vocabularies
        ]

    def measure(self, batch: Batch, source_number: int) -> DomainOutcome:
        """Return the outcome of ``batch``; a document that an engine fails on is set aside."""
        halves = [f"{HALF}={half}" for half in halves_of(batch.texts)]
        halved = replace(batch, slices={**batch.slices, HALF: halves})
        outcome = self._audit.measure(halved, source_number)
        own = DomainTallies.empty(len(self.facts))
        if outcome.batch.texts:
            self._add(own, outcome)
            stretch = Stretch(outcome.batch.texts, words=self._plan.words)
            self._words.add(*words_of(stretch))
            if self._terms is not None:
                self._terms.measure(stretch)
        return DomainOutcome(len(batch), outcome.corpus, outcome.documents, own)

    def _add(self, own: DomainTallies, outcome: Outcome) -> None:
        texts = outcome.batch.texts
        groups = groupings(len(texts), {})
        columns = {name: outcome.text_rows[name] for name in ("documents", sidebyside.INK)}
        for place, row in enumerate(outcome.rows):
            columns[sidebyside.tokens_of(place)] = row["tokens"]
            columns[sidebyside.lost_of(place)] = np.sum([row[name] for name in _LOST], axis=0)
        own.side.add(columns, groups)
        for place, vocabulary in enumerate(self._audit.vocabularies):
            rows = outcome.rows[place]
            tokens, counted = rows["tokens"], {"documents": columns["documents"]}
            own.kinds[place].add({**counted, **{n: rows[n] for n in KIND_COLUMNS}}, groups)
            documents, forms = not_composed(vocabulary.engine, texts, tokens)
            if len(documents):
                own.forms[place].add(documents, 0 * documents, [NOT_NFC], forms, groups)
