"""Which splitting patterns are proved to split where documents are cut."""

from __future__ import annotations

import pytest
import regex
from hypothesis import given
from hypothesis import strategies as st

from auditor.vocabulary.patterns import splits_after_word, splits_before_single_space

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
}


@pytest.mark.parametrize("name", list(PUBLISHED))
def test_published_patterns_are_proved(name):
    """The patterns of the field split before a single space and after a word."""
    assert splits_before_single_space(PUBLISHED[name])
    assert splits_after_word(PUBLISHED[name])


@pytest.mark.parametrize("name", list(REFUSED))
def test_what_is_not_proved_is_refused(name):
    """A pattern that breaks a condition is never relied on."""
    assert not splits_before_single_space(REFUSED[name][0])


@pytest.mark.parametrize("name", ["two words are one part", "a line is one part"])
def test_refused_patterns_do_split_elsewhere(name):
    """The refusals are not empty: these really keep the space within a part."""
    pattern, text = REFUSED[name]
    assert any(" " in part.strip() for part in regex.findall(pattern, text))


def test_the_second_claim_is_the_stronger():
    """A word that takes the line end with it splits before a space and not after a word."""
    pattern = r"\p{L}+\n?|\s+|[^\s\p{L}]+"
    assert splits_before_single_space(pattern)
    assert not splits_after_word(pattern)


texts = st.lists(st.sampled_from([*"ab1 .'sé\n\r\t—中", "'s", "  ", " a"]), max_size=14)


@pytest.mark.parametrize("name", list(PUBLISHED))
@given(parts=texts)
def test_parts_split_alone_as_in_the_whole(name, parts):
    """At every place of the two claims, the parts' splits side by side are the whole's."""
    text = "".join(parts)
    pattern = regex.compile(PUBLISHED[name])
    places = [m.start() + 1 for m in regex.finditer(r"[\p{L}\p{N}](?=[ \t\r\n])", text)]
    places += [m.start() + 1 for m in regex.finditer(r"\S(?= [\p{L}\p{N}])", text)]
    for place in places:
        apart = [m[0] for part in (text[:place], text[place:]) for m in pattern.finditer(part)]
        assert apart == [m[0] for m in pattern.finditer(text)]
