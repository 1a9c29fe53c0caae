"""Two static drawings for the page: the distribution of lengths, and cost by slice.

Positions are shares of the width, so that a drawing fills any window while its text keeps its
size; colours come from the page's style, so that it follows light and dark.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from markupsafe import Markup, escape
from rich.cells import cell_len, set_cell_size

from auditor.report.bins import Bar, Scale, round_step
from auditor.report.formatting import clean, count, plural, value
from auditor.report.slices import RANKED_BY, whole

Json = Mapping[str, Any]

_LEFT, _RIGHT = 0.02, 0.98
_MARKS_HEIGHT, _BARS_HEIGHT = 62, 130
_BASE = _MARKS_HEIGHT + _BARS_HEIGHT
_LEAST_HEIGHT = 1.5
_ROW, _GAP, _TOP = 17, 5, 24
_PLOT_RIGHT = 0.86
# The style gives a drawing of slices this width at least, in pixels, and a character so many.
_NARROWEST, _CELL = 480, 7.2
_LABEL_CELLS = 22
SHAPES = (
    ("circle", "M-4 0a4 4 0 1 0 8 0a4 4 0 1 0 -8 0z"),
    ("square", "M-3.5 -3.5h7v7h-7z"),
    ("triangle", "M0 -4.5L4.5 4H-4.5z"),
    ("diamond", "M0 -5L5 0 0 5-5 0z"),
)


def tag(element: str, *content: object, **attributes: object) -> Markup:
    """Return one element; everything in it that is not markup is escaped."""
    pairs = (
        Markup(' {}="{}"').format(name.rstrip("_").replace("_", "-"), text)
        for name, text in attributes.items()
    )
    opened = Markup("<{}{}>").format(element, Markup("").join(pairs))
    return (
        opened + Markup("").join(escape(part) for part in content) + Markup("</{}>").format(element)
    )


def _percent(share: float) -> str:
    return f"{100 * share:.2f}%"


def drawing(key: str, height: int, title: str, description: str, *parts: Markup) -> Markup:
    """Return a whole drawing with the words that a screen reader says in its place."""
    return tag(
        "svg",
        tag("title", title, id=f"{key}-title"),
        tag("desc", description, id=f"{key}-words"),
        *parts,
        role="img", aria_labelledby=f"{key}-title {key}-words", height=height, width="100%",
    )  # fmt: skip


def lengths(key: str, vocabulary: Json, scale: Scale) -> Markup:
    """Draw how many documents have which length, against the limit."""
    found, limit = whole(vocabulary)["lengths"], vocabulary["limit"]["value"]
    bars = scale.bars(found["histogram"], limit)
    tallest = max(bar.within + bar.beyond for bar in bars)
    marks = {name: found["quantiles"][name]["value"] for name in ("p50", "p95", "p99")}
    shown = {**marks, "limit": limit} if limit and limit <= scale.edges[-1] else marks
    words = ", ".join(f"{name} {count(length)}" for name, length in shown.items())
    parts = [
        _hatching(key),
        *(_bar(key, bar, scale, tallest) for bar in bars),
        _horizontal(_BASE),
        *(_tick(scale.position(tick), count(tick)) for tick in scale.ticks()),
        *(_mark(row, name, length, scale) for row, (name, length) in enumerate(shown.items())),
    ]
    name = clean(vocabulary["name"], 60)
    title = f"Documents by length in positions, {name}"
    told = f"{words}; the tallest bar holds {plural(tallest, 'document')}."
    return drawing(key, _BASE + 22, title, told, *parts)


def _across(share: float) -> float:
    return _LEFT + share * (_RIGHT - _LEFT)


def _hatching(key: str) -> Markup:
    line = tag("path", d="M0 6L6 0M-1.5 1.5L1.5 -1.5M4.5 7.5L7.5 4.5", class_="hatch")
    pattern = tag(
        "pattern", line, id=f"{key}-hatch", width=6, height=6, patternUnits="userSpaceOnUse"
    )
    return tag("defs", pattern)


def _bar(key: str, bar: Bar, scale: Scale, tallest: int) -> Markup:
    left = _across(scale.position(bar.first - 1))
    width = max(_across(scale.position(bar.last)) - left - 0.0012, 0.001)
    place = {"x": _percent(left), "width": _percent(width)}
    heights = [
        max(_BARS_HEIGHT * part / tallest, _LEAST_HEIGHT) if part else 0.0
        for part in (bar.within, bar.beyond)
    ]
    within, beyond = heights
    drawn = []
    if within:
        top = f"{_BASE - within:.1f}"
        drawn.append(tag("rect", **place, y=top, height=f"{within:.1f}", class_="bar"))
    if beyond:
        top, fill = f"{_BASE - within - beyond:.1f}", f"url(#{key}-hatch)"
        drawn.append(
            tag("rect", **place, y=top, height=f"{beyond:.1f}", fill=fill, class_="beyond")
        )
    return Markup("").join(drawn)


def _horizontal(y: int) -> Markup:
    return tag("line", x1=_percent(_LEFT), x2=_percent(_RIGHT), y1=y, y2=y, class_="axis")


def _tick(share: float, text: str) -> Markup:
    x = _percent(_across(share))
    anchor = "start" if share < 0.03 else "end" if share > 0.97 else "middle"
    line = tag("line", x1=x, x2=x, y1=_BASE, y2=_BASE + 4, class_="axis")
    return line + tag("text", text, x=x, y=_BASE + 17, text_anchor=anchor)


def _mark(row: int, name: str, length: int, scale: Scale) -> Markup:
    share = scale.position(length)
    x, y = _percent(_across(share)), 11 + 14 * row
    kind = "limit" if name == "limit" else "mark"
    right = share > 0.7
    label = tag(
        "text", f"{name} {count(length)}", x=x, y=y, dx=-4 if right else 4,
        text_anchor="end" if right else "start", class_=kind,
    )  # fmt: skip
    return tag("line", x1=x, x2=x, y1=y - 9, y2=_BASE, class_=kind) + label


def cost(key: str, field: str, vocabularies: Sequence[Json], keys: Sequence[str]) -> Markup:
    """Draw tokens per word and its interval for the slices ``keys``, in their order."""
    figures = {
        name: [own["slices"][name]["figures"][RANKED_BY] for own in vocabularies] for name in keys
    }
    ends = (figure["high"] or figure["value"] for row in figures.values() for figure in row)
    plot = Plot(label_width(keys), max((end for end in ends if end), default=1.0))
    height = len(vocabularies) * _ROW + _GAP
    bottom = _TOP + len(keys) * height
    parts = [_grid(tick, plot, bottom) for tick in plot.ticks()]
    for place, name in enumerate(keys):
        parts += _slice(_TOP + place * height, name, figures[name], plot)
    title = f"Tokens per word of {plural(len(keys), 'slice')} by {clean(field, 60)}"
    told = "A dot is the value, the line its 95% interval; the table below holds the numbers."
    return drawing(key, bottom + 6, title, told, *parts)


@dataclass(frozen=True, slots=True)
class Plot:
    """The part of a drawing that holds the dots: its left edge, and the value at its right one."""

    left: float
    reach: float

    def place(self, number: float) -> str:
        """Return where ``number`` stands, from 0 at the left edge."""
        return _percent(self.left + max(0.0, number) / self.reach * (_PLOT_RIGHT - self.left))

    def ticks(self) -> list[float]:
        """Return round values from 0 to the right edge."""
        step = round_step(self.reach / 6)
        return [step * number for number in range(int(self.reach / step) + 1)]


def label_width(keys: Sequence[str]) -> float:
    """Return the share of the narrowest drawing that the longest label takes."""
    cells = max((cell_len(clean(key, 60)) for key in keys), default=0)
    return (min(cells, _LABEL_CELLS) * _CELL + 2 * _CELL) / _NARROWEST


def _grid(tick: float, plot: Plot, bottom: int) -> Markup:
    x = plot.place(tick)
    text = tag("text", f"{tick:g}", x=x, y=13, text_anchor="middle")
    return tag("line", x1=x, x2=x, y1=_TOP - 5, y2=bottom, class_="grid") + text


def _slice(top: int, name: str, figures: Sequence[Json], plot: Plot) -> list[Markup]:
    label = tag(
        "text", tag("title", clean(name, 60)), shortened(clean(name, 60), _LABEL_CELLS),
        x=0, y=top + 13, class_="name",
    )  # fmt: skip
    rows = (
        _dot(number, top + number * _ROW + 9, figure, plot, several=len(figures) > 1)
        for number, figure in enumerate(figures)
    )
    return [label, *rows]


def _dot(number: int, y: int, figure: Json, plot: Plot, *, several: bool) -> Markup:
    text = f"{letter(number)} {value(RANKED_BY, figure)}" if several else value(RANKED_BY, figure)
    label = tag("text", text, x=_percent(_PLOT_RIGHT + 0.02), y=y + 4)
    if figure["value"] is None:
        return label
    shape = tag("path", d=SHAPES[number % len(SHAPES)][1])
    dot = tag("svg", shape, x=plot.place(figure["value"]), y=y, class_="dot")
    return _line(y, figure, plot) + dot + label


def _line(y: int, figure: Json, plot: Plot) -> Markup:
    if figure["low"] is None or figure["high"] is None:
        return Markup("")
    ends = (plot.place(figure[end]) for end in ("low", "high"))
    return tag("line", y1=y, y2=y, class_="interval", **dict(zip(("x1", "x2"), ends, strict=True)))


def letter(number: int) -> str:
    """Return the short name of the vocabulary at ``number`` in a drawing: A to Z, then A2."""
    turn, place = divmod(number, 26)
    return chr(ord("A") + place) + (str(turn + 1) if turn else "")


def shortened(text: str, cells: int) -> str:
    """Return ``text`` cut to a width of ``cells``, wide characters counted twice."""
    return text if cell_len(text) <= cells else set_cell_size(text, cells - 1).rstrip() + "…"
