"""How numbers and pieces of text are written for a person; nothing is computed here."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import regex

from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS
from auditor.report import tables

Json = Mapping[str, Any]

DASH = "–"
FIGURES = {figure.name: figure for figure in (*CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS)}
SHARES = frozenset(figure.name for figure in FIGURES.values() if figure.share) | {"used_entries"}
# The separators that `printable` leaves; they break a line in some terminals.
_LINE_BREAKS = regex.compile(r"[\p{Zl}\p{Zp}]")
_FEWEST, _MOST = 2, 6


def count(number: int | None) -> str:
    """Return a whole number with a comma at each thousand, a dash for ``None``."""
    return DASH if number is None else f"{number:,}"


def value(name: str, figure: Json) -> str:
    """Return the value of the figure called ``name``, a dash when it is undefined."""
    if figure["value"] is None:
        return DASH
    if isinstance(figure["value"], int):
        return count(figure["value"])
    return _number(figure["value"], _decimals(name, figure), share=name in SHARES)


def interval(name: str, figure: Json) -> str | None:
    """Return the two ends as ``low to high``; ``None`` where there is no interval."""
    if figure["low"] is None or figure["high"] is None:
        return None
    decimals, share = _decimals(name, figure), name in SHARES
    ends = (_number(figure[end], decimals, share=share) for end in ("low", "high"))
    return " to ".join(ends)


def ranged(name: str, figure: Json) -> str:
    """Return the value and, where there is one, its interval in brackets."""
    ends = interval(name, figure)
    return value(name, figure) + (f" ({ends})" if ends else "")


def ranged_or_why(name: str, figure: Json) -> str:
    """Return the value with its interval, or a dash with the reason why there is none."""
    if figure["value"] is None:
        return f"{DASH} ({figure['note']})"
    return ranged(name, figure)


def difference(name: str, found: Json) -> str:
    """Return a difference with its sign, shares in percentage points; a dash when undefined.

    ``name`` is a figure's, or ``length`` for quantiles, which are shown as whole numbers.
    """
    if found["difference"] is None:
        return DASH
    return _signed(name, found["difference"], _spread(found))


def difference_interval(name: str, found: Json) -> str | None:
    """Return the two ends of a difference's interval; ``None`` where one is missing."""
    if found["low"] is None or found["high"] is None:
        return None
    return " to ".join(_signed(name, found[end], _spread(found)) for end in ("low", "high"))


def _spread(found: Json) -> float:
    middle: float = found["difference"]
    if found["low"] is None or found["high"] is None:
        return abs(middle)
    half: float = max(found["high"] - middle, middle - found["low"])
    return half or abs(middle)


def _signed(name: str, number: float, spread: float) -> str:
    """Return a number with its sign and two digits of ``spread``."""
    if isinstance(number, int) or name == "length":
        whole = round(number)
        return f"{whole:+,}".replace("-", "−") if whole else "0"
    scale = 100 if name in SHARES else 1
    wanted = 1 - math.floor(math.log10(spread * scale)) if spread else 0
    decimals = max(1 if name in SHARES else 2, min(_MOST, wanted))
    shown = f"{number * scale:+,.{decimals}f}".replace("-", "−")
    return shown if any(digit in shown for digit in "123456789") else shown.lstrip("+−")


def quantile(found: Json) -> str:
    """Return an observed length and its interval; an open end is a dash."""
    if found["low"] is None and found["high"] is None:
        return count(found["value"])
    return f"{count(found['value'])} ({count(found['low'])} to {count(found['high'])})"


def _decimals(name: str, figure: Json) -> int:
    """Return as many decimals as show two digits of the interval's half width."""
    scale = 100 if name in SHARES else 1
    low, high, middle = figure["low"], figure["high"], figure["value"] or 0
    spread = middle if low is None or high is None else max(high - middle, middle - low)
    fewest = _FEWEST - 1 if name in SHARES else _FEWEST
    if not spread:
        return fewest
    wanted = 1 - math.floor(math.log10(spread * scale))
    return max(fewest, min(_MOST, wanted))


def _number(number: float, decimals: int, *, share: bool) -> str:
    """Return a number that reads 0 or 100 % only when it is exactly that."""
    sign, scale = ("%", 100) if share else ("", 1)
    if number == 0 or (share and number == 1):
        return f"{number * scale:.0f}{sign}"
    shown = f"{number * scale:,.{decimals}f}"
    least = f"{10**-decimals:.{decimals}f}"
    if number > 0 and not any(digit in shown for digit in "123456789"):
        return f"<{least}{sign}"
    if share and number < 1 and shown.startswith("100"):
        return f">{100 - 10**-decimals:.{decimals}f}{sign}"
    return shown + sign


def size(number: int) -> str:
    """Return a number of bytes in the decimal unit that suits it."""
    for unit, scale in (("GB", 10**9), ("MB", 10**6), ("kB", 10**3)):
        if number >= scale:
            return f"{number / scale:,.1f} {unit}"
    return f"{number:,} bytes"


def clean(text: str, longest: int = 160) -> str:
    """Return corpus text on one line, unprintable characters as code points, cut when too long."""
    shown = text if len(text) <= longest else text[:longest] + "…"
    return str(_LINE_BREAKS.sub(lambda m: f"⟨U+{ord(m[0]):04X}⟩", tables.printable(shown)))


def plural(number: int, noun: str, several: str | None = None) -> str:
    """Return the number with its noun, which takes an s, or is ``several``, unless it is one."""
    return f"{count(number)} {noun if number == 1 else several or noun + 's'}"


def plain_name(name: str) -> str:
    """Return a figure's name as words."""
    return name.replace("_", " ")


def proportion(share: float | None) -> str:
    """Return a share that was counted, with three digits; 0% and 100% only when it is exact."""
    if share is None:
        return "–"
    if share in (0, 1):
        return f"{share:.0%}"
    shown = f"{100 * share:.3g}"
    if float(shown) >= 100:
        return ">99.9%"
    return f"{shown}%" if "e" not in shown else f"{100 * share:.1e}%"


def times(ratio: float) -> str:
    """Return a ratio with three digits."""
    return f"{ratio:.3g} ×"


def figure(held: Json, digits: int = 3) -> str:
    """Return a value with its interval; a dash where it is undefined."""
    if held["value"] is None:
        return "–"
    value = number(held["value"], digits)
    if held["low"] is None or held["high"] is None:
        return value
    return f"{value} ({number(held['low'], digits)} to {number(held['high'], digits)})"


def number(value: float, digits: int = 3) -> str:
    """Return a number with so many digits, more before the point, never with a power of ten."""
    if abs(value) >= 10 ** (digits - 1):
        return f"{value:,.0f}"
    shown = f"{value:#.{digits}g}".rstrip(".")
    return shown if "e" not in shown else f"{value:.1e}"
