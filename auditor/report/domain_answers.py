"""The plain sentences of a vetting; terminal, page and `domain.json` say the same words."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report.formatting import clean, count, figure, plural, proportion, ranged

Json = Mapping[str, Any]

NOT_QUALITY = (
    "Figures of cost and coverage do not measure how well a model does its task; that takes a trial"
    " on your own data."
)
NO_GENERAL = (
    "No general text was named with --general, so that the figures stand alone: there is nothing to"
    " say which of them are the domain's and which the vocabulary's anywhere."
)
PAIRED = (
    "Candidates are compared on the same documents, so that intervals between them are paired;"
    " ratios to the general text are of independent documents."
)
WEIGHTS = (
    "A candidate falls short of the best one by a share: of tokens or entries more than the fewest,"
    " of characters lost or of terms broken more than the least. Its score is the sum of these"
    " shares, each times its weight."
)
# A kind of text is named when its share of the tokens is larger by so much.
MORE = 0.01
_REMEDIES = {
    "longer limit": "a limit of {length} would keep whole {documents} more ({share} of all)",
    "normalise first": "normalising to NFC first would save {share} of its tokens",
    "entries for words": (
        "were its {entries} costliest broken words entries of their own, at most {share} of its"
        " tokens would be saved"
    ),
}


# What a verdict speaks of, in this order.
HEADINGS = {
    "losses": "What is lost",
    "cost": "What it costs",
    "terms": "What becomes of the terms",
    "choice": "Which comes first",
    "help": "What would help",
    "sample": "Is the corpus large enough",
}


def verdict(document: Json) -> dict[str, list[str]]:
    """Return the sentences of the verdict under the keys of ``HEADINGS``."""
    parts = {
        "losses": (_losses,),
        "cost": (_costs, _beside, _limits, _kinds),
        "terms": (_terms,),
        "choice": (_order,),
        "help": (_help,),
        "sample": (_sample,),
    }
    found = {
        about: [told for part in own for told in part(document)] for about, own in parts.items()
    }
    return {about: told for about, told in found.items() if told}


def ordered(document: Json) -> list[Json]:
    """Return the candidates in the order of the ranking."""
    by_name = {own["name"]: own for own in document["candidates"]}
    return [by_name[row["vocabulary"]] for row in document["ranking"]["order"]]


def shared(held: Json) -> str:
    """Return a share with its interval; a dash where it is undefined."""
    if held["low"] is None or held["high"] is None:
        return proportion(held["value"]) + (f" ({held['note']})" if held["note"] else "")
    low, high = proportion(held["low"]), proportion(held["high"])
    return f"{proportion(held['value'])} ({low} to {high})"


def penalty_of(document: Json, vocabulary: str, name: str) -> Json | None:
    """Return the row of a figure over the whole domain; ``None`` without a general text."""
    rows = (row for row in document["penalty"] if row["slice"] == "all")
    return next(
        (row for row in rows if (row["vocabulary"], row["figure"]) == (vocabulary, name)), None
    )


def named(own: Json) -> str:
    """Return a candidate's name, fit to be shown."""
    return clean(own["name"], 60)


def _losses(document: Json) -> Iterator[str]:
    for own in ordered(document):
        lost, spelled = own["lost_characters"], own["figures"]["byte_spelled_characters"]
        bytes_ = f"{ranged('byte_spelled_characters', spelled)} of them are spelled in bytes"
        if lost["numerator"]:
            more = f"; {bytes_}" if spelled["numerator"] else ""
            yield f"{named(own)} loses {shared(lost)} of the characters (unknown or dropped){more}."
        else:
            more = f", though {bytes_}" if spelled["numerator"] else ""
            yield f"{named(own)} loses no character of this corpus{more}."


def _costs(document: Json) -> Iterator[str]:
    for own in ordered(document):
        fertility = own["figures"]["fertility"]
        if fertility["value"] is None:
            continue
        told = f"{named(own)} spends {ranged('fertility', fertility)} tokens a word"
        row = penalty_of(document, own["name"], "fertility")
        if row is not None and row["ratio"]["value"] is not None:
            told += f", {figure(row['ratio'])} × what it spends on the general text"
        yield f"{told}."


def _beside(document: Json) -> Iterator[str]:
    first, *rest = ordered(document)
    for own in rest:
        pair = next(pair for pair in own["paired"] if pair["other"] == first["name"])
        yield (
            f"On the same documents {named(own)} spends {figure(pair['tokens_ratio'])} × the tokens"
            f" of {named(first)}."
        )


def _kinds(document: Json) -> Iterator[str]:
    """What takes most beyond its share of the characters, under the first candidate."""
    first = ordered(document)[0]["name"]
    rows = [
        row
        for row in document["kinds"]
        if row["vocabulary"] == first and row["characters"] and row["tokens"]
    ]
    over = [row for row in rows if row["share_of_tokens"] - row["share_of_characters"] > MORE]
    over.sort(key=lambda row: row["share_of_characters"] - row["share_of_tokens"])
    if over:
        told = ", ".join(
            f"{row['kind'].replace('_', ' ')} {proportion(row['share_of_tokens'])} of tokens from"
            f" {proportion(row['share_of_characters'])} of characters"
            for row in over[:2]
        )
        yield f"Under {clean(first, 60)} these kinds of text take more than their share: {told}."


def _limits(document: Json) -> Iterator[str]:
    for own in ordered(document):
        cut, limit = own["figures"]["truncated_documents"], own["limit"]["value"]
        if cut["numerator"]:
            yield (
                f"At its limit of {count(limit)}, {named(own)} cuts"
                f" {ranged('truncated_documents', cut)} of the documents."
            )


def _terms(document: Json) -> Iterator[str]:
    for own in ordered(document):
        found = own["terms"]
        if found is None:
            continue
        by_term = found["by_term"]
        lost = by_term["unknown"]["count"] + by_term["dropped"]["count"]
        told = (
            f"Of {plural(found['terms'], 'term')}, {named(own)} keeps"
            f" {count(by_term['words_whole']['count'])} with every word whole"
            f" ({proportion(by_term['words_whole']['share'])})"
        )
        if lost:
            told += f" and loses a character of {count(lost)}"
        if by_term["byte_spelled"]["count"]:
            told += f"; {count(by_term['byte_spelled']['count'])} are spelled in bytes in part"
        yield f"{told}."
    first = ordered(document)[0]["terms"]
    if first is not None and first["not_in_corpus"]:
        absent = plural(len(first["not_in_corpus"]), "term does", "terms do")
        yield f"{absent} not occur in the corpus."


def worst_terms(document: Json) -> list[Json]:
    """Return the terms that break, most tokens in the corpus beyond a word's one first.

    Each with its rows by vocabulary, in the order of the ranking.
    """
    order = [own["name"] for own in ordered(document)]
    rows: dict[str, dict[str, Json]] = {}
    for row in document["terms"]:
        rows.setdefault(row["term"], {})[row["vocabulary"]] = row
    held = [[own[name] for name in order] for own in rows.values()]
    return [
        {"term": own[0]["term"], "occurrences": own[0]["occurrences"], "rows": own}
        for own in sorted(held, key=_cost_of_term)
    ]


def _cost_of_term(rows: list[Json]) -> tuple[int, int]:
    """Return a key by which terms are listed: those that cost most in the corpus, then alone."""
    extra = rows[0]["tokens"] - 1
    return -rows[0]["occurrences"] * extra, -extra


def _order(document: Json) -> Iterator[str]:
    found = document["ranking"]
    stability, first = found["stability"], named(ordered(document)[0])
    if stability is None:
        return
    weights = ", ".join(f"{name} {w:g}" for name, w in found["weights"].items() if w)
    yield f"Weighed by {weights}, {first} comes first{_firmness(stability)}."
    times = stability["first_in_weightings"][found["order"][0]["vocabulary"]]
    tried = count(stability["weightings"])
    yield f"Of {tried} weightings of all criteria it is first in {count(times)}."


def _firmness(stability: Json) -> str:
    if stability["first_in_everything"]:
        return ", and is best in everything that is measured"
    if stability["holds_when_one_weight_is_halved_or_doubled"]:
        return ", and stays first when any one weight is halved or doubled"
    change = stability["changes"][0]
    how = "halved" if change["times"] < 1 else "doubled"
    return (
        f", but not firmly: with the weight of {change['criterion']} {how},"
        f" {clean(change['first'], 60)} does"
    )


def _help(document: Json) -> Iterator[str]:
    first = ordered(document)[0]
    told = [remedy(own) for own in first["remedies"]]
    if told:
        yield f"What would help {named(first)}: {'; '.join(told)}."


def _sample(document: Json) -> Iterator[str]:
    held = document["growth"]["words"]
    if held["next_is_new"]["value"] is None:
        return
    yield f"The next word is one not seen yet with a probability of {shared(held['next_is_new'])}."
    steady = {own["vocabulary"]: own["ways"]["all"] for own in document["steadiness"]}
    for own in ordered(document):
        if own["name"] in steady:
            yield (
                f"{named(own)} breaks {shared(steady[own['name']]['one'])} of words drawn in one"
                " way, whatever stands beside them and in any case."
            )


def remedy(own: Json) -> str:
    """Return a remedy in words, with the effect that was computed."""
    return _REMEDIES[own["remedy"]].format(
        share=proportion(own["share"]),
        length=count(own.get("length")),
        documents=plural(own.get("documents") or 0, "document"),
        entries=count(own.get("entries")),
    )
