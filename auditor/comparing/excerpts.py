"""Words and characters that appeared, vanished or moved most between two audits."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from typing import Any

Json = Mapping[str, Any]
Row = Mapping[str, str]

KEPT = 50
_MILLION = 1_000_000
LEFT_OUT = "left out on request"
NO_TABLE = "no {name} beside the audit {when}"
NO_ROWS = "{name} lists none on either side"
SOME_ONLY = (
    "words.csv lists the words that cost most: one that appears may have cost less before, and one"
    " that vanished may cost less now"
)


def words(
    before: Iterable[Row] | None, after: Iterable[Row] | None, totals: tuple[int, int]
) -> Json:
    """Return the words whose cost moved: extra tokens for each million words of the corpus.

    ``before`` and ``after`` are the rows of `words.csv` of one vocabulary, ``None`` where there is
    no such file; ``totals`` the words of each corpus.
    """
    missing = _missing("words.csv", before, after)
    if missing is not None or before is None or after is None:
        return nothing(missing)
    sides = [_summed(rows, lambda row: row["word"], "extra_tokens") for rows in (before, after)]
    found = _moved(sides, totals, lambda key, own: {"word": key, "broken": own["broken"]})
    none = not any(sides)
    return {**found, "note": NO_ROWS.format(name="words.csv") if none else SOME_ONLY}


def characters(
    before: Iterable[Row] | None, after: Iterable[Row] | None, totals: tuple[int, int]
) -> Json:
    """Return the characters that do not come through whole and whose number moved.

    As ``words``, of `characters.csv`: occurrences for each million characters, by fate.
    """
    missing = _missing("characters.csv", before, after)
    if missing is not None or before is None or after is None:
        return nothing(missing)
    sides = [_summed(rows, _character, "count") for rows in (before, after)]

    def described(_: str, own: Row) -> dict[str, Any]:
        return {name: own[name] for name in ("character", "code_point", "name", "script", "fate")}

    found = _moved(sides, totals, described)
    note = None if any(sides) else NO_ROWS.format(name="characters.csv")
    return {**found, "note": note}


def _character(row: Row) -> str:
    return f"{row['code_point']} {row['fate']}"


def _missing(name: str, before: object, after: object) -> str | None:
    absent = [when for when, own in (("before", before), ("after", after)) if own is None]
    return NO_TABLE.format(name=name, when=" and ".join(absent)) if absent else None


def nothing(note: str | None) -> Json:
    """Return what stands where there are no rows, and why."""
    return {"appeared": [], "vanished": [], "moved": [], "counts": None, "note": note}


def _summed(
    rows: Iterable[Row], key_of: Callable[[Row], str], weight: str
) -> dict[str, tuple[int, Row]]:
    """Return the weight of each key, and its heaviest row: a word may be broken in several ways."""
    held: dict[str, tuple[int, int, Row]] = {}
    for row in rows:
        key, own = key_of(row), int(row[weight])
        total, heaviest, kept = held.get(key, (0, -1, row))
        held[key] = (total + own, max(own, heaviest), row if own > heaviest else kept)
    return {key: (total, kept) for key, (total, _, kept) in held.items()}


def _moved(
    sides: list[dict[str, tuple[int, Row]]],
    totals: tuple[int, int],
    described: Callable[[str, Row], dict[str, Any]],
) -> dict[str, Any]:
    before, after = sides

    def entry(key: str) -> dict[str, Any]:
        found = [side.get(key) for side in sides]
        times = [None if own is None else own[0] for own in found]
        rates = [(own or 0) * _MILLION / total if total else 0.0
                 for own, total in zip(times, totals, strict=True)]  # fmt: skip
        row = next(own[1] for own in reversed(found) if own is not None)
        return {
            **described(key, row),
            "before": times[0],
            "after": times[1],
            "before_per_million": rates[0],
            "after_per_million": rates[1],
            "change_per_million": rates[1] - rates[0],
        }

    def ranked(keys: Iterable[str]) -> list[dict[str, Any]]:
        entries = {key: entry(key) for key in keys}
        order = sorted(entries, key=lambda key: (-abs(entries[key]["change_per_million"]), key))
        return [entries[key] for key in order if entries[key]["change_per_million"]]

    groups = {
        "appeared": ranked(after.keys() - before.keys()),
        "vanished": ranked(before.keys() - after.keys()),
        "moved": ranked(before.keys() & after.keys()),
    }
    return {
        **{name: own[:KEPT] for name, own in groups.items()},
        "counts": {name: len(own) for name, own in groups.items()},
    }
