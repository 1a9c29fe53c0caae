"""All tallies of an audit, filled batch by batch and merged."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from auditor.encoding.measures import Columns
from auditor.encoding.whole import LostCharacters, Measured, RunTable
from auditor.figures.catalogue import COLUMNS, PAIRS
from auditor.tallies.characters import CharactersTally, Place
from auditor.tallies.corpus import DigestTally, FlawsTally
from auditor.tallies.groups import Grouping
from auditor.tallies.lengths import LengthsTally
from auditor.tallies.moments import MomentsTally, OriginsTally
from auditor.tallies.usage import UsageTally
from auditor.tallies.whitespace import WhitespaceTally
from auditor.tallies.words import WordsTally
from auditor.text.whitespace import KINDS
from auditor.vocabulary.engine import Ints


@dataclass
class VocabularyTallies:
    """The tallies of one vocabulary."""

    moments: MomentsTally
    origins: OriginsTally | None
    lengths: LengthsTally
    whitespace: WhitespaceTally
    usage: UsageTally
    words: WordsTally
    characters: CharactersTally

    @classmethod
    def empty(
        cls, *, overhead: int, size: int, graphemes: bool, origins: bool
    ) -> VocabularyTallies:
        """Return empty tallies for a vocabulary of ids below ``size``."""
        columns = (*COLUMNS, "graphemes") if graphemes else COLUMNS
        return cls(
            MomentsTally(columns, PAIRS),
            OriginsTally(columns) if origins else None,
            LengthsTally(overhead),
            WhitespaceTally(KINDS),
            UsageTally(size),
            WordsTally(),
            CharactersTally(),
        )

    def add_documents(
        self, columns: Columns, runs: RunTable, groups: list[Grouping], origins: list[str] | None
    ) -> None:
        """Add documents: their columns, and the runs of whitespace in them."""
        self.moments.add(columns, groups)
        if self.origins is not None and origins is not None:
            self.origins.add(columns, groups, origins)
        self.lengths.add(columns["tokens"], groups)
        self.whitespace.add(runs.kind_of, runs.table, runs.document_of, groups)

    def add_contents(self, measured: Measured, weights: Ints, places: list[Place]) -> None:
        """Add what texts hold: entries used, broken words, lost characters.

        ``weights`` (texts,) says how often each text of ``measured`` occurs and ``places`` where it
        was first met.
        """
        self.usage.add(measured.ids, np.repeat(weights, np.diff(measured.bounds)))
        broken = measured.broken
        times = np.zeros(len(broken.rows), dtype=np.int64)
        np.add.at(times, broken.row_of, weights[broken.document_of])
        for row, count in zip(broken.rows, times.tolist(), strict=True):
            self.words.add(row, count)
        for lost in measured.lost:
            self._add_lost(lost, weights, places)

    def _add_lost(self, lost: LostCharacters, weights: Ints, places: list[Place]) -> None:
        counts = lost.counts * weights[lost.documents]
        rows = zip(lost.points.tolist(), counts.tolist(), lost.documents.tolist(), strict=True)
        for point, count, document in rows:
            self.characters.add(chr(point), lost.fate, count, places[document])

    def merge(self, other: VocabularyTallies) -> None:
        """Add the counts of ``other``."""
        self.moments.merge(other.moments)
        if self.origins is not None and other.origins is not None:
            self.origins.merge(other.origins)
        self.lengths.merge(other.lengths)
        self.whitespace.merge(other.whitespace)
        self.usage.merge(other.usage)
        self.words.merge(other.words)
        self.characters.merge(other.characters)


@dataclass
class AuditTallies:
    """The tallies of a corpus, and of each vocabulary on it."""

    vocabularies: list[VocabularyTallies]
    digest: DigestTally
    set_aside: FlawsTally = field(default_factory=FlawsTally)
    mended: FlawsTally = field(default_factory=FlawsTally)

    def merge(self, other: AuditTallies) -> None:
        """Add the counts of ``other``."""
        for ours, theirs in zip(self.vocabularies, other.vocabularies, strict=True):
            ours.merge(theirs)
        self.digest.merge(other.digest)
        self.set_aside.merge(other.set_aside)
        self.mended.merge(other.mended)

    @property
    def documents(self) -> int:
        """The documents measured."""
        return self.vocabularies[0].moments.total("all", "documents")


def reference(columns: list[Columns]) -> list[Columns]:
    """Return the columns of each vocabulary with the tokens of the first one beside its own."""
    first = columns[0]["tokens"]
    return [{**own, "reference_tokens": np.asarray(first)} for own in columns]
