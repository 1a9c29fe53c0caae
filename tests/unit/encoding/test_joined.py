"""Parts laid end to end and taken apart again have the tokens that each has by itself."""

from __future__ import annotations

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.vocabulary import VocabularySpec, joined, open_vocabulary
from auditor.vocabulary.joined import JoinedParts
from auditor.vocabulary.separation import separate
from tests.unit.encoding.random_vocabularies import KINDS, descriptions

ALPHABET = [*"abAé.,1 \n\t", "中", "\u0301", "▁", "<s>", "\u200b", "ß", "\u00a0", "  ", "🌊"]
MIDDLE = st.lists(st.sampled_from(ALPHABET), max_size=4).map("".join)
# Parts that do not begin a document begin with whitespace and a word.
part = st.tuples(st.sampled_from([" ", "\n", "\t", "  ", ""]), st.sampled_from("ab1é"), MIDDLE)
parts = st.lists(part.map("".join), min_size=1, max_size=12)


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("joined")


@pytest.fixture(autouse=True)
def few_are_enough(monkeypatch):
    monkeypatch.setattr(joined, "_WORTH_IT", 1)
    monkeypatch.setattr(joined, "_TOGETHER", 4)


def separation_of(description, folder):
    path = folder / "tokenizer.json"
    path.write_text(json.dumps(description))
    return separate(open_vocabulary(VocabularySpec(str(path))))


def rows(encoding):
    arrays = (encoding.ids, encoding.starts, encoding.ends, encoding.bounds)
    return [values.tolist() for values in arrays]


@pytest.mark.parametrize("kind", list(KINDS))
@settings(max_examples=60)
@given(data=st.data())
def test_parts_end_to_end_are_parts_alone(kind, data, folder):
    """With and without fences between them, some going alone, over more groups than one."""
    separation = separation_of(data.draw(descriptions(kind)), folder)
    texts = data.draw(parts)
    assert rows(JoinedParts(separation).encode(texts)) == rows(separation.later.encode(texts))


class Noting:
    """An engine that notes what it is asked for."""

    def __init__(self, engine):
        self.asked, self._engine = [], engine
        self.has_decoder, self.spells_bytes = engine.has_decoder, engine.spells_bytes
        self.alters, self.unaltered = engine.alters, engine.unaltered

    def encode(self, texts):
        self.asked += texts
        return self._engine.encode(texts)


@pytest.mark.parametrize(
    ("texts", "strings"),
    [
        ([" a1", " b1", "\na1"], [" a1 b1\na1"]),  # cuts of their own
        ([" a.", " b1", "\nab"], [" a. b1\nab"]),  # before a space and a letter
        ([" a.", "\nab"], [" a.\nab"]),  # before whitespace
        ([" a_", "_b"], [" a_ a\n_b"]),  # two that hold words together: a fence with a line end
        ([" a ", " b1", " a1"], [" b1 a1", " a "]),  # ends with a space: alone
        ([" ab"] * 5, [" ab" * 4, " ab"]),  # four to a group
        (["\u0301a", " b1"], [" b1", "\u0301a"]),  # no cut before it, fence or not
        ([" a<", "s> b", " b"], [" a<s> b b"]),  # between a sign and a letter
        ([" a<", " s>"], [" a<", " s>"]),  # together they would spell an added token
    ],
)
def test_where_fences_stand(texts, strings, folder):
    """By hand: what the engine is asked for."""
    added = {
        "id": 9, "content": "< s>", "special": True, "single_word": False, "lstrip": False,
        "rstrip": False, "normalized": False,
    }  # fmt: skip
    description = {
        "version": "1.0", "added_tokens": [added], **KINDS["byte-level"],
        "model": {"type": "BPE", "vocab": {"a": 0, "b": 1}, "merges": []},
    }  # fmt: skip
    separation = separation_of(description, folder)
    noting = Noting(separation.later)
    object.__setattr__(separation, "later", noting)
    JoinedParts(separation).encode(texts)
    assert noting.asked == strings
