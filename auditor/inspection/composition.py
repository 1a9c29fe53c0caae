"""What a vocabulary is made of: entries by kind, script and length, pairs, digits, whitespace."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from typing import Any

from auditor.encoding.digits import digit_groups
from auditor.encoding.fates import FATES, Fates
from auditor.inspection.digits import digits_as_json
from auditor.inspection.surfaces import KINDS, Surface
from auditor.text.scripts import script
from auditor.text.stretch import Stretch
from auditor.text.whitespace import RunForm
from auditor.vocabulary.opening import Vocabulary
from auditor.vocabulary.spans import correct

Json = dict[str, Any]

UNKNOWN = "unknown"
_LONGEST, _PAIRS_SHOWN, _DUPLICATES_SHOWN = 30, 20, 50
_WORDS = frozenset({"word start", "continuation"})
_RUNS = (" ", "  ", "    ", "\t", "\n", "\n\n", "\r\n", "\u00a0", "\u202f", "\u3000", "\u2028",
         "\u200b")  # fmt: skip


def composition(vocabulary: Vocabulary, surfaces: Sequence[Surface]) -> Json:
    """Return the counts of entries, the longest, pairs, digits and whitespace, as JSON values."""
    return {
        "kinds": {kind: sum(own.kind == kind for own in surfaces) for kind in KINDS},
        "scripts": _scripts(surfaces),
        "lengths": _lengths(surfaces),
        "longest": _longest(surfaces),
        "case_pairs": case_pairs(surfaces),
        "duplicates": duplicates(vocabulary, surfaces),
        "digits": digits(vocabulary),
        "whitespace": whitespace(vocabulary),
    }


def _scripts(surfaces: Sequence[Surface]) -> dict[str, int]:
    """Return how many entries hold a character of each script (UAX #24), most first."""
    counts: Counter[str] = Counter()
    for own in surfaces:
        if own.text and own.kind not in {"control", "unused"}:
            counts.update({script(character) for character in own.text.strip()})
    return dict(sorted(counts.items(), key=lambda item: (-item[1], item[0])))


def _lengths(surfaces: Sequence[Surface]) -> list[list[int]]:
    """Return (characters, entries) of the entries that are text, shortest first."""
    counts = Counter(len(own.text) for own in surfaces if own.text and own.kind != "control")
    return [[length, count] for length, count in sorted(counts.items())]


def _longest(surfaces: Sequence[Surface]) -> list[Json]:
    held = [own for own in surfaces if own.text and own.kind not in {"control", "unused", "added"}]
    ordered = sorted(held, key=lambda own: (-len(own.text or ""), own.number))
    return [_named(own) for own in ordered[:_LONGEST]]


def _named(own: Surface) -> Json:
    return {"id": own.number, "entry": own.entry, "text": own.text, "kind": own.kind}


def case_pairs(surfaces: Sequence[Surface]) -> Json:
    """Return how many entries of words differ from another in nothing but case, and the first."""
    groups: dict[tuple[bool, bool, str], list[Surface]] = {}
    for own in surfaces:
        if own.kind in _WORDS and own.text:
            groups.setdefault((own.starts, own.ends, own.text.casefold()), []).append(own)
    shared = [group for group in groups.values() if len(group) > 1]
    first = sorted(shared, key=lambda group: group[0].number)[:_PAIRS_SHOWN]
    return {
        "entries": sum(len(group) for group in shared),
        "groups": len(shared),
        "first": [[own.entry for own in group] for group in first],
    }


def duplicates(vocabulary: Vocabulary, surfaces: Sequence[Surface]) -> Json:
    """Return the entries that the vocabulary's own normaliser writes alike: only one is reached."""
    groups: dict[tuple[bool, bool, str], list[Surface]] = {}
    for own in surfaces:
        if own.kind in _WORDS and own.text and vocabulary.engine.alters:
            written = vocabulary.engine.normalize(own.text.strip())
            groups.setdefault((own.starts, own.ends, written), []).append(own)
    shared = [group for group in groups.values() if len(group) > 1]
    return {
        "entries": sum(len(group) for group in shared),
        "groups": len(shared),
        "first": [[_named(own) for own in group] for group in shared[:_DUPLICATES_SHOWN]],
    }


def digits(vocabulary: Vocabulary) -> Json:
    """Return how strings of digits are grouped, by trial; the rule is ``unknown`` where a digit is
    none of the vocabulary's characters.
    """
    found = digits_as_json(digit_groups(vocabulary))
    unknown = vocabulary.inventory.unknown
    ids, _ = vocabulary.engine.ids_of([*"0123456789"])
    lost = unknown is not None and unknown in ids.tolist()
    return {**found, "rule": UNKNOWN if lost else found["rule"]}


def whitespace(vocabulary: Vocabulary) -> list[Json]:
    """Return what becomes of each run of whitespace between two letters, by trial."""
    probes = Fates(vocabulary)
    rows = []
    for text in _RUNS:
        form = RunForm(text, "middle")
        found = probes.of(form)
        rows.append(
            {
                "run": text,
                "kind": form.kind,
                "fate": None if found.fate not in FATES else found.fate,
                "tokens": _tokens(vocabulary, text),
                "by_bytes": found.by_bytes,
            }
        )
    return rows


def _tokens(vocabulary: Vocabulary, run: str) -> int:
    """Return the tokens that hold a character of the run between two letters."""
    first, second = vocabulary.letters
    text = first + run + second
    spans = correct(vocabulary.engine.encode([text]), Stretch([text]), vocabulary.inventory)
    begin, end = len(first), len(first) + len(run)
    touching = (spans.starts < end) & (spans.ends > begin) & (spans.ends > spans.starts)
    return int(touching.sum())
