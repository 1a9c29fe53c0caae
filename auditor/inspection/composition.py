"""What a vocabulary is made of: entries by kind, script and length, pairs, digits, whitespace."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from typing import Any

from auditor.encoding.fates import FATES, Fates
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
# Numbers on which the way of grouping digits is tried, of every length up to nine.
_NUMBERS = ("7", "42", "365", "1013", "20387", "198274", "3141592", "27182818", "602214076")
_BESIDE = {
    "alone": "{}",
    "after a space": "L {}",
    "after a letter": "L{}",
    "in parentheses": "({})",
}
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
    """Return how strings of digits are grouped, by trial, and the rule that fits all trials.

    A group is the digits that one token touches. Rules: ``one at a time``, ``whole``, ``threes from
    the left``, ``threes from the right``, else ``irregular``; ``unknown`` where a digit is none of
    the vocabulary's characters.
    """
    trials: list[Json] = []
    for position, context in _BESIDE.items():
        for number in _NUMBERS:
            text = context.replace("L", vocabulary.letters[0]).replace("{}", number)
            begin = text.index(number)
            groups = _groups(vocabulary, text, begin, begin + len(number))
            trials.append({"position": position, "number": number, "groups": groups})
    rules = [
        name
        for name, rule in _RULES.items()
        if all(trial["groups"] == rule(trial["number"]) for trial in trials)
    ]
    by_number: dict[str, set[tuple[str, ...]]] = {}
    for trial in trials:
        by_number.setdefault(trial["number"], set()).add(tuple(trial["groups"]))
    return {
        "rule": UNKNOWN if _unknown(vocabulary) else next(iter(rules), "irregular"),
        "depends_on_position": any(len(ways) > 1 for ways in by_number.values()),
        "trials": trials,
    }


def _unknown(vocabulary: Vocabulary) -> bool:
    unknown = vocabulary.inventory.unknown
    ids, _ = vocabulary.engine.ids_of([*"0123456789", *_NUMBERS])
    return unknown is not None and unknown in ids.tolist()


def _groups(vocabulary: Vocabulary, text: str, begin: int, end: int) -> list[str]:
    stretch = Stretch([text])
    spans = correct(vocabulary.engine.encode([text]), stretch, vocabulary.inventory)
    found = []
    for start, stop in zip(spans.starts.tolist(), spans.ends.tolist(), strict=True):
        part = text[max(start, begin) : min(stop, end)]
        if stop > begin and start < end and part:
            found.append(part)
    return found


def _threes_left(number: str) -> list[str]:
    return [number[place : place + 3] for place in range(0, len(number), 3)]


def _threes_right(number: str) -> list[str]:
    head = len(number) % 3
    return ([number[:head]] if head else []) + _threes_left(number[head:])


_RULES: dict[str, Callable[[str], list[str]]] = {
    "one at a time": list,
    "whole": lambda number: [number],
    "threes from the left": _threes_left,
    "threes from the right": _threes_right,
}


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
