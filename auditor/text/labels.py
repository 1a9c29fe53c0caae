"""Whether a language label fits the script of a text: likely subtags against what is found."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import langcodes
import regex
from langcodes.data_dicts import LIKELY_SUBTAGS

from auditor.text.scripts import script, scripts_of_code

# A text contradicts its label with at least so many letters in running words of another script,
# and with at most this share of its letters in a script of the label.
ENOUGH_LETTERS = 40
ENOUGH_WORDS = 6
AT_MOST_INSIDE = 0.1
# A text mixes scripts when each of two has at least this share of its letters, and so many.
MIXED_SHARE, MIXED_LETTERS = 0.2, 20

# Addresses, and whatever is quoted: neither says in what language a text is written.
_ADDRESS = regex.compile(r"\b\w[\w+.-]*://\S+|\bwww\.\S+|\S+@\S+")
_QUOTED = regex.compile(r"“[^”]*”|„[^“”]*[“”]|«[^»]*»|「[^」]*」|『[^』]*』|\"[^\"]*\"|`[^`']*['`]")
_WORD = regex.compile(r"\S+")
_LETTERS = regex.compile(r"\p{L}+(?:['’-]\p{L}+)*")
_EDGES = regex.compile(r"^[\p{P}\p{S}]+|[\p{P}\p{S}]+$")


@dataclass(frozen=True, slots=True)
class Label:
    """What a label leads one to expect; ``scripts`` is empty when it is no known language.

    ``code`` is the script's of ISO 15924, which tells apart what two ways of writing have in common
    (``Hans`` and ``Hant`` are both of Han).
    """

    label: str
    language: str | None
    code: str
    scripts: frozenset[str]

    @property
    def known(self) -> bool:
        """Whether the label names a language with a known script."""
        return bool(self.scripts)


@cache
def label_of(text: str) -> Label:
    """Return what the label ``text`` leads one to expect.

    The likely script of a BCP 47 tag (UTS #35, likely subtags, as `langcodes` carries them) unless
    the tag names one itself.
    """
    try:
        tag = langcodes.Language.get(text.replace("_", "-"))
    except langcodes.tag_parser.LanguageTagError:
        return Label(text, None, "", frozenset())
    if not tag.is_valid() or tag.language is None or tag.language == "und":
        return Label(text, None, "", frozenset())
    if tag.script is None and tag.language not in LIKELY_SUBTAGS:
        return Label(text, tag.language, "", frozenset())
    code = tag.script or tag.maximize().script or ""
    return Label(text, tag.language, code, scripts_of_code(code))


def near_duplicates(labels: list[str]) -> list[list[str]]:
    """Return groups of labels that name one language in one script, such as pt, por and pt-BR."""
    groups: dict[tuple[str, str], list[str]] = {}
    for text in sorted(labels):
        found = label_of(text)
        if found.language is not None and found.known:
            groups.setdefault((found.language, found.code), []).append(text)
    return [group for group in groups.values() if len(group) > 1]


Letters = dict[str, int]


def running_letters(text: str) -> tuple[Letters, Letters]:
    """Return the letters in running words of ``text``, and such words, by script.

    Running words are what is left without addresses, quoted text, and whatever looks like a command
    or a name: words with a digit or a sign inside, words in capitals or with a capital inside.
    """
    letters: Letters = {}
    words: Letters = {}
    for found in _WORD.finditer(_QUOTED.sub(" ", _ADDRESS.sub(" ", text))):
        word = _EDGES.sub("", found[0])
        if _LETTERS.fullmatch(word) and not _looks_like_a_name(word):
            _count(letters, word)
            first = script(word[0])
            words[first] = words.get(first, 0) + 1
        elif not word.isascii():
            for part in _LETTERS.findall(word):
                _count(letters, part)
    return letters, words


def _looks_like_a_name(word: str) -> bool:
    return (len(word) > 1 and word.isupper()) or any(c.isupper() for c in word[1:])


def _count(letters: Letters, word: str) -> None:
    for character in word:
        name = script(character)
        letters[name] = letters.get(name, 0) + 1


def contradicts(label: Label, letters: Letters, text: str) -> str | None:
    """Return the script in which ``text`` is written against its label; ``None`` when it is not.

    ``letters`` are those of the whole text by script, Common and Inherited left out. Without enough
    letters in running words nothing is said. A swap between languages of one script cannot be seen.
    """
    total = sum(letters.values())
    inside = sum(count for name, count in letters.items() if name in label.scripts)
    if not label.known or total < ENOUGH_LETTERS or inside > AT_MOST_INSIDE * total:
        return None
    running, words = running_letters(text)
    outside = _joined({n: c for n, c in running.items() if n in letters.keys() - label.scripts})
    most = max(outside, key=lambda name: (outside[name], name), default=None)
    if most is None or outside[most] < ENOUGH_LETTERS:
        return None
    return most if most in _UNSPACED or words.get(most, 0) >= ENOUGH_WORDS else None


# Scripts that are written without spaces between words.
_UNSPACED = frozenset({"Han", "Thai", "Lao", "Khmer", "Myanmar", "Tibetan"})
_TOGETHER = {"Hiragana": "Han", "Katakana": "Han", "Bopomofo": "Han"}


def _joined(letters: Letters) -> Letters:
    """Return letters by script, kana counted with ideographs, under whose name they stand."""
    joined: Letters = {}
    for name, count in letters.items():
        together = _TOGETHER.get(name, name)
        joined[together] = joined.get(together, 0) + count
    return joined


def is_mixed(letters: Letters) -> bool:
    """Return whether two scripts each have a good share of a text's letters.

    Kana and ideographs count as one; a text of Hangul and ideographs is mixed.
    """
    joined = _joined(letters)
    total = sum(joined.values())
    good = [n for n in joined.values() if n >= MIXED_LETTERS and n >= MIXED_SHARE * total]
    return len(good) > 1
