"""How spaces are written is found by trying, not by name."""

from __future__ import annotations

from pathlib import Path

import pytest

from auditor.vocabulary import VocabularySpec, open_vocabulary
from tests.unit import small_vocabularies as small

DEMO = Path(__file__).parents[3] / "corpora_demo" / "vocabularies"
LINES = ["the lamp is lit", "the buoy is here", "a lamp and a buoy", "here is the buoy lamp"] * 30


@pytest.mark.parametrize(
    ("name", "convention", "prefix"),
    [
        ("harbour-bytelevel", "leading marker", False),
        ("harbour-unigram", "leading marker", True),
        ("harbour-sentencepiece", "leading marker", True),
        ("harbour-wordpiece", "continuation prefix", False),
    ],
)
def test_conventions_of_the_demo(name, convention, prefix):
    """Leading markers with and without an added prefix, and continuation prefixes."""
    found = open_vocabulary(VocabularySpec(str(DEMO / name))).spaces
    assert (found.convention, found.prefix_added) == (convention, prefix)


def test_a_trailing_marker_makes_four_tokens_of_three_words(tmp_path):
    """The space is written after the word: common practice, no source."""
    found = small.trained(
        tmp_path, [line + "!" for line in LINES], vocab_size=60, model_type="unigram",
        treat_whitespace_as_suffix=True, user_defined_symbols=["lamp▁", "is▁", "lit", "!"],
    )  # fmt: skip
    assert found.spaces.convention == "trailing marker"
    assert len(found.engine.encode(["lamp is lit!"]).ids) == 5 - found.spaces.prefix_added


def test_a_word_end_marker_is_no_space(tmp_path):
    """`</w>` marks the end of a word; the space itself is not written."""
    symbols = [*"abl", *(f"{c}</w>" for c in "abl")]
    found = small.merging(tmp_path, symbols, [("a", "b</w>"), ("l", "ab</w>")])
    assert found.spaces.convention == "word-end marker"


def test_a_space_of_its_own(tmp_path):
    """A character vocabulary writes the space as a token of its own."""
    found = small.trained(tmp_path, LINES, vocab_size=40, model_type="char")
    assert (found.family, found.spaces.convention) == ("characters", "own token")


def test_a_dropped_space(tmp_path):
    """A word vocabulary that splits at whitespace loses it."""
    (tmp_path / "vocab.json").write_text('{"[UNK]": 0, "lamp": 1, "buoy": 2}')
    found = open_vocabulary(VocabularySpec(str(tmp_path)))
    assert found.spaces.convention == "dropped"
