"""Drawings for a comparison of languages: cost as points with intervals, and pairs of records."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from markupsafe import Markup

from auditor.report.bins import round_step
from auditor.report.charts import SHAPES, Plot, drawing, label_width, shortened, tag
from auditor.report.formatting import clean, count

Json = Mapping[str, Any]

_ROW, _TOP, _RIGHT = 19, 24, 0.84
_LABEL_CELLS = 22
_SIDE, _MARGIN = 300, 44


def points(
    key: str, title: str, rows: Sequence[tuple[str, Json]], reference: float | None
) -> Markup:
    """Draw a figure of each row as a point on its interval; ``reference`` is a line across."""
    names = [clean(name, 60) or "(empty)" for name, _ in rows]
    ends = [figure["high"] or figure["value"] or 0 for _, figure in rows]
    plot = Plot(label_width(names), max([*ends, reference or 0]) or 1.0)
    bottom = _TOP + len(rows) * _ROW
    parts = [_grid(tick, plot, bottom) for tick in plot.ticks()]
    if reference is not None:
        x = plot.place(reference)
        parts.append(tag("line", x1=x, x2=x, y1=_TOP - 5, y2=bottom, class_="limit"))
    for place, (name, (_, figure)) in enumerate(zip(names, rows, strict=True)):
        parts.append(_row(_TOP + place * _ROW + _ROW // 2, name, figure, plot))
    told = "A dot is the value, the line its 95% interval; the table below holds the numbers."
    return drawing(key, bottom + 6, title, told, *parts)


def _grid(tick: float, plot: Plot, bottom: int) -> Markup:
    x = plot.place(tick)
    text = tag("text", f"{tick:g}", x=x, y=13, text_anchor="middle")
    return tag("line", x1=x, x2=x, y1=_TOP - 5, y2=bottom, class_="grid") + text


def _row(y: int, name: str, figure: Json, plot: Plot) -> Markup:
    label = tag(
        "text", tag("title", name), shortened(name, _LABEL_CELLS), x=0, y=y + 4, class_="name"
    )
    if figure["value"] is None:
        return label
    value = tag("text", f"{figure['value']:.3g}", x=f"{100 * (_RIGHT + 0.04):.2f}%", y=y + 4)
    dot = tag("svg", tag("path", d=SHAPES[0][1]), x=plot.place(figure["value"]), y=y, class_="dot")
    line = Markup("")
    if figure["low"] is not None and figure["high"] is not None:
        x1, x2 = plot.place(figure["low"]), plot.place(figure["high"])
        line = tag("line", x1=x1, x2=x2, y1=y, y2=y, class_="interval")
    return label + line + dot + value


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
