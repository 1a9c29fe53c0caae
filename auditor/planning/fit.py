"""What a candidate vocabulary costs, and what would help it, from figures alone."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from typing import Any

from auditor.planning import cost
from auditor.planning.candidates import rounded, smallest
from auditor.planning.histogram import LengthHistogram
from auditor.planning.model import ModelShape

Json = dict[str, Any]

ACCEPTED = Fraction(1, 100)
# A remedy that changes less than this share of the tokens, or of the documents, is not named.
WORTHWHILE = 0.01


def price(
    entries: int,
    limit: int | None,
    histogram: LengthHistogram,
    width: int | None,
    shape: ModelShape | None,
) -> Json:
    """Return what a model with this vocabulary pays: parameters at a width, FLOPs a document.

    ``positions`` is a table with a row for each position up to the limit; models that need none
    save it. FLOPs are the mean of one forward pass over each document, cut at the limit.
    """
    width = shape.width if shape is not None else width
    fed = histogram if limit is None else histogram.cut_at(limit)
    pairs = zip(fed.lengths.tolist(), fed.documents.tolist(), strict=True)
    forward = (
        None
        if shape is None
        else sum(n * cost.forward_flops(shape, length) for length, n in pairs) / fed.total_documents
    )
    return {
        "entries": entries,
        "width": width,
        "embedding_parameters": None if width is None else entries * width,
        "positions": limit,
        "position_parameters": None if width is None or limit is None else limit * width,
        "positions_per_document": fed.total_positions / fed.total_documents,
        "forward_flops_per_document": forward,
    }


def remedies(
    figures: Mapping[str, Json],
    tokens: int,
    histogram: LengthHistogram,
    limit: int | None,
    words: tuple[int, int],
    form: Mapping[str, int],
) -> list[Json]:
    """Return what would help, each with the effect computed on this corpus.

    ``words``: how many broken words were looked at, and the tokens saved at most were each of them
    an entry. ``form``: tokens of the documents not in NFC as they are, and normalised.
    """
    entries, saved = words
    composed = form["tokens"] - form["tokens_as_nfc"]
    found: list[Json] = [
        {"remedy": "entries for words", "entries": entries, "tokens": saved},
        {"remedy": "normalise first", "documents": form["documents"], "tokens": composed},
    ]
    shared: list[Json] = [{**own, "share": own["tokens"] / tokens} for own in found if tokens]
    told = [*_longer(figures, histogram, limit), *shared]
    return [own for own in told if own["share"] >= WORTHWHILE]


def _longer(
    figures: Mapping[str, Json], histogram: LengthHistogram, limit: int | None
) -> list[Json]:
    """A limit that cuts at most 1 % of the documents, where today's cuts more."""
    cut = figures["truncated_documents"]
    if limit is None or not cut["value"] or cut["value"] <= float(ACCEPTED):
        return []
    needed = rounded(smallest(histogram, ACCEPTED))
    beyond = histogram.documents[histogram.lengths > needed].sum()
    kept = cut["numerator"] - int(beyond)
    return [{"remedy": "longer limit", "length": needed, "documents": kept,
             "share": kept / cut["denominator"]}]  # fmt: skip
