"""A drawing of pairs of records, for a comparison of languages."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from markupsafe import Markup

from auditor.report.bins import round_step
from auditor.report.charts import tag
from auditor.report.formatting import clean, count

Json = Mapping[str, Any]

_SIDE, _MARGIN = 300, 44


def scatter(key: str, found: Json) -> Markup:
    """Draw pairs of records: tokens of the reference across, of the language upwards."""
    pairs = found["pairs"]
    most = max((max(pair) for pair in pairs), default=1) or 1
    scale = (_SIDE - _MARGIN - 8) / most
    base = _SIDE - _MARGIN

    def at(across: float, up: float) -> dict[str, str]:
        return {"cx": f"{_MARGIN + across * scale:.1f}", "cy": f"{base - up * scale:.1f}"}

    corner = at(most, most)
    parts = [
        tag("line", x1=_MARGIN, y1=base, x2=corner["cx"], y2=corner["cy"], class_="limit"),
        tag("line", x1=_MARGIN, y1=base, x2=_SIDE, y2=base, class_="axis"),
        tag("line", x1=_MARGIN, y1=base, x2=_MARGIN, y2=0, class_="axis"),
    ]
    step = max(1, int(round_step(most / 4)))
    for tick in range(step, most + 1, step):
        place = at(tick, tick)
        parts.append(
            tag("text", count(tick), x=place["cx"], y=base + 16, text_anchor="middle")
            + tag("text", count(tick), x=_MARGIN - 5, y=place["cy"], text_anchor="end", dy=4)
        )
    parts += [tag("circle", r=2.5, **at(theirs, ours), class_="pair") for ours, theirs in pairs]
    language, reference = clean(found["language"], 60), clean(found["reference"], 60)
    title = f"Tokens of {language} against those of {reference}, one dot a content"
    told = "Dots above the line cost more than the reference."
    return tag(
        "svg",
        tag("title", title, id=f"{key}-title"),
        tag("desc", told, id=f"{key}-words"),
        *parts,
        role="img", aria_labelledby=f"{key}-title {key}-words", viewBox=f"0 0 {_SIDE} {_SIDE}",
        width=_SIDE + 60, class_="scatter",
    )  # fmt: skip
