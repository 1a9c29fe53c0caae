"""All tallies of an audit, filled batch by batch and merged."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from auditor.encoding.measures import Columns
from auditor.encoding.whole import Measured
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

    def add(
        self,
        columns: Columns,
        measured: Measured,
        groups: list[Grouping],
        origins: list[str] | None,
        places: list[Place],
    ) -> None:
        """Add one stretch; ``places`` says where each document stands."""
        self.moments.add(columns, groups)
        if self.origins is not None and origins is not None:
            self.origins.add(columns, groups, origins)
        self.lengths.add(columns["tokens"], groups)
        runs = measured.runs
        self.whitespace.add(runs.kind_of, runs.table, runs.document_of, groups)
        self.usage.add(measured.ids)
        for row, count in measured.broken.items():
            self.words.add(row, count)
        for lost in measured.lost:
            self.characters.add(lost.character, lost.fate, lost.count, places[lost.document])

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
