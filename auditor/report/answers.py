"""The plain sentences that answer each question; terminal and page say the same words."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from auditor.report.formatting import (
    DASH,
    clean,
    count,
    interval,
    plain_name,
    plural,
    quantile,
    ranged,
)
from auditor.report.formatting import value as shown
from auditor.report.slices import RANKED_BY, anything_cut, whole

Json = Mapping[str, Any]


class Excerpt(str):
    """Text of the corpus or of a file's name inside a sentence: set apart and escaped."""

    __slots__ = ()


Sentence = tuple[str, ...]

HOW_TO_READ = (
    "Counts are exact for this corpus; a range in brackets is the 95% interval "
    "for further documents from the same source."
)
LANGUAGES_DIFFER = (
    "Where slices are languages, unequal cost is a property of the vocabulary, not of the "
    "languages; what is fair is for your own rules to decide."
)
CUT_IS_LOST = (
    "What is cut from medical, legal or similar records is lost to the model: follow your own "
    "rules and licensed practice."
)
EXCERPTS = (
    "Words are excerpts of the corpus and may hold personal data: treat them by the rules that "
    "hold for the corpus, or leave them out with --no-excerpts."
)

_FIT = {
    "fertility": "A word costs {value} tokens{range}.",
    "continued_words": "{value} of words are broken into two tokens or more{range}.",
    "bytes_per_token": "A token holds {value} bytes{range}.",
}
_RELATIVE = {"relative_tokens": "It spends {value} tokens for each one of the first{range}."}
_LOSE = {
    "unknown_words": "{value} of words hold an unknown token{range}.",
    "unknown_characters": "{value} of characters become unknown{range}.",
    "byte_spelled_characters": "{value} of characters are spelled byte by byte{range}.",
    "dropped_characters": "{value} of characters are dropped{range}.",
    "changed_words": "{value} of words are changed in more than case{range}.",
    "case_folded_words": "{value} of words lose their case{range}.",
    "control_strings": "{value} of tokens are control tokens spelled by the text{range}.",
    "lossless_documents": "{value} of documents come back exactly{range}.",
}
_WHITESPACE = {"whitespace_tokens": "{value} of tokens hold nothing but whitespace{range}."}
_CUT = {
    "truncated_documents": "{value} of documents are longer{range}.",
    "truncated_tokens": "{value} of tokens would be cut{range}.",
}
_BROKEN = {"continued_words": _FIT["continued_words"], "unknown_words": _LOSE["unknown_words"]}


def headline(vocabulary: Json) -> str:
    """Return what kind of vocabulary it is, in half a sentence."""
    limit = vocabulary["limit"]["value"]
    known = f"limit {count(limit)}" if limit is not None else "no limit known"
    return f"{vocabulary['family']}, {count(vocabulary['entries'])} entries, {known}"


def fit(vocabulary: Json, *, relative: bool) -> list[Sentence]:
    """Answer: does this vocabulary fit the text?"""
    used = whole(vocabulary)["usage"]["used_entries"]
    sentences = _said({**_FIT, **(_RELATIVE if relative else {})}, vocabulary)
    entries = f"{count(used['numerator'])} of {count(used['denominator'])} entries occur"
    return [*sentences, (f"{entries} ({shown('used_entries', used)}).",)]


def lose(vocabulary: Json) -> list[Sentence]:
    """Answer: what does it lose?"""
    return _said(_LOSE, vocabulary)


def whitespace(vocabulary: Json) -> list[Sentence]:
    """Answer: how is whitespace treated?"""
    prefix = "; one is added before the text" if vocabulary["prefix_added"] else ""
    first = f"A space is written as: {vocabulary['space_convention']}{prefix}."
    return [(first,), *_said(_WHITESPACE, vocabulary), *_fates(whole(vocabulary)["whitespace"])]


def _fates(rows: Iterable[Json]) -> list[Sentence]:
    """Name each kind whose runs do not all come back as they were."""
    rows = list(rows)
    unknown = [row for row in rows if row["fates"] is None]
    if unknown:
        return [(f"What becomes of runs: {DASH} ({unknown[0].get('note', 'not measured')}).",)]
    damaged = [row for row in rows if row["fates"]["kept"] != row["occurrences"]]
    if rows and not damaged:
        return [("Every run of whitespace comes back as it was.",)]
    return [(_fate(row),) for row in damaged]


def _fate(row: Json) -> str:
    fates = (
        f"{count(times)} {fate}" for fate, times in row["fates"].items() if times and fate != "kept"
    )
    return f"{row['kind']}: {plural(row['occurrences'], 'run')}, of which {', '.join(fates)}."


def length(vocabulary: Json) -> list[Sentence]:
    """Answer: how long do documents become, and what would a limit cut?"""
    found = whole(vocabulary)["lengths"]
    p50, p95, p99 = (quantile(found["quantiles"][name]) for name in ("p50", "p95", "p99"))
    overhead = vocabulary["overhead"]["single"]
    template = plural(overhead, "of them is", "of them are") if overhead else "None of them is"
    half = f"Half of the documents take at most {p50} positions, 95% at most {p95}, 99% at most"
    lengths = f"{half} {p99}; the longest takes {count(found['maximum'])}."
    limit = vocabulary["limit"]["value"]
    first = [(lengths,), (f"{template} the template's own.",)]
    heading = [(f"The limit is {plural(limit, 'position')}.",)] if limit is not None else []
    return [*first, *heading, *_said(_CUT, vocabulary)]


def slices(vocabulary: Json, ranked: list[str]) -> list[Sentence]:
    """Answer: which slices pay more? ``ranked`` are the keys of one set, costliest first."""
    figures = {key: vocabulary["slices"][key]["figures"][RANKED_BY] for key in ranked}
    held = [key for key in ranked if figures[key]["value"] is not None]
    if not held:
        return [("No slice holds a word.",)]
    most, least = held[0], held[-1]
    told: list[Sentence] = [_pays(most, "pays most", figures[most])]
    return [*told, _pays(least, "pays least", figures[least])] if most != least else told


def _pays(key: str, how: str, figure: Json) -> Sentence:
    return (Excerpt(clean(key, 60)), f" {how}: {ranged(RANKED_BY, figure)} tokens per word.")


def words(vocabulary: Json) -> list[Sentence]:
    """Answer: which words and characters cause it?"""
    return _said(_BROKEN, vocabulary)


def set_aside(corpus: Json) -> list[Sentence]:
    """Answer: what was set aside?"""
    return [
        _flaws(corpus["set_aside"], "set aside"),
        _flaws(corpus["mended"], "mended"),
    ]


def _flaws(flaws: Json, how: str) -> Sentence:
    if not flaws["records"]:
        return (f"No record was {how}.",)
    reasons = "; ".join(f"{reason}: {count(times)}" for reason, times in flaws["reasons"].items())
    verb = "was" if flaws["records"] == 1 else "were"
    return (f"{plural(flaws['records'], 'record')} {verb} {how}: ", Excerpt(clean(reasons)), ".")


def cautions(audit: Json, *, sliced: bool) -> list[str]:
    """Return what a reader must be warned of, given what the audit holds."""
    cut = any(anything_cut(vocabulary) for vocabulary in audit["vocabularies"])
    return [*([LANGUAGES_DIFFER] if sliced else []), *([CUT_IS_LOST] if cut else [])]


def _said(phrases: Mapping[str, str], vocabulary: Json) -> list[Sentence]:
    """Return one sentence a figure; those undefined or never seen share one for each reason."""
    told: list[Sentence] = []
    grouped: dict[str, list[str]] = {}
    notes: dict[str, None] = {}
    for name, phrase in phrases.items():
        figure = whole(vocabulary)["figures"][name]
        if figure["value"] is None:
            grouped.setdefault(f"{DASH} ({figure['note']})", []).append(name)
        elif figure["note"] and figure["low"] is not None and figure["high"] is None:
            grouped.setdefault(figure["note"], []).append(name)
        else:
            told.append((_filled(phrase, name, figure),))
            notes.update({figure["note"]: None} if figure["note"] else {})
    told += [(f"{_listed(names)}: {reason}.",) for reason, names in grouped.items()]
    return told + [(f"{note[:1].upper()}{note[1:]}.",) for note in notes]


def _listed(names: Iterable[str]) -> str:
    listed = ", ".join(plain_name(name) for name in names)
    return listed[:1].upper() + listed[1:]


def _filled(phrase: str, name: str, figure: Json) -> str:
    ends = interval(name, figure)
    return phrase.format(value=shown(name, figure), range=f" ({ends})" if ends else "")
