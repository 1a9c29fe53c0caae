"""Broken words, written all at once, against one word and one token after another."""

from __future__ import annotations

import json
from collections import Counter

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.encoding.broken import LONGEST_SHOWN, BrokenWords
from auditor.encoding.measures import Reading
from auditor.tallies.words import BrokenWord
from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularySpec, open_vocabulary
from auditor.vocabulary.spans import Spans, correct
from tests.unit.encoding.random_vocabularies import KINDS, descriptions

PARTS = [*"abAé1 .\n", "中", "\u0301", "a·b", "·", "<s>", "ß", "🌊", "ab" * 40, "\u0e01"]
documents = st.lists(st.lists(st.sampled_from(PARTS), max_size=9).map("".join), max_size=4)


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("broken")


def reading_of(vocabulary, texts):
    stretch = Stretch(texts)
    spans = correct(vocabulary.engine.encode(texts), stretch, vocabulary.inventory)
    return Reading(stretch, spans, vocabulary.engine, vocabulary.inventory, parse_control=True)


def found_in(reading, inventory):
    """Return (document, row) of every broken word that is found, with its occurrences."""
    found = BrokenWords(inventory).find(reading)
    columns = zip(*(column.to_pylist() for column in found.rows.columns), strict=True)
    rows = [BrokenWord(*row) for row in columns]
    pairs = zip(found.document_of.tolist(), found.row_of.tolist(), strict=True)
    return Counter((document, rows[row]) for document, row in pairs)


def expected_in(reading, inventory):
    """Return the same, word by word and token by token."""
    spans, joined, bounds = reading.spans, reading.stretch.joined, reading.stretch.bounds
    tokens = list(zip(spans.ids.tolist(), spans.starts.tolist(), spans.ends.tolist(), strict=True))
    unknown = reading.unknown.tolist()
    found = Counter()
    words = reading.stretch.words
    for begin, end in zip(words.starts.tolist(), words.ends.tolist(), strict=True):
        over = [n for n, (_, s, e) in enumerate(tokens) if s < e and s < end and e > begin]
        lost = any(unknown[n] for n in over)
        if len(over) < 2 and not lost:
            continue
        over.sort(key=lambda n: tokens[n][1])
        shown = list(pieces(joined, inventory, [tokens[n] for n in over], begin, end))
        row = (shortened(joined[begin:end]), shortened("·".join(shown)), len(over), int(lost))
        document = int(np.searchsorted(bounds, begin, side="right")) - 1
        found[document, BrokenWord(*row)] += 1
    return found


def pieces(joined, inventory, over, begin, end):
    reached = begin
    for number, start, stop in over:
        stop = min(stop, end)
        spelled = inventory.entry_bytes
        if inventory.stands_for_bytes[number]:
            if spelled is None:
                yield f"⟨{inventory.entries[number][3:5]}⟩"
            else:
                yield f"⟨{spelled[number].hex(' ').upper()}⟩"
        elif number == inventory.unknown or stop <= reached:
            yield f"⟨{inventory.entries[number]}⟩"
        else:
            yield joined[max(start, reached) : stop]
        reached = max(reached, stop)


def shortened(text):
    return text if len(text) <= LONGEST_SHOWN else text[:LONGEST_SHOWN] + "…"


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=40)
@given(data=st.data())
def test_broken_words_of_random_vocabularies(kind, data, folder):
    """Every kind; long words, words that hold a dot, bytes and unknown tokens among them."""
    path = folder / "tokenizer.json"
    path.write_text(json.dumps(data.draw(descriptions(kind))))
    vocabulary = open_vocabulary(VocabularySpec(str(path)))
    reading = reading_of(vocabulary, data.draw(documents))
    assert found_in(reading, vocabulary.inventory) == expected_in(reading, vocabulary.inventory)


@settings(max_examples=150)
@given(
    text=st.text("ab·é 1", max_size=25),
    drawn=st.lists(st.tuples(st.integers(0, 24), st.integers(0, 5)), max_size=12),
)
def test_broken_words_under_any_spans(text, drawn, folder):
    """Spans with gaps, overlaps and in no order, as some library may report them."""
    path = folder / "tokenizer.json"
    entries = {"a": 0, "b": 1, "<unk>": 2}
    model = {"type": "BPE", "vocab": entries, "merges": [], "unk_token": "<unk>"}
    path.write_text(json.dumps({"version": "1.0", "added_tokens": [], "model": model}))
    vocabulary = open_vocabulary(VocabularySpec(str(path)))
    stretch, size = Stretch([text]), len(text)
    starts = np.array([min(start, size) for start, _ in drawn], dtype=np.int64)
    ends = np.array([min(start + width, size) for start, width in drawn], dtype=np.int64)
    # Each token its own id, as far as it goes: words are remembered by their tokens' ids.
    ids = (starts + ends) % 3
    spans = Spans(ids, starts, ends, np.array([0, len(ids)]))
    reading = Reading(stretch, spans, vocabulary.engine, vocabulary.inventory, parse_control=False)
    inventory = vocabulary.inventory
    for word in range(len(stretch.words)):
        one = word_alone(reading, word)
        assert found_in(one, inventory) == expected_in(one, inventory)


def word_alone(reading, place):
    """Return the reading with one of its words only."""
    alone = Reading(
        Stretch([reading.stretch.joined]), reading.spans, reading.engine, reading.inventory,
        parse_control=False,
    )  # fmt: skip
    words = reading.stretch.words
    one = type(words)(words.starts[place : place + 1], words.ends[place : place + 1])
    alone.stretch.__dict__["words"] = one
    return alone
