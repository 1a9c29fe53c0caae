"""Two audits in, the parts of `comparison.json` out."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from auditor.comparing import excerpts, figures, lengths
from auditor.comparing.pairs import Pair, Side, same_corpus
from auditor.figures.catalogue import RELATIVE_TOKENS

Json = Mapping[str, Any]
Rows = Sequence[Mapping[str, str]]

INDEPENDENT = (
    "the two audits are taken as separate samples: documents that stand in both make the intervals"
    " wider than they need be"
)
ONE_CORPUS = (
    "both audits measured the same documents: intervals of differences are wider than paired ones,"
    " which exist only within one run (name both vocabularies with --vocab; see"
    f" {RELATIVE_TOKENS.name})"
)
NOTHING_CHANGED = "corpus and vocabulary are the same on both sides"
OTHER_VERSIONS = "the audits were made with other versions of {names}, which may move figures"


@dataclass(frozen=True, slots=True)
class Tables:
    """The rows of `words.csv` and `characters.csv` beside an audit, ``None`` where not there.

    ``left_out`` says that words are not to be shown.
    """

    words: Rows | None
    characters: Rows | None
    left_out: bool = False


def compare(
    before: Side, after: Side, pairs: Sequence[Pair], tables: tuple[Tables, Tables]
) -> dict[str, Any]:
    """Return what `comparison.json` holds of the vocabularies ``pairs`` of two audits."""
    one, other = before.document, after.document
    origin = one["settings"].get("origin")
    references = one["vocabularies"][0], other["vocabularies"][0]
    same = same_corpus(one, other)
    why_not = lengths.SAME_DOCUMENTS if same else lengths.OVER_ORIGINS if origin else None
    found = figures.adjusted(
        [own for pair in pairs for own in figures.differences(pair, origin, references)]
    )
    shifted = [own for pair in pairs for own in lengths.lengths(pair, why_not)]
    return {
        "before": _side(before),
        "after": _side(after),
        "same_corpus": same,
        "pairs": [_pair(pair, (one, other), tables) for pair in pairs],
        "notes": _notes(one, other, pairs, same=same),
        "comparisons": {"figures": figures.counts(found), "lengths": lengths.counts(shifted)},
        "differences": found,
        "lengths": shifted,
    }


def _side(side: Side) -> Json:
    document = side.document
    kept = ("sources", "digest", "documents", "bytes", "characters", "words")
    return {
        "audit": side.where,
        "corpus": {name: document["corpus"][name] for name in kept},
        "set_aside": document["corpus"]["set_aside"]["records"],
        "made_with": document["made_with"],
        "settings": document["settings"],
    }


def _notes(one: Json, other: Json, pairs: Sequence[Pair], *, same: bool) -> list[str]:
    versions = [one["made_with"], other["made_with"]]
    names = sorted(
        name
        for name in versions[0].keys() | versions[1].keys()
        if versions[0].get(name) != versions[1].get(name)
    )
    notes = [ONE_CORPUS if same else INDEPENDENT]
    if same and all(pair.same for pair in pairs):
        notes.append(NOTHING_CHANGED)
    if names:
        notes.append(OTHER_VERSIONS.format(names=", ".join(names)))
    return notes


def _pair(pair: Pair, documents: tuple[Json, Json], tables: tuple[Tables, Tables]) -> Json:
    held = pair.before["slices"], pair.after["slices"]
    kept = ("name", "source", "digest", "family", "entries", "limit")
    totals = [document["corpus"] for document in documents]
    names = pair.before["name"], pair.after["name"]
    sides = [(own.words, own.characters) for own in tables]
    rows = [[_of(rows, name) for rows in own] for own, name in zip(sides, names, strict=True)]
    words = (totals[0]["words"], totals[1]["words"])
    left_out = any(own.left_out for own in tables)
    return {
        "before": {name: pair.before[name] for name in kept},
        "after": {name: pair.after[name] for name in kept},
        "same_vocabulary": pair.same,
        "slices": {
            "common": [key for key in held[0] if key in held[1]],
            "only_before": [key for key in held[0] if key not in held[1]],
            "only_after": [key for key in held[1] if key not in held[0]],
        },
        "words": excerpts.nothing(excerpts.LEFT_OUT)
        if left_out
        else excerpts.words(rows[0][0], rows[1][0], words),
        "characters": excerpts.characters(
            rows[0][1], rows[1][1], (totals[0]["characters"], totals[1]["characters"])
        ),
    }


def _of(rows: Rows | None, vocabulary: str) -> Rows | None:
    """Return the rows of one vocabulary."""
    return None if rows is None else [row for row in rows if row["vocabulary"] == vocabulary]
