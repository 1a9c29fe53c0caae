"""One figure over another of independent documents, from values and intervals alone."""

from __future__ import annotations

import math
from typing import Any

from auditor.figures.values import Value, undefined

Json = dict[str, Any]
NO_BASE = "the figure it is divided by is 0"
UNBOUNDED = "no upper end: the figure it is divided by may be 0"


def ratio(ours: Json, theirs: Json) -> Value:
    """Return ``ours`` divided by ``theirs``, figures that are at least 0, as `audit.json` has them.

    The interval is recovered from theirs by the method of variance estimates recovery for ratios
    (MOVER-R: Donner & Zou 2012, Statistical Methods in Medical Research 21:347-359, section 2),
    which keeps intervals as lopsided as theirs are. For symmetric ones it is Fieller's (1954).
    """
    for figure in (ours, theirs):
        if figure["value"] is None:
            return undefined(figure.get("note") or "undefined on one side")
    top, base = float(ours["value"]), float(theirs["value"])
    if base == 0:
        return undefined(NO_BASE)
    if None in (ours["low"], ours["high"], theirs["low"], theirs["high"]):
        return Value(top / base, None, None, None, None, "one side has no interval")
    low = _end(top, base, ours["low"], theirs["high"])
    high = _end(top, base, ours["high"], theirs["low"])
    return Value(top / base, low, high, None, None, UNBOUNDED if high is None else None)


def _end(top: float, base: float, own: float, other: float) -> float | None:
    """Return an end of the interval, from an end of each side's; ``None`` where it has no bound.

    It is a root of a·r² - 2·top·base·r + c, whose discriminant is never below 0: a is at most base²
    and c at most top². The lower end is written so that a may be 0.
    """
    a, c = other * (2 * base - other), own * (2 * top - own)
    root = math.sqrt(max(0.0, (top * base) ** 2 - a * c))
    if own <= top:
        below = top * base + root
        return c / below if below else 0.0
    return (top * base + root) / a if a > 0 else None
