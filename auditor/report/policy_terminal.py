"""What a terminal shows of a policy: the outcome, then each bound that does not hold."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

from auditor.report import policy_answers
from auditor.report.answers import Sentence
from auditor.report.formatting import plural

Json = Mapping[str, Any]

_HELD, _NOT_HELD = 5, 30
_STYLES = {"fail": "bold red", "undecided": "yellow", "pass": "green"}


def parts(policy: Json) -> Iterable[RenderableType]:
    """Return the outcome and the verdicts, as far as a terminal has room for them."""
    yield Text("".join(policy_answers.headline(policy)), "bold")
    several = policy_answers.several_vocabularies(policy)
    verdicts = policy_answers.ordered(policy)
    first = [own for own in verdicts if own["verdict"] != "pass"]
    held = [own for own in verdicts if own["verdict"] == "pass"]
    for group, most in ((first, _NOT_HELD), (held, _HELD)):
        for own in group[:most]:
            yield _line(policy_answers.told(own, several=several), own["verdict"])
        if len(group) > most:
            yield _line((f"{plural(len(group) - most, 'more bound')}: policy.json.",), "pass")
    for assumed in policy_answers.assumption(policy):
        yield Text(assumed, "dim")


def failures(policy: Json) -> Iterable[RenderableType]:
    """Return the outcome and the bounds that fail, alone."""
    yield Text("".join(policy_answers.headline(policy)), "bold")
    several = policy_answers.several_vocabularies(policy)
    for own in policy_answers.ordered(policy):
        if own["verdict"] == "fail":
            yield _line(policy_answers.told(own, several=several), own["verdict"])


def _line(sentence: Sentence, verdict: str) -> RenderableType:
    table = Table.grid(padding=(0, 1, 0, 0))
    table.add_column(width=1)
    table.add_column(overflow="fold")
    word, colon, rest = "".join(sentence).partition(":")
    table.add_row("·", Text.assemble((word, _STYLES[verdict] if colon else ""), colon, rest))
    return table
