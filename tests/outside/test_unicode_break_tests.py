"""Boundaries and scripts against the Unicode Consortium's own files (Debian's `unicode-data`)."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import pytest
import regex
from icu4py.breakers import CharacterBreaker, WordBreaker

from auditor.text.scripts import SCRIPTS, script
from auditor.text.stretch import Stretch
from auditor.text.words import LOCALE, count_graphemes

pytestmark = pytest.mark.outside

FOLDER = Path("/usr/share/unicode")
FILES = {
    "WordBreakTest": (WordBreaker, 1823),
    "GraphemeBreakTest": (CharacterBreaker, 602),
}
every_file = pytest.mark.parametrize("name", list(FILES))

# The files are of Unicode 15.0, ICU 78 of Unicode 17.0. Since then U+2701 UPPER BLADE SCISSORS is
# Extended_Pictographic no more (emoji-data.txt), so that WB3c and GB11 no longer join it to a ZWJ.
# Left: the line of the file; right: the boundaries of today.
CHANGED = {
    "WordBreakTest": {
        "÷ 2701 × 200D × 2701 ÷": "÷ 2701 × 200D ÷ 2701 ÷",
        "÷ 0061 × 200D × 2701 ÷": "÷ 0061 × 200D ÷ 2701 ÷",
    },
    "GraphemeBreakTest": {
        "÷ 2701 × 200D × 2701 ÷": "÷ 2701 × 200D ÷ 2701 ÷",
    },
}


def content(path):
    return (FOLDER / path).read_text(encoding="utf-8")


def lines_of(name):
    """Return the test lines of a file, comments taken off."""
    bare = (line.split("#")[0].strip() for line in content(f"auxiliary/{name}.txt").split("\n"))
    return [line for line in bare if line]


def parsed(line):
    """Return the segments of a line such as ``÷ 0061 × 0308 ÷ 0062 ÷``."""
    parts = [part.split("×") for part in line.split("÷") if part.strip()]
    return ["".join(chr(int(code, 16)) for code in part) for part in parts]


def by_icu(breaker, text):
    spelled = text.encode("utf-16-le")
    pairs = breaker(text, LOCALE).segments()
    return [spelled[2 * start : 2 * end].decode("utf-16-le") for start, end in pairs]


@every_file
def test_every_line_is_parsed(name):
    """As many lines as the file's trailer and its 15.0.0 edition say."""
    trailer = regex.search(r"^# Lines: (\d+)$", content(f"auxiliary/{name}.txt"), regex.M)
    assert len(lines_of(name)) == int(trailer[1]) == FILES[name][1]


@every_file
def test_the_file_is_of_unicode_15(name):
    """The list of changed lines holds for this edition only."""
    assert content(f"auxiliary/{name}.txt").startswith(f"# {name}-15.0.0.txt")


@every_file
def test_icu_sets_the_boundaries_of_every_line(name):
    """ICU agrees with the file, or with the newer rule where one is listed."""
    breaker, changed = FILES[name][0], CHANGED[name]
    wrong = {}
    for line in lines_of(name):
        expected = parsed(changed.get(line, line))
        if (found := by_icu(breaker, "".join(expected))) != expected:
            wrong[line] = found
    assert wrong == {}


@every_file
def test_every_changed_line_stands_in_the_file(name):
    """No listed difference outlives its reason: it differs, and by U+2701 beside a ZWJ alone."""
    assert set(CHANGED[name]) <= set(lines_of(name))
    for line, today in CHANGED[name].items():
        assert today == line.replace("200D × 2701", "200D ÷ 2701") != line


def points_of(row):
    """Return the range of code points that a row of a property file opens with."""
    first, *last = row.split(";")[0].strip().split("..")
    return range(int(first, 16), int((last or [first])[0], 16) + 1)


def test_u_2701_was_a_pictograph_and_is_none():
    """The reason for the changed lines: emoji-data.txt of 15.0 against the property of today."""
    rows = content("emoji/emoji-data.txt").split("\n")
    held = [row for row in rows if "; Extended_Pictographic" in row and not row.startswith("#")]
    assert any(0x2701 in points_of(row) for row in held)
    assert not regex.fullmatch(r"\p{Extended_Pictographic}", "\u2701")


def test_words_of_every_line_at_once():
    """All 1,823 texts end to end: the words are the segments that hold a letter or a number."""
    lines = [parsed(CHANGED["WordBreakTest"].get(line, line)) for line in lines_of("WordBreakTest")]
    expected = [piece for line in lines for piece in line if regex.search(r"[\p{L}\p{N}]", piece)]
    assert Stretch(["".join(line) for line in lines]).word_texts == expected


def test_grapheme_counts_of_every_line():
    """Each of the 602 texts has as many clusters as its line says."""
    changed = CHANGED["GraphemeBreakTest"]
    wrong = [
        line
        for line in lines_of("GraphemeBreakTest")
        if count_graphemes("".join(parsed(line))) != len(parsed(changed.get(line, line)))
    ]
    assert wrong == []


def listed_scripts():
    """Yield (code point, script) of every code point that Scripts.txt lists."""
    for line in content("Scripts.txt").split("\n"):
        if row := line.split("#")[0].strip():
            for point in points_of(row):
                yield point, row.split(";")[1].strip()


def test_scripts_of_every_listed_character():
    """All 149,251 code points of Scripts-15.0.0.txt keep their script; none has moved since."""
    listed = list(listed_scripts())
    assert len(listed) == 149_251
    assert [(point, name) for point, name in listed if script(chr(point)) != name] == []


def test_counts_of_scripts():
    """Counts of Scripts-15.0.0.txt, by the look-up over the characters that it lists."""
    counts = Counter(script(chr(point)) for point, _ in listed_scripts())
    expected = {
        "Han": 98_408, "Hangul": 11_739, "Common": 8_301, "Latin": 1_481, "Arabic": 1_368,
        "Inherited": 657, "Greek": 518, "Cyrillic": 506, "Hiragana": 381, "Katakana": 321,
        "Devanagari": 164, "Hebrew": 134, "Thai": 86,
    }  # fmt: skip
    assert {name: counts[name] for name in expected} == expected
    assert len(counts) == 163


def test_no_script_is_missing():
    """Every script of the file is among those looked up, so that none reads as Unknown."""
    assert {name for _, name in listed_scripts()} <= set(SCRIPTS)
