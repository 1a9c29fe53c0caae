"""What languages pay: premiums on the same content, room, remedies, and mixtures."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

from auditor.figures import independent
from auditor.figures.paired import mean_of_ratios, ratio_of_totals
from auditor.figures.values import Value
from auditor.planning.candidates import rounded, smallest
from auditor.planning.histogram import LengthHistogram

Json = dict[str, Any]
# Content → (records that hold it, sum of a column over them).
Held = Mapping[str, tuple[int, int]]

ACCEPTED = Fraction(1, 100)
MOST_REMEDIES = 2
WEAKER = ("tokens_per_character", "tokens_per_grapheme", "tokens_per_byte")


def pairs_of(ours: Held, theirs: Held) -> list[tuple[int, int]]:
    """Return (our sum, their sum) for each content that both hold in one record."""
    common = sorted(ours.keys() & theirs.keys())
    return [
        (ours[content][1], theirs[content][1])
        for content in common
        if ours[content][0] == theirs[content][0] == 1
    ]


def premium(ours: Held, theirs: Held) -> Json:
    """Return what ``ours`` costs over the reference ``theirs`` on the same content.

    ``missing`` counts the reference's contents that we lack, ``missing_in_reference`` ours that it
    lacks; ``ambiguous`` the contents that both hold, one of them in several records.
    """
    pairs = pairs_of(ours, theirs)
    common = ours.keys() & theirs.keys()
    return {
        "ratio_of_totals": ratio_of_totals(pairs).as_json(),
        "mean_of_ratios": mean_of_ratios(pairs).as_json(),
        "pairs": len(pairs),
        "missing": len(theirs.keys() - ours.keys()),
        "missing_in_reference": len(ours.keys() - theirs.keys()),
        "ambiguous": len(common) - len(pairs),
    }


def spread(tokens: Mapping[str, Held], premiums: Mapping[str, Json]) -> Json | None:
    """Return the costliest language over the cheapest, on what these two share.

    ``premiums`` are over one reference. ``None`` with fewer than two languages that have pairs. The
    two were picked by their cost, which the interval does not know.
    """
    values = {
        key: own["ratio_of_totals"]["value"]
        for key, own in premiums.items()
        if own["ratio_of_totals"]["value"]
    }
    if len(values) < 2:
        return None
    highest = max(values, key=lambda key: (values[key], key))
    lowest = min(values, key=lambda key: (values[key], key))
    pairs = pairs_of(tokens[highest], tokens[lowest])
    return {
        "highest": highest,
        "lowest": lowest,
        "ratio_of_totals": ratio_of_totals(pairs).as_json(),
        "pairs": len(pairs),
    }


def relative(ours: Json, theirs: Json) -> Json:
    """Return the cost by character, grapheme and byte over the reference's: weaker evidence."""
    return {name: independent.ratio(ours[name], theirs[name]).as_json() for name in WEAKER}


def room(figures: Json, room_tokens: int | None, reference_words: Json | None) -> Json | None:
    """Return what fits into ``room_tokens``: words, graphemes, the reference's words' worth.

    ``reference_words``: the reference's words per token of this language on the same content.
    """
    if room_tokens is None:
        return None
    return {
        "tokens": room_tokens,
        "words": _fitting(room_tokens, figures["fertility"]),
        "graphemes": _fitting(room_tokens, figures["tokens_per_grapheme"]),
        "reference_words": _times(room_tokens, reference_words) if reference_words else None,
    }


def _fitting(tokens: int, cost: Json) -> Json:
    """Return ``tokens`` divided by a cost, and its interval, which turns over."""

    def over(end: float | None) -> float | None:
        return tokens / end if end else None

    return Value(over(cost["value"]), over(cost["high"]), over(cost["low"]), None, None).as_json()


def _times(tokens: int, worth: Json) -> Json:
    value, low, high = (
        None if worth[end] is None else tokens * worth[end] for end in ("value", "low", "high")
    )
    return Value(value, low, high, None, None, worth["note"]).as_json()


def remedies(language: Json, histogram: LengthHistogram, limit: int | None) -> list[Json]:
    """Return at most two remedies that the figures support, the most effective first.

    Each gives the share of the language's tokens that it touches: tokens saved, or tokens no longer
    cut off.
    """
    tokens = language["counts"]["tokens"]
    found = [
        *_longer(language, histogram, limit),
        *_entries_for_characters(language, tokens),
        *_entries_for_words(language, tokens),
        *_normalise(language, tokens),
    ]
    worthwhile = [own for own in found if own["share"] >= float(ACCEPTED)]
    return sorted(worthwhile, key=lambda own: (-own["share"], own["remedy"]))[:MOST_REMEDIES]


def _longer(language: Json, histogram: LengthHistogram, limit: int | None) -> list[Json]:
    cut = language["figures"]["truncated_tokens"]
    documents = language["figures"]["truncated_documents"]
    if limit is None or not documents["value"] or documents["value"] <= float(ACCEPTED):
        return []
    needed = rounded(smallest(histogram, ACCEPTED))
    kept = cut["numerator"] - int(
        ((histogram.lengths - needed).clip(min=0) * histogram.documents).sum()
    )
    share = kept / cut["denominator"]
    return [{"remedy": "longer limit", "length": needed, "tokens": kept, "share": share}]


def _entries_for_characters(language: Json, tokens: int) -> list[Json]:
    """Entries for the characters that cost most: one token each, where they are byte-spelled now.

    The saving is at least that of the characters by themselves, in places where no longer entry
    takes them in.
    """
    costly = language["characters"]
    saved = sum(own["tokens"] - own["count"] for own in costly if own["tokens"] > own["count"])
    if not saved:
        return []
    return [
        {
            "remedy": "entries for characters",
            "entries": len(costly),
            "tokens": saved,
            "share": saved / tokens,
        }
    ]


def _entries_for_words(language: Json, tokens: int) -> list[Json]:
    """Entries for broken words: at most what is saved were each of them one token."""
    words = language["figures"]["continued_words"]["numerator"]
    spent = language["cost"]["in_broken_words"]
    if not words or spent <= words:
        return []
    saved = spent - words
    return [{"remedy": "entries for words", "tokens": saved, "share": saved / tokens}]


def _normalise(language: Json, tokens: int) -> list[Json]:
    form = language["normal_form"]
    saved = form["tokens"] - form["tokens_as_nfc"]
    if saved <= 0:
        return []
    return [{"remedy": "normalise first", "tokens": saved, "share": saved / tokens}]


def mixture(counts: Mapping[str, Mapping[str, int]], powers: Sequence[float]) -> list[Json]:
    """Return each language's share of a mixture, planned in documents and counted in tokens.

    ``counts`` has documents and tokens by language. For each power α a language is drawn in
    proportion to p^α, p being its share in that unit; a mixture planned in documents is told in
    tokens too, by the tokens of its documents.
    """
    units = ("documents", "tokens")
    totals = {unit: sum(own[unit] for own in counts.values()) for unit in units}
    shares = {
        unit: {key: own[unit] / max(1, totals[unit]) for key, own in counts.items()}
        for unit in units
    }
    rows: list[Json] = [
        {"language": key, **{f"share_of_{unit}": shares[unit][key] for unit in units}, "powers": []}
        for key in counts
    ]
    for power in powers:
        planned = {unit: _weights(shares[unit], power) for unit in units}
        mean = {key: own["tokens"] / own["documents"] for key, own in counts.items()}
        spent = {key: planned["documents"][key] * mean[key] for key in counts}
        total = sum(spent.values())
        for row in rows:
            key = row["language"]
            row["powers"].append(
                {
                    "power": power,
                    "planned_in_documents": planned["documents"][key],
                    "that_in_tokens": spent[key] / total if total else None,
                    "planned_in_tokens": planned["tokens"][key],
                }
            )
    return rows


def _weights(shares: Mapping[str, float], power: float) -> dict[str, float]:
    raised = {key: share**power if share else 0.0 for key, share in shares.items()}
    total = sum(raised.values())
    return {key: own / total if total else 0.0 for key, own in raised.items()}
