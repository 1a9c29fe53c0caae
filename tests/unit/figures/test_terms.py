"""Twenty terms worked by hand under a tiny vocabulary: term by term, and every share."""

from __future__ import annotations

import json
from fractions import Fraction

import pytest

from auditor.corpus.glossary import Glossary, Term
from auditor.encoding.constructed import construct
from auditor.encoding.terms import TermFinder
from auditor.figures import terms as figures
from auditor.figures.terms import terms_as_json
from auditor.tallies.terms import TermRow, TermsTally
from auditor.text.stretch import Stretch
from tests.unit.small_vocabularies import byte_level, wordpiece

# WordPiece: the longest entry first, then continuations, else the whole word unknown. Words are
# lowered, and parted at punctuation and around every Chinese character.
ENTRIES = [
    "[UNK]", "a", "l", "x", "(", ")", "-", "/", "7", "114", "buoy", "bz", "an", "##em", "##ometer",
    "##s", "anchor", "##age", "chain", "top", "##mark", "##amp", "tide", "gauge", "zinc", "##ode",
    "light", "##house", "an·", "··",
]  # fmt: skip
# Each term, how it is broken after a space, its tokens, its broken words, its state.
WORKED = [
    ("buoy", "buoy", 1, 0, "whole"),
    ("buoys", "buoy·s", 2, 1, "two"),
    ("anemometer", "an·em·ometer", 3, 1, "three_or_more"),
    ("anchor chain", "anchor· chain", 2, 0, "two"),
    ("anchorage", "anchor·age", 2, 1, "two"),
    ("topmark", "top·mark", 2, 1, "two"),
    ("lamp", "l·amp", 2, 1, "two"),
    ("tide gauge", "tide· gauge", 2, 0, "two"),
    ("tide-gauge", "tide·-·gauge", 3, 0, "three_or_more"),
    ("BZ-114/7", "BZ·-·114·/·7", 5, 0, "three_or_more"),
    ("zinc anode", "zinc· an·ode", 3, 1, "three_or_more"),
    ("lighthouse", "light·house", 2, 1, "two"),
    ("light", "light", 1, 0, "whole"),
    ("sinker", "⟨[UNK]⟩", 1, 0, "unknown"),
    ("sinker chain", "⟨[UNK]⟩· chain", 2, 0, "unknown"),
    ("anode", "an·ode", 2, 1, "two"),
    ("chains", "chain·s", 2, 1, "two"),
    ("Gauges", "Gauge·s", 2, 1, "two"),
    ("TOPS", "TOP·S", 2, 1, "two"),
    ("浮標", "⟨[UNK]⟩·⟨[UNK]⟩", 2, 1, "unknown"),
]
TEXTS = [
    "Buoy and BUOY: the anchor chain, one chain and its anchor  chains.",
    "Zinc anode, anode; tide gauge\ntide\ngauge. 浮標 sinker chain",
    "(buoy) anchor\tchain",
]
# What stands in the texts, worked by hand: "anchor  chains" is not "anchor chain" but "chains".
OCCURRENCES = {
    "buoy": {"BUOY": 1, "Buoy": 1, "buoy": 1},
    "anchor chain": {"anchor chain": 1, "anchor\tchain": 1},
    "chains": {"chains": 1},
    "zinc anode": {"Zinc anode": 1},
    "anode": {"anode": 1},
    "tide gauge": {"tide gauge": 1},
    "浮標": {"浮標": 1},
    "sinker chain": {"sinker chain": 1},
}


def measured(vocabulary, glossary, texts):
    finder = TermFinder([vocabulary], glossary)
    finder.measure(Stretch(texts))
    return terms_as_json(glossary, construct(vocabulary, glossary), finder.tallies[0])


@pytest.fixture
def document(tmp_path):
    glossary = Glossary(tuple(Term(term) for term, *_ in WORKED))
    return measured(wordpiece(tmp_path, ENTRIES), glossary, TEXTS)


def test_each_term_is_broken_as_worked_by_hand(document):
    """After a space, as given: pieces, their number, broken words, state."""
    names = ("term", "broken", "tokens", "broken_words", "state")
    assert [tuple(own[name] for name in names) for own in document["terms"]] == WORKED


def test_occurrences_are_those_counted_by_hand(document):
    """Forms and counts; the most frequent form first, then in order; longest terms win."""
    found = {
        own["term"]: {form["form"]: form["count"] for form in own["forms"]}
        for own in document["terms"]
        if own["occurrences"]
    }
    assert found == OCCURRENCES
    assert list(found["buoy"]) == ["BUOY", "Buoy", "buoy"]
    chain = next(own for own in document["terms"] if own["term"] == "anchor chain")
    assert [way["broken"] for form in chain["forms"] for way in form["ways"]] == [
        "anchor·\tchain",
        "anchor· chain",
    ]


def counts(shares):
    """Return the counts of each state, and what they are of."""
    assert len({own["of"] for own in shares.values()}) == 1
    for own in shares.values():
        assert own["share"] == own["count"] / own["of"]
    return {name: own["count"] for name, own in shares.items()}, shares["whole"]["of"]


def test_shares_are_those_counted_by_hand(document):
    """By term from WORKED; by use with the sums of OCCURRENCES as weights."""
    summary = document["summary"]
    assert counts(summary["by_term"]) == (
        {
            "whole": 2, "two": 11, "three_or_more": 4, "unknown": 3, "dropped": 0,
            "byte_spelled": 0, "words_whole": 6,
        },
        20,
    )  # fmt: skip
    expected = {
        "whole": 3, "two": 5, "three_or_more": 1, "unknown": 2, "dropped": 0, "byte_spelled": 0,
        "words_whole": 6,
    }  # fmt: skip
    assert counts(summary["by_use"]) == (expected, 11)
    assert counts(summary["running_text"]) == (expected, 11)
    assert summary["by_weight"] is None
    assert (summary["terms"], summary["in_corpus"], summary["occurrences"]) == (20, 8, 11)
    assert summary["not_in_corpus"] == [term for term, *_ in WORKED if term not in OCCURRENCES]


def test_weights_are_added_exactly(tmp_path):
    """0.1 + 0.2 of 0.6 is a half; a term without a weight would weigh 1."""
    weights = {"buoy": "0.1", "light": "0.2", "lamp": "0.3", "sinker": "0"}
    terms = tuple(Term(term, (), Fraction(weight)) for term, weight in weights.items())
    glossary = Glossary(terms, weighted=True)
    found = measured(wordpiece(tmp_path, ENTRIES), glossary, [])
    shares = found["summary"]["by_weight"]
    assert shares["whole"] == {"count": 0.3, "of": 0.6, "share": 0.5}
    assert shares["unknown"] == {"count": 0, "of": 0.6, "share": 0.0}
    assert [own["weight"] for own in found["terms"]] == [0.1, 0.2, 0.3, 0]
    assert found["summary"]["running_text"]["whole"] == {"count": 0, "of": 0, "share": None}
    assert found["summary"]["by_use"]["two"] == {"count": 0, "of": 0, "share": None}


def test_cases_worked_by_hand(tmp_path):
    """Byte-level with ``light`` and `` light``: a capital leaves ``ight``, more leave letters."""
    merges = [("l", "i"), ("g", "h"), ("gh", "t"), ("li", "ght"), ("Ġ", "light"), ("i", "ght")]
    found = construct(byte_level(tmp_path, merges), Glossary((Term("light", ("Lights",)),)))
    shown = {
        (own.spelling, own.case, own.form): {b.broken for b in own.breakings.values()}
        for own in found
    }
    assert shown == {
        ("light", "as given", "light"): {"light"},
        ("light", "title", "Light"): {"L·ight"},
        ("light", "upper", "LIGHT"): {"L·I·G·H·T"},
        ("Lights", "as given", "Lights"): {"L·ight·s"},
        ("Lights", "lower", "lights"): {"light·s"},
        ("Lights", "upper", "LIGHTS"): {"L·I·G·H·T·S"},
    }


def test_a_position_may_break_otherwise(tmp_path):
    """Only `` buoy`` is an entry: after a space one token, elsewhere four."""
    merges = [("u", "o"), ("Ġ", "b"), ("Ġb", "uo"), ("Ġbuo", "y")]
    found = construct(byte_level(tmp_path, merges), Glossary((Term("buoy"),)))
    assert {place: own.broken for place, own in found[0].breakings.items()} == {
        "alone": "b·uo·y", "line start": "b·uo·y", "after space": "buoy",
        "in parentheses": "b·uo·y",
    }  # fmt: skip


def test_bytes_are_shown_and_counted(tmp_path):
    """A letter of two bytes without an entry is spelled in bytes: ``é`` is C3 A9."""
    found = measured(byte_level(tmp_path, [("c", "a")]), Glossary((Term("café"),)), ["Café café"])
    own = found["terms"][0]
    assert (own["broken"], own["state"], own["byte_spelled"]) == (
        "ca·f·⟨C3⟩·⟨A9⟩", "three_or_more", True,
    )  # fmt: skip
    assert found["summary"]["running_text"]["byte_spelled"]["count"] == 2


def test_variants_count_as_their_term(tmp_path):
    """Occurrences of a variant are the term's; each spelling is tried in each case."""
    glossary = Glossary((Term("buoy", ("light buoy", "Buoys")),))
    found = measured(wordpiece(tmp_path, ENTRIES), glossary, ["A light buoy, two buoys, a buoy."])
    (own,) = found["terms"]
    assert own["occurrences"] == 3
    assert [form["form"] for form in own["forms"]] == ["buoy", "buoys", "light buoy"]
    spellings = list(dict.fromkeys(tried["spelling"] for tried in own["constructed"]))
    assert spellings == ["buoy", "light buoy", "Buoys"]
    assert own["running_text"]["whole"] == {"count": 1, "of": 3, "share": 1 / 3}


def test_rare_forms_are_summed_when_they_are_shown(tmp_path, monkeypatch):
    """Past the bound, forms are one row; the tally itself holds them all."""
    monkeypatch.setattr(figures, "FORMS_SHOWN", 2)
    glossary = Glossary((Term("buoy"),))
    tally = TermsTally(glossary.digest)
    for form, count in (("buoy", 5), ("Buoy", 2), ("BUOY", 1), ("bUOY", 1)):
        tally.add(TermRow("buoy", form, form, 1, 0, 0, 0, 0), count)
    vocabulary = wordpiece(tmp_path, ENTRIES)
    (own,) = terms_as_json(glossary, construct(vocabulary, glossary), tally)["terms"]
    assert [form["form"] for form in own["forms"]] == ["buoy", "Buoy"]
    assert own["other_forms"] == {"forms": 2, "count": 2}
    assert own["occurrences"] == 9


def test_the_document_is_json_and_always_the_same(tmp_path):
    """Nothing but JSON's own types; documents in any order give the same bytes."""
    glossary = Glossary(tuple(Term(term) for term, *_ in WORKED))
    vocabulary = wordpiece(tmp_path, ENTRIES)
    one = json.dumps(measured(vocabulary, glossary, TEXTS))
    assert one == json.dumps(measured(vocabulary, glossary, TEXTS[::-1]))
