"""Which vocabulary comes first by what the user weighs, and whether that holds when weights move.

A candidate falls short of the best one in each criterion by a share: of tokens or of entries more
than the fewest, of characters lost or of terms broken more than the least. Its score is the sum of
these shares, each times its weight, so that weights are rates of exchange: with `tokens=1` and
`losses=10`, one more character in a hundred lost is as bad as ten more tokens in a hundred.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from fractions import Fraction
from itertools import combinations, pairwise
from typing import Any

from auditor.errors import SettingsError

Json = dict[str, Any]
Shortfalls = Mapping[str, Mapping[str, float]]

CRITERIA = ("tokens", "losses", "terms", "parameters")
# One character in a hundred lost is held as bad as ten more tokens in a hundred (our choice: text
# that is lost cannot be bought back, and losing text saves tokens).
USUAL = {"tokens": 1.0, "losses": 10.0, "terms": 1.0, "parameters": 0.0}
# Weightings are tried in steps of one in this many; single weights are halved and doubled.
STEPS = 20
FACTORS = (0.5, 2.0)


def parse_weights(text: str) -> dict[str, float]:
    """Return weights written as ``tokens=2,losses=10``; what is not named weighs nothing.

    SettingsError for an unknown criterion, or a weight that is no number of at least 0.
    """
    found: dict[str, float] = {}
    for part in text.split(","):
        name, _, weight = (piece.strip() for piece in part.partition("="))
        if name not in CRITERIA:
            raise _refused(f"{name!r} is nothing that can be weighed.")
        if name in found:
            raise _refused(f"{name} is weighed twice.")
        try:
            found[name] = float(Fraction(weight))
        except (ValueError, ZeroDivisionError):
            raise _refused(f"{weight!r} is no weight for {name}.") from None
    return weights_of(found)


def weights_of(found: Mapping[str, float]) -> dict[str, float]:
    """Return the weight of every criterion; SettingsError as `parse_weights` raises it."""
    for name, weight in found.items():
        if name not in CRITERIA:
            raise _refused(f"{name!r} is nothing that can be weighed.")
        if not 0 <= weight < math.inf:
            raise _refused(f"the weight of {name} is not at least 0.")
    if not any(found.values()):
        raise _refused("nothing is weighed.")
    return {name: float(found.get(name, 0.0)) for name in CRITERIA}


def _refused(message: str) -> SettingsError:
    return SettingsError(
        message, hint=f"Known: {', '.join(CRITERIA)}; as in tokens=1,losses=10.", where="--weigh"
    )


def shortfalls(tokens: Mapping[str, int], losses: Mapping[str, float], terms: Mapping[str, float],
               entries: Mapping[str, int]) -> dict[str, dict[str, float]]:  # fmt: skip
    """Return by candidate how far it falls short of the best in each criterion, all at least 0.

    ``losses`` and ``terms`` are shares, of characters lost and of terms kept whole; ``terms`` is
    empty without a glossary, and then no criterion.
    """
    fewest, least = min(tokens.values()), min(losses.values())
    smallest, most = min(entries.values()), max(terms.values(), default=0.0)
    return {
        name: {
            "tokens": tokens[name] / fewest - 1 if fewest else 0.0,
            "losses": losses[name] - least,
            **({"terms": most - terms[name]} if terms else {}),
            "parameters": entries[name] / smallest - 1,
        }
        for name in tokens
    }


def rank(found: Shortfalls, weights: Mapping[str, float]) -> Json:
    """Return the candidates best first, and how firm the first place is.

    Criteria that no candidate is measured in are left out. Equal scores keep the order of
    ``found``.
    """
    known = [name for name in CRITERIA if all(name in own for own in found.values())]
    used = {name: weights[name] for name in known}
    scores = {name: _score(own, used) for name, own in found.items()}
    order = sorted(found, key=lambda name: scores[name])
    rows = [
        {"vocabulary": name, "score": scores[name], "short_by": dict(found[name])} for name in order
    ]
    return {"weights": used, "order": rows, "stability": _stability(found, used, order)}


def _score(own: Mapping[str, float], weights: Mapping[str, float]) -> float:
    return sum(weight * own[name] for name, weight in weights.items())


def _leader(found: Shortfalls, weights: Mapping[str, float]) -> str:
    return min(found, key=lambda name: _score(found[name], weights))


def _stability(found: Shortfalls, weights: Mapping[str, float], order: list[str]) -> Json | None:
    """Return how the first place answers to other weights; ``None`` with one candidate."""
    if len(order) < 2:
        return None
    first, rivals = order[0], order[1:]
    weighed = [name for name, weight in weights.items() if weight]
    moved = [
        {"criterion": name, "times": factor, "first": leader}
        for name in weighed
        for factor in FACTORS
        if (leader := _leader(found, {**weights, name: factor * weights[name]})) != first
    ]
    firsts = dict.fromkeys(order, 0)
    tried = list(_weightings(list(weights)))
    for trial in tried:
        firsts[_leader(found, trial)] += 1
    best = all(found[first][name] <= found[rival][name] for rival in rivals for name in weights)
    return {
        "first_in_everything": best,
        "holds_when_one_weight_is_halved_or_doubled": not moved,
        "changes": moved,
        "weightings": len(tried),
        "first_in_weightings": firsts,
        "turning_points": [
            point for rival in rivals for point in _turning_points(found, weights, first, rival)
        ],
    }  # fmt: skip


def _weightings(names: list[str]) -> Iterator[dict[str, float]]:
    """Yield every weighting whose weights are multiples of 1/STEPS and add up to 1."""
    places = range(STEPS + len(names) - 1)
    for bars in combinations(places, len(names) - 1):
        edges = (-1, *bars, STEPS + len(names) - 1)
        parts = [b - a - 1 for a, b in pairwise(edges)]
        yield {name: part / STEPS for name, part in zip(names, parts, strict=True)}


def _turning_points(
    found: Shortfalls, weights: Mapping[str, float], first: str, rival: str
) -> Iterator[Json]:
    """Yield each weight at which ``rival`` draws level with ``first``, the others unchanged."""
    lead = _score(found[rival], weights) - _score(found[first], weights)
    for name, weight in weights.items():
        gain = found[rival][name] - found[first][name]
        if gain and weight - lead / gain >= 0:
            yield {"rival": rival, "criterion": name, "weight": weight - lead / gain}
