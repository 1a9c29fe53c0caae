"""The integers of one document."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field

from tests.oracle.fates import Prober
from tests.oracle.spans import Token, spans
from tests.oracle.text import Run, is_whitespace, runs_of, words_of
from tests.oracle.vocabularies import SPACE_MARKER, OracleVocabulary


@dataclass
class WhitespaceRow:
    """One kind of whitespace: occurrences, tokens wholly inside, fates, written by bytes."""

    occurrences: int = 0
    tokens: int = 0
    fates: Counter[str | None] = field(default_factory=Counter)
    bytes: int = 0


@dataclass
class Measured:
    """One document: named integers, its token ids, and its whitespace by kind."""

    integers: Counter[str]
    ids: list[int]
    whitespace: dict[str, WhitespaceRow]


class DocumentMeasurer:
    """Measures documents one by one under one setting."""

    def __init__(
        self, vocabulary: OracleVocabulary, words: str, control_strings: str, limit: int | None
    ) -> None:
        self._vocabulary = vocabulary
        self._words = words
        self._control_strings = control_strings
        self._limit = limit
        self._prober = Prober(vocabulary, control_strings)
        self._alteration: dict[str, str] = {}

    def __call__(self, text: str) -> Measured:
        tokens = spans(text, self._vocabulary, self._control_strings)
        integers: Counter[str] = Counter(
            documents=1,
            bytes=len(text.encode("utf-8")),
            characters=len(text),
            tokens=len(tokens),
            control_tokens=sum(token.is_control for token in tokens),
            unknown_tokens=sum(token.is_unknown for token in tokens),
        )
        if self._limit is not None:
            overhead = self._vocabulary.overhead
            room = max(0, self._limit - overhead)
            integers["truncated_tokens"] = max(0, len(tokens) - room)
            integers["truncated_documents"] = int(len(tokens) + overhead > self._limit)
        ids = [token.id for token in tokens]
        if self._vocabulary.has_decoder:
            integers["lossless_documents"] = int(self._vocabulary.decode(ids) == text)
        self._measure_characters(text, tokens, integers)
        self._measure_words(text, tokens, integers)
        for flag, counted in (
            ("documents_with_unknown", "unknown_tokens"),
            ("documents_with_byte_tokens", "byte_tokens"),
            ("documents_with_control_strings", "control_tokens"),
        ):
            integers[flag] = int(integers[counted] > 0)
        return Measured(integers, ids, self._measure_whitespace(text, tokens))

    def _measure_characters(self, text: str, tokens: list[Token], integers: Counter[str]) -> None:
        visible = {place for place, character in enumerate(text) if not is_whitespace(character)}
        byte_tokens = [
            token
            for token in tokens
            if token.id in self._vocabulary.byte_ids and token.positions & visible
        ]
        unknown = [token for token in tokens if token.is_unknown]
        integers["visible_characters"] = len(visible)
        integers["byte_tokens"] = len(byte_tokens)
        integers["byte_spelled_characters"] = len(visible & _union(byte_tokens))
        integers["unknown_characters"] = len(visible & _union(unknown))
        integers["whitespace_tokens"] = sum(
            bool(token.positions) and not token.positions & visible for token in tokens
        )
        dropped = visible - _union(tokens)
        dropped |= self._characters_with_a_lost_byte(text, tokens, visible)
        integers["dropped_characters"] = len(dropped)

    def _characters_with_a_lost_byte(
        self, text: str, tokens: list[Token], visible: set[int]
    ) -> set[int]:
        """Characters with a byte that no covering token holds and no entry could supply."""
        missing = self._vocabulary.missing_bytes
        if not missing:
            return set()
        suspects = {
            place: missing & set(text[place].encode("utf-8"))
            for place in visible
            if missing & set(text[place].encode("utf-8"))
        }
        lost = set()
        for place, bytes_without_entry in suspects.items():
            held = set()
            for token in tokens:
                if place in token.positions:
                    held |= set(self._vocabulary.entry_bytes(token.id))
            if bytes_without_entry - held:
                lost.add(place)
        return lost

    def _measure_words(self, text: str, tokens: list[Token], integers: Counter[str]) -> None:
        tokens_at: list[set[int]] = [set() for _ in text]
        for number, token in enumerate(tokens):
            for place in token.positions:
                tokens_at[place].add(number)
        for start, stop in words_of(text, self._words):
            touching = set().union(*tokens_at[start:stop])
            has_unknown = any(tokens[number].is_unknown for number in touching)
            integers["words"] += 1
            integers["pieces"] += len(touching)
            integers["continued_words"] += len(touching) >= 2
            if has_unknown:
                integers["unknown_words"] += 1
            else:
                integers["known_words"] += 1
                integers["pieces_of_known_words"] += len(touching)
            integers[self._alteration_of(text[start:stop])] += 1

    def _alteration_of(self, word: str) -> str:
        """Return "unaltered_words", "case_folded_words" or "changed_words"."""
        if word not in self._alteration:
            written = self._vocabulary.normalise(word)
            written = written.replace(" ", "").replace(SPACE_MARKER, "")
            self._alteration[word] = alteration(word, written)
        return self._alteration[word]

    def _measure_whitespace(self, text: str, tokens: list[Token]) -> dict[str, WhitespaceRow]:
        rows: dict[str, WhitespaceRow] = {}
        run_at: dict[int, Run] = {}
        for run in runs_of(text):
            probe = self._prober(run)
            row = rows.setdefault(run.kind, WhitespaceRow())
            row.occurrences += 1
            row.fates[probe.fate] += 1
            row.bytes += probe.uses_bytes
            run_at.update(dict.fromkeys(range(run.start, run.stop), run))
        for token in tokens:
            touched = {run_at.get(place) for place in token.positions}
            if len(touched) == 1 and (inside := touched.pop()) is not None:
                rows[inside.kind].tokens += 1
        return rows


def alteration(word: str, written: str) -> str:
    """Compare a word with what the normaliser wrote, inserted spaces and markers removed."""
    if written == word:
        return "unaltered_words"
    # Full case folding by the standard library: CaseFolding.txt, statuses C and F.
    equal_but_for_case = word.casefold() == written.casefold()
    return "case_folded_words" if equal_but_for_case else "changed_words"


def _union(tokens: list[Token]) -> set[int]:
    return set().union(*(token.positions for token in tokens))
