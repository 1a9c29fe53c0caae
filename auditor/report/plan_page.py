"""The page of a length plan: one file of HTML, its slider the only script."""

from __future__ import annotations

import hashlib
from base64 import b64encode
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from typing import Any

import orjson
from jinja2 import Environment
from markupsafe import Markup

from auditor.report import answers, bins, charts, plan_answers, repeating
from auditor.report.formatting import proportion, times
from auditor.report.page import own_environment
from auditor.report.plan_answers import candidate

Json = Mapping[str, Any]

_SLICES_SHOWN = 200
CUT_NAMES = {
    "end": "the end",
    "start": "the start",
    "middle": "the middle, head and tail kept",
    "longest_first": "the longer text, token by token",
    "first_only": "the first text only",
    "second_only": "the second text only",
}
PACK_NAMES = {
    "best_fit": "least room left that fits",
    "worst_fit_3": "most room left, at most 3 together",
    "worst_fit_8": "most room left, at most 8 together",
    "worst_fit": "most room left",
}


def render(plan: Json) -> str:
    """Return the page for a `plan.json` document; the same input gives the same text."""
    lengths, limit = plan["lengths"], plan["vocabulary"]["limit"]["value"]
    recommended = plan["recommended"]
    scale = _scale(plan)
    shown = {
        "name": plan["vocabulary"]["name"],
        "slices": {"all": {"lengths": lengths}},
        "limit": {"value": limit},
    }
    script = _script()
    named = [recommended[which] for which in ("cheaper", "safer") if recommended[which]]
    choices = sorted({recommended["length"], *(own["length"] for own in named)})
    return (
        _environment()
        .get_template("plan.html.jinja")
        .render(
            plan=plan,
            drawing=charts.lengths("lengths", shown, scale),
            script=Markup(script),  # noqa: S704 - a file of this package
            script_hash=b64encode(hashlib.sha256(script.encode()).digest()).decode(),
            data=Markup(_data(plan, scale)),  # noqa: S704 - numbers only
            chosen=candidate(plan, recommended["length"]),
            choices=[candidate(plan, length) for length in choices],
            slices=_slices(plan),
            slices_left=max(0, len(plan["candidates"][0]["slices"]) - _SLICES_SHOWN),
            command=repeating.plan_command(plan),
            command_notes=repeating.command_notes(plan),
            facts=repeating.plan_facts(plan),
        )
    )


@cache
def _environment() -> Environment:
    made = own_environment()
    made.filters |= {"proportion": proportion, "times": times, "flops": flops}
    made.globals |= {
        "cut_names": CUT_NAMES,
        "pack_names": PACK_NAMES,
        "padding_names": plan_answers.PADDINGS,
        "no_model": plan_answers.NO_MODEL,
        "cuts": plan_answers.cuts,
        "languages_differ": answers.LANGUAGES_DIFFER,
        "cut_is_lost": answers.CUT_IS_LOST,
        "how_to_read": answers.HOW_TO_READ,
    }
    return made


def flops(number: float) -> str:
    """Return a number of operations with its power of ten in words a reader knows."""
    for unit, scale in (("P", 1e15), ("T", 1e12), ("G", 1e9), ("M", 1e6)):
        if number >= scale:
            return f"{number / scale:,.3g} {unit}FLOP"
    return f"{number:,.0f} FLOP"


def _scale(plan: Json) -> bins.Scale:
    lengths = plan["lengths"]
    longest = max(lengths["maximum"], plan["recommended"]["length"])
    return bins.scale_for(lengths["minimum"], longest)


def _slices(plan: Json) -> list[str]:
    """Return the slices that the recommended length cuts most, most first."""
    held = candidate(plan, plan["recommended"]["length"])["slices"]
    ranked = sorted(held, key=lambda key: (-(held[key]["truncated_documents"]["value"] or 0), key))
    return ranked[:_SLICES_SHOWN]


def _data(plan: Json, scale: bins.Scale) -> str:
    """Return what the slider computes from, as JSON: documents by length, and what one costs."""
    histogram = plan["lengths"]["histogram"]
    model = plan["cost_model"]
    held = {
        "lengths": [length for length, _ in histogram],
        "documents": [documents for _, documents in histogram],
        "overhead": plan["overhead"],
        "recommended": plan["recommended"]["length"],
        "edges": [scale.edges[0], scale.edges[-1]],
        "doubling": scale.doubling,
        "model": model,
    }
    return orjson.dumps(held).decode().replace("<", "\\u003c")


def _script() -> str:
    return (files("auditor.report") / "templates" / "plan.js").read_text(encoding="utf-8")
