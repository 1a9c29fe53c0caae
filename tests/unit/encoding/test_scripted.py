"""Which scripts and kinds of words tokens are spent on, against the oracle's tokens."""

from __future__ import annotations

from collections import Counter

import pytest

from auditor.encoding.measures import Reading
from auditor.encoding.scripted import (
    SPENT_ON,
    by_script,
    costly_characters,
    letters_by_script,
    spent_on,
)
from auditor.text.scripts import NAMES, script
from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularySpec, open_vocabulary
from auditor.vocabulary.spans import correct
from tests import oracle
from tests.oracle.text import is_whitespace, words_of
from tests.unit.encoding.test_truncation import notices
from tests.unit.runs.conftest import DEMO, TROUBLE, VOCABULARIES

TEXTS = [*TROUBLE, *notices()]


def reading_of(folder):
    vocabulary = open_vocabulary(VocabularySpec(str(folder)))
    stretch = Stretch(TEXTS)
    spans = correct(vocabulary.engine.encode(TEXTS), stretch, vocabulary.inventory)
    return Reading(stretch, spans, vocabulary.engine, vocabulary.inventory, parse_control=True)


def opened(folder):
    model = folder / "tokenizer.model"
    if model.exists():
        return oracle.open_sentencepiece(model)
    return oracle.open_tokenizers(folder / "tokenizer.json")


def own_script(text, positions):
    """Return the script of a token: of its first character that has one of its own."""
    held = [script(text[place]) for place in sorted(positions)]
    return next((s for s in held if s not in ("Common", "Inherited")), (held or ["Common"])[0])


def spells_bytes(text, token, vocabulary):
    inked = any(not is_whitespace(text[place]) for place in token.positions)
    return token.id in vocabulary.byte_ids and inked


def kind_of(text, token, words, tokens, vocabulary):
    """Return what a token is spent on."""
    if spells_bytes(text, token, vocabulary):
        return "byte_spelled"
    touched = [w for w in words if token.positions & set(range(*w))]
    if not touched:
        return "between_words"
    alone = sum(bool(t.positions & set(range(*touched[0]))) for t in tokens) == 1
    return "whole_words" if alone else "broken_words"


@pytest.mark.parametrize("name", VOCABULARIES)
def test_every_token_and_character_is_counted_where_the_oracle_counts_it(name):
    """Scripts of characters and tokens, and what tokens are spent on, of every text."""
    folder = DEMO / "vocabularies" / name
    reading, vocabulary = reading_of(folder), opened(folder)
    found = by_script(reading)
    rows = {
        (document, NAMES[number]): tuple(counts)
        for document, number, counts in zip(
            found.documents.tolist(), found.scripts.tolist(), found.counts.tolist(), strict=True
        )
    }
    spent = spent_on(reading)
    for place, text in enumerate(TEXTS):
        tokens, words = oracle.spans(text, vocabulary), words_of(text, "icu")
        characters = Counter(script(c) for c in text)
        of_tokens = Counter(own_script(text, token.positions) for token in tokens)
        spelled = {p for t in tokens if spells_bytes(text, t, vocabulary) for p in t.positions}
        as_bytes = Counter(script(text[p]) for p in spelled if not is_whitespace(text[p]))
        for key in characters.keys() | of_tokens.keys():
            expected = (characters[key], as_bytes[key], of_tokens[key])
            assert rows.pop((place, key)) == expected, (text, key)
        kinds = Counter(kind_of(text, token, words, tokens, vocabulary) for token in tokens)
        assert {name: int(spent[name][place]) for name in SPENT_ON} == {
            name: kinds[name] for name in SPENT_ON
        }, text
    assert rows == {}


def test_letters_are_those_of_a_script_of_their_own():
    """Marks, digits and signs are no letters; the sign of an ordinal is Latin."""
    found = letters_by_script(Stretch(["aб1 é\u0301", "漢かº"]))
    held = {
        (document, NAMES[number]): count
        for document, number, [count] in zip(
            found.documents.tolist(), found.scripts.tolist(), found.counts.tolist(), strict=True
        )
    }
    assert held == {
        (0, "Latin"): 2, (0, "Cyrillic"): 1, (1, "Han"): 1, (1, "Hiragana"): 1, (1, "Latin"): 1
    }  # fmt: skip


def test_byte_spelled_characters_and_their_tokens():
    """Byte-level: every wave takes several byte tokens, as the entries' own bytes say."""
    reading = reading_of(DEMO / "vocabularies" / VOCABULARIES[0])
    found = costly_characters(reading)
    waves = found.scripts == ord("😀")
    place = TEXTS.index("😀" * 40)
    [row] = found.counts[waves & (found.documents == place)].tolist()
    begin, end = reading.spans.bounds[place : place + 2]
    assert row == [40, end - begin]
