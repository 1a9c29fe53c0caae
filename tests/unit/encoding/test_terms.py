"""Terms in running text, by contexts and by whole documents, against the slow oracle."""

from __future__ import annotations

import json
from collections import Counter
from functools import partial

import orjson
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import auditor.encoding.terms as finding
from auditor.corpus.glossary import Glossary, Term, read_glossary
from auditor.encoding.terms import TermFinder
from auditor.runs.processes import Processes
from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularySpec, open_vocabulary
from auditor.vocabulary.bytelevel import CHARACTER_OF_BYTE
from auditor.vocabulary.separation import separate
from tests import oracle
from tests.oracle.terms import Found, sought, terms_of
from tests.unit.encoding.random_vocabularies import (
    KINDS,
    PREFIXED,
    descriptions,
    merged,
    spelled,
)
from tests.unit.runs.conftest import DEMO, TROUBLE, VOCABULARIES
from tests.unit.small_vocabularies import described

# What cuts are made at, what joins across them, and what a vocabulary takes for a control string.
ALPHABET = [
    *"abAé.,1 \n(:='_b", "中", "\u0301", "▁", "<s>", "ß", "\u00a0", "  ", "⒈", "a b", "ab", "b1",
]  # fmt: skip
documents = st.lists(
    st.lists(st.sampled_from(ALPHABET), max_size=16).map("".join), min_size=1, max_size=6
)
SPELLINGS = {
    "a": "a", "b": "b", "a b": "a b", "ab": "ab", "b1": "ab", "é": "é", "a.b": "a.b", "1": "1",
    "b (a": "b (a", "ß": "ss", "中": "中", "A=b": "A=b", "s": "s", "aé": "aé",
}  # fmt: skip


def glossary_of(spellings):
    """Return a glossary from a term by spelling; the first spelling of a term may be another."""
    variants: dict[str, list[str]] = {}
    for spelling, term in spellings.items():
        variants.setdefault(term, []).append(spelling)
    terms = (Term(t, tuple(s for s in own if s != t)) for t, own in variants.items())
    return Glossary(tuple(terms))


def counted(vocabulary, glossary, texts, *, batch=99, whole=False):
    """Return the rows of terms with their counts, measured some documents at a time."""
    finder = TermFinder([vocabulary], glossary, whole=whole)
    for begin in range(0, len(texts), batch):
        finder.measure(Stretch(texts[begin : begin + batch]))
    return list(finder.tallies[0].rows())


def shown(form, pieces):
    """Return the form with dots between pieces, of which each has characters of its own."""
    marked, reached = "", 0
    for piece in pieces:
        begin = form.index(piece, reached)
        marked += ("·" if marked else "") + form[reached:begin] + piece
        reached = begin + len(piece)
    return marked


def agree(rows, expected):
    """Check counts and flags of every row, and how it is written where characters show it."""
    ours = Counter()
    for row, count in rows:
        ours[row.term, row.form, row.tokens, *row[4:]] += count
    theirs = Counter()
    for found, count in expected.items():
        theirs[found.term, found.form, len(found.pieces), *map(int, found[3:])] += count
    assert ours == theirs
    plain = {
        (f.term, f.form, shown(f.form, f.pieces))
        for f in expected
        if not any(f[4:]) and "".join(f.pieces) == "".join(f.form.split())
    }
    assert plain <= {(row.term, row.form, row.broken) for row, _ in rows}


def by_oracle(name):
    folder = DEMO / "vocabularies" / name
    model = folder / "tokenizer.model"
    if model.exists():
        return oracle.open_sentencepiece(model)
    return oracle.open_tokenizers(folder / "tokenizer.json")


def opened(name):
    return open_vocabulary(VocabularySpec(str(DEMO / "vocabularies" / name)))


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("random")


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=15)
@given(data=st.data())
def test_random_vocabularies_break_terms_as_the_oracle_says(kind, folder, data):
    """Random entries, random merges, random text: contexts, whole documents and the oracle."""
    description, texts = data.draw(descriptions(kind)), data.draw(documents)
    text = json.dumps(description)
    (folder / "tokenizer.json").write_text(text)
    vocabulary = open_vocabulary(VocabularySpec(str(folder / "tokenizer.json")))
    glossary = glossary_of(SPELLINGS)
    rows = counted(vocabulary, glossary, texts)
    assert rows == counted(vocabulary, glossary, texts, whole=True)
    assert rows == counted(vocabulary, glossary, texts, batch=1)
    agree(rows, terms_of(texts, SPELLINGS, oracle.open_tokenizers(text)))


def test_what_stands_before_a_context_is_not_forgotten(tmp_path):
    """A space is set before a text: at its start `` ab`` is broken `` a·b``, elsewhere ``ab``."""
    pairs = [("▁", "a"), ("a", "b")]
    model = merged(list(CHARACTER_OF_BYTE.values()), [spelled(pair) for pair in pairs])
    vocabulary = described(tmp_path, pre_tokenizer=PREFIXED, decoder=PREFIXED, model=model)
    rows = counted(vocabulary, glossary_of({"ab": "ab"}), ["ab", "b (ab", "b\nab", "b ab"])
    assert [(row.broken, count) for row, count in rows] == [("ab", 2), ("a·b", 2)]
    assert not isinstance(separate(vocabulary), str)


NOTES = [
    orjson.loads(line)["text"]
    for line in (DEMO / "inspection_notes.jsonl").read_bytes().splitlines()
]
DEMO_SPELLINGS = {
    **{term: term for term in (
        "wind vane", "buoy", "anemometer", "boia", "Antifoulinganstrich", "weld", "AIS", "lantern",
        "kN", "蓄電池", "浮標", "लालटेन", "الحلقة", "σημαντήρας", "zinc anode", "<s>",
        "sacrificial anode", "line", "ss", "😀 x", "strasse", "istanbul", "café", "e\u0301",
        "two spaces",
    )},
    "АІС": "AIS", "кН": "kN", "zinc anodes": "zinc anode",
}  # fmt: skip


@pytest.mark.parametrize("name", VOCABULARIES)
def test_demo_notes_break_terms_as_the_oracle_says(name):
    """Every third note of eight languages and every trouble, under the four demo vocabularies."""
    texts = [*NOTES[::3], *TROUBLE]
    rows = counted(opened(name), glossary_of(DEMO_SPELLINGS), texts, batch=40)
    assert sum(count for _, count in rows) > 200
    agree(rows, terms_of(texts, DEMO_SPELLINGS, by_oracle(name)))


@pytest.mark.parametrize("batch", [1, 7, 999])
def test_batches_and_forgetting_change_nothing(monkeypatch, batch):
    """Any batch, contexts forgotten at once or kept, one vocabulary or four: the same rows."""
    vocabularies = [opened(name) for name in VOCABULARIES]
    glossary = glossary_of(DEMO_SPELLINGS)
    expected = [counted(vocabulary, glossary, NOTES, whole=True) for vocabulary in vocabularies]
    monkeypatch.setattr(finding, "_MOST_CONTEXTS", 5 if batch == 7 else 10**6)
    finder = TermFinder(vocabularies, glossary)
    for begin in range(0, len(NOTES), batch):
        finder.measure(Stretch(NOTES[begin : begin + batch]))
    assert [list(tally.rows()) for tally in finder.tallies] == expected


class Finding:
    """What each process does here: it finds terms in batches of notes."""

    def __init__(self, glossary):
        self._finder = TermFinder([opened(name) for name in VOCABULARIES], glossary)
        self.facts = []

    def measure(self, texts):
        self._finder.measure(Stretch(texts))

    def finish(self):
        return self._finder.tallies


@pytest.mark.parametrize("workers", [1, 2])
def test_one_process_or_two_give_the_same(workers):
    """Batches of 30 notes spread over processes: tallies merge to those of one finder."""
    glossary = read_glossary(DEMO / "glossary.csv")
    batches = [(NOTES[begin : begin + 30],) for begin in range(0, len(NOTES), 30)]
    every, merged = Finding(glossary), TermFinder([opened(n) for n in VOCABULARIES], glossary)
    every.measure(NOTES)
    with Processes(partial(Finding, glossary), workers) as processes:
        list(processes.measured(batches))
        for tallies in processes.finished():
            merged.merge(tallies)
    assert merged.tallies == every.finish()
    assert sum(count for _, count in merged.tallies[0].rows()) > 900


def test_finders_merge():
    """Two processes with half of the notes each give what one gives with all."""
    vocabularies = [opened(name) for name in VOCABULARIES[:2]]
    glossary = glossary_of(DEMO_SPELLINGS)
    one, two, every = (TermFinder(vocabularies, glossary) for _ in range(3))
    one.measure(Stretch(NOTES[:200]))
    two.measure(Stretch(NOTES[200:]))
    every.measure(Stretch(NOTES))
    two.merge(one)
    assert two.tallies == every.tallies


def test_an_engine_that_fails_adds_nothing(monkeypatch):
    """When one vocabulary fails on a stretch, no tally has taken in a part of it."""
    finder = TermFinder([opened(n) for n in VOCABULARIES[:3]], glossary_of({"buoy": "buoy"}))
    monkeypatch.setattr(finder._whole[2], "of", lambda *_: 1 / 0)
    with pytest.raises(ZeroDivisionError):
        finder.measure(Stretch(["A buoy."]))
    assert all(not list(tally.rows()) for tally in finder.tallies)


def test_the_oracle_sees_a_difference():
    """The comparison is not blind: one count more, or one piece more, is told."""
    texts, name = ["The anemometer.", "anemometer"], VOCABULARIES[0]
    expected = terms_of(texts, {"anemometer": "anemometer"}, by_oracle(name))
    rows = counted(opened(name), glossary_of({"anemometer": "anemometer"}), texts)
    agree(rows, expected)
    with pytest.raises(AssertionError):
        agree(rows[1:], expected)
    with pytest.raises(AssertionError):
        agree(rows, expected + Counter({Found("x", "x", ("x",), 0, False, False, False): 1}))
    assert sought(" A  b\t") == "a b"
