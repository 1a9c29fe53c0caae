"""What each kind of text takes: characters, tokens, and tokens a character with an interval."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from auditor.encoding.kinds import (
    CHARACTER_COLUMNS,
    CHARACTERS,
    TOKEN_COLUMNS,
    TOKEN_KINDS,
    TOKENS,
)
from auditor.figures.catalogue import Figure
from auditor.figures.values import Basis, compute
from auditor.tallies.moments import HoldsMoments
from auditor.tallies.words import BrokenWord
from auditor.text.kinds import KINDS

Json = dict[str, Any]
Worst = Sequence[tuple[BrokenWord, int]]

COLUMNS = ("documents", *CHARACTER_COLUMNS, *TOKEN_COLUMNS)
PAIRS = tuple((TOKENS + kind, CHARACTERS + kind) for kind in KINDS)


def kinds_as_json(tally: HoldsMoments, key: str, worst: Mapping[str, Worst]) -> list[Json]:
    """Return one row a kind: its share of characters and of tokens, and its costliest stretches.

    Characters of all kinds add up to all characters, tokens of all rows to all tokens: those that
    hold several kinds, or no text, have a row of their own. ``worst`` holds the costliest stretches
    of some kinds, as `tables.worst_words` gives words.
    """
    characters = {kind: tally.total(key, CHARACTERS + kind) for kind in KINDS}
    tokens = {kind: tally.total(key, TOKENS + kind) for kind in TOKEN_KINDS}
    rows = []
    for kind in TOKEN_KINDS:
        held = characters.get(kind)
        rows.append(
            {
                "kind": kind,
                "characters": held,
                "share_of_characters": _share(held, sum(characters.values())),
                "tokens": tokens[kind],
                "share_of_tokens": _share(tokens[kind], sum(tokens.values())),
                "tokens_per_character": None if held is None else _cost(tally, key, kind),
                "worst": [
                    {"text": row.word, "count": count, "pieces": row.pieces, "broken": row.broken}
                    for row, count in worst.get(kind, ())
                ],
            }
        )
    return rows


def _share(part: int | None, whole: int) -> float | None:
    return part / whole if whole and part is not None else None


def _cost(tally: HoldsMoments, key: str, kind: str) -> Json:
    figure = Figure(
        kind, TOKENS + kind, CHARACTERS + kind, "tokens per character",
        "Tokens of one kind of text divided by its characters.", share=False,
    )  # fmt: skip
    return compute(figure, key, Basis(tally, tally)).as_json()
