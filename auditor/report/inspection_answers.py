"""The plain sentences of an inspection; terminal and page say the same words."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report.formatting import clean, count, plural, proportion

Json = Mapping[str, Any]

NOT_A_FAULT = (
    "An entry that is never produced wastes a row and was hardly trained: it is found by trial in"
    " the contexts counted here, and another context might still bring it out."
)
_RULES = {
    "one at a time": "Digits are written one at a time.",
    "one token": "Numbers are kept whole, as far as tried.",
    "depends on position": "The rule for digits depends on what stands before a number.",
    "irregular": "Digits are grouped irregularly: no one rule fits all the numbers tried.",
    "unknown": "Some digits are none of the vocabulary's characters: numbers become unknown.",
}


def answers(vocabulary: Json) -> list[str]:
    """Return what there is to say of one vocabulary, most important first."""
    parts = (_unreachable, _made_of, _digits, _whitespace, _duplicates, _findings, _price)
    return [told for part in parts for told in part(vocabulary)]


def _unreachable(vocabulary: Json) -> Iterator[str]:
    found = vocabulary["unreachable"]
    if not found["through_pipeline"]:
        yield (
            f"All of {plural(found['tried'], 'entry', 'entries')} that are text are produced in"
            f" some of {plural(found['contexts'], 'context')}."
        )
    else:
        why = "; ".join(f"{cause}: {count(n)}" for cause, n in found["causes"].items())
        yield (
            f"{count(found['through_pipeline'])} of"
            f" {plural(found['tried'], 'entry', 'entries')} are never produced in"
            f" {plural(found['contexts'], 'context')} ({why})."
        )
    if found["in_model"]:
        yield (
            f"{count(found['in_model'])} are not what the model makes of their own spelling, even"
            " with nothing before it."
        )


def _made_of(vocabulary: Json) -> Iterator[str]:
    kinds, entries = vocabulary["kinds"], vocabulary["entries"]
    told = ", ".join(
        f"{kind} {count(n)} ({proportion(n / entries)})"
        for kind, n in sorted(kinds.items(), key=lambda item: -item[1])[:4]
        if n
    )
    yield f"Of {plural(entries, 'entry', 'entries')}: {told}."
    if kinds["unused"]:
        yield f"{plural(kinds['unused'], 'entry is', 'entries are')} named as unused or reserved."
    pairs = vocabulary["case_pairs"]
    if pairs["entries"]:
        yield (
            f"{count(pairs['entries'])} entries differ from another in nothing but case"
            f" ({plural(pairs['groups'], 'group')})."
        )


def _digits(vocabulary: Json) -> Iterator[str]:
    digits = vocabulary["digits"]
    rule = digits["rule"]
    yield _RULES.get(rule) or f"Digits are grouped {rule}."
    changed = {name: n for name, n in digits["positions"].items() if n}
    if changed:
        told = ", ".join(f"{name} {count(n)}" for name, n in changed.items())
        yield (
            f"Of {count(digits['numbers'])} numbers, so many are grouped otherwise than at the"
            f" start: {told}."
        )


def _whitespace(vocabulary: Json) -> Iterator[str]:
    space = f"A space is written as: {vocabulary['space_convention']}"
    yield space + ("; one is added before the text." if vocabulary["prefix_added"] else ".")
    lost = [row["kind"] for row in vocabulary["whitespace"] if row["fate"] not in (None, "kept")]
    if lost:
        yield f"Not kept between letters: {', '.join(dict.fromkeys(lost))}."


def _duplicates(vocabulary: Json) -> Iterator[str]:
    found = vocabulary["duplicates"]
    if found["entries"]:
        yield (
            f"{count(found['entries'])} entries are one after the vocabulary's own normaliser"
            f" ({plural(found['groups'], 'group')}): of each group one can be produced at most."
        )


def _findings(vocabulary: Json) -> Iterator[str]:
    for own in vocabulary["findings"]:
        if own["what"] != "note":
            place = f" [{own['file']}: {own['key']}]" if own["file"] else ""
            yield f"{own['what'].capitalize()}: {clean(own['detail'], 300)}{place}."


def _price(vocabulary: Json) -> Iterator[str]:
    price = vocabulary["price"]
    if price["tied"] is None:
        return
    share = f", {proportion(price['share_of_model'])} of the model" if price["layers"] else ""
    yield (
        f"At a width of {count(price['width'])} its {count(price['rows'])} rows are"
        f" {count(price['tied'])} parameters{share}; {count(price['untied'])} with an output table"
        " of its own."
    )
