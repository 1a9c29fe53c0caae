"""Steadiness of words, by hand on a vocabulary whose every entry is known."""

from __future__ import annotations

import numpy as np
import pytest
from tokenizers import Tokenizer, models, normalizers, pre_tokenizers

from auditor.encoding.steadiness import Cost, costs_of, ways_of
from auditor.figures.intervals import Z
from auditor.figures.steadiness import steadiness
from auditor.text.perturbing import changes
from auditor.vocabulary import VocabularySpec, open_vocabulary

WORDS = [("buoy", 3), ("lamp", 2), ("naïve", 1)]


@pytest.fixture
def vocabulary(tmp_path):
    """Whole words `buoy` and `lamp`, the letters of all, `Buoy` whole too; no capitals else."""
    letters = sorted(set("buoylampnaïvei().,xBLN"))
    entries = ["[UNK]", *letters, *(f"##{c}" for c in letters), "buoy", "lamp", "Buoy"]
    model = models.WordPiece({e: n for n, e in enumerate(entries)}, unk_token="[UNK]")
    tokenizer = Tokenizer(model)
    tokenizer.normalizer = normalizers.NFC()
    tokenizer.pre_tokenizer = pre_tokenizers.BertPreTokenizer()
    tokenizer.save(str(tmp_path / "tokenizer.json"))
    return open_vocabulary(VocabularySpec(str(tmp_path)))


def test_ways_by_what_is_varied(vocabulary):
    """`buoy` is whole everywhere but in capitals, where it is unknown; `lamp` in two ways by case.

    lamp: whole; Lamp: L·a·m·p; LAMP: unknown. naïve: broken letter by letter, in capitals unknown.
    """
    ways = ways_of(vocabulary, WORDS, parse_control=True)
    held = steadiness(WORDS, ways, {})
    assert (held["words"], held["draws"]) == (3, 6)
    for about in ("position", "punctuation"):
        assert held["ways"][about]["one"]["numerator"] == 6
        assert held["ways"][about]["mean"] == 1
    case = held["ways"]["case"]
    assert case["one"]["numerator"] == 0
    assert case["two"]["numerator"] == 4  # buoy (3) and naïve (1)
    assert case["three_or_more"]["numerator"] == 2  # lamp
    assert case["mean"] == pytest.approx((3 * 2 + 2 * 3 + 1 * 2) / 6)
    worst = held["worst"][0]
    assert worst["word"] == "lamp"
    assert {row["broken"] for row in worst["ways"]} == {"lamp", "l·a·m·p", "⟨[unk]⟩"}


def test_what_changes_cost(vocabulary):
    """Upper case: `buoy`, `lamp` and `naïve` of 1, 1 and 5 tokens become one unknown each.

    Without diacritics, `naive` has as many letters. The ratio and its interval by hand.
    """
    made = changes(WORDS, 7)
    costs = costs_of(vocabulary, WORDS, {n: made[n] for n in ("upper case", "without diacritics")})
    held = {
        row["change"]: row
        for row in steadiness(WORDS, ways_of(vocabulary, WORDS, parse_control=True), costs)[
            "changes"
        ]
    }
    upper = held["upper case"]
    assert (upper["draws"], upper["unaltered"], upper["unknown_appears"]) == (6, 0, 6)
    ratio = upper["tokens_ratio"]
    assert (ratio["numerator"], ratio["denominator"]) == (6, 3 * 1 + 2 * 1 + 5)
    y, x = np.ones(6), np.array([1, 1, 1, 1, 1, 5.0])
    error = np.sqrt(6 / 5 * ((y - 0.6 * x) ** 2).sum()) / x.sum()
    assert ratio["high"] == pytest.approx(0.6 + Z * error)
    bare = held["without diacritics"]
    assert (bare["draws"], bare["unaltered"]) == (1, 5)
    assert bare["tokens_ratio"]["value"] == 1.0
    spaced = held["two spaces before"]
    assert spaced["tokens_ratio"]["value"] == 1.0  # spaces are dropped


def test_a_change_that_alters_nothing_has_no_ratio(vocabulary):
    """It says so."""
    none = np.zeros(0, dtype=np.int64)
    ways = ways_of(vocabulary, WORDS, parse_control=True)
    held = steadiness(WORDS, ways, {"NFC": Cost(none, none, none, none, 6)})
    assert held["changes"][0]["tokens_ratio"]["value"] is None
    assert "alters no word" in held["changes"][0]["tokens_ratio"]["note"]
