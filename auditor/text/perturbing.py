"""Small changes of words, each stated and drawn from the word itself and a seed."""

from __future__ import annotations

import hashlib
import unicodedata
from collections import Counter
from collections.abc import Callable, Iterable

import regex

from auditor.text.scripts import script

_LETTERS = regex.compile(r"\p{L}")
_MARKS = regex.compile(r"\p{Mn}")
# Letters of a script that replace others: the most frequent ones of the words themselves.
_MOST_LETTERS = 40

Change = Callable[[str], str]


def changes(words: Iterable[tuple[str, int]], seed: int) -> dict[str, Change]:
    """Return the changes of a word by name; a word that has nothing to change stays as it is.

    Typing errors stand at a place drawn by the hash of seed, change and word. A letter is replaced
    by one that ``words`` (word, weight) hold in the same script.
    """
    letters = _letters_of(words)
    return {
        "lower case": str.lower,
        "upper case": str.upper,
        "without diacritics": _bare,
        "NFC": lambda word: unicodedata.normalize("NFC", word),
        "NFD": lambda word: unicodedata.normalize("NFD", word),
        "NFKC": lambda word: unicodedata.normalize("NFKC", word),
        "two letters swapped": lambda word: _swapped(word, seed),
        "a letter left out": lambda word: _left_out(word, seed),
        "a letter doubled": lambda word: _doubled(word, seed),
        "a letter replaced": lambda word: _replaced(word, letters, seed),
    }


def _letters_of(words: Iterable[tuple[str, int]]) -> dict[str, str]:
    """Return the letters of each script, most frequent first."""
    counts: dict[str, Counter[str]] = {}
    for word, weight in words:
        for letter in _LETTERS.findall(word.lower()):
            counts.setdefault(script(letter), Counter())[letter] += weight
    return {
        name: "".join(sorted(held, key=lambda c: (-held[c], c))[:_MOST_LETTERS])
        for name, held in counts.items()
    }


def _bare(word: str) -> str:
    return unicodedata.normalize("NFC", _MARKS.sub("", unicodedata.normalize("NFD", word)))


def _drawn(below: int, *about: object) -> int:
    """Return a number below ``below``, the same for the same things at any time."""
    told = "\0".join(map(str, about)).encode("utf-8", "surrogatepass")
    return int.from_bytes(hashlib.blake2b(told, digest_size=8).digest(), "big") % below


def share_of(seed: int) -> float:
    """Return a number from 0 up to 1 that ``seed`` draws."""
    return _drawn(1 << 53, seed, "share") / (1 << 53)


def _swapped(word: str, seed: int) -> str:
    places = [i for i in range(len(word) - 1) if word[i] != word[i + 1]
              and _LETTERS.match(word[i]) and _LETTERS.match(word[i + 1])]  # fmt: skip
    if not places:
        return word
    place = places[_drawn(len(places), seed, "swap", word)]
    return word[:place] + word[place + 1] + word[place] + word[place + 2 :]


def _left_out(word: str, seed: int) -> str:
    places = [i for i in range(len(word)) if _LETTERS.match(word[i])]
    if len(places) < 2:
        return word
    place = places[_drawn(len(places), seed, "drop", word)]
    return word[:place] + word[place + 1 :]


def _doubled(word: str, seed: int) -> str:
    places = [i for i in range(len(word)) if _LETTERS.match(word[i])]
    if not places:
        return word
    place = places[_drawn(len(places), seed, "double", word)]
    return word[: place + 1] + word[place:]


def _replaced(word: str, letters: dict[str, str], seed: int) -> str:
    places = [i for i in range(len(word)) if _LETTERS.match(word[i])]
    if not places:
        return word
    place = places[_drawn(len(places), seed, "place", word)]
    old = word[place]
    others = letters.get(script(old.lower()), "").replace(old.lower(), "")
    if not others:
        return word
    new = others[_drawn(len(others), seed, "letter", word)]
    return word[:place] + (new.upper() if old.isupper() else new) + word[place + 1 :]
