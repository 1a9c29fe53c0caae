"""Which characters of the document each token covers: FIGURES' span, rules (a), (b) and (c)."""

from __future__ import annotations

from dataclasses import dataclass

from tests.oracle.text import is_mark, is_whitespace, strip_whitespace
from tests.oracle.vocabularies import OracleVocabulary, Reported


@dataclass
class Token:
    """One token and the positions of the characters in its span."""

    id: int
    entry: str
    positions: set[int]
    is_control: bool = False  # a control token that the text itself produced
    is_unknown: bool = False  # the unknown token, produced by no control string


def spans(text: str, vocabulary: OracleVocabulary, control_strings: str = "parse") -> list[Token]:
    """Return the tokens of one document, in order, with their corrected spans."""
    tokens = [
        Token(reported.id, vocabulary.entry(reported.id), _covered(text, reported, vocabulary))
        for reported in vocabulary.encode(text, control_strings)
    ]
    _give_marks_to_the_character_before(text, tokens)
    parsed = vocabulary.parses_control_strings and control_strings == "parse"
    for token in tokens:
        token.is_control = parsed and token.id in vocabulary.control_ids
        # The model itself emits these too: only the spelling tells.
        if token.id == vocabulary.unknown_id or token.id in vocabulary.byte_ids:
            token.is_control = parsed and _spells_its_own_entry(text, token, vocabulary)
        token.is_unknown = token.id == vocabulary.unknown_id and not token.is_control
    return tokens


def _covered(text: str, reported: Reported, vocabulary: OracleVocabulary) -> set[int]:
    is_empty = reported.start == reported.stop
    stop = reported.start + 1 if is_empty else reported.stop
    positions = {position for position in range(reported.start, stop) if position < len(text)}
    holds_whitespace = any(is_whitespace(text[position]) for position in positions)
    if not holds_whitespace and vocabulary.is_space_marker(reported.id):
        return set()  # rule (a)
    return positions  # rule (b) where the range is empty


def _give_marks_to_the_character_before(text: str, tokens: list[Token]) -> None:
    """Rule (c), from left to right, so that a run of marks follows its first character."""
    covering: list[list[Token]] = [[] for _ in text]
    for token in tokens:
        for position in token.positions:
            covering[position].append(token)
    for position in range(1, len(text)):
        if not covering[position] and is_mark(text[position]):
            covering[position] = covering[position - 1]
            for token in covering[position]:
                token.positions.add(position)


def _spells_its_own_entry(text: str, token: Token, vocabulary: OracleVocabulary) -> bool:
    if token.id not in vocabulary.control_ids or not token.positions:
        return False
    written = text[min(token.positions) : max(token.positions) + 1]
    return strip_whitespace(written) == token.entry
