"""The cases of a term: as given, lower, title and upper (Unicode, section 3.13)."""

from __future__ import annotations

from auditor.text.stretch import Stretch

AS_GIVEN, LOWER, TITLE, UPPER = "as given", "lower", "title", "upper"


def cases_of(text: str) -> dict[str, str]:
    """Return ``text`` by case; a case that spells it as an earlier one does is left out."""
    every = {AS_GIVEN: text, LOWER: text.lower(), TITLE: titled(text), UPPER: text.upper()}
    first: dict[str, str] = {}
    for case, form in every.items():
        first.setdefault(form, case)
    return {case: form for form, case in first.items()}


def titled(text: str) -> str:
    """Return ``text`` with the first cased letter of each word (UAX #29) in title case.

    The letters after it are in lower case; what stands between words is left alone.
    """
    words = Stretch([text]).words
    parts, reached = [], 0
    for start, end in zip(words.starts.tolist(), words.ends.tolist(), strict=True):
        parts += [text[reached:start], _titled_word(text[start:end])]
        reached = end
    return "".join([*parts, text[reached:]])


def _titled_word(word: str) -> str:
    for place, letter in enumerate(word):
        if letter.lower() != letter or letter.upper() != letter:
            # Behind another letter: a sigma at the end of a word has a form of its own.
            return word[:place] + letter.title() + ("a" + word[place + 1 :]).lower()[1:]
    return word
