"""Boundaries by the table against ICU's own, for every plain character and for mixed lines."""

from __future__ import annotations

from itertools import product

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from icu4py.breakers import WordBreaker

from auditor.text import boundaries
from auditor.text.boundaries import LOCALE, SEPARATOR, segment_starts
from auditor.text.stretch import Stretch

KINDS = boundaries._KINDS


def starts_of(texts):
    stretch = Stretch(texts)
    return segment_starts(texts, stretch.bounds, stretch.points).tolist()


def asked(texts):
    """Return where segments begin, asking ICU document by document."""
    found, begin = [], 0
    for text in texts:
        units = 0
        places = {}
        for place, character in enumerate(text):
            places[units] = place
            units += len(character.encode("utf-16-le")) // 2
        found += [begin + places[start] for start, _ in WordBreaker(text, LOCALE).segments()]
        begin += len(text)
    return found


def test_every_plain_character_behaves_like_its_kind():
    """Those of ASCII at each of four places, the others at one: ICU gives the same."""
    kind_of = boundaries._kind_of()
    plain = np.flatnonzero(kind_of < len(KINDS)).tolist()
    assert len(plain) > 1000
    threes = ["".join(three) for three in product("\va#0 \r\n_:.'’", repeat=3)]
    for place in range(4):
        models = {
            kind: boundary(KINDS[kind], threes, place) for kind in {int(k) for k in kind_of[plain]}
        }
        for point in plain:
            if chr(point) not in KINDS and (point < 0x80 or point % 9 == place):
                assert boundary(chr(point), threes, place) == models[int(kind_of[point])], hex(
                    point
                )


def boundary(character, threes, place):
    """Return for each three, ``character`` set in at ``place``, where segments begin."""
    fours = [three[:place] + character + three[place:] for three in threes]
    return [start for start, _ in WordBreaker(SEPARATOR.join(fours), LOCALE).segments()]


@settings(max_examples=400)
@given(st.lists(st.text(KINDS + "bZ9-@\f\x85é«ßжΩ–“…", max_size=14), max_size=6))
def test_plain_documents(texts):
    """No window of four is enough for a fifth character, if a rule looked that far."""
    assert starts_of(texts) == asked(texts)


@settings(max_examples=400)
@given(
    st.lists(
        st.text("a1.' \r\n\n:\v\u0308\u200d🇵🇹กาแม日カ\u00ad\u2028א\"", max_size=14), max_size=6
    )
)
def test_lines_that_are_not_plain(texts):
    """They go to ICU, the lines beside them do not."""
    assert starts_of(texts) == asked(texts)


@given(st.lists(st.text(max_size=20), max_size=4))
def test_any_text(texts):
    """Over all of Unicode."""
    assert starts_of(texts) == asked(texts)


def test_icu_is_not_asked_for_plain_text(monkeypatch):
    """What the table is for: neither for ASCII, nor for the plain lines beside another."""
    starts_of(["a"])
    seen = []
    breaker = boundaries.WordBreaker
    monkeypatch.setattr(
        boundaries, "WordBreaker", lambda text, locale: seen.append(text) or breaker(text, locale)
    )
    starts_of(["It's 3.2 m,\r\nor – “so”…\n", "Ünder keel"])
    assert seen == []
    starts_of(["low\nกา tide\nlamp", "日\n"])
    assert seen == ["กา tide\n\v日\n"]
