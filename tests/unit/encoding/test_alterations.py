"""Words that a normaliser alters: not at all, in case alone, or in more."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.encoding.alterations import (
    CASE_ONLY,
    MORE_THAN_CASE,
    UNALTERED,
    Alterations,
    judge,
)
from auditor.text.stretch import Stretch
from auditor.vocabulary.tokenizers_engine import TokenizersEngine
from tests.unit.small_vocabularies import measured, wordpiece


@pytest.mark.parametrize(
    ("word", "normalized"),
    [("buoy", "buoy"), ("buoy", "▁buoy"), ("buoy", " buoy"), ("Boje", "▁Boje"), ("博", " 博 ")],
)
def test_inserted_spaces_and_markers_alter_nothing(word, normalized):
    """A prefix, or spaces set around a Han character (google-research/bert), are no alteration."""
    assert judge(word, normalized) == UNALTERED


@pytest.mark.parametrize(
    ("word", "normalized"),
    [
        ("Buoy", "buoy"),
        ("BUOY", "▁buoy"),
        ("Éire", "éire"),
        ("Straße", "strasse"),  # CaseFolding.txt, status F: U+00DF to "ss"
        ("ΟΔΟΣ", "οδος"),  # both sigmas fold to U+03C3
        ("ΟΔΟΣ", "οδοσ"),
        ("İzmir", "i\u0307zmir"),  # SpecialCasing.txt: U+0130 to "i" and U+0307
        ("ﬁn", "fin"),  # CaseFolding.txt, status F: U+FB01 to "fi"
    ],
)
def test_case_alone(word, normalized):
    """Full case folding (Unicode's CaseFolding.txt, statuses C and F) makes them equal."""
    assert judge(word, normalized) == CASE_ONLY


@pytest.mark.parametrize(
    ("word", "normalized"),
    [
        ("café", "cafe"),
        ("Café", "cafe"),  # case and an accent
        ("が", "か"),
        ("e\u0301", "é"),  # composed: not the same characters
        ("２", "2"),
        ("a\u202fb", "a b"),  # a word may hold U+202F; its space is then taken off as inserted
        ("buoy", ""),
        ("buoy", "buoys"),
        ("İzmir", "izmir"),
    ],
)
def test_more_than_case(word, normalized):
    """Marks, width, composition, deletion: whatever case folding does not explain."""
    assert judge(word, normalized) == MORE_THAN_CASE


@given(st.text(st.characters(max_codepoint=0x7F)))
def test_ascii_in_lower_case_is_case_alone(word):
    """Both ways of comparing agree on ASCII: unaltered when there is no capital."""
    bare = word.replace(" ", "")
    expected = UNALTERED if bare == bare.lower() else CASE_ONLY
    assert judge(bare, bare.lower()) == expected


def test_each_distinct_word_is_normalised_once():
    """The normaliser is asked once for each distinct word, the judgement stays the same."""
    asked = []
    alterations = Alterations(lambda word: asked.append(word) or word.lower())
    assert [alterations.of(word) for word in ("Tide", "tide", "Tide")] == [1, 0, 1]
    assert asked == ["Tide", "tide"]


def test_both_kinds_in_one_document(tmp_path):
    """The uncased normaliser of google-research/bert strips accents: 2 words in case, 1 in more."""
    vocabulary = wordpiece(tmp_path, ["[UNK]", "the", "cafe", "buoy"])
    found = measured(vocabulary, ["The café BUOY buoy"])
    assert (found["case_folded_words"], found["changed_words"]) == ([2], [1])


@pytest.mark.parametrize("form", ["NFC", "NFD", "NFKC", "Lowercase"])
@given(texts=st.lists(st.text("aBé ÉßK\u0301\u0338.ﬁ中\u212a", max_size=12), max_size=5))
def test_words_of_a_stretch_are_judged_like_single_ones(form, texts):
    """Words of characters that the normaliser leaves alone are not shown to it, others are."""
    model = {"type": "BPE", "vocab": {"a": 0}, "merges": []}
    description = {"normalizer": {"type": form}, "model": model, "version": "1.0"}
    engine = TokenizersEngine(description, control_strings="parse", where="test")
    shown = []

    def normalize(word):
        shown.append(word)
        return engine.normalize(word)

    stretch = Stretch(texts)
    found = Alterations(normalize, engine.unaltered).of_words(stretch)
    expected = [judge(word, engine.normalize(word)) for word in stretch.word_texts]
    assert found.tolist() == expected
    assert form == "Lowercase" or not any(word.isascii() for word in shown)
