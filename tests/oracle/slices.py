"""The oracle's answer: every figure of one vocabulary, by slice, in the shape of audit.json."""

from __future__ import annotations

import json
from collections import Counter
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

from tests.oracle.fates import FATES
from tests.oracle.intervals import ratio_interval, wilson
from tests.oracle.measuring import DocumentMeasurer, Measured, WhitespaceRow
from tests.oracle.summaries import lengths_of, usage_of
from tests.oracle.text import KINDS
from tests.oracle.vocabularies import OracleVocabulary

COUNTS = ("documents", "bytes", "characters", "words", "tokens")

# name: (numerator, denominator, whether the numerator is a part of the denominator)
RATIOS = {
    "fertility": ("tokens", "words", False),
    "pieces_per_word": ("pieces", "words", False),
    "pieces_per_known_word": ("pieces_of_known_words", "known_words", False),
    "continued_words": ("continued_words", "words", True),
    "bytes_per_token": ("bytes", "tokens", False),
    "characters_per_token": ("characters", "tokens", False),
    "unknown_tokens": ("unknown_tokens", "tokens", True),
    "unknown_words": ("unknown_words", "words", True),
    "unknown_characters": ("unknown_characters", "visible_characters", True),
    "byte_tokens": ("byte_tokens", "tokens", True),
    "byte_spelled_characters": ("byte_spelled_characters", "visible_characters", True),
    "dropped_characters": ("dropped_characters", "visible_characters", True),
    "case_folded_words": ("case_folded_words", "words", True),
    "changed_words": ("changed_words", "words", True),
    "whitespace_tokens": ("whitespace_tokens", "tokens", True),
    "control_strings": ("control_tokens", "tokens", True),
    "truncated_tokens": ("truncated_tokens", "tokens", True),
}
PROPORTIONS = (
    "documents_with_unknown",
    "documents_with_byte_tokens",
    "documents_with_control_strings",
    "truncated_documents",
    "lossless_documents",
)
NEED_AN_UNKNOWN_ID = (
    "unknown_tokens", "unknown_words", "unknown_characters", "documents_with_unknown"
)  # fmt: skip
NEED_A_LIMIT = ("truncated_tokens", "truncated_documents")
NEED_A_DECODER = ("lossless_documents",)

Figure = dict[str, Any]


@dataclass
class Document:
    """One record: its text and the other fields of the record."""

    text: str
    fields: dict[str, Any] = field(default_factory=dict)


def measure(
    documents: list[Document],
    vocabulary: OracleVocabulary,
    *,
    by: list[str],
    limit: int | None,
    words: str = "icu",
    control_strings: str = "parse",
    origin: str | None = None,
    reference_tokens: list[int] | None = None,
) -> dict[str, Any]:
    """Return one vocabulary's "slices"; ``reference_tokens`` adds `relative_tokens`.

    ``reference_tokens`` gives the tokens of each document under the vocabulary compared with.
    """
    measure_document = DocumentMeasurer(vocabulary, words, control_strings, limit)
    measured = [measure_document(document.text) for document in documents]
    if reference_tokens is not None:
        for one, tokens in zip(measured, reference_tokens, strict=True):
            one.integers["reference_tokens"] = tokens

    members: dict[str, list[int]] = {"all": list(range(len(documents)))}
    for name in by:
        for number, document in enumerate(documents):
            members.setdefault(slice_key(name, document.fields.get(name)), []).append(number)

    has_reference = reference_tokens is not None
    slices = {}
    for key, numbers in members.items():
        chosen = [measured[number] for number in numbers]
        origins = None if origin is None else [
            slice_key(origin, documents[number].fields.get(origin)) for number in numbers
        ]  # fmt: skip
        settings = _Settings(vocabulary, limit, has_reference)
        slices[key] = _slice(chosen, origins, settings)
    everything = [number for one in measured for number in one.ids]
    slices["all"]["usage"] = usage_of(everything, vocabulary)
    return slices


def tokens_per_document(
    documents: list[Document], vocabulary: OracleVocabulary, control_strings: str = "parse"
) -> list[int]:
    """Return the number of tokens of each document."""
    return [len(vocabulary.encode(document.text, control_strings)) for document in documents]


def slice_key(name: str, value: object) -> str:
    if value is None:
        return f"{name}=(none)"
    return f"{name}={value}" if isinstance(value, str) else f"{name}={json.dumps(value)}"


@dataclass(frozen=True)
class _Settings:
    vocabulary: OracleVocabulary
    limit: int | None
    has_reference: bool


def _slice(
    chosen: list[Measured], origins: list[str] | None, settings: _Settings
) -> dict[str, Any]:
    totals: Counter[str] = Counter()
    for one in chosen:
        totals.update(one.integers)
    units = [one.integers for one in chosen] if origins is None else _by_origin(chosen, origins)
    overhead = settings.vocabulary.overhead
    return {
        "counts": {name: totals[name] for name in COUNTS},
        "figures": _figures(units, settings, has_origins=origins is not None),
        "lengths": lengths_of([len(one.ids) + overhead for one in chosen]),
        "whitespace": _whitespace(chosen, settings.vocabulary),
    }


def _by_origin(chosen: list[Measured], origins: list[str]) -> list[Counter[str]]:
    sums: dict[str, Counter[str]] = {}
    for one, key in zip(chosen, origins, strict=True):
        sums.setdefault(key, Counter()).update(one.integers)
    return list(sums.values())


def _figures(
    units: list[Counter[str]], settings: _Settings, *, has_origins: bool
) -> dict[str, Figure]:
    """Return the figures of a slice whose units (documents or origins) have these totals."""
    figures = {}
    for name, (numerator, denominator, is_share) in RATIOS.items():
        y, x = [unit[numerator] for unit in units], [unit[denominator] for unit in units]
        figures[name] = _ratio(y, x, is_share=is_share)
    for name in PROPORTIONS:
        y, x = [unit[name] for unit in units], [unit["documents"] for unit in units]
        figures[name] = _ratio(y, x, is_share=True) if has_origins else _proportion(y)
    if settings.has_reference:
        y, x = [unit["tokens"] for unit in units], [unit["reference_tokens"] for unit in units]
        figures["relative_tokens"] = _ratio(y, x, is_share=False)
    figures.update(_undefined_ones(settings))
    return figures


def _undefined_ones(settings: _Settings) -> dict[str, Figure]:
    undefined = {}
    if settings.vocabulary.unknown_id is None:
        undefined.update(dict.fromkeys(NEED_AN_UNKNOWN_ID, "the vocabulary has no unknown id"))
    if settings.limit is None:
        undefined.update(dict.fromkeys(NEED_A_LIMIT, "no limit is known"))
    if not settings.vocabulary.has_decoder:
        undefined.update(dict.fromkeys(NEED_A_DECODER, "the vocabulary has no decoder"))
    return {name: _figure(None, None, None, None, None, why) for name, why in undefined.items()}


def _ratio(y: list[int], x: list[int], *, is_share: bool) -> Figure:
    numerator, denominator = sum(y), sum(x)
    if denominator == 0:
        return _figure(None, None, None, numerator, denominator, "the denominator is 0")
    value = float(Fraction(numerator, denominator))
    if len(y) == 1:
        return _figure(value, None, None, numerator, denominator, "one unit has no spread")
    if numerator == 0:
        bound = wilson(0, len(y))[1]
        note = f"none seen: at most a share of {bound:.6g} of documents or origins (Wilson)"
        return _figure(value, 0.0, None, numerator, denominator, note)
    low, high = ratio_interval(y, x, is_share=is_share)
    return _figure(value, low, high, numerator, denominator, None)


def _proportion(flags: list[int]) -> Figure:
    successes, trials = sum(flags), len(flags)
    if trials == 0:
        return _figure(None, None, None, successes, trials, "no documents")
    value = float(Fraction(successes, trials))
    if trials == 1:
        return _figure(value, None, None, successes, trials, "one document has no spread")
    low, high = wilson(successes, trials)
    return _figure(value, low, high, successes, trials, None)


def _figure(
    value: float | None,
    low: float | None,
    high: float | None,
    numerator: int | None,
    denominator: int | None,
    note: str | None,
) -> Figure:
    return {
        "value": value,
        "low": low,
        "high": high,
        "numerator": numerator,
        "denominator": denominator,
        "note": note,
    }


def _whitespace(chosen: list[Measured], vocabulary: OracleVocabulary) -> list[dict[str, Any]]:
    table = []
    for kind in KINDS:
        rows = [one.whitespace[kind] for one in chosen if kind in one.whitespace]
        if rows:
            table.append(_row(kind, rows, has_decoder=vocabulary.has_decoder))
    return table


def _row(kind: str, rows: list[WhitespaceRow], *, has_decoder: bool) -> dict[str, Any]:
    fates = {fate: sum(row.fates[fate] for row in rows) for fate in FATES}
    return {
        "kind": kind,
        "occurrences": sum(row.occurrences for row in rows),
        "tokens": sum(row.tokens for row in rows),
        "fates": fates if has_decoder else None,
        "bytes": sum(row.bytes for row in rows),
    }
