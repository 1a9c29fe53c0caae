"""The page of a vetting: one file of HTML without scripts or outside parts."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from typing import Any

from jinja2 import Environment
from markupsafe import Markup

from auditor.report import domain_answers, repeating, row_charts
from auditor.report.formatting import FIGURES, clean, figure, number, plain_name, proportion, value
from auditor.report.page import WorstWords, own_environment, script_of, word_tables

Json = Mapping[str, Any]

_TERMS = 100
# Figures whose ratio is drawn: what a token costs, and what is broken.
_DRAWN = ("fertility", "pieces_per_word", "continued_words", "bytes_per_token")


_WAYS = {
    "position": "the place: start of the text, after a space, after a line end",
    "punctuation": "punctuation beside it: a bracket, a full stop, a comma",
    "case": "case: as written, lower, title, upper",
    "all": "all of these",
}
_SHARES = {
    "by_term": "each term once",
    "by_weight": "by weight",
    "by_use": "by use in the corpus",
    "running_text": "occurrences, as broken in running text",
}
_STATES = {
    "words_whole": "every word whole",
    "whole": "one token",
    "two": "in two",
    "three_or_more": "in three or more",
    "unknown": "unknown characters",
    "dropped": "dropped characters",
    "byte_spelled": "spelled in bytes in part",
}


def render(document: Json, worst: WorstWords) -> str:
    """Return the page for a `domain.json` document and the costliest words of each vocabulary."""
    return (
        _environment()
        .get_template("domain.html.jinja")
        .render(
            document=document,
            candidates=domain_answers.ordered(document),
            penalties=_penalties(document),
            drawings=[_drawing(n, name, document) for n, name in enumerate(_DRAWN)]
            if document["general"]
            else [],
            worst_terms=domain_answers.worst_terms(document)[:_TERMS],
            kinds_by_vocabulary=_kinds(document),
            kind_drawings={
                name: _kind_drawing(number, name, rows)
                for number, (name, rows) in enumerate(_kinds(document).items())
            },
            drawn_growth=_growth(document),
            word_tables=[table for name, rows in worst for table in word_tables(name, rows)],
            command=repeating.domain_command(document),
            **script_of("page.js"),
            command_notes=repeating.command_notes({**document, "vocabularies": []}),
            blocks=repeating.blocks({**document, "vocabularies": document["candidates"]}),
        )
    )


@cache
def _environment() -> Environment:
    made = own_environment()
    made.filters |= {
        "proportion": proportion,
        "figure": figure,
        "number": number,
        "plain": plain_name,
        "shared": domain_answers.shared,
        "remedy": domain_answers.remedy,
    }
    made.globals |= {
        "not_quality": domain_answers.NOT_QUALITY,
        "no_general": domain_answers.NO_GENERAL,
        "paired": domain_answers.PAIRED,
        "weights_mean": domain_answers.WEIGHTS,
        "headings": domain_answers.HEADINGS,
        "drawn": _DRAWN,
        "shares": _SHARES,
        "ways_told": _WAYS,
        "state_names": _STATES,
        "value_of": value,
        "known": FIGURES,
    }
    return made


def _kinds(document: Json) -> dict[str, list[Json]]:
    """Return the rows of kinds by vocabulary, in the order of the ranking."""
    return {
        own["name"]: [row for row in document["kinds"] if row["vocabulary"] == own["name"]]
        for own in domain_answers.ordered(document)
    }


def _kind_drawing(number: int, name: str, rows: list[Json]) -> Markup:
    held = [
        (plain_name(row["kind"]), row["tokens_per_character"])
        for row in rows
        if row["tokens_per_character"] and row["tokens_per_character"]["value"] is not None
    ]
    title = f"Tokens per character by kind of text, {clean(name, 60)}"
    return row_charts.points(f"kinds-{number}", title, held, None)


def _growth(document: Json) -> Markup | None:
    """Draw the distinct words expected in a part of the corpus."""
    curve = [(m, v) for m, v in document["growth"]["words"]["curve"] if v >= 1]
    if len(curve) < 2:
        return None
    return row_charts.growing("growth", "Distinct words by words read", curve)


def _penalties(document: Json) -> dict[str, list[Json]]:
    """Return the rows over the whole domain by figure, the vocabularies in ranking order.

    Figures that are 0 or undefined for all, on both sides, are left out.
    """
    order = [own["name"] for own in domain_answers.ordered(document)]
    found: dict[str, list[Json]] = {}
    for name in order:
        for row in document["penalty"]:
            if row["slice"] == "all" and row["vocabulary"] == name:
                found.setdefault(row["figure"], []).append(row)
    return {
        name: rows
        for name, rows in found.items()
        if any(row[side]["value"] for row in rows for side in ("domain", "general"))
    }


def _drawing(place: int, name: str, document: Json) -> Markup:
    rows = [
        (own["name"], row["ratio"])
        for own in domain_answers.ordered(document)
        if (row := domain_answers.penalty_of(document, own["name"], name)) is not None
    ]
    return row_charts.points(
        f"penalty-{place}", f"{plain_name(name)}: domain over general text", rows, 1.0
    )
