"""Patterns of the kinds of text, each with the standard it follows; no match holds whitespace.

Every repetition that may fail is bounded, so that a long line without whitespace takes linear time.
"""

from __future__ import annotations

import re
from functools import cache

import numpy as np

from auditor.text import properties

# Latin letters, digits and the low line: what runs on within an identifier. Letters of other
# scripts do not: 第3章 holds a number between words.
_LATIN = "A-Za-zÀ-ÖØ-öø-ɏ"
_RUN = f"[{_LATIN}0-9_]"
_BEGIN, _END = f"(?<!{_RUN})", f"(?!{_RUN})"


def _begun(*alternatives: str) -> str:
    """Return a pattern of ``alternatives``, none of which begins within a run."""
    return f"{_BEGIN}(?:{'|'.join(alternatives)})"


# RFC 3986 sections 2.2 and 2.3; characters beyond ASCII by RFC 3987. A full stop, comma or bracket
# at the end belongs to the sentence around the URL.
_URL_CHARACTER = r"(?:[\w\-.~:/?#\[\]@!$&'()*+,;=%])"
_URL_LAST = r"[\w/#=&%~+\-$@*]"
_HOST_NAME = r"[A-Za-z0-9](?:[A-Za-z0-9\-]{0,62})(?:\.[A-Za-z0-9\-]{1,63}){1,8}"
_OCTET = r"(?:25[0-5]|2[0-4][0-9]|1[0-9][0-9]|[1-9]?[0-9])"
_URLS = _begun(
    # RFC 3986 section 3: a scheme and an authority, or a well-known scheme without one.
    rf"[A-Za-z][A-Za-z0-9+.\-]{{0,31}}://"
    rf"(?:(?:\[[0-9A-Fa-f:.]{{2,45}}\])?{_URL_CHARACTER}*{_URL_LAST}|\[[0-9A-Fa-f:.]{{2,45}}\])",
    rf"(?:mailto|news|tel|urn|doi|geo|sip|sips|data):{_URL_CHARACTER}*{_URL_LAST}",
    rf"www\.{_HOST_NAME}(?:[/?#:]{_URL_CHARACTER}*{_URL_LAST})?",
    # RFC 5322 section 3.4.1, dot-atoms; the local part has 64 octets at most (RFC 5321).
    rf"[A-Za-z0-9_][\w!#$%&'*+/=?^`{{|}}~.\-]{{0,63}}@{_HOST_NAME}",
    # RFC 3986 section 3.2.2, IPv4address, with the length of a prefix (RFC 4632) or a port.
    rf"(?<![0-9]\.)(?:{_OCTET}\.){{3}}{_OCTET}(?:/[0-9]{{1,2}}|:[0-9]{{1,5}})?"
    rf"(?!\.?{_RUN})",
    # RFC 4291 section 2.2; shortened ones hold a digit, as a::b is a name in programs.
    r"(?<!:)(?:[0-9A-Fa-f]{1,4}:){7}[0-9A-Fa-f]{1,4}(?![\w:])",
    r"(?<!:)(?=[0-9A-Fa-f:]{0,39}::)(?=[A-Fa-f:]{0,39}[0-9])"
    r"(?:[0-9A-Fa-f]{0,4}:){2,7}[0-9A-Fa-f]{0,4}(?![\w:])",
)

_CLOCK = r"(?:[01]?[0-9]|2[0-4]):[0-5][0-9](?::(?:[0-5][0-9]|60)(?:[.,][0-9]{1,9})?)?"
_ZONE = r"(?:[Zz]|[+\-−][0-9]{2}:?[0-9]{2})"
_DAY, _MONTH = r"(?:0?[1-9]|[12][0-9]|3[01])", r"(?:0?[1-9]|1[0-2])"
_DATES = (
    rf"{_BEGIN}(?<![0-9][.,:/\-])(?:"
    # RFC 3339 section 5.6: full-date, date-time; the offset may be left out.
    rf"[0-9]{{4}}-(?:0[1-9]|1[0-2])-(?:0[1-9]|[12][0-9]|3[01])(?:[Tt]{_CLOCK}{_ZONE}?)?"
    rf"|{_CLOCK}(?:{_ZONE}|[AaPp][Mm])?"
    # Common practice, no standard: day and month in either order, year of four or two digits.
    rf"|[0-9]{{4}}/{_MONTH}/{_DAY}"
    rf"|(?:{_DAY}/{_MONTH}|{_MONTH}/{_DAY})/(?:[0-9]{{4}}|[0-9]{{2}})"
    rf"|{_DAY}(?P<parted>[.\-]){_MONTH}(?P=parted)[0-9]{{4}}"
    rf"){_END}(?![:/\-][0-9])"
)

# UCUM's symbols as printed, table by table: base and derived units with their usual prefixes.
_ATTACHED = (
    "mmHg|mol/[lL]|mmol|µmol|umol|mol|kWh|MWh|GWh|Wh|[kMG]?Pa|hPa|mbar|bar|psi|atm"
    "|[kMGT]?Hz|[kMGT]i?B|[kMG]bit|[kmMGµu]?[WVAΩJ]|eV|[kM]eV|[kmµun]?[gmsLl]|c[mlL]|d[mlL]"
    "|dB|dBm|[NKCFT]|°[CF]?|℃|℉|%|‰|′|″|min|h|d|rad|sr|lx|lm|cd|kn|nmi|ft|in|lb|oz|ppm|ppb|rpm"
)
_COMPOUND = rf"(?:{_ATTACHED})(?:[²³⁻¹]{{1,3}}|\^?-?[23])?"
_AFTER_NUMBER = rf"{_COMPOUND}(?:[/·]{_COMPOUND}){{0,3}}{_END}"
# Symbols that are no word of themselves.
_ALONE = (
    r"km/h|m/s[²2]?|mg/d?[lL]|[mk]?g/m[³3]|mmHg|mmol(?:/[lL])?|µmol|[kMG]Wh|[kMh]Pa|mbar|[kMG]?Hz"
    r"|[kMGT]i?B|dBm?|[mkµ]g|[kcmµn]m[²³]?|m[lLVAWs]|k[WVJ]|MW|°[CF]|℃|℉|[kM]eV"
)
# How those of them begin that nothing else points at, see `kinds`: whole symbols of two letters,
# and the first two letters of longer ones.
PAIRS = ("mg", "kg", "km", "cm", "mm", "nm", "ml", "ms", "Hz", "MW", "GB", "MB", "TB")
BEGINNINGS = ("mb", "mm", "MP", "MW", "GW", "MH", "GH")
_UNITS = rf"(?<=[0-9]){_AFTER_NUMBER}|{_BEGIN}(?:{_ALONE}){_END}"

# RFC 9562 section 4.
_HEX = "[0-9A-Fa-f]"
_UUID = rf"{_HEX}{{8}}(?:-{_HEX}{{4}}){{3}}-{_HEX}{{12}}{_END}"

# Signed where no word or number stands before the sign; grouped by comma, full stop or apostrophe;
# ISO 80000-1 section 7.3 for the decimal sign, ISO 6093 (NR3) for the exponent.
_NUMBER = (
    rf"{_BEGIN}(?<![0-9][.,])(?!{_UUID})(?:(?<![\w)\]])[+\-−])?(?:"
    r"[0-9]{1,3}(?:,[0-9]{3}){1,8}(?:\.[0-9]{1,99})?|[0-9]{1,3}(?:\.[0-9]{3}){2,8}(?:,[0-9]{1,99})?"
    r"|[0-9]{1,3}(?:['’][0-9]{3}){1,8}(?:\.[0-9]{1,99})?"
    r"|[0-9]{1,200}(?:[.,][0-9]{1,200})?|\.[0-9]{1,200})(?:[eE][+\-−]?[0-9]{1,4})?"
    r"(?:st|nd|rd|th)?"
    rf"(?:{_END}(?![.\-][0-9])|(?={_AFTER_NUMBER}))"
)

_NAME = r"[\w.\-+@]"
_SUFFIXES = (
    "py|js|ts|c|h|cc|cpp|hpp|rs|go|java|rb|sh|txt|md|rst|csv|tsv|json|jsonl|xml|html|css|yaml|yml"
    "|toml|ini|cfg|conf|log|pdf|png|jpg|svg|zip|gz|tar|so|dll|exe|dtsi?|bin|dat|parquet|sql"
)
# Versions as in Semantic Versioning 2.0.0; IEEE 1003.1 section 4.13
# (path names). Names of programs: common practice, no standard.
_IDENTIFIERS = _begun(
    _UUID,
    rf"(?:~|\.{{1,2}}|[A-Za-z]:)(?:[/\\]{_NAME}{{1,255}})+[/\\]?",
    rf"(?<![/<.\\])(?:/{_NAME}{{1,255}}){{2,}}/?",
    rf"(?<![/<.\-@+])[\w.\-+]{{1,64}}(?:/{_NAME}{{1,255}}){{2,}}/?",
    rf"(?<![.\-])[\w\-]{{1,64}}(?:/[\w\-]{{1,64}})?(?:\.[\w\-]{{1,16}})?\.(?:{_SUFFIXES}){_END}",
    rf"(?<!\.)v?[0-9]{{1,9}}(?:\.[0-9]{{1,9}}){{2,5}}(?:[\-+][0-9A-Za-z.\-+]{{0,64}}[0-9A-Za-z])?{_END}",
    rf"v[0-9]{{1,9}}\.[0-9]{{1,9}}{_END}",
    rf"[0-9]{{1,9}}(?:-[0-9]{{1,9}}){{2,9}}{_END}",
    # Letters and digits mixed, low lines, or a capital after a small letter.
    rf"(?:_{{0,3}}[{_LATIN}]{{1,200}}[0-9_]|_{{0,3}}[0-9]{{1,200}}[{_LATIN}_]"
    rf"|[{_LATIN}]{{0,200}}?[a-zß-öø-ÿ][A-ZÀ-ÖØ-Þ])(?:{_RUN})*",
    rf"_{{1,3}}[{_LATIN}0-9]{_RUN}*",
)

_OPERAND = r"(?:[0-9]{1,20}(?:\.[0-9]{1,20})?[A-Za-z]?|[A-Za-z][0-9]?)"
_OPERATOR = r"[+\-−*/^·×÷]"
_SIDE = rf"{_OPERAND}(?:{_OPERATOR}{_OPERAND}){{0,9}}"
# TeX: a command, and a group after ^ or _; relations between operands of a letter or a number.
_FORMULAS = (
    r"\\[A-Za-z]+\*?|(?<=[A-Za-z0-9)}])[\^_]\{[^\s{}]{0,64}\}"
    rf"|{_BEGIN}{_SIDE}(?:(?:[<>=]=?|[≤≥≈≠]){_SIDE}){{1,4}}{_END}"
    rf"|{_BEGIN}{_OPERAND}\^{_OPERAND}{_END}"
)


@cache
def character_class(of_properties: str) -> str:
    """Return a class of the characters with ``of_properties`` for `re`, which knows none."""
    flags = np.concatenate(([False], properties.table(of_properties), [False]))
    edges = np.flatnonzero(flags[1:] != flags[:-1]).tolist()
    pairs = zip(edges[::2], edges[1::2], strict=True)
    return "[" + "".join(f"\\U{begin:08x}-\\U{end - 1:08x}" for begin, end in pairs) + "]"


def _emoji() -> str:
    """Return the sequences of UTS #51 section 1.4.9 (ED-13 to ED-17), longest first."""
    shown = character_class(r"(?:(?!\p{Regional_Indicator})\p{Emoji_Presentation})")
    pictured = character_class(r"\p{Extended_Pictographic}")
    changed = "(?:\\ufe0f|[\\U0001f3fb-\\U0001f3ff])"
    tags = "(?:[\\U000e0020-\\U000e007e]{1,30}\\U000e007f)"
    joined = rf"(?:\u200d{pictured}{changed}?)"
    return (
        r"[0-9#*]\ufe0f?\u20e3|[\U0001f1e6-\U0001f1ff]{2}"
        rf"|{shown}(?!\ufe0e){changed}?{tags}?{joined}*|{pictured}{changed}{tags}?{joined}*"
        rf"|{pictured}{joined}+"
    )


def _repeated() -> str:
    mark = character_class(r"[\p{P}\p{S}]")
    return rf"[|+:]{{0,9}}(?P<rule>[\-=])(?P=rule){{2,}}[|+:\-=]*|(?P<mark>{mark})(?P=mark){{2,}}"


# Where no kind can begin, passed over at once: within a word, and a long word before a mark that
# belongs to no pattern that begins with a letter.
_PASSED = rf"(?<=[{_LATIN}])[{_LATIN}]+|{_BEGIN}[A-Za-z][a-z]{{4,63}}(?=[\n,;()\[\]\"])"


@cache
def pattern() -> re.Pattern[str]:
    """Return the one pattern: at each place the first kind in this order that matches is taken."""
    kinds = {
        "urls_and_addresses": _URLS,
        "dates_and_times": _DATES,
        "emoji": _emoji(),
        "formulas": _FORMULAS,
        "numbers": _NUMBER,
        "units": _UNITS,
        "repeated_punctuation": _repeated(),
        "identifiers": _IDENTIFIERS,
    }
    named = "|".join(f"(?P<{kind}>{text})" for kind, text in kinds.items())
    return re.compile(f"{_PASSED}|{named}")
