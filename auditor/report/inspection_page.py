"""The page of an inspection: one file of HTML whose only script sorts tables."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from typing import Any

from jinja2 import Environment

from auditor.report import inspection_answers, repeating, row_charts
from auditor.report.formatting import clean, proportion
from auditor.report.page import own_environment, script_of

Json = Mapping[str, Any]

_SCRIPTS = 20


def render(document: Json) -> str:
    """Return the page for an `inspection.json` document; the same input gives the same text."""
    return (
        _environment()
        .get_template("inspection.html.jinja")
        .render(
            document=document,
            vocabularies=[
                {**own, "drawings": _drawings(number, own)}
                for number, own in enumerate(document["vocabularies"])
            ],
            command=repeating.inspect_command(document),
            blocks=repeating.blocks({**document, "corpus": None}),
            not_a_fault=inspection_answers.NOT_A_FAULT,
            **script_of("page.js"),
        )
    )


@cache
def _environment() -> Environment:
    made = own_environment()
    made.filters |= {"proportion": proportion}
    return made


def _drawings(number: int, vocabulary: Json) -> list[tuple[str, Any]]:
    name = clean(vocabulary["name"], 60)
    kinds = sorted(vocabulary["kinds"].items(), key=lambda item: -item[1])
    scripts = list(vocabulary["scripts"].items())[:_SCRIPTS]
    return [
        (
            title,
            row_charts.bars(
                f"{key}-{number}", f"{title}, {name}", [(n, c, "") for n, c in rows if c], "entries"
            ),
        )
        for key, title, rows in (
            ("kinds", "Entries by kind", kinds),
            ("scripts", "Entries by script (an entry may hold several)", scripts),
        )
    ]
