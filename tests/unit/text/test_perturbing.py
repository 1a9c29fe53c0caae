"""Changes of words: each does what it is called, at a place that the seed draws."""

from collections import Counter

from hypothesis import given
from hypothesis import strategies as st

from auditor.text.perturbing import changes

WORDS = [("buoy", 3), ("Ångström", 1), ("маяк", 2), ("14", 1), ("中", 1)]
LETTERS = st.text("abcdeéжß", min_size=2, max_size=12)


def test_stated_changes():
    """By hand."""
    made = changes(WORDS, 1)
    assert made["without diacritics"]("Ångström") == "Angstrom"
    assert made["NFD"]("é") == "e\u0301"
    assert made["NFKC"]("ﬁn") == "fin"
    assert made["upper case"]("straße") == "STRASSE"


@given(LETTERS, st.integers(0, 9))
def test_typing_errors_are_what_they_are_called(word, seed):
    """Swapped: the same letters; left out and doubled: one fewer and one more; replaced: one."""
    made = changes([*WORDS, (word, 1)], seed)
    swapped = made["two letters swapped"](word)
    assert Counter(swapped) == Counter(word)
    assert sum(a != b for a, b in zip(word, swapped, strict=True)) in (0, 2)
    left = made["a letter left out"](word)
    assert len(left) == len(word) - 1
    assert not Counter(left) - Counter(word)
    doubled = made["a letter doubled"](word)
    assert len(doubled) == len(word) + 1
    assert sum((Counter(doubled) - Counter(word)).values()) == 1
    replaced = made["a letter replaced"](word)
    assert sum(a != b for a, b in zip(word, replaced, strict=True)) <= 1


def test_what_has_nothing_to_change_stays():
    """Digits and single letters."""
    made = changes(WORDS, 1)
    assert made["two letters swapped"]("14") == "14"
    assert made["a letter left out"]("中") == "中"
    assert made["a letter replaced"]("14") == "14"


def test_the_seed_decides():
    """The same seed, the same places; another, others."""
    words = [(f"letter{chr(97 + n)}s", 1) for n in range(20)]
    one, same, other = (
        [changes(words, seed)["a letter left out"](word) for word, _ in words]
        for seed in (1, 1, 2)
    )  # fmt: skip
    assert one == same != other
