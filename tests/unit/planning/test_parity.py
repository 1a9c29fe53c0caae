"""Premiums, room, remedies and mixtures of languages, by hand."""

from __future__ import annotations

import pytest

from auditor.planning import parity
from auditor.planning.histogram import LengthHistogram

# Content → (records, tokens): notice 4 is missing in Portuguese, 5 in English; 3 stands twice.
ENGLISH = {"1": (1, 10), "2": (1, 20), "3": (1, 30), "4": (1, 40)}
PORTUGUESE = {"1": (1, 15), "2": (1, 20), "3": (2, 90), "5": (1, 50)}
GREEK = {"1": (1, 30), "2": (1, 40), "4": (1, 100)}


def figure(value, low=None, high=None, numerator=None, denominator=None):
    return {
        "value": value, "low": low, "high": high, "numerator": numerator,
        "denominator": denominator, "note": None,
    }  # fmt: skip


def test_only_clear_pairs_count_and_the_others_are_counted():
    """Pairs 1 and 2; one content missing on each side, one ambiguous."""
    found = parity.premium(PORTUGUESE, ENGLISH)
    totals = found["ratio_of_totals"]
    assert (totals["numerator"], totals["denominator"]) == (35, 30)
    assert found["mean_of_ratios"]["value"] == (1.5 + 1.0) / 2
    assert (found["pairs"], found["ambiguous"]) == (2, 1)
    assert (found["missing"], found["missing_in_reference"]) == (1, 1)


def test_a_language_pays_nothing_over_itself():
    """Ratio 1 with an interval of no width."""
    own = parity.premium(ENGLISH, ENGLISH)["ratio_of_totals"]
    assert (own["value"], own["low"], own["high"]) == (1.0, 1.0, 1.0)


def test_the_spread_is_over_what_both_ends_share():
    """Greek and English share notices 1, 2 and 4: 170 over 70 tokens."""
    tokens = {"el": GREEK, "en": ENGLISH, "pt": PORTUGUESE}
    premiums = {key: parity.premium(own, ENGLISH) for key, own in tokens.items()}
    found = parity.spread(tokens, premiums)
    assert (found["highest"], found["lowest"], found["pairs"]) == ("el", "en", 3)
    assert found["ratio_of_totals"]["value"] == 170 / 70
    assert parity.spread({"en": ENGLISH}, {"en": premiums["en"]}) is None


def test_room_turns_costs_over():
    """510 tokens at 2 (1.5 to 3) tokens a word hold 255 (170 to 340) words."""
    figures = {"fertility": figure(2.0, 1.5, 3.0), "tokens_per_grapheme": figure(0.5)}
    found = parity.room(figures, 510, figure(0.25, 0.2, 0.5))
    words = found["words"]
    assert (words["value"], words["low"], words["high"]) == (255.0, 170.0, 340.0)
    assert (found["graphemes"]["value"], found["graphemes"]["low"]) == (1020.0, None)
    worth = found["reference_words"]
    assert (worth["value"], worth["low"], worth["high"]) == (127.5, 102.0, 255.0)
    assert parity.room(figures, None, None) is None


def language(**changed):
    held = {
        "counts": {"tokens": 1000},
        "figures": {
            "truncated_tokens": figure(0.0, numerator=0, denominator=1000),
            "truncated_documents": figure(0.0),
            "continued_words": figure(0.5, numerator=100),
        },
        "cost": {"in_broken_words": 400},
        "characters": [{"character": "ї", "count": 20, "tokens": 60}],
        "normal_form": {"documents": 0, "characters": 0, "tokens": 0, "tokens_as_nfc": 0},
    }
    return {**held, **changed}


LENGTHS = LengthHistogram.of([(100, 9), (1500, 1)])


def test_the_most_effective_remedies_come_first():
    """Words: 400 − 100 tokens; characters: 60 − 20; both of 1,000."""
    found = parity.remedies(language(), LENGTHS, None)
    assert [(own["remedy"], own["tokens"], own["share"]) for own in found] == [
        ("entries for words", 300, 0.3),
        ("entries for characters", 40, 0.04),
    ]


def test_a_longer_limit_is_told_with_what_it_keeps():
    """At 512 the long one of ten documents loses 988 positions; 1,504 loses none."""
    cut = {
        "truncated_tokens": figure(0.4, numerator=988, denominator=2400),
        "truncated_documents": figure(0.1),
        "continued_words": figure(0.0, numerator=0),
    }
    found = parity.remedies(language(figures=cut), LENGTHS, 512)
    assert found[0] == {
        "remedy": "longer limit", "length": 1504, "tokens": 988, "share": 988 / 2400
    }  # fmt: skip


def test_normalising_is_told_only_where_it_saves():
    """70 tokens of 1,000 saved; a form that costs more is none."""
    saves = {"documents": 3, "characters": 90, "tokens": 170, "tokens_as_nfc": 100}
    found = parity.remedies(language(normal_form=saves, characters=[]), LENGTHS, None)
    assert found[1] == {"remedy": "normalise first", "tokens": 70, "share": 0.07}
    worse = {**saves, "tokens_as_nfc": 180}
    found = parity.remedies(language(normal_form=worse, characters=[]), LENGTHS, None)
    assert [own["remedy"] for own in found] == ["entries for words"]


def test_a_mixture_changes_its_shares_with_its_unit():
    """Half of the documents each, but 10 and 30 tokens: 1 to 3 in tokens."""
    counts = {"en": {"documents": 50, "tokens": 500}, "el": {"documents": 50, "tokens": 1500}}
    english, greek = parity.mixture(counts, (1.0, 0.5))
    assert (english["share_of_documents"], english["share_of_tokens"]) == (0.5, 0.25)
    assert greek["powers"][0]["that_in_tokens"] == 0.75
    half = greek["powers"][1]
    assert (half["planned_in_documents"], half["that_in_tokens"]) == (0.5, 0.75)
    # 0.75^½ over 0.75^½ + 0.25^½.
    assert half["planned_in_tokens"] == pytest.approx(3**0.5 / (3**0.5 + 1), rel=1e-12)
