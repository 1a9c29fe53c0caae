"""The page of a comparison of two audits: one file of HTML without scripts or outside parts."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import cache
from typing import Any

from jinja2 import Environment
from markupsafe import Markup

from auditor.report import answers, comparison_answers, comparison_charts, formatting, repeating
from auditor.report.comparison_answers import NOT_SHOWN, of_pair
from auditor.report.comparison_charts import Point
from auditor.report.formatting import SHARES, clean
from auditor.report.page import own_environment
from auditor.report.slices import RANKED_BY
from auditor.tallies.groups import ALL

Json = Mapping[str, Any]

_DRAWN, _TABLED = 60, 300
_SLICE_COLUMNS = (
    "fertility", "unknown_words", "byte_spelled_characters", "dropped_characters",
    "truncated_documents", "lossless_documents",
)  # fmt: skip


def render(document: Json) -> str:
    """Return the page for a `comparison.json` document; the same input gives the same text."""
    return (
        _environment()
        .get_template("comparison.html.jinja")
        .render(
            document=document,
            pairs=[_pair(number, document, own) for number, own in enumerate(document["pairs"])],
            command=repeating.comparison_command(document),
            blocks=repeating.comparison_blocks(document),
            tabled=_TABLED,
            any_words=any(_words(own) for own in document["pairs"]),
        )
    )


@cache
def _environment() -> Environment:
    made = own_environment()
    made.filters |= {
        "difference": lambda own, name: formatting.difference(name, own),
        "difference_interval": lambda own, name: formatting.difference_interval(name, own) or "",
        "p": p_value,
        "rate": lambda number: f"{number:,.1f}",
        "change": lambda number: f"{number:+,.1f}".replace("-", "−"),
    }
    made.globals |= {
        "told": comparison_answers,
        "how_to_read_differences": comparison_answers.HOW_TO_READ,
        "excerpts": answers.EXCERPTS,
        "languages_differ": answers.LANGUAGES_DIFFER,
    }
    return made


def p_value(number: float | None) -> str:
    """Return a p-value with two digits, or the bound it lies below."""
    if number is None:
        return ""
    return "<0.0001" if number < 0.0001 else f"{number:.2g}"


def _words(pair: Json) -> bool:
    return any(pair["words"][group] for group in ("appeared", "vanished", "moved"))


def _pair(number: int, document: Json, pair: Json) -> dict[str, Any]:
    """Return everything the template shows of one pair of vocabularies."""
    found = of_pair(document, pair)
    whole = [own for own in found if own["slice"] == ALL]
    by_slice: dict[str, dict[str, Json]] = {}
    for own in found:
        by_slice.setdefault(own["slice"], {})[own["figure"]] = own
    by_slice.pop(ALL, None)
    ranked = sorted(by_slice, key=lambda key: (_farthest(by_slice[key].get(RANKED_BY)), key))
    moved = {name for own in by_slice.values() for name in own if own[name]["difference"]}
    columns = [name for name in _SLICE_COLUMNS if name in moved or name == RANKED_BY]
    return {
        "pair": pair,
        "whole": whole,
        "surest": comparison_answers.surest(found)[:12],
        "slices": [(key, by_slice[key]) for key in ranked[:_TABLED]],
        "slices_left": max(0, len(ranked) - _TABLED),
        "columns": columns,
        "lengths": comparison_answers.lengths_of(document, pair),
        "drawings": _drawings(number, whole),
        "by_slice": _by_slice(number, [by_slice[key].get(RANKED_BY) for key in ranked]),
    }


def _farthest(own: Json | None) -> tuple[bool, float]:
    if own is None or own["difference"] is None:
        return True, 0.0
    return False, -abs(own["difference"])


def _drawings(number: int, whole: Sequence[Json]) -> list[tuple[str, Markup]]:
    """Return the drawings of the whole corpus: shares in points, others in percent of before."""
    shown = [own for own in whole if own["difference"] is not None and own["low"] is not None]
    shares = [_point(own, own["figure"], 100) for own in shown if own["figure"] in SHARES]
    ratios = [
        _point(own, own["figure"], 100 / own["before"]["value"], relative=True)
        for own in shown
        if own["figure"] not in SHARES and own["before"]["value"]
    ]
    found = (
        ("ratios", "Ratios: differences in percent of the value before", ratios),
        ("shares", "Shares: differences in percentage points", shares),
    )
    return [
        (caption, comparison_charts.points(f"{key}-{number}", caption, rows))
        for key, caption, rows in found
        if rows
    ]


def _by_slice(number: int, ranked: Sequence[Json | None]) -> Markup | None:
    held = [own for own in ranked if own is not None and own["difference"] is not None]
    rows = [_point(own, own["slice"], 1) for own in held[:_DRAWN]]
    if not rows:
        return None
    title = "Difference of tokens per word by slice, the largest first"
    return comparison_charts.points(f"slices-{number}", title, rows)


def _point(own: Json, label: str, scale: float, *, relative: bool = False) -> Point:
    low, high = (None if own[end] is None else scale * own[end] for end in ("low", "high"))
    moved = scale * own["difference"]
    text = (
        f"{moved:+.1f}%".replace("-", "−")
        if relative
        else formatting.difference(own["figure"], own)
    )
    shown = own["verdict"] not in (None, NOT_SHOWN)
    return Point(clean(label, 60), moved, low, high, text, shown)
