"""How numbers are written: as precise as their interval, never rounded to what they are not."""

from __future__ import annotations

import pytest

from auditor.report.formatting import clean, interval, quantile, ranged_or_why, size, value
from tests.unit.report import material


@pytest.mark.parametrize(
    ("name", "figure", "expected"),
    [
        ("fertility", (1.84321, 1.79, 1.896), "1.843 (1.790 to 1.896)"),
        ("fertility", (13.2, 10.1, 16.3), "13.20 (10.10 to 16.30)"),
        ("unknown_words", (0.1234, 0.10, 0.15), "12.3% (10.0% to 15.0%)"),
        ("unknown_words", (0.00001, 0.0, 0.00003), "0.0010% (0% to 0.0030%)"),
        ("lossless_documents", (1.0, 0.996, 1.0), "100% (99.60% to 100%)"),
        ("unknown_words", (0.0, 0.0, None), "0%"),
    ],
)
def test_a_value_has_the_digits_of_its_interval(name, figure, expected):
    """Two digits of the half width are shown, and a bare 0 or 100 % is exact."""
    assert ranged_or_why(name, material.value(*figure)) == expected


def test_almost_none_and_almost_all_are_told_apart():
    """One token in a thousand million is not none, nor is all but one all."""
    assert value("unknown_words", material.value(1e-9, None, None)) == "<0.000001%"
    assert value("lossless_documents", material.value(1 - 1e-9, 0.9, 1.0)) == ">99.9%"


def test_undefined_is_a_dash_with_its_reason():
    """No value: a dash and why; no interval: the value alone."""
    undefined = material.value(None, None, None, "no words in this slice")
    assert ranged_or_why("fertility", undefined) == "– (no words in this slice)"
    assert interval("fertility", material.value(1.0, None, None)) is None


def test_an_open_end_of_a_length_is_a_dash():
    """A quantile beyond what the documents can tell has one end."""
    assert quantile({"value": 1042, "low": 840, "high": None}) == "1,042 (840 to –)"
    assert quantile({"value": 7, "low": None, "high": None}) == "7"


def test_text_of_the_corpus_is_made_harmless():
    """Control and format characters and line separators are written as code points; long is cut."""
    assert clean("a\nb\u2028c\u202ed") == "a⟨U+000A⟩b⟨U+2028⟩c⟨U+202E⟩d"
    assert clean("x" * 200, 5) == "xxxxx…"


def test_sizes_take_their_unit():
    """Bytes are written in decimal units."""
    assert [size(n) for n in (999, 90_210, 1_300_000)] == ["999 bytes", "90.2 kB", "1.3 MB"]
