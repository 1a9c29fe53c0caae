"""Normal forms: the pairs of UAX #15, and vocabularies that fold them or do not."""

from __future__ import annotations

import unicodedata

import pytest

from auditor.vocabulary import VocabularySpec, open_vocabulary
from auditor.vocabulary.entries import entries_by_script
from auditor.vocabulary.forms import SAMPLES, normal_forms
from tests.unit.runs.conftest import DEMO
from tests.unit.small_vocabularies import described, merging


@pytest.mark.parametrize(
    ("composed", "decomposed"),
    [
        ("\u00c5", "A\u030a"),
        ("\u00f4", "o\u0302"),
        ("\u1e69", "s\u0323\u0307"),
        ("\uac00", "\u1100\u1161"),
        ("\u0915\u093c", "\u0915\u093c"),
    ],
)
def test_samples_have_the_forms_of_the_standard(composed, decomposed):
    """UAX #15, figures 3 to 5; U+0958 is a composition exclusion, Hangul composes by rule."""
    assert composed in SAMPLES
    assert unicodedata.normalize("NFD", composed) == decomposed


def test_a_vocabulary_that_composes_encodes_both_forms_alike(tmp_path):
    """With NFC in its normaliser every pair is one; byte-level without it tells them apart."""
    symbols = {chr(c): n for n, c in enumerate([*range(33, 256)])}
    model = {"type": "BPE", "vocab": symbols, "merges": [], "unk_token": None}
    level = {"type": "ByteLevel", "add_prefix_space": False, "trim_offsets": False}
    folding = described(tmp_path, model=model, pre_tokenizer=level, normalizer={"type": "NFC"})
    assert all(pair.alike for pair in normal_forms(folding.engine))
    plain = open_vocabulary(VocabularySpec(str(DEMO / "vocabularies" / "harbour-bytelevel")))
    found = {pair.nfc: pair.alike for pair in normal_forms(plain.engine)}
    assert found["\u00c5"] is False
    assert found["\u0915\u093c"] is True


def test_entries_are_counted_under_every_script_they_hold(tmp_path):
    """Two entries of Latin, one of Greek and Latin, one of digits."""
    vocabulary = merging(tmp_path, ["a", "b", "λ", "7"], [("a", "b"), ("λ", "a")])
    assert entries_by_script(vocabulary.inventory) == {"Latin": 4, "Greek": 2, "Common": 1}
