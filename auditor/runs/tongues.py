"""One process's share of an audit by language: an audit's own, and what languages need beside."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from auditor.corpus import Batch
from auditor.encoding import composed
from auditor.encoding.composed import not_composed
from auditor.encoding.measures import Reading
from auditor.encoding.scripted import (
    IN_BROKEN,
    SCRIPT_COLUMNS,
    SPENT_ON,
    ScriptRows,
    by_script,
    costly_characters,
    letters_by_script,
    spent_on,
)
from auditor.runs.measuring import Finished, Measurer, Outcome
from auditor.runs.plan import Plan
from auditor.tallies.groups import Grouping, groupings
from auditor.tallies.parallel import ParallelTally
from auditor.tallies.rows import RowsTally
from auditor.text import labels
from auditor.text.scripts import NAMES
from auditor.text.stretch import Stretch
from auditor.vocabulary import Vocabulary, VocabularyFacts
from auditor.vocabulary.engine import Ints
from auditor.vocabulary.entries import entries_by_script
from auditor.vocabulary.forms import FormPair, normal_forms
from auditor.vocabulary.spans import correct

CHARACTER_COLUMNS = ("count", "tokens")
LABEL_COLUMNS = ("documents",)
NOT_NFC, SPENT = "not in NFC", "spent"
CONTRADICTS = "contradicts: "
MIXED = "mixed"


@dataclass(frozen=True, slots=True)
class Mismatch:
    """A document whose script contradicts its label, or that mixes scripts.

    ``script`` is the one that contradicts, or the one with most letters outside the label's;
    ``letters`` counts those outside.
    """

    source: str
    line: int
    finding: str
    label: str
    script: str
    letters: int


@dataclass
class VocabularyTallies:
    """What languages need of one vocabulary."""

    scripts: RowsTally = field(default_factory=lambda: RowsTally(SCRIPT_COLUMNS))
    characters: RowsTally = field(default_factory=lambda: RowsTally(CHARACTER_COLUMNS))
    spent: RowsTally = field(default_factory=lambda: RowsTally((*SPENT_ON, IN_BROKEN)))
    forms: RowsTally = field(default_factory=lambda: RowsTally(composed.COLUMNS))

    def merge(self, other: VocabularyTallies) -> None:
        """Add the counts of ``other``."""
        self.scripts.merge(other.scripts)
        self.characters.merge(other.characters)
        self.spent.merge(other.spent)
        self.forms.merge(other.forms)


@dataclass
class LanguageTallies:
    """What languages need beside an audit's own tallies."""

    vocabularies: list[VocabularyTallies]
    parallel: ParallelTally
    labels: RowsTally = field(default_factory=lambda: RowsTally(LABEL_COLUMNS))

    @classmethod
    def empty(cls, vocabularies: int) -> LanguageTallies:
        """Return empty tallies for so many vocabularies."""
        columns = (*(f"tokens:{place}" for place in range(vocabularies)), "words")
        return cls([VocabularyTallies() for _ in range(vocabularies)], ParallelTally(columns))

    def merge(self, other: LanguageTallies) -> None:
        """Add the counts of ``other``."""
        for ours, theirs in zip(self.vocabularies, other.vocabularies, strict=True):
            ours.merge(theirs)
        self.parallel.merge(other.parallel)
        self.labels.merge(other.labels)


@dataclass
class LanguageOutcome:
    """What a batch comes to: an audit's outcome, the tallies of languages, and mismatches."""

    outcome: Outcome
    tallies: LanguageTallies
    mismatches: list[Mismatch]


@dataclass
class LanguageFinished:
    """What an audit hands over; of each vocabulary the entries by script, and normal forms."""

    audit: Finished
    entries_by_script: list[dict[str, int]]
    normal_forms: list[list[FormPair]]


class LanguageMeasurer:
    """Measures batches as an audit does, and what languages need on whole documents."""

    def __init__(self, plan: Plan) -> None:
        self._plan = plan
        self._audit = Measurer(plan)

    @property
    def facts(self) -> list[VocabularyFacts]:
        """The facts of the vocabularies that are measured with."""
        return self._audit.facts

    def finish(self) -> LanguageFinished:
        """Return what an audit hands over in the end, and what is asked of the vocabularies."""
        entries = [entries_by_script(own.inventory) for own in self._audit.vocabularies]
        forms = [normal_forms(own.engine) for own in self._audit.vocabularies]
        return LanguageFinished(self._audit.finish(), entries, forms)

    def measure(self, batch: Batch, source_number: int) -> LanguageOutcome:
        """Return the outcome of ``batch``; a document that an engine fails on is set aside."""
        outcome = self._audit.measure(batch, source_number)
        tallies = LanguageTallies.empty(len(self.facts))
        batch = outcome.batch
        if not batch.texts:
            return LanguageOutcome(outcome, tallies, [])
        field_ = self._plan.read.by[0]
        keys = batch.slices[field_]
        groups = groupings(len(batch), {field_: keys})
        stretch = Stretch(batch.texts, words=self._plan.words)
        for place, vocabulary in enumerate(self._audit.vocabularies):
            tokens = outcome.rows[place]["tokens"]
            self._add(tallies.vocabularies[place], vocabulary, stretch, groups, tokens)
        if batch.contents is not None:
            own = [row["tokens"] for row in outcome.rows]
            table = np.stack([*own, outcome.text_rows["words"]], axis=1)
            tallies.parallel.add(batch.contents, keys, table)
        mismatches = _check_labels(batch, keys, field_, stretch, tallies.labels, groups)
        return LanguageOutcome(outcome, tallies, mismatches)

    def _add(
        self,
        tallies: VocabularyTallies,
        vocabulary: Vocabulary,
        stretch: Stretch,
        groups: list[Grouping],
        tokens: Ints,
    ) -> None:
        encoding = vocabulary.engine.encode(stretch.texts)
        spans = correct(encoding, stretch, vocabulary.inventory)
        parse = self._plan.parse_control
        reading = Reading(stretch, spans, vocabulary.engine, vocabulary.inventory, parse)
        _add_rows(tallies.scripts, by_script(reading), NAMES, groups)
        found = costly_characters(reading)
        points, rows = np.unique(found.scripts, return_inverse=True)
        named = [chr(point) for point in points.tolist()]
        own = ScriptRows(found.documents, rows, found.counts)
        _add_rows(tallies.characters, own, named, groups)
        spent = spent_on(reading)
        every = np.arange(len(stretch))
        table = np.stack([spent[name] for name in (*SPENT_ON, IN_BROKEN)], axis=1)
        tallies.spent.add(every, 0 * every, [SPENT], table, groups)
        documents, forms = not_composed(vocabulary.engine, stretch.texts, tokens)
        if len(documents):
            tallies.forms.add(documents, 0 * documents, [NOT_NFC], forms, groups)


def _add_rows(
    tally: RowsTally, found: ScriptRows, names: tuple[str, ...] | list[str], groups: list[Grouping]
) -> None:
    tally.add(found.documents, found.scripts, list(names), found.counts, groups)


def _check_labels(
    batch: Batch,
    keys: list[str],
    field_: str,
    stretch: Stretch,
    tally: RowsTally,
    groups: list[Grouping],
) -> list[Mismatch]:
    """Tally how each document's script fits its label; return those that raise a doubt."""
    letters: list[labels.Letters] = [{} for _ in keys]
    found = letters_by_script(stretch)
    for document, number, count in zip(
        found.documents.tolist(), found.scripts.tolist(), found.counts[:, 0].tolist(), strict=True
    ):
        letters[document][NAMES[number]] = count
    mismatches: list[Mismatch] = []
    verdicts: list[tuple[int, str]] = []
    for place, (key, own) in enumerate(zip(keys, letters, strict=True)):
        label = labels.label_of(key.removeprefix(f"{field_}="))
        against = labels.contradicts(label, own, batch.texts[place])
        mixed = labels.is_mixed(own)
        verdicts += [(place, f"{CONTRADICTS}{against}")] if against is not None else []
        verdicts += [(place, MIXED)] if mixed else []
        if against is not None or mixed:
            finding = MIXED if against is None else "contradicts"
            outside = {name: n for name, n in own.items() if name not in label.scripts}
            most = max(outside, key=lambda name: (outside[name], name), default="")
            mismatches.append(
                Mismatch(
                    batch.source, batch.lines[place], finding, label.label, against or most,
                    sum(outside.values()),
                )
            )  # fmt: skip
        if sum(own.values()) < labels.ENOUGH_LETTERS:
            verdicts.append((place, "few letters"))
    names = sorted({verdict for _, verdict in verdicts})
    documents = np.array([place for place, _ in verdicts], dtype=np.int64)
    rows = np.array([names.index(verdict) for _, verdict in verdicts], dtype=np.int64)
    if len(documents):
        tally.add(documents, rows, names, np.ones((len(rows), 1), dtype=np.int64), groups)
    return mismatches
