"""The summary of a comparison that a terminal shows."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

from auditor.comparing.figures import FIRST
from auditor.report import answers, comparison_answers
from auditor.report.comparison_answers import lengths_of, of_pair
from auditor.report.formatting import clean, count, difference, difference_interval, value
from auditor.report.terminal import line, rendered, written
from auditor.tallies.groups import ALL

Json = Mapping[str, Any]

_MOVED, _WORDS = 10, 5
_MAIN = (
    "fertility", "continued_words", "bytes_per_token", "relative_tokens", "unknown_words",
    "byte_spelled_characters", "dropped_characters", "truncated_documents", "lossless_documents",
)  # fmt: skip


def summary(document: Json, *, files: Sequence[Path], width: int = 80, colour: bool) -> str:
    """Return the comparison as text for a terminal ``width`` cells wide, with colours if asked."""
    return rendered(_parts(document, files), width=width, colour=colour)


def _parts(document: Json, files: Sequence[Path]) -> Iterable[RenderableType]:
    yield Text("".join(comparison_answers.subject(document)), "bold")
    yield Text(comparison_answers.HOW_TO_READ, "dim")
    yield Text()
    for sentence in (*comparison_answers.counted(document), *comparison_answers.settings(document)):
        yield line(sentence)
    for note in comparison_answers.notes(document):
        yield line((note,))
    for pair in document["pairs"]:
        yield from _pair(document, pair)
    yield Text()
    yield Text(comparison_answers.MANY, "italic")
    yield Text(comparison_answers.METHOD, "italic")
    if any(_shown(pair) for pair in document["pairs"]):
        yield Text(answers.EXCERPTS, "italic")
    yield from written(files)


def _pair(document: Json, pair: Json) -> Iterable[RenderableType]:
    yield Text()
    yield Text("".join(comparison_answers.vocabularies(pair)), "bold")
    found = of_pair(document, pair)
    whole = (own for own in found if own["slice"] == ALL and own["figure"] in _MAIN)
    yield _table([own for own in whole if _telling(own)])
    sliced = [own for own in comparison_answers.surest(found) if own["slice"] != ALL]
    if sliced:
        yield Text()
        yield Text("Surest differences of slices (* still differs, all comparisons reckoned with)")
    for own in sliced[:_MOVED]:
        yield line(comparison_answers.moved(own))
    if len(sliced) > _MOVED:
        yield line((f"{count(len(sliced) - _MOVED)} more in differences.csv.",))
    for sentence in comparison_answers.only_one(pair):
        yield line(sentence)
    yield Text()
    for own in lengths_of(document, pair):
        if own["slice"] == ALL:
            yield line(comparison_answers.distance(own))
            for name in ("p50", "p95", "p99"):
                yield line((f"{name}: {comparison_answers.shift(own['quantiles'][name])}.",))
    yield from _movements(pair)


def _telling(own: Json) -> bool:
    """Whether a figure says something: not 0 or undefined on both sides, nor 1 by definition."""
    if own["note"] == FIRST:
        return False
    return own["verdict"] is not None or any(own[side]["value"] for side in ("before", "after"))


def _table(found: Sequence[Json]) -> Table:
    table = Table(box=None, padding=(0, 2, 0, 0), pad_edge=False, header_style="dim")
    table.add_column("figure, whole corpus", overflow="fold")
    for title in ("before", "after"):
        table.add_column(title, justify="right", no_wrap=True)
    table.add_column("difference, shares in points", overflow="fold")
    table.add_column("", overflow="fold")
    for own in found:
        name = own["figure"]
        ends = difference_interval(name, own)
        moved = f"{difference(name, own)}" + (f"\n{ends}" if ends else "")
        sides = (value(name, own[side]) for side in ("before", "after"))
        sign = "*" if own["shown_after_adjustment"] else ""
        told = f"{comparison_answers.effect(own)}{sign}"
        table.add_row(name.replace("_", " "), *sides, moved, told)
    return table


_GROUPS = {"appeared": "appeared", "vanished": "vanished", "moved": "moved most"}


def _named(own: Json, label: str) -> str:
    """Return a word, or a character with its code point, which a mark alone would not show."""
    if label == "word":
        return clean(own[label], 30)
    mark = own["name"].startswith("COMBINING")
    return f"{'◌' if mark else ''}{clean(own[label], 30)} {own['code_point']}"


def _shown(pair: Json) -> bool:
    return any(pair["words"][group] for group in ("appeared", "vanished", "moved"))


def _movements(pair: Json) -> Iterable[RenderableType]:
    for kind, label in (("words", "word"), ("characters", "character")):
        held = pair[kind]
        for group in ("appeared", "vanished", "moved"):
            if held[group]:
                names = ", ".join(_named(own, label) for own in held[group][:_WORDS])
                total = held["counts"][group]
                more = f" and {count(total - _WORDS)} more" if total > _WORDS else ""
                yield line((f"{kind.capitalize()} that {_GROUPS[group]}: {names}{more}.",))
        if held["note"]:
            yield line((f"{kind.capitalize()}: {clean(held['note'])}.",))
