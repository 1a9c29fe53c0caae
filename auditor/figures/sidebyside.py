"""Vocabularies on the same documents: ratios of tokens and differences of losses, paired."""

from __future__ import annotations

from auditor.figures.catalogue import Figure
from auditor.figures.intervals import ratio_interval
from auditor.figures.values import Basis, Value, compute, undefined
from auditor.tallies.moments import HoldsMoments, Moments

INK = "ink_characters"
ONE = "one document: no interval"
NO_INK = "no characters but whitespace"


def tokens_of(place: int) -> str:
    """Return the column of the tokens under the vocabulary at ``place``."""
    return f"tokens:{place}"


def lost_of(place: int) -> str:
    """Return the column of the unknown and dropped characters under the one at ``place``."""
    return f"lost:{place}"


def columns(vocabularies: int) -> tuple[str, ...]:
    """Return the columns that comparing so many vocabularies takes."""
    own = [name(place) for place in range(vocabularies) for name in (tokens_of, lost_of)]
    return ("documents", INK, *own)


def pairs(vocabularies: int) -> tuple[tuple[str, str], ...]:
    """Return the pairs of columns whose products comparing takes."""
    places = range(vocabularies)
    return tuple(
        pair
        for i in places
        for pair in (
            (lost_of(i), INK),
            *((name(i), name(j)) for j in places if j > i for name in (tokens_of, lost_of)),
        )
    )


def tokens_ratio(tally: HoldsMoments, key: str, ours: int, theirs: int) -> Value:
    """Return the tokens under ``ours`` over those under ``theirs``, paired by document.

    The interval is the ratio estimator's over documents (Cochran 1977, chapter 6).
    """
    moments = tally.moments(key, tokens_of(ours), tokens_of(theirs))
    if not moments.x:
        return undefined("the other vocabulary gives no tokens")
    low, high = ratio_interval(moments)
    note = ONE if low is None else None
    return Value(moments.y / moments.x, low, high, moments.y, moments.x, note)


def lost_share(tally: HoldsMoments, key: str, place: int) -> Value:
    """Return the share of characters lost: unknown or dropped, of those that are not whitespace."""
    figure = Figure(
        "lost_characters", lost_of(place), INK, "share of characters",
        "Non-whitespace characters that are unknown or dropped.",
    )  # fmt: skip
    return compute(figure, key, Basis(tally, tally))


def loss_difference(tally: HoldsMoments, key: str, ours: int, theirs: int) -> Value:
    """Return the share of characters lost under ``ours`` less that under ``theirs``, paired.

    The difference of each document is the numerator of a ratio estimator, since both shares have
    one denominator.
    """
    a, b = lost_of(ours), lost_of(theirs)
    own, other = (tally.moments(key, name, INK) for name in (a, b))
    if not own.x:
        return undefined(NO_INK)
    squares = own.yy + other.yy - 2 * tally.moments(key, a, b).xy
    y = own.y - other.y
    low, high = ratio_interval(Moments(own.units, y, own.x, squares, own.xx, own.xy - other.xy))
    return Value(y / own.x, low, high, y, own.x, ONE if low is None else None)
