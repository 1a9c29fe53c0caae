"""The cases in which terms are tried."""

from __future__ import annotations

import pytest

from auditor.text.cases import cases_of, titled


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("wind vane", "Wind Vane"),
        ("AIS-transponder", "Ais-Transponder"),
        ("keeper's", "Keeper's"),
        ("2nd mate", "2Nd Mate"),
        ("ǆep", "ǅep"),
        ("ΣΟΦΟΣ", "Σοφος"),
        ("浮標", "浮標"),
        ("(kN)", "(Kn)"),
    ],
)
def test_title_case(text, expected):
    """The first cased letter of each UAX #29 word, the rest in lower case."""
    assert titled(text) == expected


def test_cases_that_spell_alike_are_tried_once():
    """A spelling stands under the first case that gives it."""
    assert cases_of("AIS") == {"as given": "AIS", "lower": "ais", "title": "Ais"}
    assert cases_of("buoy") == {"as given": "buoy", "title": "Buoy", "upper": "BUOY"}
    assert cases_of("浮標") == {"as given": "浮標"}
    assert list(cases_of("kN")) == ["as given", "lower", "title", "upper"]
