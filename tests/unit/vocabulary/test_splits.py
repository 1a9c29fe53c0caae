"""Where tokens are proved to part: parts split alone as in the whole, and why each condition is."""

from __future__ import annotations

import json
from itertools import pairwise

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import find, given, settings
from hypothesis import strategies as st
from tokenizers import Regex, pre_tokenizers

from auditor.text.stretch import Stretch
from auditor.vocabulary import VocabularySpec, fenced, open_vocabulary, splittexts
from auditor.vocabulary.fenced import FencedParts
from auditor.vocabulary.indents import splits_indents
from auditor.vocabulary.patterns import splits_before_space
from auditor.vocabulary.separation import separate
from auditor.vocabulary.splits import Splits
from auditor.vocabulary.splittexts import SplitTexts
from tests.unit.encoding.random_vocabularies import GLUING, KINDS, descriptions
from tests.unit.vocabulary.test_patterns import CL100K, GPT2, O200K

PATTERNS = {"gpt-2": GPT2, "cl100k": CL100K, "o200k": O200K, "glued": GLUING}
HARD = [*"abA1 .'sé\n\r\t—中(),=/_\"", "'s", "  ", " a", "\n\n", "\n \n", "\t\t", "\r\n", "   (",
        "\u0301", "\u00a0", "\u2028", "\v", "\x1c", "\u200b", "²", "😀"]  # fmt: skip
hard_texts = st.lists(st.lists(st.sampled_from(HARD), min_size=1, max_size=12).map("".join),
                      min_size=1, max_size=4)  # fmt: skip


def places_in(splits: Splits, texts: list[str]) -> list[int]:
    stretch = Stretch(texts)
    return np.flatnonzero(splits.within(stretch.points, stretch.bounds)).tolist()


def parts_of(splits: Splits, texts: list[str]) -> list[str]:
    """Return the parts of texts that lie end to end."""
    joined = "".join(texts)
    edges = [*places_in(splits, texts), len(joined)]
    return [joined[begin:end] for begin, end in pairwise(edges)]


def split(pattern: str, text: str) -> list[str]:
    """Return how the library splits ``text``."""
    step = pre_tokenizers.Split(Regex(pattern), "isolated")
    return [part for part, _ in step.pre_tokenize_str(text)]


@pytest.mark.parametrize("name", list(PATTERNS))
@settings(max_examples=200)
@given(texts=hard_texts)
def test_parts_split_alone_as_in_the_whole(name, texts):
    """By the library that encodes, over texts that lie end to end."""
    pattern = PATTERNS[name]
    whole = [part for text in texts for part in split(pattern, text)]
    parts = parts_of(Splits.of(pattern), texts)
    assert [part for text in parts for part in split(pattern, text)] == whole


@pytest.mark.parametrize("name", list(PATTERNS))
def test_every_two_characters_of_ascii_split(name):
    """Whatever is said of two characters is so for the library, and for one of each class."""
    splits = Splits.of(PATTERNS[name])
    every = [*map(chr, range(128)), "é", "中", "²", "Ⅷ", "ﾞ"]
    pairs = [one + other for one in every for other in every]
    split_alone = [pair for pair in pairs if 1 in places_in(splits, [pair])]
    assert len(split_alone) > 3000
    assert all(split(PATTERNS[name], pair) == list(pair) for pair in split_alone)


# A text and its parts, by pattern: finer than pieces, which the rules of words hold together.
PARTS = {
    "words, signs and what glues": ("glued", "foo_ba.b(x1)", ["foo", "_ba", ".b", "(x", "1", ")"]),
    "an indented line": ("glued", "a\n    b", ["a", "\n", "   ", " b"]),
    "tabs after a bracket": ("glued", "{\n\t\tif", ["{\n", "\t", "\tif"]),
    "a blank line with blanks in it": ("glued", "a\n  \n  b", ["a", "\n  \n", " ", " b"]),
    "no line end is taken first": ("gpt-2", "a\n    b", ["a", "\n   ", " b"]),
    "whitespace before whitespace of another kind": ("glued", "a\n \u2028 b", ["a", "\n \u2028 b"]),
    "blanks at the end": ("glued", "a\n  ", ["a", "\n  "]),
    "the end of the text is looked for": ("cl100k", "a\n  b", ["a", "\n  b"]),
}  # fmt: skip


@pytest.mark.parametrize("name", list(PARTS))
def test_parts(name):
    """What is taken apart, and what is not."""
    pattern, text, parts = PARTS[name]
    assert parts_of(Splits.of(PATTERNS[pattern]), [text]) == parts


# Patterns that break one condition of a place in whitespace, and a text that each splits otherwise
# when it is cut there: its left and its right part.
REFUSED = {
    "the end of the text is looked for": (r"\S+|\s++$|\s*[\r\n]+|\s+(?!\S)|\s+", "\n ", " a"),
    "blanks after a word": (r"\S+[\n ]*|\s+(?!\S)|\s+", "a\n", " b"),
    "a word that may begin with blanks": (r"[ \t]*[^\s]+|\s+(?!\S)|\s+", " ", " b"),
    "whitespace is not given back": (r" ?\S+|\s+", " ", " b"),
    "another whitespace comes first": (r" ?\S+|\s{2}|\s+(?!\S)|\s+", " ", " b"),
    "a look-ahead in a group": (r"(?:a|$)\n|\S+|\s+(?!\S)|\s+", "a\n", " b"),
}


@pytest.mark.parametrize("name", list(REFUSED))
def test_what_is_not_proved_of_whitespace(name):
    """Nothing is said of a pattern that is not of the forms."""
    pattern, left, right = REFUSED[name]
    assert splits_indents(pattern) == (False, False)
    if "group" not in name:
        assert split(pattern, left) + split(pattern, right) != split(pattern, left + right)


def test_line_ends_must_come_before_blanks():
    """With the look-ahead first, blanks stay with the line end before them."""
    pattern = r" ?\S+|\s+(?!\S)|\s*[\r\n]+|\s+"
    assert not splits_indents(pattern).last_line_end
    assert split(pattern, "\n") + split(pattern, "   b") != split(pattern, "\n   b")


def test_a_group_that_looks_ahead_is_refused():
    """Such a group sees past the place: the word ends otherwise where the text does."""
    pattern = r"[a-z]+(?:1|$)|[a-z]|\s+(?!\S)|\s+|[^\sa-z]+"
    assert not splits_before_space(pattern)
    assert split(pattern, "ab") + split(pattern, " 1") != split(pattern, "ab 1")


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("splits")


def separation_of(description, folder):
    path = folder / "tokenizer.json"
    path.write_text(json.dumps(description))
    return separate(open_vocabulary(VocabularySpec(str(path))))


BYTE_LEVEL = [kind for kind in KINDS if kind.startswith("byte-level") and "parts" not in kind]


def rows(encoding):
    arrays = (encoding.ids, encoding.starts, encoding.ends, encoding.bounds)
    return [values.tolist() for values in arrays]


@pytest.mark.parametrize("kind", BYTE_LEVEL)
@pytest.mark.parametrize("most", [0, 3, 1000])
@settings(max_examples=20)
@given(data=st.data())
def test_texts_encoded_by_parts_are_those_of_the_library(kind, most, folder, data):
    """Twice over, so that parts are remembered: with room for none, for few, and for all."""
    separation = separation_of(data.draw(descriptions(kind)), folder)
    batches = [data.draw(hard_texts), data.draw(hard_texts)]
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(splittexts, "MOST_PARTS", most)
        patch.setattr(fenced, "_TOGETHER", 3)
        by_parts = SplitTexts(separation.later, separation.splits, separation.whole_for)
        for texts in [*batches, *batches]:
            assert rows(by_parts.encode(texts)) == rows(separation.later.encode(texts))


def test_an_added_token_that_comes_about_between_parts(folder):
    """A fence and the part after it spell one: the parts of that string go alone."""
    description = find(descriptions("byte-level"), lambda _: True)
    added = {**description["added_tokens"][0], "content": "1b", "rstrip": False}
    separation = separation_of({**description, "added_tokens": [added]}, folder)
    later, splits = separation.later, separation.splits
    fencing = FencedParts(later, splits, separation.whole_for)
    parts = pa.array(["a", "b"], pa.large_string())
    assert FencedParts(later, splits, ()).laid(parts).sound.all()
    assert not fencing.laid(parts).sound.any()
    assert fencing.tokens(parts)[0].tolist() == later.ids_of(["a", "b"])[0].tolist()
