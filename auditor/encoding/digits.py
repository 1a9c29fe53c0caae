"""How a vocabulary groups the digits of numbers: asked of it, never read from its description."""

from __future__ import annotations

import random
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from auditor.encoding.dotted import Held
from auditor.text.stretch import Stretch
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.spans import correct

# What stands before and after a number, by position.
POSITIONS = {
    "start": ("", ""),
    "after a space": ("a ", ""),
    "after a letter": ("a", ""),
    "in parentheses": ("a (", ")"),
    "after a minus": ("a -", ""),
}
SEPARATORS = {"none": "", "comma": ",", "space": " ", "full stop": "."}
LENGTHS = range(1, 13)
_SEED = 20_261_201
_NUMBERS_A_LENGTH = 24

# The digits that each token over a number holds: 1234567 in (3, 3, 1).
Groups = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class DigitGroups:
    """How numbers were grouped.

    ``rules`` gives the rule of each position, ``by_length`` how many numbers of a length were
    grouped which way in it. ``separators`` and ``positions`` count the numbers whose digits are
    grouped otherwise than in the first of them; ``tokens`` the tokens over the numbers of
    ``numbers_separated`` by separator, those of separators included.
    """

    rules: dict[str, str]
    by_length: dict[str, dict[int, dict[Groups, int]]]
    positions: dict[str, int]
    separators: dict[str, int]
    tokens: dict[str, int]
    numbers: int
    numbers_separated: int


def digit_groups(vocabulary: Vocabulary, given: Iterable[str] = ()) -> DigitGroups:
    """Ask ``vocabulary`` for numbers of 1 to 12 digits, and for ``given`` ones, of digits only."""
    numbers = list(dict.fromkeys([*constructed(), *given]))
    grouped = {
        name: _grouped(vocabulary, numbers, before, after)[0]
        for name, (before, after) in POSITIONS.items()
    }
    by_length = {name: _by_length(numbers, groups) for name, groups in grouped.items()}
    long = [number for number in numbers if len(number) > 3]
    parted = {
        name: _grouped(vocabulary, [in_threes(number, mark) for number in long], "a ", "")
        for name, mark in SEPARATORS.items()
    }
    return DigitGroups(
        {name: rule(lengths) for name, lengths in by_length.items()},
        by_length,
        _different(grouped),
        _different({name: groups for name, (groups, _) in parted.items()}),
        {name: tokens for name, (_, tokens) in parted.items()},
        len(numbers),
        len(long),
    )


def constructed() -> list[str]:
    """Return numbers of every length of ``LENGTHS``, the same in every run."""
    chance = random.Random(_SEED)  # noqa: S311 - examples, no secret
    found = []
    for length in LENGTHS:
        first = [str(digit) for digit in range(10)] if length == 1 else []
        drawn = [
            str(chance.randrange(10 ** (length - 1), 10**length)) for _ in range(_NUMBERS_A_LENGTH)
        ]
        found += list(dict.fromkeys(first or drawn))
    return found


def in_threes(number: str, mark: str) -> str:
    """Return ``number`` with ``mark`` before every third digit from the right."""
    lead = len(number) % 3 or 3
    parts = [number[:lead], *(number[p : p + 3] for p in range(lead, len(number), 3))]
    return mark.join(parts)


def rule(by_length: dict[int, dict[Groups, int]]) -> str:
    """Name the rule that all numbers follow, or say that they follow none.

    ``one at a time``, ``one token``, ``3 from the left``, ``3 from the right``, or ``irregular``.
    """
    held = {groups for lengths in by_length.values() for groups in lengths}
    most = max(size for groups in held for size in groups)
    if most == 1 and all(len(groups) == sum(groups) for groups in held):
        return "one at a time"
    if all(len(groups) == 1 for groups in held):
        return "one token"
    for name, expected in (("left", _from_left), ("right", _from_right)):
        if all(groups == expected(sum(groups), most) for groups in held):
            return f"{most} from the {name}"
    return "irregular"


def _from_left(length: int, size: int) -> Groups:
    full, rest = divmod(length, size)
    return (size,) * full + ((rest,) if rest else ())


def _from_right(length: int, size: int) -> Groups:
    return _from_left(length, size)[::-1]


def _grouped(
    vocabulary: Vocabulary, numbers: list[str], before: str, after: str
) -> tuple[list[Groups], int]:
    """Return the digits in each token over each number, and the tokens over all of them."""
    stretch = Stretch([f"{before}{number}{after}" for number in numbers])
    encoding = vocabulary.engine.encode(stretch.texts)
    held = Held.of(correct(encoding, stretch, vocabulary.inventory))
    begins = stretch.bounds[:-1] + len(before)
    ends = stretch.bounds[1:] - len(after)
    digits = (stretch.points >= ord("0")) & (stretch.points <= ord("9"))
    digits_before = np.concatenate(([0], np.cumsum(digits)))
    over = held.over(begins, ends)
    groups, tokens = [], 0
    for begin, end, first, stop in zip(begins, ends, over.firsts, over.stops, strict=True):
        starts = np.clip(held.starts[first:stop], begin, end)
        stops = np.clip(held.ends[first:stop], begin, end)
        sizes = digits_before[stops] - digits_before[starts]
        groups.append(tuple(int(size) for size in sizes if size))
        tokens += int(stop - first)
    return groups, tokens


def _by_length(numbers: list[str], groups: list[Groups]) -> dict[int, dict[Groups, int]]:
    found: dict[int, Counter[Groups]] = {}
    for number, own in zip(numbers, groups, strict=True):
        found.setdefault(len(number), Counter())[own] += 1
    return {length: dict(sorted(found[length].items())) for length in sorted(found)}


def _different(groups: dict[str, list[Groups]]) -> dict[str, int]:
    """Return, by name, how many are grouped otherwise than under the first name."""
    first = next(iter(groups.values()))
    return {
        name: sum(a != b for a, b in zip(first, own, strict=True)) for name, own in groups.items()
    }
