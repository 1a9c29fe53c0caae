"""Drawing for a comparison: differences as points with intervals about a line at 0."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from markupsafe import Markup
from rich.cells import cell_len

from auditor.report.bins import round_step
from auditor.report.charts import SHAPES, drawing, shortened, tag

_ROW, _TOP, _RIGHT = 19, 24, 0.82
_NARROWEST, _CELL, _LABEL_CELLS = 480, 7.0, 30
_TICKS = 6


@dataclass(frozen=True, slots=True)
class Point:
    """One row: a label, the difference with its interval, its text, and whether it is shown."""

    label: str
    difference: float
    low: float | None
    high: float | None
    text: str
    shown: bool


@dataclass(frozen=True, slots=True)
class Axis:
    """Where differences stand: ``left`` is the share of the width that labels take."""

    left: float
    low: float
    high: float

    def place(self, number: float) -> str:
        """Return the place of ``number`` as a share of the width."""
        inside = min(max(number, self.low), self.high)
        share = (inside - self.low) / (self.high - self.low)
        return f"{100 * (self.left + share * (_RIGHT - self.left)):.2f}%"

    def ticks(self) -> list[float]:
        """Return round values from one end to the other, 0 among them."""
        step = round_step((self.high - self.low) / _TICKS)
        first, last = -int(-self.low / step + 1e-9), int(self.high / step + 1e-9)
        return [step * number for number in range(first, last + 1)]


def points(key: str, title: str, rows: Sequence[Point]) -> Markup:
    """Draw each row as a point on its interval; a filled point is a difference that is shown."""
    axis = _axis(rows)
    bottom = _TOP + len(rows) * _ROW
    zero = axis.place(0.0)
    parts = [_grid(tick, axis, bottom) for tick in axis.ticks()]
    parts.append(tag("line", x1=zero, x2=zero, y1=_TOP - 5, y2=bottom, class_="axis"))
    for place, row in enumerate(rows):
        parts.append(_row(_TOP + place * _ROW + _ROW // 2, row, axis))
    told = (
        "A dot is the difference, the line its 95% interval, a filled dot a difference that is"
        " shown; the table holds the numbers."
    )
    return drawing(key, bottom + 6, title, told, *parts)


def _axis(rows: Sequence[Point]) -> Axis:
    ends = [end for row in rows for end in (row.difference, row.low, row.high) if end is not None]
    low, high = min([0.0, *ends]), max([0.0, *ends])
    if low == high:
        low, high = -1.0, 1.0
    margin = 0.04 * (high - low)
    cells = max((cell_len(row.label) for row in rows), default=0)
    left = (min(cells, _LABEL_CELLS) * _CELL + 2 * _CELL) / _NARROWEST
    return Axis(left, low - margin, high + margin)


def _grid(tick: float, axis: Axis, bottom: int) -> Markup:
    x = axis.place(tick)
    text = tag("text", f"{tick:g}".replace("-", "−"), x=x, y=13, text_anchor="middle")
    return tag("line", x1=x, x2=x, y1=_TOP - 5, y2=bottom, class_="grid") + text


def _row(y: int, row: Point, axis: Axis) -> Markup:
    title, text = tag("title", row.label), shortened(row.label, _LABEL_CELLS)
    label = tag("text", title, text, x=0, y=y + 4, class_="name")
    number = tag("text", row.text, x=f"{100 * (_RIGHT + 0.02):.2f}%", y=y + 4)
    kind = "dot shown" if row.shown else "dot"
    dot = tag("svg", tag("path", d=SHAPES[0][1]), x=axis.place(row.difference), y=y, class_=kind)
    line = Markup("")
    if row.low is not None and row.high is not None:
        x1, x2 = axis.place(row.low), axis.place(row.high)
        line = tag("line", x1=x1, x2=x2, y1=y, y2=y, class_="interval")
    return label + line + dot + number
