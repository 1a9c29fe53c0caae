"""The plain sentences of a length plan; terminal and page say the same words."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report.formatting import clean, count, plural, proportion, ranged, times

Json = Mapping[str, Any]

_SLICES_NAMED = 3
_BUCKETS_NAMED = 4
PADDINGS = {
    "fixed": "padded to it",
    "random_batches": "in random batches",
    "grouped_batches": "in batches of similar length",
    "packed": "packed",
}
NO_MODEL = (
    "Costs are counted in positions; with --model they are FLOPs, in which attention grows with"
    " the square of the length."
)


def because(plan: Json) -> list[str]:
    """Return the advice: what the recommended length does, why it, and what would change it."""
    parts = (_choice, _lost, _neighbours, _changes, _slices, _batches)
    return [told for part in parts for told in part(plan)]


def candidate(plan: Json, length: int) -> Json:
    """Return the candidate of that length."""
    found: Json = next(own for own in plan["candidates"] if own["length"] == length)
    return found


def percent(share: float) -> str:
    """Return a share that was given, such as the accepted one, with the digits it has."""
    return f"{100 * share:.6g}%"


def cuts(own: Json) -> str:
    """Return what a candidate cuts, as the rest of a sentence that begins with its length."""
    documents, tokens = own["truncated_documents"], own["truncated_tokens"]
    if not documents["numerator"]:
        told = "cuts no document"
        if documents["high"] is None:
            return told
        return f"{told} (of further documents up to {proportion(documents['high'])} may be longer)"
    shares = (ranged("truncated_documents", documents), ranged("truncated_tokens", tokens))
    return f"cuts {shares[0]} of documents and {shares[1]} of tokens"


def _choice(plan: Json) -> Iterator[str]:
    advice = plan["recommended"]
    length, accepted = advice["length"], percent(plan["settings"]["accept_truncated"])
    yield f"{count(length)} {cuts(candidate(plan, length))}."
    needs = f"cutting at most {accepted} needs {count(advice['accepted_share_needs'])}"
    asked = bool(plan["settings"]["candidates"])
    if advice["meets_accepted_share"] and asked:
        yield f"Of the lengths asked for it is the smallest that cuts at most {accepted}."
    elif advice["meets_accepted_share"] and length == advice["accepted_share_needs"]:
        yield f"It is the smallest multiple of 8 that cuts at most {accepted} of documents."
    elif advice["meets_accepted_share"]:
        yield f"It is the smallest length weighed that cuts at most {accepted} of documents."
    elif asked:
        yield f"It is the longest of the lengths asked for; {needs}."
    else:
        yield f"It is the limit of the model; {needs}."


def _lost(plan: Json) -> Iterator[str]:
    """Say what cutting takes away, and what reading all of the text would take instead."""
    own = candidate(plan, plan["recommended"]["length"])
    if not own["truncated_documents"]["numerator"]:
        return
    end = (own["cutting"] or {}).get("end")
    if end is not None:
        words, inside = end["lost_words"], end["documents_cut_inside_word"]["numerator"]
        lost = proportion(words["value"])
        yield (
            f"Cutting off the end loses {lost} of words, and cuts {plural(inside, 'document')}"
            " inside a word."
        )
    if own["windows"] is not None:
        windows = own["windows"]
        split = own["sentences"]
        parts = f"; split at sentence ends, {plural(split['parts'], 'part')}" if split else ""
        yield (
            f"To lose nothing, {plural(windows['windows'], 'window')} that share"
            f" {plural(windows['overlap'], 'token')} read {proportion(windows['share_read_twice'])}"
            f" of tokens twice{parts}."
        )


def _neighbours(plan: Json) -> Iterator[str]:
    for which in ("safer", "cheaper"):
        other = plan["recommended"][which]
        if other is not None:
            told = cuts(candidate(plan, other["length"]))
            named = f"The next {which} choice, {count(other['length'])},"
            yield f"{named} {told}; {_costs(plan, other)}."


def _costs(plan: Json, other: Json) -> str:
    what = "compute" if plan["settings"]["model"] else "positions"
    fixed, packed = times(other["compute_fixed"]), times(other["compute_packed"])
    return f"it costs {fixed} the {what} per document when padded, {packed} when packed"


def _changes(plan: Json) -> Iterator[str]:
    advice, settings = plan["recommended"], plan["settings"]
    holds = advice["holds_for_accepted"]
    least, below = holds["from"], holds["below"]
    ends = [f"at least {proportion(least)}"] if least else []
    ends += [f"less than {proportion(below)}"] if below is not None else []
    if ends:
        yield f"The choice stays as long as you accept {' and '.join(ends)} of documents cut."
    else:
        yield "The choice stays whatever share of documents cut you accept."
    if not advice["meets_accepted_share"]:
        return
    documents = candidate(plan, advice["length"])["truncated_documents"]
    if documents["high"] is not None and documents["high"] > settings["accept_truncated"]:
        high, accepted = proportion(documents["high"]), percent(settings["accept_truncated"])
        told = f"Of further documents it may cut up to {high}, more than {accepted}"
        needs = advice["upper_end_needs"]
        safe = f"{count(needs)} stays within it at 95% confidence" if needs else _TOO_FEW
        yield f"{told}; {safe}."


_TOO_FEW = "more documents are needed to be sure of any length"


def _slices(plan: Json) -> Iterator[str]:
    advice, accepted = plan["recommended"], percent(plan["settings"]["accept_truncated"])
    beyond = advice["slices_beyond_accepted"]
    if not beyond:
        return
    named = ", ".join(
        f"{clean(own['slice'], 60)} {ranged('truncated_documents', own['truncated_documents'])}"
        for own in beyond[:_SLICES_NAMED]
    )
    more = ", the most in" if len(beyond) > _SLICES_NAMED else ":"
    yield (
        f"It cuts more than {accepted} in {plural(len(beyond), 'slice')}{more} {named}; for every"
        f" slice to stay within it, {count(advice['every_slice_needs'])} is needed."
    )


def _batches(plan: Json) -> Iterator[str]:
    length = plan["recommended"]["length"]
    padding = candidate(plan, length)["padding"]
    batch = plan["settings"]["batch"]
    shares = {name: proportion(own["share"]) for name, own in padding.items()}
    yield (
        f"At {count(length)}, documents padded to it spend {shares['fixed']} of positions on"
        f" padding, in random batches of {count(batch)} {shares['random_batches']}, in batches of"
        f" similar length {shares['grouped_batches']}, packed {shares['packed']}."
    )
    choices = plan["buckets"]["choices"]
    chosen = choices[min(_BUCKETS_NAMED, len(choices)) - 1]
    if chosen["buckets"] > 1:
        named = ", ".join(map(count, chosen["boundaries"]))
        yield (
            f"{count(chosen['buckets'])} buckets, at {named}, would spend"
            f" {proportion(chosen['share'])}."
        )
