"""Labels: what script they lead one to expect, and which texts contradict them."""

from __future__ import annotations

from collections import Counter

import pytest

from auditor.text.labels import contradicts, is_mixed, label_of, near_duplicates
from auditor.text.scripts import NAMES, script, script_numbers, scripts_of_code
from auditor.text.stretch import Stretch


def letters(text):
    """Return the letters of a text by script, one by one."""
    found = Counter(script(c) for c in text if c.isalpha())
    return {name: n for name, n in found.items() if name not in ("Common", "Inherited")}


def against(label, text):
    return contradicts(label_of(label), letters(text), text)


@pytest.mark.parametrize(
    ("label", "scripts"),
    [
        ("pt", {"Latin"}),
        ("pt_BR", {"Latin"}),
        ("ru", {"Cyrillic"}),
        ("ja", {"Han", "Hiragana", "Katakana"}),
        ("ko", {"Hangul", "Han"}),
        ("zh-TW", {"Han"}),
        ("ar", {"Arabic"}),
        ("hi", {"Devanagari"}),
        ("sr", {"Cyrillic"}),
        ("sr-Latn", {"Latin"}),
        ("el", {"Greek"}),
    ],
)
def test_a_label_leads_one_to_expect_a_script(label, scripts):
    """Likely subtags of UTS #35; examples of BCP 47 and CLDR's table of likely subtags."""
    assert label_of(label).scripts == scripts


@pytest.mark.parametrize("label", ["", "(none)", "xx", "no idea", "und", "qaa"])
def test_a_label_that_names_no_language_leads_to_nothing(label):
    """Empty, made up, undetermined or private: known to be unknown."""
    assert not label_of(label).known


def test_labels_of_one_language_and_script_are_near_duplicates():
    """pt, por and pt-BR are one; simplified and traditional writing are two."""
    found = near_duplicates(["pt", "por", "pt-BR", "zh-CN", "zh-TW", "de", "xx", "sr", "sr-Latn"])
    assert found == [["por", "pt", "pt-BR"]]


PROSE = "The buoy was lifted on board and its mooring chain was found worn near the upper shackle."


def test_a_passage_in_another_script_contradicts():
    """A whole sentence of English under labels of other scripts, and the other way round."""
    for label in ("ru", "ja", "el", "hi", "ar"):
        assert against(label, PROSE) == "Latin"
    russian = "Буй подняли на борт, и цепь оказалась изношенной у верхней скобы."
    assert against("en", russian) == "Cyrillic"
    japanese = "ブイを引き揚げたところ、係留用の鎖が上側のシャックル付近で摩耗しており、"
    assert against("ru", japanese + "直ちに交換する必要があるとの報告を受けた。") == "Han"


@pytest.mark.parametrize(
    "text",
    [
        PROSE[:38],
        "sudo mount -t ext4 /dev/sda1 /mnt && cp -r /etc/buoyd.conf /mnt/backup/buoyd.conf.old",
        "https://buoys.example/reports/all-the-notes-of-last-winter?station=north&format=long",
        "BuoyControl MooringPlanner TideTable WaveGauge LightSensor ChainTester SeaLog PortDesk",
        "BZ-114 BZ-115 BZ-116 NORTH EAST SOUTH WEST HARBOUR CHANNEL PIER QUAY STATION LIGHT",
    ],
)
def test_commands_names_and_addresses_do_not(text):
    """Too few letters, or nothing that runs like a text."""
    assert against("ru", text) is None


def test_quoted_foreign_text_does_not():
    """What a Greek note quotes says nothing of the note."""
    note = f"Η ετικέτα γράφει: «{PROSE}» και τίποτε άλλο."
    assert against("el", note) is None


def test_a_text_in_its_own_script_does_not():
    """Whatever commands stand in it."""
    russian = "Выполните sudo systemctl restart buoyd и проверьте журнал событий."
    assert against("ru", russian) is None
    assert against("pt", PROSE) is None
    assert against("xx", PROSE) is None


def test_mixed_scripts():
    """Two scripts with a good share each; kana beside ideographs is one writing."""
    assert is_mixed(letters("Буй подняли на борт сегодня, and the chain was found worn."))
    assert not is_mixed(letters("ブイを引き揚げたところ係留用の鎖が上側で摩耗していました"))
    assert not is_mixed(letters(PROSE))


def test_numbers_of_scripts_name_the_scripts():
    """The table by code point, filled as it is asked, against one character at a time."""
    text = "aя か漢ア한ไ🌊\u0301Ω1\U0001e900\u0378"
    found = [NAMES[number] for number in script_numbers(Stretch([text]).points).tolist()]
    assert found == [script(character) for character in text]


def test_codes_of_iso_15924():
    """Four-letter codes and the long names of UAX #24; those of several scripts."""
    assert scripts_of_code("Cyrl") == {"Cyrillic"}
    assert scripts_of_code("Jpan") == {"Han", "Hiragana", "Katakana"}
    assert scripts_of_code("Adlm") == {"Adlam"}
    assert scripts_of_code("Zzzz") <= {"Unknown"}
    assert scripts_of_code("Qaaz") == frozenset()
