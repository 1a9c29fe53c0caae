"""Drawings of one row a thing: points with intervals, bars, and use by rank."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import Any

from markupsafe import Markup

from auditor.report.charts import SHAPES, Plot, drawing, label_width, shortened, tag
from auditor.report.formatting import clean, count

Json = Mapping[str, Any]

_ROW, _TOP, _RIGHT = 19, 24, 0.84
_LABEL_CELLS = 22
_CURVE_TOP = 16
_CURVE_HEIGHT, _CURVE_LEFT, _CURVE_RIGHT = 150, 2.0, 98.0


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
    shown = count(int(tick)) if tick >= 1000 else f"{tick:g}"
    text = tag("text", shown, x=x, y=13, text_anchor="middle")
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


def bars(key: str, title: str, rows: Sequence[tuple[str, int, str]], unit: str) -> Markup:
    """Draw a bar for each (name, number, what is hatched of it or ""), in their order."""
    names = [clean(name, 60) or "(empty)" for name, _, _ in rows]
    plot = Plot(label_width(names), max((number for _, number, _ in rows), default=1) or 1)
    bottom = _TOP + len(rows) * _ROW
    parts = [_grid(tick, plot, bottom) for tick in plot.ticks()]
    for place, (name, (_, number, told)) in enumerate(zip(names, rows, strict=True)):
        y = _TOP + place * _ROW
        said = f"{name}: {count(number)} {unit}" + (f", {told}" if told else "")
        width = f"{float(plot.place(number)[:-1]) - 100 * plot.left:.2f}%"
        parts.append(
            tag("text", shortened(name, _LABEL_CELLS), x=0, y=y + 13, class_="name")
            + tag(
                "rect", tag("title", said), x=plot.place(0), y=y + 3, width=width,
                height=_ROW - 6, class_="bar",
            )
            + tag("text", count(number), x=f"{100 * (_RIGHT + 0.04):.2f}%", y=y + 13)
        )  # fmt: skip
    told = f"Bars give {unit}; the table below holds the numbers."
    return drawing(key, bottom + 6, title, told, *parts)


def by_rank(key: str, title: str, ranks: Sequence[tuple[int, int]]) -> Markup:
    """Draw occurrences by rank, both by powers of ten; ``ranks`` holds (rank, occurrences)."""
    said = [f"rank {count(rank)}: {count(times)} occurrences" for rank, times in ranks]
    told = (
        f"The most frequent entry occurs {count(ranks[0][1])} times, the one at rank"
        f" {count(ranks[-1][0])} {count(ranks[-1][1])} times."
    )
    return _curve(key, title, told, ranks, said)


def growing(key: str, title: str, points: Sequence[tuple[int, float]]) -> Markup:
    """Draw distinct kinds by occurrences read, both by powers of ten, from (read, distinct)."""
    said = [f"{count(m)} read: {count(round(v))} distinct" for m, v in points]
    return _curve(key, title, f"In all {said[-1]}.", points, said)


def _curve(
    key: str,
    title: str,
    told: str,
    points: Sequence[tuple[int, float]],
    said: Sequence[str],
) -> Markup:
    """Draw points of at least 1 joined by lines, each of which says what it begins with."""
    across = max(1, math.ceil(math.log10(max(points[-1][0], 2))))
    upwards = max(1, math.ceil(math.log10(max(*(v for _, v in points), 2))))

    def x(rank: float) -> float:
        return _CURVE_LEFT + math.log10(rank) / across * (_CURVE_RIGHT - _CURVE_LEFT)

    def y(times: float) -> float:
        return _CURVE_TOP + (1 - math.log10(times) / upwards) * (_CURVE_HEIGHT - _CURVE_TOP)

    parts = [
        *(_power(x(10**n), n, upright=True) for n in range(across + 1)),
        *(_power(y(10**n), n, upright=False) for n in range(upwards + 1)),
    ]
    for words, ((read, value), (after, other)) in zip(said[:-1], pairwise(points), strict=True):
        parts.append(
            tag(
                "line", tag("title", words), x1=f"{x(read):.2f}%", x2=f"{x(after):.2f}%",
                y1=f"{y(value):.1f}", y2=f"{y(other):.1f}", class_="interval",
            )
        )  # fmt: skip
    return drawing(key, _CURVE_HEIGHT + 22, title, told, *parts)


def _power(place: float, power: int, *, upright: bool) -> Markup:
    name = count(10**power) if power < 6 else f"10^{power}"
    if upright:
        x = f"{place:.2f}%"
        anchor = "start" if place < 5 else "end" if place > 90 else "middle"
        return tag("line", x1=x, x2=x, y1=_CURVE_TOP, y2=_CURVE_HEIGHT, class_="grid") + tag(
            "text", name, x=x, y=_CURVE_HEIGHT + 16, text_anchor=anchor
        )
    line = tag(
        "line", x1=f"{_CURVE_LEFT}%", x2=f"{_CURVE_RIGHT}%", y1=f"{place:.1f}",
        y2=f"{place:.1f}", class_="grid",
    )  # fmt: skip
    return line + tag("text", name, x=f"{_CURVE_RIGHT}%", y=f"{place - 3:.1f}", text_anchor="end")
