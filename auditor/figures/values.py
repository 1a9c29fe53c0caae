"""From tallies to figures: values with their intervals, or the reason why there is none."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS, WHY_UNDEFINED, Figure
from auditor.figures.intervals import ratio_interval, wilson
from auditor.tallies.moments import HoldsMoments, Moments


@dataclass(frozen=True, slots=True)
class Value:
    """One figure on one slice; ``note`` says why something is ``None``, or how to read it."""

    value: float | None
    low: float | None
    high: float | None
    numerator: int | None
    denominator: int | None
    note: str | None = None

    def as_json(self) -> dict[str, float | int | str | None]:
        """Return the figure as `audit.json` holds it."""
        return {
            "value": self.value,
            "low": self.low,
            "high": self.high,
            "numerator": self.numerator,
            "denominator": self.denominator,
            "note": self.note,
        }


def undefined(reason: str) -> Value:
    """Return a figure that has no value, for ``reason``."""
    return Value(None, None, None, None, None, reason)


@dataclass(frozen=True, slots=True)
class Basis:
    """What figures are computed from: totals by document, and moments by sampling unit.

    ``by_unit`` is the same tally unless origins are the units; ``lacks`` names what the
    vocabulary or the settings do not have (keys of ``WHY_UNDEFINED``).
    """

    by_document: HoldsMoments
    by_unit: HoldsMoments
    lacks: frozenset[str] = frozenset()

    @property
    def clustered(self) -> bool:
        """Whether origins, not documents, are the sampling units."""
        return self.by_unit is not self.by_document


def figures_of(key: str, basis: Basis, *, relative: bool) -> dict[str, Value]:
    """Return every figure of the slice ``key`` by name, in the order of the catalogue."""
    found = {figure.name: compute(figure, key, basis) for figure in CATALOGUE}
    if relative:
        found[RELATIVE_TOKENS.name] = compute(RELATIVE_TOKENS, key, basis)
    return found


def compute(figure: Figure, key: str, basis: Basis) -> Value:
    """Return ``figure`` on the slice ``key``."""
    missing = next((need for need in figure.needs if need in basis.lacks), None)
    if missing is not None:
        return undefined(WHY_UNDEFINED[missing])
    y = basis.by_document.total(key, figure.numerator)
    x = basis.by_document.total(key, figure.denominator)
    documents = basis.by_document.total(key, "documents")
    if x == 0:
        return Value(None, None, None, y, x, f"no {_plain(figure.denominator)} in this slice")
    if documents == 1:
        return Value(y / x, None, None, y, x, "one document: no interval")
    if figure.of_documents and not basis.clustered:
        return Value(y / x, *wilson(y, documents), y, x)
    if y == 0:
        _, bound = wilson(0, documents)
        note = f"none seen; it may still occur in up to {bound:.4%} of further documents (Wilson)"
        return Value(0.0, 0.0, None, 0, x, note)
    moments = basis.by_unit.moments(key, figure.numerator, figure.denominator)
    if moments.units < 2:
        return Value(y / x, None, None, y, x, "one origin: no interval")
    return Value(y / x, *ratio_interval(moments, share=figure.share), y, x)


def _plain(column: str) -> str:
    return {"ink_characters": "non-whitespace characters", "known_words": "known words"}.get(
        column, column
    )


def proportion(successes: int, documents: int) -> Value:
    """Return a proportion of documents that no column holds, by Wilson."""
    if documents == 0:
        return Value(None, None, None, successes, documents, "no documents in this slice")
    if documents == 1:
        return Value(successes / documents, None, None, successes, 1, "one document: no interval")
    return Value(successes / documents, *wilson(successes, documents), successes, documents)


def as_json(figures: Mapping[str, Value]) -> dict[str, dict[str, float | int | str | None]]:
    """Return figures as `audit.json` holds them."""
    return {name: value.as_json() for name, value in figures.items()}


__all__ = [
    "Basis",
    "Moments",
    "Value",
    "as_json",
    "compute",
    "figures_of",
    "proportion",
    "undefined",
]
