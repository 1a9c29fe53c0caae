"""Kinds of text: published examples, a page labelled by hand, and the law of locality."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.text import kinds as module
from auditor.text.kind_patterns import pattern
from auditor.text.kinds import INK_KINDS, KINDS, kinds_of, may_be_cut
from auditor.text.stretch import Stretch


def named(text):
    return [KINDS[kind] for kind in kinds_of(Stretch([text])).tolist()]


def parted(text):
    """Return the maximal runs of one kind, with its name."""
    found = []
    for character, kind in zip(text, named(text), strict=True):
        if found and found[-1][1] == kind:
            found[-1] = (found[-1][0] + character, kind)
        else:
            found.append((character, kind))
    return found


# RFC 3339 section 5.8.
RFC_3339 = [
    "1985-04-12T23:20:50.52Z",
    "1996-12-19T16:39:57-08:00",
    "1990-12-31T23:59:60Z",
    "1990-12-31T15:59:60-08:00",
    "1937-01-01T12:00:27.87+00:20",
]
# RFC 3986 section 1.1.2.
RFC_3986 = [
    "ftp://ftp.is.co.za/rfc/rfc1808.txt",
    "http://www.ietf.org/rfc/rfc2396.txt",
    "ldap://[2001:db8::7]/c=GB?objectClass?one",
    "mailto:John.Doe@example.com",
    "news:comp.infosystems.www.servers.unix",
    "tel:+1-816-555-1212",
    "telnet://192.0.2.16:80/",
    "urn:oasis:names:specification:docbook:dtd:xml:4.1.2",
]
# UTS #51 section 1.4: presentation, modifier, flag, tag, keycap and ZWJ sequences; from memory.
UTS_51 = [
    "\u231a",
    "\u2764\ufe0f",
    "\U0001f44d\U0001f3fd",
    "\U0001f1e9\U0001f1ea",
    "\U0001f3f4\U000e0067\U000e0062\U000e0073\U000e0063\U000e0074\U000e007f",
    "1\ufe0f\u20e3",
    "\U0001f469\u200d\U0001f680",
    "\U0001f469\u200d\u2764\ufe0f\u200d\U0001f468",
]
# UCUM, print symbols, with prefixes; from memory.
UCUM = ["mg", "kg", "kPa", "hPa", "mmHg", "kWh", "Hz", "MHz", "km", "cm", "mL", "°C", "mmol/L"]
OTHERS = {
    "identifiers": [
        "123e4567-e89b-12d3-a456-426614174000",  # an invented UUID of the form of RFC 9562
        "wave_height", "waveHeight", "0x1F", "v1.2", "1.2.3", "1.0.0-alpha.1", "/var/log/buoy.log",
        r"C:\buoys\a7", "readings.csv", "B7", "__init__",
    ],
    "numbers": ["7", "-3.5", "1013.25", "1,234,567", "1.234.567", "6.02e23", "1'000", "3rd"],
    "dates_and_times": ["2026-12-01", "12:30", "7:05:09", "3/4/2026", "01.12.2026", "2026/12/01"],
    "urls_and_addresses": ["www.buoy.example", "keeper@buoy.example", "192.0.2.1", "2001:db8::7"],
    "formulas": ["a=b+c", r"\alpha", "∑", "x^2", "y=2x+1"],
    "repeated_punctuation": ["=====", "|---|---|", "...", "!!!", "-----"],
}  # fmt: skip
PUBLISHED = [
    *((text, "dates_and_times") for text in RFC_3339),
    *((text, "urls_and_addresses") for text in RFC_3986),
    *((text, "emoji") for text in UTS_51),
    *((text, "units") for text in UCUM),
    *((text, kind) for kind, texts in OTHERS.items() for text in texts),
]


@pytest.mark.parametrize(("text", "kind"), PUBLISHED)
@pytest.mark.parametrize("around", ["{}", "at {} again", "({})"])
def test_examples_are_of_one_kind(text, kind, around):
    before, after = around.split("{}")
    found = named(around.format(text))
    assert found[len(before) : len(found) - len(after)] == [kind] * len(text)


# Set by hand, one letter a character.
LETTERS = dict(
    zip("wndiu@fe.r_ao", [  # noqa: B905
        "words", "numbers", "dates_and_times", "identifiers", "units", "urls_and_addresses",
        "formulas", "emoji", "punctuation", "repeated_punctuation", "single_spaces", "alignment",
        "other",
    ])
) | {"\n": "line_ends"}  # fmt: skip
PAGE = [
    ("2026-12-01T06:00:00Z B7 hs=2.13 m, 8.4°C!", "dddddddddddddddddddd_ii_ww.nnnn_w._nnnuu."),
    ("It's calm; wind 12 km/h.", "wwww_wwww._wwww_nn_uuuu."),
    ('{"t": 12.5, "wave_height": -0.5}', "..w.._nnnn._.iiiiiiiiiii.._nnnn."),
    ("| buoy  | hPa |", "._wwwwaa._uuu_."),
    ("|------|-----|", "rrrrrrrrrrrrrr"),
    ("    return maxWave(a)", "aaaawwwwww_iiiiiii.w."),
    ("See www.buoy.example, 👍!", "www_@@@@@@@@@@@@@@@@._e."),
    ("\tx\u200b", "awo"),
]


@pytest.mark.parametrize(("line", "labels"), PAGE)
def test_a_line_labelled_by_hand(line, labels):
    assert named(line) == [LETTERS[label] for label in labels]


def test_a_page_labelled_by_hand():
    text = "\n".join(line for line, _ in PAGE)
    assert named(text) == [LETTERS[label] for label in "\n".join(labels for _, labels in PAGE)]


PARTS = [
    *"aAbmg15.,:/\\-=_|(@'+^ \n\t\r", "mg", "\r\n", "é", "\u0301", "===", "👍", "\u200d", "\ufe0f",
    "://", "www.", "12:30", "\u2028", "\u00a0", "°C", "中", "::", "MHz", "kW",
]  # fmt: skip
hard = st.lists(st.sampled_from(PARTS), max_size=24).map("".join)


@settings(max_examples=300, deadline=None)
@given(text=hard)
def test_cuts_change_no_kind(text):
    """Cut wherever it is allowed, and lay the parts end to end as documents of their own."""
    stretch = Stretch([text])
    points = stretch.points
    cuts = (np.flatnonzero(may_be_cut(points[:-1], points[1:])) + 1).tolist()
    parts = [text[a:b] for a, b in zip([0, *cuts], [*cuts, len(text)], strict=True)]
    assert kinds_of(Stretch(parts)).tolist() == kinds_of(stretch).tolist()


@settings(max_examples=200, deadline=None)
@given(texts=st.lists(hard, max_size=5))
def test_documents_are_told_apart(texts):
    found = kinds_of(Stretch(texts)).tolist()
    assert found == [kind for text in texts for kind in kinds_of(Stretch([text])).tolist()]


@settings(max_examples=300, deadline=None)
@given(text=hard)
def test_items_passed_over_hold_nothing_for_the_patterns(text):
    """Without triggers, every item is looked at: the outcome is the same."""
    expected = named(text)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(module, "_triggers", lambda points, *_: np.ones(len(points), dtype=bool))
        assert named(text) == expected


@given(text=st.text())
def test_whitespace_kinds_are_whitespace(text):
    blank = {"single_spaces", "alignment", "line_ends"}
    for kind, ink in zip(named(text), Stretch([text]).ink.tolist(), strict=True):
        assert (kind in INK_KINDS) is ink
        assert (kind in blank) is not ink


@pytest.mark.parametrize("part", ["a=", "1.", "a@", "_", "/a", "a.", "::1", "a-", "1,234,", "aB"])
def test_a_long_line_takes_linear_time(part):
    """Matches of a line of 200,000 characters without whitespace end; none is quadratic."""
    text = part * (200_000 // len(part))
    assert len(named(text)) == len(text)
    assert sum(len(match[0]) for match in pattern().finditer(text)) <= len(text)
