"""Documents measured piece by piece are what they are when encoded whole: over random vocabularies.

The oracle is whole-document encoding. What must be equal: every column, the runs of whitespace by
kind, the entries used, the broken words and the lost characters.
"""

from __future__ import annotations

import json

import numpy as np
import pytest
from hypothesis import find, given, settings
from hypothesis import strategies as st

import auditor.encoding.documents as encoding
from auditor.encoding import ledger
from auditor.encoding.documents import Documents, SeparationError
from auditor.runs.tallied import ContentTallies
from auditor.tallies.groups import groupings
from auditor.tallies.usage import UsageTally
from auditor.tallies.whitespace import WhitespaceTally
from auditor.text.stretch import Stretch
from auditor.text.whitespace import KINDS as WHITESPACE_KINDS
from auditor.vocabulary import VocabularySpec, adjoining, open_vocabulary, separation
from auditor.vocabulary.separation import separate
from tests.unit.encoding.random_vocabularies import KINDS, descriptions, spelled

# Beside letters: what cuts are made at, what compatibility forms take apart (⒈), marks that join.
ALPHABET = [
    *"abAé.,1 \n\t(:='_\"",
    "中",
    "\u0301",
    "▁",
    "<s>",
    "\u200b",
    "ß",
    "\u00a0",
    "  ",
    "⒈",
    "\u0338",
]
document = st.lists(st.sampled_from(ALPHABET), max_size=16).map("".join)
texts = st.lists(document, min_size=1, max_size=8)


def measured(vocabulary, documents, *, whole):
    """Return all that is measured of ``documents``, as plain values."""
    contents = ContentTallies(UsageTally(len(vocabulary.inventory.entries)))
    measuring = Documents(
        [vocabulary], lambda _, found: contents.add(found), words="icu", graphemes=True,
        parse_control=True, whole=whole,
    )  # fmt: skip
    columns, runs = [], WhitespaceTally(WHITESPACE_KINDS)
    for begin in range(0, len(documents), 3):
        batch = documents[begin : begin + 3]
        lines = np.arange(begin + 1, begin + 1 + len(batch))
        found = measuring.measure(Stretch(batch), 0, lines)
        rows = {**found.text, **found.columns[0]}
        columns.append({name: values.tolist() for name, values in sorted(rows.items())})
        table = found.runs[0]
        runs.add(table.kind_of, table.table, table.document_of, groupings(len(batch), {}))
    measuring.finish()
    tallies = (contents.usage, contents.words, contents.characters, runs)
    return columns, [tally.counts() for tally in tallies], measuring.tale


def opened(description, folder):
    path = folder / "tokenizer.json"
    path.write_text(json.dumps(description))
    return open_vocabulary(VocabularySpec(str(path)))


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("random")


@pytest.fixture(autouse=True)
def always_by_pieces(monkeypatch):
    """Never turn to whole encoding for speed, so that pieces are what is tested."""
    monkeypatch.setattr(encoding, "_TOO_DIVERSE", 99.0)


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=40)
@given(data=st.data())
def test_pieces_add_up_to_the_whole(kind, folder, data):
    """Random entries, random merges, random text of hard characters; the run's own check is on."""
    description, documents = data.draw(descriptions(kind)), data.draw(texts)
    vocabulary = opened(description, folder)
    columns, tallies, tale = measured(vocabulary, documents, whole=False)
    assert (columns, tallies) == measured(vocabulary, documents, whole=True)[:2]
    assert tale.whole + tale.by_pieces == len(documents)


@pytest.mark.parametrize("kind", list(KINDS))
def test_these_kinds_are_cut(kind, folder):
    """The test above is not empty: each of these kinds is measured by pieces."""
    found = separate(opened(data_for(kind), folder))
    assert not isinstance(found, str), found


def data_for(kind):
    return find(descriptions(kind), lambda _: True)


# Words short and long, with the same beginnings: pieces of up to 15 bytes are found as machine
# words, the others as strings.
WORDS = [
    "a",
    "ab",
    "ab" * 7,
    "ab" * 7 + "1",
    "ab" * 8,
    "ab" * 20,
    "Aéé",
    "é" * 7,
    "é" * 8,
    "中" * 5,
]
long_texts = st.lists(
    st.lists(st.sampled_from([*WORDS, " ", " ", ".", "\n"]), max_size=12).map("".join),
    min_size=1,
    max_size=24,
)


@pytest.mark.parametrize("kind", ["byte-level", "bert", "no splitter"])
@pytest.mark.parametrize("rows", [1, 4, 12])
@settings(max_examples=20)
@given(data=st.data())
def test_a_ledger_of_any_size_gives_the_same(kind, rows, folder, data):
    """Emptied after every batch, now and then, and with pieces met once let go again."""
    description, documents = data.draw(descriptions(kind)), data.draw(long_texts)
    vocabulary = opened(description, folder)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(ledger, "MOST_ROWS", rows)
        columns, tallies, _ = measured(vocabulary, documents, whole=False)
    assert (columns, tallies) == measured(vocabulary, documents, whole=True)[:2]


def test_a_wrong_cut_is_noticed_by_the_run(folder, monkeypatch):
    """When a cut is made that is not proved, the check against whole encoding stops the run."""
    description = data_for("no splitter")
    model = description["model"]
    model["vocab"].update({"a▁": 800, "a▁b": 801})
    model["merges"] = [["a", "▁"], ["a▁", "b"]]
    vocabulary = opened(description, folder)
    right = measured(vocabulary, ["1a b1 a b"], whole=False)
    assert right[:2] == measured(vocabulary, ["1a b1 a b"], whole=True)[:2]
    everywhere = (adjoining.classes(), adjoining.allowed_by_text())
    monkeypatch.setattr(separation, "_by_entries", lambda _: everywhere)
    with pytest.raises(SeparationError):
        measured(vocabulary, ["1a b1 a b"], whole=False)


@pytest.mark.parametrize("kind", list(KINDS))
@pytest.mark.parametrize("text", ["a b ", " a b", "a\nb", "a\tb ", "ab  ", "a <s> b", "1a b1\n\n"])
def test_edges_and_line_ends_come_back_as_in_the_whole(kind, text, folder):
    """A last piece of one space, line ends and control strings: each once decided wrongly."""
    vocabulary = opened(data_for(kind), folder)
    by_pieces = measured(vocabulary, ["a", text], whole=False)
    assert by_pieces[:2] == measured(vocabulary, ["a", text], whole=True)[:2]


# A kind, entries joined beside those of the alphabet, and a text whose parts would join or part
# otherwise if one condition of a cut were left out.
ACROSS = {
    "line ends before a letter": ("byte-level", ["\n\n"], "a\n\nb"),
    "a number that ends in a full stop": ("byte-level, glued, NFKC", [".\n"], "⒈\na"),
    "a mark that was part of a letter": ("byte-level, glued, NFD", ["\u0301\n"], "é\na"),
    "a bracket before a word": ("byte-level, glued", ["(a"], "b(a"),
    "punctuation before a line end": ("byte-level, glued", [".\n"], "b.\na"),
    "a contraction": ("byte-level", ["'s"], "b's"),
    "two characters without an entry": ("no splitter, unknown", [], "a%%b"),
    "an entry beyond ASCII": ("no splitter", ["é("], "aé(b"),
    "an entry of ASCII": ("no splitter", ["a("], "ba(b"),
    "a line end within an entry": ("no splitter", ["\na"], "b\na"),
    "two spaces within an entry": ("no splitter", ["a▁", "a▁▁"], "ba  b"),
    "a space before each part": ("byte-level, prefixed parts", [" ("], "a(1"),
    "a tab before each part": ("byte-level, prefixed parts", [" \t"], "a\tb"),
    "decoded with a space before it": ("bert", [], "a(b"),
}


@pytest.mark.parametrize("name", list(ACROSS))
def test_what_reaches_across_is_not_cut(name, folder):
    """Each condition of a cut has a text that shows why it is there."""
    kind, joined, text = ACROSS[name]
    description = data_for(kind)
    model = description["model"]
    for number, entry in enumerate(joined):
        left, right = parted(entry, kind)
        model["vocab"][left + right] = 900 + number
        model["merges"].append([left, right])
    model |= {"fuse_unk": True} if kind == "no splitter, unknown" else {}
    vocabulary = opened(description, folder)
    by_pieces = measured(vocabulary, ["a", text], whole=False)
    assert by_pieces[:2] == measured(vocabulary, ["a", text], whole=True)[:2]
    assert by_pieces[2].by_pieces == 2


def parted(entry, kind):
    """Return the last two characters of an entry, or bytes, as the vocabulary spells them."""
    if not kind.startswith("byte"):
        return entry[:-1], entry[-1]
    left, right = spelled((entry[:-1], entry[-1]))
    return left[-1], right


def test_a_mark_after_punctuation_decides(folder):
    """`=` and a slash through it are no punctuation to this splitter, and stay with the letter."""
    description = {**data_for("bert"), "normalizer": {"type": "NFC"}}
    vocabulary = opened(description, folder)
    text = ["a", "a=\u0338 b"]
    by_pieces = measured(vocabulary, text, whole=False)
    assert by_pieces[:2] == measured(vocabulary, text, whole=True)[:2]
