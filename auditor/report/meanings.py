"""What each figure means, for a reader of the page: the catalogue, and what stands beside it."""

from __future__ import annotations

from dataclasses import dataclass

from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS, Figure
from auditor.report.formatting import plain_name


@dataclass(frozen=True, slots=True)
class Meaning:
    """A figure's name, its definition, and unit, fraction and better direction in one line."""

    name: str
    definition: str
    details: str


_BETTER = {"lower": "lower is better", "higher": "higher is better", "neither": ""}
_COLUMNS = {
    "ink_characters": "non-whitespace characters",
    "reference_tokens": "tokens of the first",
}


def _column(name: str) -> str:
    return _COLUMNS.get(name, plain_name(name))


def _meaning(figure: Figure) -> Meaning:
    fraction = f"{_column(figure.numerator)} / {_column(figure.denominator)}"
    told = [figure.unit, fraction, _BETTER[figure.better]]
    return Meaning(figure.name, figure.definition, "; ".join(part for part in told if part) + ".")


MEANINGS: tuple[Meaning, ...] = (
    *map(_meaning, (*CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS)),
    Meaning(
        "used_entries", "Entries of the vocabulary that occur in the corpus.",
        "Share of entries; distinct ids seen / entries.",
    ),
    Meaning("entropy", "Shannon entropy of the tokens' frequencies.", "Bits per token."),
    Meaning(
        "renyi_efficiency",
        "Rényi entropy of order 2.5 over its largest value, the logarithm of the number of "
        "entries (Zouhar et al. 2023).",
        "Between 0 and 1; higher means that tokens are used more evenly.",
    ),
    Meaning(
        "rank_95_frequency",
        "Occurrences of the entry that stands at 95% of the entries, the most frequent first; "
        "control and byte pieces are left out (Gowda & May 2020).",
        "Occurrences.",
    ),
    Meaning(
        "quantiles",
        "p95 is the smallest observed length with at least 95% of the documents at or below it; "
        "the others alike. Length is tokens and the template's own positions together.",
        "Positions; intervals by order statistics, without an assumption on the distribution.",
    ),
    Meaning(
        "interval",
        "What 95% intervals are: for ratios the linearised ratio estimator over documents "
        "(Cochran 1977, chapter 6) or over origins, for proportions of documents Wilson's. The "
        "value itself is exact for this corpus.",
        "A dash is a figure that is not defined here; the reason stands beside it.",
    ),
)  # fmt: skip
