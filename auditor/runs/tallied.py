"""All tallies of an audit, filled batch by batch and merged."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from auditor.encoding.broken import Broken
from auditor.encoding.measures import Columns
from auditor.encoding.whole import Contents, RunTable
from auditor.figures.catalogue import COLUMNS, PAIRS
from auditor.tallies.characters import CharactersTally, Place
from auditor.tallies.corpus import DigestTally, FlawsTally
from auditor.tallies.groups import ALL, Grouping
from auditor.tallies.lengths import LengthsTally
from auditor.tallies.moments import MomentsTally, OriginsTally
from auditor.tallies.usage import UsageTally
from auditor.tallies.whitespace import WhitespaceTally
from auditor.tallies.words import WordsTally
from auditor.text.whitespace import KINDS
from auditor.vocabulary.engine import Ints


@dataclass
class DocumentTallies:
    """What is summed over documents under one vocabulary."""

    moments: MomentsTally
    origins: OriginsTally | None
    lengths: LengthsTally
    whitespace: WhitespaceTally

    @classmethod
    def empty(cls, *, overhead: int, graphemes: bool, origins: bool) -> DocumentTallies:
        """Return empty tallies for a template of ``overhead`` tokens."""
        columns = (*COLUMNS, "graphemes") if graphemes else COLUMNS
        return cls(
            MomentsTally(columns, (*PAIRS, ("tokens", "graphemes")) if graphemes else PAIRS),
            OriginsTally(columns) if origins else None,
            LengthsTally(overhead),
            WhitespaceTally(KINDS),
        )

    def add(
        self, columns: Columns, runs: RunTable, groups: list[Grouping], origins: list[str] | None
    ) -> None:
        """Add documents: their columns, and the runs of whitespace in them."""
        self.moments.add(columns, groups)
        if self.origins is not None and origins is not None:
            self.origins.add(columns, groups, origins)
        self.lengths.add(columns["tokens"], groups)
        self.whitespace.add(runs.kind_of, runs.table, runs.document_of, groups)

    def merge(self, other: DocumentTallies) -> None:
        """Add the counts of ``other``."""
        self.moments.merge(other.moments)
        if self.origins is not None and other.origins is not None:
            self.origins.merge(other.origins)
        self.lengths.merge(other.lengths)
        self.whitespace.merge(other.whitespace)


@dataclass
class ContentTallies:
    """What texts hold under one vocabulary: entries used, broken words, lost characters.

    ``kinds`` holds the broken stretches of each kind of text, where kinds are asked for.
    """

    usage: UsageTally
    words: WordsTally = field(default_factory=WordsTally)
    characters: CharactersTally = field(default_factory=CharactersTally)
    kinds: dict[str, WordsTally] = field(default_factory=dict)

    def add(self, contents: Contents) -> None:
        """Add texts, each as often as it occurs."""
        measured, weights = contents.measured, contents.weights
        self.usage.add(measured.ids, np.repeat(weights, np.diff(measured.bounds)))
        _add_broken(self.words, measured.broken, weights)
        for kind, broken in measured.broken_kinds.items():
            _add_broken(self.kinds.setdefault(kind, WordsTally()), broken, weights)
        for lost in measured.lost:
            counts = (lost.counts * weights[lost.documents]).tolist()
            sources = contents.sources[lost.documents].tolist()
            lines = contents.lines[lost.documents].tolist()
            for point, count, *place in zip(
                lost.points.tolist(), counts, sources, lines, strict=True
            ):
                if count:
                    self.characters.add(chr(point), lost.fate, count, Place(*place))

    def merge(self, other: ContentTallies) -> None:
        """Add the counts of ``other``."""
        self.usage.merge(other.usage)
        self.words.merge(other.words)
        self.characters.merge(other.characters)
        for kind, words in other.kinds.items():
            self.kinds.setdefault(kind, WordsTally()).merge(words)


def _add_broken(tally: WordsTally, broken: Broken, weights: Ints) -> None:
    times = np.zeros(len(broken.rows), dtype=np.int64)
    np.add.at(times, broken.row_of, weights[broken.document_of])
    tally.add_table(broken.rows, times)


@dataclass
class CorpusTallies:
    """What is known of a corpus without a vocabulary."""

    digest: DigestTally
    set_aside: FlawsTally = field(default_factory=FlawsTally)
    mended: FlawsTally = field(default_factory=FlawsTally)

    def merge(self, other: CorpusTallies) -> None:
        """Add the counts of ``other``."""
        self.digest.merge(other.digest)
        self.set_aside.merge(other.set_aside)
        self.mended.merge(other.mended)


@dataclass
class AuditTallies:
    """All tallies of an audit; ``documents`` and ``contents`` have one item a vocabulary."""

    corpus: CorpusTallies
    documents: list[DocumentTallies]
    contents: list[ContentTallies]

    def merge_contents(self, other: list[ContentTallies]) -> None:
        """Add the contents that one process has gathered."""
        for ours, theirs in zip(self.contents, other, strict=True):
            ours.merge(theirs)

    def merge_documents(self, corpus: CorpusTallies, documents: list[DocumentTallies]) -> None:
        """Add the documents of a batch; none when all its records were set aside."""
        self.corpus.merge(corpus)
        if not documents:
            return
        for ours, theirs in zip(self.documents, documents, strict=True):
            ours.merge(theirs)

    @property
    def measured(self) -> int:
        """The number of documents measured."""
        return self.documents[0].moments.total(ALL, "documents")


def reference(columns: list[Columns]) -> list[Columns]:
    """Return the columns of each vocabulary with the tokens of the first one beside its own."""
    first = columns[0]["tokens"]
    return [{**own, "reference_tokens": np.asarray(first)} for own in columns]
