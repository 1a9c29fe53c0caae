"""One process's share of length planning: a batch in, lengths and what is cut of them out."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from auditor.corpus import Batch
from auditor.encoding.measures import Columns
from auditor.encoding.pairs import PAIR_LOSSES, PAIR_PLACES, PAIR_WAYS, pair_columns
from auditor.encoding.truncation import LOSSES, WAYS, Candidate, Truncation
from auditor.errors import AuditError
from auditor.runs.measuring import corpus_tallies, without_failing
from auditor.runs.plan import Plan
from auditor.runs.tallied import CorpusTallies
from auditor.tallies.corpus import DigestTally
from auditor.tallies.groups import ALL, groupings
from auditor.tallies.lengths import LengthsTally
from auditor.tallies.moments import MomentsTally
from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularyFacts, facts_of, open_vocabulary
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.spans import correct

_TOTALS = ("documents", "tokens")
_TEXT = ("characters", "words")
_BOTH = ("first_tokens", "second_tokens")


@dataclass
class LengthTallies:
    """Documents by length, and for each candidate what cutting takes from them."""

    corpus: CorpusTallies
    lengths: LengthsTally
    cuts: MomentsTally

    @classmethod
    def empty(
        cls, plan: Plan, facts: VocabularyFacts, candidates: tuple[Candidate, ...]
    ) -> LengthTallies:
        """Return empty tallies; without candidates nothing but lengths is counted."""
        paired = plan.read.pair is not None
        columns = _pair_columns(candidates) if paired else _cut_columns(candidates)
        return cls(
            CorpusTallies(DigestTally(distinct=False)),
            LengthsTally(facts.overhead[1 if paired else 0]),
            MomentsTally(*columns),
        )

    @property
    def slices(self) -> list[str]:
        """The slice keys, that of all documents among them."""
        return self.cuts.slices()

    @property
    def documents(self) -> int:
        """The number of documents measured."""
        return self.cuts.total(ALL, "documents")

    def merge(self, other: LengthTallies) -> None:
        """Add the counts of ``other``."""
        self.corpus.merge(other.corpus)
        self.lengths.merge(other.lengths)
        self.cuts.merge(other.cuts)


def _cut_columns(candidates: tuple[Candidate, ...]) -> tuple[tuple[str, ...], _Pairs]:
    if not candidates:
        return _TOTALS, (("tokens", "documents"),)
    names = [name for candidate in candidates for name in candidate.columns()]
    wholes = dict(zip(LOSSES, _TEXT, strict=True))
    pairs = tuple(
        (candidate.column(loss, way), whole)
        for candidate in candidates
        for way in WAYS
        for loss, whole in wholes.items()
    )
    return (*_TOTALS, *_TEXT, *names), pairs


def _pair_columns(candidates: tuple[Candidate, ...]) -> tuple[tuple[str, ...], _Pairs]:
    named = [(candidate, way) for candidate in candidates for way in PAIR_WAYS]
    names = [own.column(name, way) for own, way in named for name in (*PAIR_LOSSES, *PAIR_PLACES)]
    wholes = dict(zip(PAIR_LOSSES, _BOTH, strict=True))
    pairs = [(own.column(loss, way), whole) for own, way in named for loss, whole in wholes.items()]
    return (*_TOTALS, *_BOTH, *names), (("tokens", "documents"), *pairs)


_Pairs = tuple[tuple[str, str], ...]


class LengthMeasurer:
    """Measures lengths under the one vocabulary of a plan, and what candidates cut."""

    def __init__(self, plan: Plan) -> None:
        self._plan = plan
        self._vocabulary = open_vocabulary(plan.vocabularies[0])
        self.facts: list[VocabularyFacts] = [facts_of(self._vocabulary)]

    def finish(self) -> None:
        """Hand over nothing: every batch's counts went with it."""

    def measure(
        self, batch: Batch, source_number: int, candidates: tuple[Candidate, ...]
    ) -> LengthTallies:
        """Return the tallies of ``batch``; a document that the engine fails on is set aside."""
        try:
            return self._measure(batch, source_number, candidates)
        except (KeyboardInterrupt, SystemExit, MemoryError, AuditError):
            raise
        except BaseException:
            sound = without_failing(batch, [self._vocabulary])
            return self._measure(sound, source_number, candidates)

    def _measure(
        self, batch: Batch, source_number: int, candidates: tuple[Candidate, ...]
    ) -> LengthTallies:
        tallies = LengthTallies.empty(self._plan, self.facts[0], candidates)
        tallies.corpus = corpus_tallies(self._plan, batch, source_number)
        if batch.texts:
            columns = self._columns(batch, candidates)
            columns["documents"] = np.ones(len(batch), dtype=np.int64)
            groups = groupings(len(batch), batch.slices)
            tallies.lengths.add(columns["tokens"], groups)
            tallies.cuts.add(columns, groups)
        return tallies

    def _columns(self, batch: Batch, candidates: tuple[Candidate, ...]) -> Columns:
        if batch.pairs is not None:
            first, second = self._tokens(batch.texts), self._tokens(batch.pairs)
            found = pair_columns(candidates, first, second)
            return {
                **found, "tokens": first + second, "first_tokens": first, "second_tokens": second,
            }  # fmt: skip
        if not candidates:
            return {"tokens": self._tokens(batch.texts)}
        stretch = Stretch(batch.texts, words=self._plan.words)
        encoding = self._vocabulary.engine.encode(batch.texts)
        spans = correct(encoding, stretch, self._vocabulary.inventory)
        return {
            **Truncation(stretch, spans).columns(candidates),
            "tokens": np.diff(spans.bounds),
            "characters": np.diff(stretch.bounds),
            "words": stretch.per_document(stretch.words.starts),
        }

    def _tokens(self, texts: list[str]) -> Ints:
        return np.diff(self._vocabulary.engine.encode(texts).bounds)
