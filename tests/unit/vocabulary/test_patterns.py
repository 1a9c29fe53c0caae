"""Which splitting patterns are proved to split where documents are cut."""

from __future__ import annotations

import pytest
import regex
from hypothesis import given
from hypothesis import strategies as st

from auditor.vocabulary.adjoining import LETTER, NUMBER, SPECIAL, classes
from auditor.vocabulary.patterns import (
    splits_before_space,
    splits_between,
    takes_line_ends,
)

# Source: openai/gpt-2 src/encoder.py; openai/tiktoken tiktoken_ext/openai_public.py (cl100k_base,
# o200k_base), as stated there.
GPT2 = r"'s|'t|'re|'ve|'m|'ll|'d| ?\p{L}+| ?\p{N}+| ?[^\s\p{L}\p{N}]+|\s+(?!\S)|\s+"
CL100K = (
    r"'(?i:[sdmt]|ll|ve|re)|[^\r\n\p{L}\p{N}]?+\p{L}++|\p{N}{1,3}+| ?[^\s\p{L}\p{N}]++[\r\n]*+"
    r"|\s++$|\s*[\r\n]|\s+(?!\S)|\s"
)
O200K = (
    r"[^\r\n\p{L}\p{N}]?[\p{Lu}\p{Lt}\p{Lm}\p{Lo}\p{M}]*[\p{Ll}\p{Lm}\p{Lo}\p{M}]+"
    r"(?i:'s|'t|'re|'ve|'m|'ll|'d)?|[^\r\n\p{L}\p{N}]?[\p{Lu}\p{Lt}\p{Lm}\p{Lo}\p{M}]+"
    r"[\p{Ll}\p{Lm}\p{Lo}\p{M}]*(?i:'s|'t|'re|'ve|'m|'ll|'d)?|\p{N}{1,3}"
    r"| ?[^\s\p{L}\p{N}]+[\r\n/]*|\s*[\r\n]+|\s+(?!\S)|\s+"
)
PUBLISHED = {"gpt-2": GPT2, "cl100k": CL100K, "o200k": O200K}
# Each breaks one condition of the proof, and splits elsewhere on the text beside it.
REFUSED = {
    "two words are one part": (r"\p{L}+ \p{L}+|\s+|[^\s]", "ab cd"),
    "words are left unmatched": (r"\p{N}+|\s{2,}", "ab cd"),
    "a line is one part": (r" ?[^\r\n]+|\s+", "ab cd"),
    "a look-ahead sees the space": (r"\p{L}+(?= )|\s+|\S", "ab cd"),
    "spaces within a class": (r"[a-z ]+|\s+|[^a-z\s]+", "ab cd"),
    "a group that holds a space": (r"(?:ab cd)|\s+|\S+", "ab cd"),
    "a back-reference": (r"(\S)\1|\s+|\S", "ab cd"),
    "nothing is matched first": (r"\p{N}*|\s+|\S+", "ab cd"),
    "a boundary is looked for": (r"\p{L}+\b|\s+|\S", "ab cd"),
    "a set taken from a set": (r"[^\s&&[^a]]+|\s+|\S", "ab cd"),
}


def splits(pattern: str, before: str | int, after: str | int) -> bool:
    """Return whether a split is proved between two characters of ASCII, or two classes."""
    left, right = (ord(c) if isinstance(c, str) else c for c in (before, after))
    return bool(splits_between(pattern)[left, right])


@pytest.mark.parametrize("name", list(PUBLISHED))
def test_published_patterns_are_proved(name):
    """The patterns of the field split before a space and after words."""
    pattern = PUBLISHED[name]
    assert splits_before_space(pattern)
    pairs = [(x, y) for x in ("a", "1", LETTER, NUMBER) for y in " \t\n(,"]
    assert all(splits(pattern, x, y) for x, y in pairs)
    assert all(splits(pattern, "\n", y) for y in ("a", "(", LETTER))


# Whether each splits: between a bracket and a letter, a bracket and a line end, a letter and a
# quote; and whether it takes several line ends whatever follows them.
DIFFERENCES = {
    "gpt-2": (True, True, True, False),
    "cl100k": (False, False, True, True),
    "o200k": (False, False, False, True),
}


@pytest.mark.parametrize("name", list(PUBLISHED))
def test_patterns_differ_in_what_they_glue(name):
    """What one splits another joins: each answer is read off its own pattern."""
    pattern = PUBLISHED[name]
    pairs = ("(a", "(\n", "a'")
    found = (*(splits(pattern, *pair) for pair in pairs), takes_line_ends(pattern))
    assert found == DIFFERENCES[name]


@pytest.mark.parametrize("name", list(REFUSED))
def test_what_is_not_proved_is_refused(name):
    """A pattern that breaks a condition is never relied on."""
    assert not splits_before_space(REFUSED[name][0])


@pytest.mark.parametrize("name", ["two words are one part", "a line is one part"])
def test_refused_patterns_do_split_elsewhere(name):
    """The refusals are not empty: these really keep the space within a part."""
    pattern, text = REFUSED[name]
    assert any(" " in part.strip() for part in regex.findall(pattern, text))


# Each pattern with two characters that it may match side by side, by another path than a class.
JOINING = {
    "a word takes the line end": (r"\p{L}+\n?|\s+|[^\s\p{L}]+", "a\n"),
    "an element repeated": (r"[\p{L}=]{2,3}|\s+|\S", "a="),
    "elements further apart": (r"\p{L}+\p{N}*=?|\s+|\S", "a="),
    "a group": (r"\p{L}+(?:\p{N}|=)?|\s+|\S", "a="),
    "within a group": (r"(?:ab=|cd)|\s+|\S", "b="),
    "a group repeated": (r"(?:=|a)+|\s+|\S", "a="),
    "in either case": (r"(?i:b=)|\s+|\S", "B="),
    "a letter of few": (r"[b-y]=?|\s+|\S", "c="),
}


@pytest.mark.parametrize("name", list(JOINING))
def test_what_may_be_joined_is_not_split(name):
    """The proof finds each way in which one match holds both; beside it, it still proves."""
    pattern, text = JOINING[name]
    assert any(text in part for part in regex.findall(pattern, f"a{text}"))
    assert not splits(pattern, *text)
    assert splits(pattern, text[0], ";")


def test_a_letter_beyond_ascii_counts_for_its_class():
    """One letter that takes a bracket closes the class of letters, not those of ASCII."""
    pattern = r"ж\(?|\s+|\S"
    assert not splits(pattern, LETTER, "(")
    assert splits(pattern, "a", "(")


LINE_ENDS = {
    "the end of the text is looked for first": (r"\s+(?!\S)|\s*[\r\n]+|\s+|\S", False),
    "line ends are taken first": (r"\s*[\r\n]+|\s+(?!\S)|\s+|\S", True),
    "nothing looks": (r"\s+|\S+", True),
    "spaces are given back": (r"\s+$|\s*[\r\n]+|\s+|\S", False),
    "no line end is among them": (r"\s*[\t]+|\s+(?!\S)|\s+|\S", False),
}


@pytest.mark.parametrize("name", list(LINE_ENDS))
def test_what_takes_line_ends(name):
    """Only an alternative that comes before every look-ahead settles a run of line ends."""
    pattern, answer = LINE_ENDS[name]
    assert takes_line_ends(pattern) is answer
    text, apart = "\n\na", [["\n\n"], ["a"]]
    same = [regex.findall(pattern, part) for part in ("\n\n", "a")] == apart
    assert not answer or (same and regex.findall(pattern, text) == ["\n\n", "a"])


pieces = [*"ab1 .'sé\n\r\t—中(),=/_\"", "'s", "  ", " a", "\n\n"]
texts = st.lists(st.sampled_from(pieces), max_size=14)


@pytest.mark.parametrize("name", list(PUBLISHED))
@given(parts=texts)
def test_parts_split_alone_as_in_the_whole(name, parts):
    """At every place that is proved, the parts' splits side by side are the whole's."""
    text = "".join(parts)
    pattern = regex.compile(PUBLISHED[name])
    for place in range(1, len(text)):
        if not proved(PUBLISHED[name], text, place):
            continue
        apart = [m[0] for part in (text[:place], text[place:]) for m in pattern.finditer(part)]
        assert apart == [m[0] for m in pattern.finditer(text)]


def proved(pattern: str, text: str, place: int) -> bool:
    """Return whether a split is proved before ``place``, the rules of text aside."""
    if regex.compile(r"(?<=\S)(?= )").match(text, place):
        return True
    ends = text[place - 1] == "\n" and not text[place].isspace()
    lone = not text[: place - 1][-1:].isspace()
    if ends and not lone and not takes_line_ends(pattern):
        return False
    if text[place - 1].isspace() and not ends:
        return False
    left, right = classes()[[ord(text[place - 1]), ord(text[place])]].tolist()
    return max(left, right) <= SPECIAL and bool(splits_between(pattern)[left, right])
