"""The terms of a glossary in documents, slowly: every stretch between two word boundaries is read,
every document is encoded whole, every token is asked which characters it holds."""

from __future__ import annotations

from collections import Counter
from typing import NamedTuple

from tests.oracle.spans import Token, spans
from tests.oracle.text import (
    LINE_ENDS,
    _segments_between_word_boundaries,
    is_whitespace,
    words_of,
)
from tests.oracle.vocabularies import OracleVocabulary


class Found(NamedTuple):
    """An occurrence, and how it is broken; ``pieces`` are the characters that each token holds."""

    term: str
    form: str
    pieces: tuple[str, ...]
    broken_words: int
    unknown: bool
    byte_spelled: bool
    dropped: bool


def sought(text: str) -> str:
    """Return the text as terms are compared: full case folding, whitespace as one space."""
    spaced = "".join(" " if is_whitespace(character) else character for character in text)
    return " ".join(part for part in spaced.split(" ") if part).casefold()


def occurrences(text: str, spellings: dict[str, str]) -> list[tuple[int, int, str]]:
    """Return start, stop and term of each occurrence; ``spellings`` leads to the term of each."""
    terms = {sought(spelling): term for spelling, term in spellings.items()}
    segments = _segments_between_word_boundaries(text)
    starts = [start for start, _ in segments]
    stops = [stop for _, stop in segments]
    longest = max(map(len, terms))
    found = []
    for start in starts:
        for stop in (stop for stop in stops if stop > start):
            part = text[start:stop]
            if LINE_ENDS & set(part) or len(sought(part)) > longest:
                break
            if is_whitespace(part[0]) or is_whitespace(part[-1]):
                continue
            if sought(part) in terms:
                found.append((start, stop, terms[sought(part)]))
    taken: list[tuple[int, int, str]] = []
    for start, stop, term in sorted(found, key=lambda f: (-len(sought(text[f[0] : f[1]])), f[0])):
        if all(stop <= other_start or start >= other_stop for other_start, other_stop, _ in taken):
            taken.append((start, stop, term))
    return sorted(taken)


def terms_of(
    texts: list[str], spellings: dict[str, str], vocabulary: OracleVocabulary
) -> Counter[Found]:
    """Return how often each term occurs in each form and is broken in each way."""
    counted: Counter[Found] = Counter()
    for text in texts:
        places = occurrences(text, spellings)
        tokens = spans(text, vocabulary) if places else []
        for start, stop, term in places:
            counted[_found(text, start, stop, term, tokens, vocabulary)] += 1
    return counted


def _found(
    text: str, start: int, stop: int, term: str, tokens: list[Token], vocabulary: OracleVocabulary
) -> Found:
    inside = set(range(start, stop))
    ink = {place for place in inside if not is_whitespace(text[place])}
    touching = [token for token in tokens if token.positions & inside]
    covered = set().union(*(token.positions for token in touching)) if touching else set()
    by_bytes = [
        token
        for token in touching
        if token.id in vocabulary.byte_ids
        and any(not is_whitespace(text[place]) for place in token.positions)
    ]
    broken = 0
    for word_start, word_stop in words_of(text, "icu"):
        if start <= word_start < stop:
            word = set(range(word_start, word_stop))
            broken += sum(bool(token.positions & word) for token in tokens) >= 2
    return Found(
        term,
        text[start:stop],
        tuple(
            "".join(text[place] for place in sorted(token.positions & inside)) for token in touching
        ),
        broken,
        any(token.is_unknown and token.positions & ink for token in touching),
        any(token.positions & ink for token in by_bytes),
        bool(ink - covered) or _lost_byte(text, ink, touching, vocabulary),
    )


def _lost_byte(text: str, ink: set[int], tokens: list[Token], vocabulary: OracleVocabulary) -> bool:
    """Tell whether a character has a byte that no entry is and no token over it holds."""
    for place in ink:
        lacking = vocabulary.missing_bytes & set(text[place].encode())
        held = (
            {
                byte
                for token in tokens
                if place in token.positions
                for byte in vocabulary.entry_bytes(token.id)
            }
            if lacking
            else set()
        )
        if lacking - held:
            return True
    return False
