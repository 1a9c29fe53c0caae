"""Scripts of characters (UAX #24), looked up in `regex`, the one authority for properties."""

from __future__ import annotations

from functools import cache

import regex

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
