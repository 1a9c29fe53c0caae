"""How digits are grouped, as JSON values."""

from __future__ import annotations

from typing import Any

from auditor.encoding.digits import DigitGroups

Json = dict[str, Any]

_EXAMPLES = 3


def digits_as_json(found: DigitGroups) -> Json:
    """Return the rule by position, what position and separator change, and the usual groupings.

    ``positions`` and ``separators`` count numbers whose digits are grouped otherwise than at the
    start, or than without a separator. ``groupings`` holds for each length the most frequent ways
    after a space, as sizes of groups with how many numbers show each.
    """
    spaced = found.by_length["after a space"]
    return {
        "rule": next(iter(set(found.rules.values()))) if len(set(found.rules.values())) == 1
        else "depends on position",
        "rules": found.rules,
        "numbers": found.numbers,
        "positions": found.positions,
        "numbers_separated": found.numbers_separated,
        "separators": found.separators,
        "tokens": found.tokens,
        "groupings": [
            {
                "digits": length,
                "ways": [
                    {"groups": list(groups), "numbers": count}
                    for groups, count in sorted(ways.items(), key=lambda i: (-i[1], i[0]))[
                        :_EXAMPLES
                    ]
                ],
                "distinct": len(ways),
            }
            for length, ways in spaced.items()
        ],
    }  # fmt: skip
