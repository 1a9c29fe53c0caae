"""Where the rules of text allow a cut: words, grapheme clusters and normal forms stay.

The places here are those of a vocabulary whose every entry is a single character, so that nothing
but the rules of text forbids a cut.
"""

from __future__ import annotations

import unicodedata
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.encoding.cutting import Places
from auditor.text.stretch import Stretch
from auditor.text.words import count_graphemes
from auditor.vocabulary.separation import Separation, _by_entries

BYTES = [f"<0x{byte:02X}>" for byte in range(256)]
PLACES = Places([Separation(None, (), *_by_entries(BYTES), ())])
HARD = [
    *map(chr, range(32, 127)), *"\n\n\n\r\t\v\0", *"éßאבكのアｱﾞ中가½²Ⅷ٣กำअि",
    *"\u0301\u0338\u200d\u200b\u00ad\u2019·\u2028\u00a0\u0600\u1b05😀👍🇩",
]  # fmt: skip
texts = st.lists(st.text(st.sampled_from(HARD), min_size=1, max_size=12), min_size=1, max_size=6)


def parts_of(text: str, places: list[int]) -> list[str]:
    edges = [0, *places, len(text)]
    return [text[begin:end] for begin, end in pairwise(edges)]


def found(parts: list[str]) -> tuple[object, ...]:
    """Return the words by position, the grapheme clusters and the normal forms of ``parts``."""
    stretch = Stretch(parts)
    words = [values.tolist() for values in (stretch.words.starts, stretch.words.ends)]
    forms = [
        "".join(unicodedata.normalize(form, part) for part in parts)
        for form in ("NFC", "NFD", "NFKC", "NFKD")
    ]
    return words, sum(map(count_graphemes, parts)), forms


@settings(max_examples=300)
@given(documents=texts)
def test_cuts_change_no_word_cluster_or_form(documents):
    """At every place allowed, in text of hard characters."""
    places = PLACES.within(Stretch(documents)).tolist()
    joined = "".join(documents)
    bounds = Stretch(documents).bounds.tolist()
    assert not set(places) & set(bounds)
    parts = parts_of(joined, sorted({*places, *bounds[1:-1]}))
    assert found(parts) == found(documents)


# A text, the place where it is never cut, and which of words, clusters and forms would change.
REFUSED = {
    "a full stop within a word": ("a.b", 1, 0),
    "a comma within a number": ("1,2", 1, 0),
    "an apostrophe before a mark": ("a'\u0301b", 1, 0),
    "a low line after a word": ("a_", 1, 0),
    "two low lines": ("a__b", 2, 0),
    "a quote after a Hebrew letter": ("א' ", 1, 0),
    "a sound mark that is a letter": ("(ﾞa", 1, 1),
    "a vowel that joins anything": ("(ำ", 1, 1),
    "a mark that joins what stands before": ("a=\u0338", 2, 2),
    "a prepended letter": ("\u0d4ea", 1, 1),
}


@pytest.mark.parametrize("name", list(REFUSED))
def test_places_that_are_not_cut(name):
    """Each rule has a text that a cut would change."""
    text, place, changed = REFUSED[name]
    assert place not in PLACES.within(Stretch([text])).tolist()
    whole, apart = found([text]), found(parts_of(text, [place]))
    assert whole[changed] != apart[changed]


CUT = {
    "a word and a bracket": ("foo(bar", [3, 4]),
    "a full stop that ends": ("foo.", [3]),
    "a comma and a space": ("foo, bar", [3, 4]),
    "a number and what divides": ("12/34", [2, 3]),
    "brackets and a line end": ("f()\nbar", [1, 2, 3, 4]),
    "an indented line": ("foo\n  bar", [3]),
    "beyond ASCII": ("naïveté(中", [7, 8]),
    "what is refused elsewhere": ("a.b 1,2", [3]),
}


@pytest.mark.parametrize("name", list(CUT))
def test_places_that_are_cut(name):
    """Words, punctuation and line ends are parts of their own."""
    text, places = CUT[name]
    assert PLACES.within(Stretch([text])).tolist() == places


def test_what_follows_decides_not_the_character_alone():
    """A mark after a bracket keeps it with the letter before; a later document's does not."""
    assert PLACES.within(Stretch(["a=\u0338"])).tolist() == []
    assert PLACES.within(Stretch(["a=", "\u0338"])).tolist() == [1]
