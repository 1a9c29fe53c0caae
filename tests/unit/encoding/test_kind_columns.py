"""Kinds of text by pieces are what they are whole, and add up; tokens by kind by a slow rule."""

from __future__ import annotations

from collections import Counter

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import auditor.encoding.documents as encoding
from auditor.encoding.documents import Documents
from auditor.encoding.kinds import CHARACTER_COLUMNS, LISTED, TOKEN_COLUMNS
from auditor.encoding.whole import WholeTexts
from auditor.tallies.words import WordsTally
from auditor.text.kinds import KINDS as TEXT_KINDS
from auditor.text.kinds import kinds_of
from auditor.text.stretch import Stretch
from auditor.text.whitespace import find_runs
from auditor.vocabulary.spans import correct
from tests.unit.encoding.random_vocabularies import KINDS, descriptions
from tests.unit.encoding.test_pieces import data_for, opened
from tests.unit.small_vocabularies import byte_level

ALPHABET = [*"aAbmg15.,:/-=_(' \n\t", "mg", "\r\n", "é", "\u0301", "<s>", "===", "👍", "\u200d"]
document = st.lists(st.sampled_from(ALPHABET), max_size=16).map("".join)
texts = st.lists(document, min_size=1, max_size=8)


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("kinds")


@pytest.fixture(autouse=True)
def always_by_pieces(monkeypatch):
    monkeypatch.setattr(encoding, "_TOO_DIVERSE", 99.0)


def measured(vocabulary, documents, *, whole, kinds=True):
    """Return columns a document, the broken stretches with counts, and how it was measured."""
    tallies = {kind: WordsTally() for kind in LISTED}

    def take(_, contents):
        for kind, broken in contents.measured.broken_kinds.items():
            counts = np.bincount(
                broken.row_of, contents.weights[broken.document_of], minlength=len(broken.rows)
            )
            tallies[kind].add_table(broken.rows, counts.astype(np.int64))

    measuring = Documents(
        [vocabulary], take, words="icu", graphemes=False, parse_control=True, whole=whole,
        kinds=kinds,
    )  # fmt: skip
    columns = []
    for begin in range(0, len(documents), 3):
        batch = documents[begin : begin + 3]
        found = measuring.measure(Stretch(batch), 0, np.arange(len(batch)))
        rows = {**found.text, **found.columns[0]}
        columns.append({name: values.tolist() for name, values in sorted(rows.items())})
    measuring.finish()
    return columns, {kind: tally.counts() for kind, tally in tallies.items()}, measuring.tale


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=25, deadline=None)
@given(data=st.data())
def test_pieces_add_up_to_the_whole(kind, folder, data):
    description, documents = data.draw(descriptions(kind)), data.draw(texts)
    vocabulary = opened(description, folder)
    by_pieces = measured(vocabulary, documents, whole=False)
    assert by_pieces[:2] == measured(vocabulary, documents, whole=True)[:2]
    for batch in by_pieces[0]:
        for names, total in ((CHARACTER_COLUMNS, "characters"), (TOKEN_COLUMNS, "tokens")):
            sums = [sum(values) for values in zip(*(batch[n] for n in names), strict=True)]
            assert sums == batch[total]


def test_documents_are_cut_with_kinds(folder):
    """The test above is not empty: pieces are fewer than without kinds, and more than documents."""
    vocabulary = opened(data_for("byte-level"), folder)
    text = ["a b (1.5 mg)\nb, a"] * 2
    ours = measured(vocabulary, text, whole=False)[2].pieces
    assert 2 < ours < measured(vocabulary, text, whole=False, kinds=False)[2].pieces


def test_nothing_of_kinds_without_the_option(folder):
    columns, tallies, _ = measured(
        opened(data_for("byte-level"), folder), ["a 15"], whole=False, kinds=False
    )
    assert not [name for name in columns[0] if name.startswith("kind_")]
    assert not any(tally["rows"] for tally in tallies.values())


def slow_kind(text, kinds, start, end):
    """Return the kind of one token by its rule, character by character."""
    if start == end:
        return "(no text)"
    held = [(text[p], TEXT_KINDS[kinds[p]]) for p in range(start, end)]
    ink = {kind for character, kind in held if not character.isspace()}
    found = ink or {kind for _, kind in held}
    return found.pop() if len(found) == 1 else "(several)"


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=15, deadline=None)
@given(data=st.data())
def test_tokens_by_the_slow_rule(kind, folder, data):
    description, text = data.draw(descriptions(kind)), data.draw(document)
    vocabulary = opened(description, folder)
    stretch = Stretch([text])
    measuring = WholeTexts(vocabulary, parse_control=True, kinds=True)
    spans = correct(vocabulary.engine.encode([text]), stretch, vocabulary.inventory)
    kinds = kinds_of(stretch).tolist()
    slow = Counter(
        slow_kind(text, kinds, start, end)
        for start, end in zip(spans.starts.tolist(), spans.ends.tolist(), strict=True)
    )
    columns = measuring.measure(stretch, find_runs(stretch)).columns
    ours = {name.partition(":")[2]: int(columns[name][0]) for name in TOKEN_COLUMNS}
    assert ours == {kind: slow[kind] for kind in ours}


def test_a_number_and_how_it_is_broken(tmp_path):
    """1013.25 by the merges 1+0 and 1+3, 2+5: four tokens, thrice."""
    vocabulary = byte_level(tmp_path, [("1", "0"), ("1", "3"), ("2", "5")])
    columns, broken, _ = measured(vocabulary, ["1013.25 hPa", "a 1013.25\n1013.25"], whole=False)
    assert broken["numbers"]["rows"] == [["1013.25", "10·13·.·25", 4, 0, 3]]
    assert broken["units"]["rows"] == [["hPa", "h·P·a", 3, 0, 1]]
    assert columns[0]["kind_tokens:numbers"] == [4, 8]
