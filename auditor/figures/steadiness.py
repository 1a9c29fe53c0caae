"""From words broken in contexts to figures: ways of breaking, and the cost of small changes."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from auditor.encoding.breaking import Breaking
from auditor.encoding.steadiness import Cost, Ways
from auditor.figures.intervals import ratio_interval
from auditor.figures.values import Value, proportion, undefined
from auditor.tallies.moments import Moments

Json = dict[str, Any]

_WORST = 20
ALL = "all"


def steadiness(
    words: Sequence[tuple[str, int]], ways: Sequence[Ways], costs: Mapping[str, Cost]
) -> Json:
    """Return the figures as JSON values; ``words`` (word, draws), each with its ``ways``.

    A word is steady when it is broken in one way in all contexts that vary one thing; case is
    folded before ways are compared. Draws are the units of intervals.
    """
    draws = sum(weight for _, weight in words)
    abouts = list(ways[0]) if ways else []
    return {
        "words": len(words),
        "draws": draws,
        "ways": {
            **{about: _ways(words, ways, (about,), draws) for about in abouts},
            ALL: _ways(words, ways, tuple(abouts), draws),
        },
        "worst": _worst(words, ways),
        "changes": [_change(name, cost) for name, cost in costs.items()],
    }


def _way(breaking: Breaking) -> tuple[str, int, int]:
    return breaking.broken.casefold(), breaking.unknown, breaking.dropped


def _distinct(own: Ways, abouts: tuple[str, ...]) -> int:
    return len({_way(breaking) for about in abouts for breaking in own[about].values()})


def _ways(
    words: Sequence[tuple[str, int]], ways: Sequence[Ways], abouts: tuple[str, ...], draws: int
) -> Json:
    counts = [0, 0, 0]
    total = 0
    for (_, weight), own in zip(words, ways, strict=True):
        number = _distinct(own, abouts)
        counts[min(number, 3) - 1] += weight
        total += number * weight
    names = ("one", "two", "three_or_more")
    shares = {
        name: proportion(count, draws).as_json() for name, count in zip(names, counts, strict=True)
    }
    return {**shares, "mean": total / draws if draws else None}


def _worst(words: Sequence[tuple[str, int]], ways: Sequence[Ways]) -> list[Json]:
    """Return the words with most ways, most drawn first among equals, with the contexts of each."""
    rows = []
    for (word, weight), own in zip(words, ways, strict=True):
        by_way: dict[tuple[str, int, int], list[str]] = {}
        for contexts in own.values():
            for name, breaking in contexts.items():
                by_way.setdefault(_way(breaking), []).append(name)
        if len(by_way) > 1:
            rows.append((len(by_way), weight, word, by_way))
    rows.sort(key=lambda row: (-row[0], -row[1], row[2]))
    return [
        {
            "word": word,
            "draws": weight,
            "ways": [
                {"broken": broken, "contexts": list(dict.fromkeys(names))}
                for (broken, _, _), names in by_way.items()
            ],
        }
        for _, weight, word, by_way in rows[:_WORST]
    ]


def _change(name: str, cost: Cost) -> Json:
    rows = list(zip(cost.weights.tolist(), cost.before.tolist(), cost.after.tolist(), strict=True))
    draws = sum(weight for weight, _, _ in rows)
    return {
        "change": name,
        "draws": draws,
        "unaltered": cost.unaltered,
        "tokens_ratio": _ratio(rows, draws).as_json(),
        "unknown_appears": int((cost.weights * cost.unknown).sum()),
    }


def _ratio(rows: list[tuple[int, int, int]], draws: int) -> Value:
    """Return the tokens after over those before, by the ratio estimator over draws."""
    y = sum(w * after for w, _, after in rows)
    x = sum(w * before for w, before, _ in rows)
    if not x:
        return undefined("the change alters no word that was drawn")
    moments = Moments(
        draws, y, x,
        sum(w * after * after for w, _, after in rows),
        sum(w * before * before for w, before, _ in rows),
        sum(w * before * after for w, before, after in rows),
    )  # fmt: skip
    low, high = ratio_interval(moments)
    note = "one draw: no interval" if low is None else None
    return Value(y / x, low, high, y, x, note)
