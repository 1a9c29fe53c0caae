"""Encodes texts whole and measures them: the plain path, and the oracle of any other."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from auditor.encoding.alterations import Alterations
from auditor.encoding.broken import Broken, BrokenWords
from auditor.encoding.fates import FATES, Fates
from auditor.encoding.kinds import BrokenKinds, kind_columns
from auditor.encoding.measures import (
    Columns,
    Reading,
    character_columns,
    lossless_column,
    token_columns,
    word_columns,
)
from auditor.encoding.touching import tokens_within
from auditor.text.properties import CODE_POINTS
from auditor.text.stretch import Stretch
from auditor.text.whitespace import KINDS, Runs
from auditor.vocabulary.engine import Bools, Engine, Ints
from auditor.vocabulary.joined import JoinedParts
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.separation import Separation
from auditor.vocabulary.spans import correct


@dataclass(frozen=True, slots=True)
class RunTable:
    """Runs of whitespace as the whitespace tally takes them."""

    kind_of: Ints
    table: Ints
    document_of: Ints


_NO_RUNS = RunTable(np.zeros(0, np.int64), np.zeros((0, 0), np.int64), np.zeros(0, np.int64))


@dataclass(frozen=True, slots=True)
class LostCharacters:
    """Characters that did not come through whole, with one fate; arrays of shape (rows,).

    A row is a code point in a document, and how often it met this fate there.
    """

    fate: str
    points: Ints
    documents: Ints
    counts: Ints


@dataclass(frozen=True, slots=True)
class Measured:
    """What one vocabulary makes of one stretch; columns have shape (documents,)."""

    columns: Columns
    ids: Ints
    bounds: Ints
    runs: RunTable
    broken: Broken
    lost: list[LostCharacters]
    # Broken stretches of one kind of text, by kind; empty where kinds are not asked for.
    broken_kinds: dict[str, Broken] = field(default_factory=dict)

    def contents_only(self) -> Measured:
        """Return the same without columns and runs, which take most of the memory."""
        return replace(self, columns={}, runs=_NO_RUNS, ids=self.ids.astype(np.int32))


@dataclass(frozen=True, slots=True)
class Contents:
    """Measured texts with how often each occurs, and where it was first met; shape (texts,)."""

    measured: Measured
    weights: Ints
    sources: Ints
    lines: Ints


class WholeTexts:
    """Measures texts under one vocabulary, each encoded whole.

    ``separation`` is given for texts that are later parts of documents: it names the engine for
    them, and the tokens that stand before theirs when they are decoded. With ``kinds`` the
    columns of kinds of text are added.
    """

    def __init__(
        self,
        vocabulary: Vocabulary,
        *,
        parse_control: bool,
        separation: Separation | None = None,
        kinds: bool = False,
    ) -> None:
        self._engine: Engine = JoinedParts(separation) if separation else vocabulary.engine
        self._anchor = separation.anchor if separation else ()
        self._inventory = vocabulary.inventory
        self._parse_control = parse_control
        engine = vocabulary.engine
        self._alterations = Alterations(engine.normalize, engine.unaltered)
        self._fates = Fates(vocabulary)
        self._broken = BrokenWords(vocabulary.inventory)
        self._kinds = BrokenKinds(vocabulary.inventory) if kinds else None

    def measure(self, stretch: Stretch, runs: Runs) -> Measured:
        """Return the measures of ``stretch``; raises what the engine raises on a text."""
        encoding = self._engine.encode(stretch.texts)
        spans = correct(encoding, stretch, self._inventory)
        reading = Reading(stretch, spans, self._engine, self._inventory, self._parse_control)
        columns = {
            **token_columns(reading),
            **word_columns(reading, self._alterations),
            **character_columns(reading),
            **lossless_column(reading, self._anchor),
        }
        if self._kinds is not None:
            columns |= kind_columns(reading, stretch.kinds)
        return Measured(
            columns,
            spans.ids,
            spans.bounds,
            self._run_table(reading, runs),
            self._broken.find(reading),
            _lost_characters(reading),
            {} if self._kinds is None else self._kinds.find(reading, stretch.kinds),
        )

    def _run_table(self, reading: Reading, runs: Runs) -> RunTable:
        probed = self._fates.of_all(runs.forms)
        kinds = [KINDS.index(form.kind) for form in runs.forms]
        by_form = np.zeros((len(runs.forms), 2 + len(FATES) + 1), dtype=np.int64)
        for place, found in enumerate(probed):
            by_form[place, 0] = 1
            by_form[place, -1] = found.by_bytes
            if found.fate is not None:
                by_form[place, 2 + FATES.index(found.fate)] = 1
        table = by_form[runs.form_of]
        # Whitespace and zero-width runs are disjoint, so that one look-up serves both. A token in
        # one of whitespace holds no ink; zero-width characters are ink, but rare.
        blank = None if runs.any_zero_width else ~reading.inked
        table[:, 1] = tokens_within(reading.spans, runs.starts, runs.ends, blank)
        kind_of = np.array(kinds, dtype=np.int64)[runs.form_of]
        return RunTable(kind_of, table, reading.stretch.document_of(runs.starts))


def _lost_characters(reading: Reading) -> list[LostCharacters]:
    fates = {
        "unknown": reading.unknown_characters,
        "byte-spelled": reading.byte_spelled_characters,
        "dropped": reading.dropped_characters,
    }
    return [_by_character(reading.stretch, flagged, fate) for fate, flagged in fates.items()]


def _by_character(stretch: Stretch, flagged: Bools, fate: str) -> LostCharacters:
    places = np.flatnonzero(flagged)
    codes = stretch.document_of(places) * CODE_POINTS + stretch.points[places]
    distinct, counts = np.unique(codes, return_counts=True)
    documents, points = np.divmod(distinct, CODE_POINTS)
    return LostCharacters(fate, points, documents, counts.astype(np.int64))
