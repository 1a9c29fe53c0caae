"""Measures documents under several vocabularies: by pieces where that is proved, else whole."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import partial

import numpy as np

from auditor.encoding.added import AddedContents
from auditor.encoding.cutting import FIRST, LAST, Cut, Places, cut
from auditor.encoding.ledger import Ledger
from auditor.encoding.measures import Columns, text_columns
from auditor.encoding.weaving import Counted, woven
from auditor.encoding.whole import Contents, Measured, RunTable, WholeTexts
from auditor.errors import AuditError
from auditor.text.stretch import Edges, Stretch
from auditor.text.whitespace import find_runs
from auditor.text.words import count_graphemes
from auditor.vocabulary.engine import Bools, Ints
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.separation import Separation, separate

Sink = Callable[[int, Contents], None]

# A batch whose pieces are new by more than this share of its characters is encoded whole.
_TOO_DIVERSE = 0.4
# The first documents of a process, and about one in this many after them, are encoded both ways.
_CHECKED_FIRST = 32
_CHECKED_AFTER = 401


class SeparationError(AuditError):
    """A document whose pieces did not add up to the whole: the run must be measured whole."""


@dataclass
class Tale:
    """How documents were encoded: goes into `run.json`, never into a figure."""

    whole: int = 0
    by_pieces: int = 0
    pieces: int = 0
    distinct_pieces: int = 0
    checked: int = 0
    reasons: dict[str, str] = field(default_factory=dict)

    def merge(self, other: Tale) -> None:
        """Add what another process tells."""
        self.whole += other.whole
        self.by_pieces += other.by_pieces
        self.pieces += other.pieces
        self.distinct_pieces += other.distinct_pieces
        self.checked += other.checked
        self.reasons.update(other.reasons)


class Documents:
    """Measures stretches of documents; ``sink`` takes in what texts hold.

    With ``whole`` no document is cut; with ``kinds`` kinds of text are counted too. Which way is
    taken never changes a figure.
    """

    def __init__(
        self,
        vocabularies: list[Vocabulary],
        sink: Sink,
        *,
        words: str,
        graphemes: bool,
        parse_control: bool,
        whole: bool,
        kinds: bool = False,
    ) -> None:
        self.tale = Tale()
        self._vocabularies = vocabularies
        self._sink = sink
        self._words = words
        self._graphemes = graphemes
        self._whole = [
            WholeTexts(v, parse_control=parse_control, kinds=kinds) for v in vocabularies
        ]
        self._separations = self._separate(whole=whole)
        # Places in the list of vocabularies: those measured by pieces, and the others.
        self._cut = [p for p, s in enumerate(self._separations) if s is not None]
        self._uncut = [p for p, s in enumerate(self._separations) if s is None]
        self._later = [
            WholeTexts(v, parse_control=parse_control, separation=s, kinds=kinds) if s else None
            for v, s in zip(vocabularies, self._separations, strict=True)
        ]
        held = [s for s in self._separations if s is not None]
        self._places = Places(held, kinds=kinds) if held else None
        self._added = AddedContents(sorted({c for s in held for c in s.whole_for}))
        self._ledger = Ledger(len(self._cut), self._measure_pieces, self._sink_pieces)

    def _separate(self, *, whole: bool) -> list[Separation | None]:
        found: list[Separation | None] = []
        for vocabulary in self._vocabularies:
            answer = "asked for with --whole" if whole else separate(vocabulary)
            if isinstance(answer, str):
                self.tale.reasons[vocabulary.name] = answer
            found.append(None if isinstance(answer, str) else answer)
        return found

    def measure(self, stretch: Stretch, source: int, lines: Ints) -> Counted:
        """Return the measures of ``stretch``, whose documents stand at ``lines`` of ``source``."""
        if self._places is None:
            return self._measure_whole(stretch, source, lines)
        apart = self._must_be_whole(stretch)
        if apart.all():
            return self._measure_whole(stretch, source, lines)
        if not apart.any():
            return self._measure_cut(self._places, stretch, source, lines)
        parts = []
        cutting = partial(self._measure_cut, self._places)
        for chosen, measure in ((apart, self._measure_whole), (~apart, cutting)):
            places = np.flatnonzero(chosen)
            texts = [stretch.texts[place] for place in places.tolist()]
            part = Stretch(texts, words=self._words)
            parts.append((places, measure(part, source, lines[places])))
        return woven(parts, len(stretch))

    def finish(self) -> None:
        """Hand over what the ledger still holds."""
        self._ledger.empty()

    def _must_be_whole(self, stretch: Stretch) -> Bools:
        """Return which documents are encoded whole: empty ones, and those with an added token."""
        empty: Bools = np.diff(stretch.bounds) == 0
        return empty | self._added.in_texts(stretch.texts)

    def _measure_whole(self, stretch: Stretch, source: int, lines: Ints) -> Counted:
        self.tale.whole += len(stretch)
        measured = self._whole_measures(stretch, range(len(self._whole)))
        once = np.ones(len(stretch), dtype=np.int64)
        sources = np.full(len(stretch), source, dtype=np.int64)
        for place, found in enumerate(measured):
            self._sink(place, Contents(found, once, sources, lines))
        text = text_columns(stretch, graphemes=self._count_graphemes(stretch))
        return Counted(text, [m.columns for m in measured], [m.runs for m in measured])

    def _whole_measures(self, stretch: Stretch, places: range | list[int]) -> list[Measured]:
        runs = find_runs(stretch)
        return [self._whole[place].measure(stretch, runs) for place in places]

    def _measure_cut(self, places: Places, stretch: Stretch, source: int, lines: Ints) -> Counted:
        pieces = cut(stretch, places)
        rows = self._ledger.rows_of(pieces)
        new = pieces.distinct(np.flatnonzero(rows < 0))
        if new.characters > _TOO_DIVERSE * len(stretch.points) + 50_000:
            return self._measure_whole(stretch, source, lines)
        by_piece = self._ledger.take_in(pieces, rows, new, source, lines)
        self._check(stretch, by_piece, pieces, lines)
        self._ledger.count(by_piece)
        self._tell(pieces)
        text = self._ledger.text_columns(by_piece, pieces.bounds)
        text["documents"] = np.ones(len(stretch), dtype=np.int64)
        columns: list[Columns] = [{}] * len(self._vocabularies)
        runs: list[RunTable | None] = [None] * len(self._vocabularies)
        for order, place in enumerate(self._cut):
            columns[place] = self._ledger.columns(order, by_piece, pieces.bounds)
            runs[place] = self._ledger.runs(order, by_piece, pieces.bounds)
        self._ledger.release()
        self._add_uncut(stretch, source, lines, columns, runs)
        return Counted(text, columns, [table for table in runs if table is not None])

    def _add_uncut(
        self,
        stretch: Stretch,
        source: int,
        lines: Ints,
        columns: list[Columns],
        runs: list[RunTable | None],
    ) -> None:
        """Measure the vocabularies for which no cut is proved."""
        if not self._uncut:
            return
        once = np.ones(len(stretch), dtype=np.int64)
        sources = np.full(len(stretch), source, dtype=np.int64)
        for place, found in zip(
            self._uncut, self._whole_measures(stretch, self._uncut), strict=True
        ):
            columns[place], runs[place] = found.columns, found.runs
            self._sink(place, Contents(found, once, sources, lines))

    def _tell(self, pieces: Cut) -> None:
        self.tale.by_pieces += len(pieces.bounds) - 1
        self.tale.pieces += len(pieces)
        self.tale.distinct_pieces = self._ledger.measured

    def _measure_pieces(self, texts: list[str], standing: Ints) -> tuple[Columns, list[Measured]]:
        edges = Edges(standing >= FIRST, standing % FIRST == LAST)
        stretch = Stretch(texts, words=self._words, edges=edges)
        runs = find_runs(stretch)
        begins = bool(edges.begins[0])
        encoders = [self._whole[p] if begins else self._later[p] for p in self._cut]
        measured = [encoder.measure(stretch, runs) for encoder in encoders if encoder is not None]
        return text_columns(stretch, graphemes=self._count_graphemes(stretch)), measured

    def _sink_pieces(self, order: int, contents: Contents) -> None:
        self._sink(self._cut[order], contents)

    def _count_graphemes(self, stretch: Stretch) -> Ints | None:
        if not self._graphemes:
            return None
        return np.array([count_graphemes(text) for text in stretch.texts], dtype=np.int64)

    def _check(self, stretch: Stretch, by_piece: Ints, pieces: Cut, lines: Ints) -> None:
        """Encode some documents whole too, and compare ids and every column."""
        chosen = [p for p, text in enumerate(stretch.texts) if self._is_checked(text, p)]
        if not chosen:
            return
        self.tale.checked += len(chosen)
        part = Stretch([stretch.texts[place] for place in chosen], words=self._words)
        whole = self._whole_measures(part, self._cut)
        text = text_columns(part, graphemes=self._count_graphemes(part))
        for order, found in enumerate(whole):
            for place, document in enumerate(chosen):
                rows = by_piece[pieces.bounds[document] : pieces.bounds[document + 1]]
                if not self._agrees(order, rows, found, text, place):
                    name = self._vocabularies[self._cut[order]].name
                    raise SeparationError(
                        f"pieces and whole differ under {name}.",
                        hint="Measure again with --whole.",
                        where=f"line {lines[document]}",
                    )

    def _is_checked(self, text: str, place: int) -> bool:
        if self.tale.checked == 0:
            return place < _CHECKED_FIRST
        digest = hashlib.blake2b(text.encode(), digest_size=4).digest()
        return int.from_bytes(digest, "big") % _CHECKED_AFTER == 0

    def _agrees(self, order: int, rows: Ints, whole: Measured, text: Columns, place: int) -> bool:
        """Return whether one document's pieces, ``rows``, add up to what it is as a whole."""
        one = np.array([0, len(rows)])
        ids = self._ledger.ids(order, rows)
        begin, end = whole.bounds[place : place + 2]
        if not np.array_equal(ids, whole.ids[begin:end]):
            return False
        ours = {**self._ledger.text_columns(rows, one), **self._ledger.columns(order, rows, one)}
        theirs = {**text, **whole.columns}
        names = set(theirs) - {"documents"}
        return all(ours[name][0] == theirs[name][place] for name in names) and _same_runs(
            self._ledger.runs(order, rows, one), whole.runs, place
        )


def _same_runs(ours: RunTable, theirs: RunTable, place: int) -> bool:
    mine = theirs.document_of == place
    return _by_kind(ours.kind_of, ours.table) == _by_kind(theirs.kind_of[mine], theirs.table[mine])


def _by_kind(kinds: Ints, table: Ints) -> dict[int, list[int]]:
    return {kind: table[kinds == kind].sum(axis=0).tolist() for kind in set(kinds.tolist())}
