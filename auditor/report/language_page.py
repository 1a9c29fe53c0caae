"""The page of a comparison of languages: one file of HTML without scripts or outside parts."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from typing import Any

from jinja2 import Environment
from markupsafe import Markup

from auditor.report import answers, language_answers, language_charts, repeating, row_charts
from auditor.report.formatting import figure, number, proportion
from auditor.report.page import own_environment, script_of
from auditor.report.tables import character_name

Json = Mapping[str, Any]

_DRAWN, _TABLED, _SCRIPTS = 60, 1000, 6


def render(document: Json) -> str:
    """Return the page for a `languages.json` document; the same input gives the same text."""
    vocabularies = [
        {**own, "drawing": _drawing(number, own), "scatter_drawing": _scatter(number, own)}
        for number, own in enumerate(document["vocabularies"])
    ]
    return (
        _environment()
        .get_template("languages.html.jinja")
        .render(
            document=document,
            vocabularies=vocabularies,
            label_answers=language_answers.label_answers(document),
            command=repeating.languages_command(document),
            **script_of("page.js"),
            command_notes=repeating.command_notes(document),
            blocks=repeating.blocks(document),
            tabled=_TABLED,
            scripts_shown=_SCRIPTS,
        )
    )


@cache
def _environment() -> Environment:
    made = own_environment()
    made.filters |= {
        "proportion": proportion,
        "figure": figure,
        "number": number,
        "character_name": character_name,
    }
    made.globals |= {
        "told": language_answers.told,
        "cost_is_not_quality": language_answers.COST_IS_NOT_QUALITY,
        "same_script": language_answers.SAME_SCRIPT,
        "no_guessing": language_answers.NO_GUESSING,
        "weaker": language_answers.WEAKER,
        "languages_differ": answers.LANGUAGES_DIFFER,
        "how_to_read": answers.HOW_TO_READ,
    }
    return made


def _drawing(number: int, vocabulary: Json) -> Markup:
    paired = vocabulary["ranked_by"] == "premium"
    rows = [(own["language"], _ranked(own, paired=paired)) for own in vocabulary["languages"]]
    drawn = rows if len(rows) <= _DRAWN else [*rows[: _DRAWN - 15], *rows[-15:]]
    what = "Premium over the reference" if paired else "Tokens per grapheme"
    return row_charts.points(
        f"cost-{number}", f"{what}, by language", drawn, 1.0 if paired else None
    )


def _ranked(language: Json, *, paired: bool) -> Json:
    figures, premium = language["figures"], language["premium"]
    found: Json = premium["ratio_of_totals"] if paired else figures["tokens_per_grapheme"]
    return found


def _scatter(number: int, vocabulary: Json) -> Markup | None:
    found = vocabulary["scatter"]
    if found is None or not found["pairs"]:
        return None
    return language_charts.scatter(f"pairs-{number}", found)
