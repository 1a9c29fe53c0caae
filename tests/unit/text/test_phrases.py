"""Where phrases stand in texts: by hand, and against reading every part between two boundaries."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.text.folding import fold, folded_phrase
from auditor.text.phrases import Phrases
from auditor.text.stretch import Stretch
from tests.oracle.terms import occurrences, sought

ALPHABET = [
    *"abAs1é.'-_,: \n\t", "ß", "ﬃ", "İ", "ſ", "\u0301", "\u00a0", "\r\n", "  ", "\u200d", "\u200b",
    "係", "留", "カ", "ส", "วั", "ς", "Σ", "K", "😀", "\u2028",
    "i", "և", "ե", "ւ",
]  # fmt: skip
texts = st.lists(st.lists(st.sampled_from(ALPHABET), max_size=14).map("".join), max_size=5)


def found(phrases, documents):
    """Return document, start, end and phrase of each occurrence."""
    stretch = Stretch(documents)
    own = Phrases(phrases).find(stretch)
    places = stretch.document_of(own.starts)
    shift = stretch.bounds[places]
    rows = zip(places, own.starts - shift, own.ends - shift, own.phrases, strict=True)
    return [(int(d), int(a), int(b), phrases[p]) for d, a, b, p in rows]


def expected(phrases, documents):
    spellings = {phrase: phrase for phrase in phrases}
    return [(d, *f) for d, text in enumerate(documents) for f in occurrences(text, spellings)]


def words(phrases, text):
    """Return the forms that are found in one text."""
    return [text[start:end] for _, start, end, _ in found(phrases, [text])]


@pytest.mark.parametrize(
    ("phrase", "text", "forms"),
    [
        ("buoy", "Buoy, buoys and a BUOY", ["Buoy", "BUOY"]),
        ("wind vane", "wind  vane, Wind\tvane, wind\u00a0vane", 3),
        ("wind vane", "wind\nvane wind \n vane wind\u2028vane", []),
        ("straße", "STRASSE, Straße, strasse", 3),
        ("stras", "Straß", []),
        ("s", "ß", []),
        ("i", "İ", []),
        ("ե", "և", []),
        ("ւ", "և", []),
        ("եւ", "և", ["և"]),
        ("anchor", "anchor_1 anchors' anchor's 'anchor'", ["anchor"]),
        ("km/h", "9 km/h", ["km/h"]),
        ("C++", "C++ and c++.", 2),
        ("4.5 m", "14.5 m 4.5 m 4.5 mm", ["4.5 m"]),
        ("cafe", "cafe\u0301 cafe", ["cafe"]),
        ("係留", "係留チェーン", ["係留"]),
        ("ΣΟΦΟΣ", "σοφος σοφοσ", 2),
    ],
)
def test_what_is_an_occurrence(phrase, text, forms):
    """Case, whitespace, lines, parts of words, and characters that fold to several."""
    own = words([phrase], text)
    assert (len(own) if isinstance(forms, int) else own) == forms


def test_the_longest_of_overlapping_occurrences_counts():
    """A longer phrase wins wherever it begins; of equal ones the first; then what is left over."""
    assert words(["chain", "anchor chain"], "anchor chain, chain") == ["anchor chain", "chain"]
    assert words(["a b", "b ccc"], "a b ccc") == ["b ccc"]
    assert words(["a b", "b c"], "a b c") == ["a b"]
    assert words(["a b", "b c d e", "a"], "a b c d e") == ["a", "b c d e"]


def test_a_long_chain_of_overlapping_occurrences():
    """Each overlaps the next, all through the text: every other one counts, from the left."""
    assert words(["a b", "b a"], "a b " * 20_000) == ["a b"] * 20_000


def test_nothing_reaches_from_one_document_into_the_next():
    """Two words of a phrase in two documents are no occurrence."""
    assert found(["wind vane"], ["wind ", "vane", "wind", " vane", "wind vane"]) == [
        (4, 0, 9, "wind vane")
    ]


def test_equal_phrases_are_refused():
    """Two phrases that cannot be told apart are an error of the caller."""
    with pytest.raises(ValueError, match="when folded"):
        Phrases(["Buoy", "buoy"])


def test_no_phrase_and_no_text():
    """Nothing is sought, or there is nothing to seek in."""
    assert found([], ["a"]) == []
    assert found(["a"], [""]) == []
    assert found(["a"], []) == []


@settings(max_examples=400)
@given(documents=texts, data=st.data())
def test_occurrences_are_those_of_reading_every_part(documents, data):
    """Random texts of hard characters, and phrases that are parts of them or drawn beside them."""
    joined = "".join(documents)
    part = st.tuples(st.integers(0, len(joined)), st.integers(1, 6)).map(
        lambda pair: joined[pair[0] : sum(pair)]
    )
    drawn = st.one_of(part, st.lists(st.sampled_from(ALPHABET), max_size=4).map("".join))
    proposed = data.draw(st.lists(drawn, max_size=8))
    phrases = list({sought(p): p for p in proposed if any(c.isalnum() for c in p)}.values())
    assert found(phrases, documents) == (expected(phrases, documents) if phrases else [])


@given(documents=texts)
def test_folded_text_is_that_of_the_whole(documents):
    """Folding a stretch is folding its text; every character knows where it comes from."""
    stretch = Stretch(documents)
    folded = fold(stretch)
    spelled = "".join(map(chr, folded.points.tolist()))
    assert "".join(spelled.split()) == "".join(stretch.joined.casefold().split())
    assert folded_phrase(spelled) == sought(stretch.joined)
    for place, origin in enumerate(folded.origins(np.arange(len(spelled))).tolist()):
        own = stretch.joined[origin]
        assert spelled[place] in own.casefold() or own.isspace()
