"""Scripts of characters (UAX #24), looked up in `regex`, the one authority for properties."""

from __future__ import annotations

from functools import cache

import numpy as np
import numpy.typing as npt
import regex

from auditor.text.properties import CODE_POINTS, every_character

Ints = npt.NDArray[np.int64]
Points = npt.NDArray[np.uint32]

# The commonest come first: the look-up tries them in this order.
_NAMES = """
Latin Common Inherited Cyrillic Greek Arabic Han Hiragana Katakana Hangul Adlam Ahom
Anatolian_Hieroglyphs Armenian Avestan Balinese Bamum Bassa_Vah Batak Bengali Beria_Erfe
Bhaiksuki Bopomofo Brahmi Braille Buginese Buhid Canadian_Aboriginal Carian
Caucasian_Albanian Chakma Cham Cherokee Chorasmian Coptic Cuneiform Cypriot Cypro_Minoan
Deseret Devanagari Dives_Akuru Dogra Duployan Egyptian_Hieroglyphs Elbasan Elymaic Ethiopic
Garay Georgian Glagolitic Gothic Grantha Gujarati Gunjala_Gondi Gurmukhi Gurung_Khema
Hanifi_Rohingya Hanunoo Hatran Hebrew Imperial_Aramaic Inscriptional_Pahlavi
Inscriptional_Parthian Javanese Jurchen Kaithi Kannada Kawi Kayah_Li Kharoshthi
Khitan_Small_Script Khmer Khojki Khudawadi Kirat_Rai Lao Lepcha Limbu Linear_A Linear_B Lisu
Lycian Lydian Mahajani Makasar Malayalam Mandaic Manichaean Marchen Masaram_Gondi
Medefaidrin Meetei_Mayek Mende_Kikakui Meroitic_Cursive Meroitic_Hieroglyphs Miao Modi
Mongolian Mro Multani Myanmar Nabataean Nag_Mundari Nandinagari New_Tai_Lue Newa Nko Nushu
Nyiakeng_Puachue_Hmong Ogham Ol_Chiki Ol_Onal Old_Hungarian Old_Italic Old_North_Arabian
Old_Permic Old_Persian Old_Sogdian Old_South_Arabian Old_Turkic Old_Uyghur Oriya Osage
Osmanya Pahawh_Hmong Palmyrene Pau_Cin_Hau Phags_Pa Phoenician Proto_Cuneiform
Psalter_Pahlavi Rejang Runic Samaritan Saurashtra Seal Sharada Shavian Siddham Sidetic
SignWriting Sinhala Sogdian Sora_Sompeng Soyombo Sundanese Sunuwar Syloti_Nagri Syriac
Tagalog Tagbanwa Tai_Le Tai_Tham Tai_Viet Tai_Yo Takri Tamil Tangsa Tangut Telugu Thaana
Thai Tibetan Tifinagh Tirhuta Todhri Tolong_Siki Toto Tulu_Tigalari Ugaritic Vai Vithkuqi
Wancho Warang_Citi Yezidi Yi Zanabazar_Square
"""
SCRIPTS = tuple(_NAMES.split())


@cache
def _pattern() -> regex.Pattern[str]:
    return regex.compile("|".join(rf"(?P<{name}>\p{{Script={name}}})" for name in SCRIPTS))


@cache
def script(character: str) -> str:
    """Return the long script name of one character, ``Unknown`` when it has none."""
    match = _pattern().fullmatch(character)
    return str(match.lastgroup) if match else "Unknown"


# Names by number; the last one stands for characters that have no script.
NAMES = (*SCRIPTS, "Unknown")
COMMON, INHERITED = SCRIPTS.index("Common"), SCRIPTS.index("Inherited")
_UNSEEN = -1
_NUMBERS = np.full(CODE_POINTS, _UNSEEN, dtype=np.int16)


def script_numbers(points: Points) -> Ints:
    """Return the script of each code point as an index into ``NAMES``, shape (characters,)."""
    found = _NUMBERS[points]
    if (found == _UNSEEN).any():
        for point in np.unique(points[found == _UNSEEN]).tolist():
            _NUMBERS[point] = NAMES.index(script(chr(point)))
        found = _NUMBERS[points]
    return found.astype(np.int64)


@cache
def scripts_of_code(code: str) -> frozenset[str]:
    """Return the long names that a script code of ISO 15924 stands for; empty if there is none.

    Codes for writing systems of several scripts (``Jpan``, ``Kore``) or for one variant of a script
    (``Hans``, ``Latf``) are those of UTS #39, table 1, and of ISO 15924 itself.
    """
    if code in _SEVERAL:
        return frozenset(_SEVERAL[code].split())
    try:
        pattern = regex.compile(rf"\p{{Script={code}}}")
    except regex.error:
        return frozenset()
    found = pattern.search(every_character())
    return frozenset({script(found[0])}) if found else frozenset()


_SEVERAL = {
    "Jpan": "Han Hiragana Katakana",
    "Kore": "Hangul Han",
    "Hans": "Han",
    "Hant": "Han",
    "Hanb": "Han Bopomofo",
    "Hrkt": "Hiragana Katakana",
    "Aran": "Arabic",
    "Latf": "Latin",
    "Latg": "Latin",
    "Cyrs": "Cyrillic",
    "Syrj": "Syriac",
    "Syre": "Syriac",
    "Syrn": "Syriac",
    "Geok": "Georgian",
}
