"""The policy file: TOML, one table for each slice or set of slices, one bound for each figure."""

from __future__ import annotations

import difflib
import tomllib
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from decimal import Decimal
from pathlib import Path
from typing import Any

from auditor.errors import SettingsError
from auditor.figures.catalogue import CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS
from auditor.figures.lengths import QUANTILES
from auditor.tallies.groups import ALL

EVERY = "=*"
USAGE = ("used_entries", "entropy", "renyi_efficiency", "rank_95_frequency")
_FIGURES = (*CATALOGUE, RELATIVE_TOKENS, REPEATED_DOCUMENTS)
FIGURES = (*(figure.name for figure in _FIGURES), *USAGE, *QUANTILES)
_SHARES = {figure.name for figure in _FIGURES if figure.share} | {
    "used_entries",
    "renyi_efficiency",
}
_OF_THE_WHOLE = {*USAGE, REPEATED_DOCUMENTS.name}
_KEYS = ("min", "max", "on", "vocabulary")
_SPOKEN_OF = ("value", "interval")


@dataclass(frozen=True, slots=True)
class Bound:
    """What one figure may be on one slice, or on every slice of a field (``field=*``).

    ``on`` is ``value`` (this corpus) or ``interval`` (further documents like it); ``vocabulary``
    names the one that is meant, all when ``None``.
    """

    slices: str
    figure: str
    least: Decimal | None
    most: Decimal | None
    on: str
    vocabulary: str | None
    where: str


@dataclass(frozen=True, slots=True)
class Policy:
    """The bounds of one file, in its order."""

    source: str
    bounds: tuple[Bound, ...]


def read_policy(path: Path) -> Policy:
    """Return the policy that stands in ``path``.

    Raises SettingsError, with the place and the nearest names, for anything that is no bound.
    """
    source = str(path)
    try:
        held = tomllib.loads(path.read_text(encoding="utf-8"), parse_float=Decimal)
    except (tomllib.TOMLDecodeError, UnicodeDecodeError, OSError) as fault:
        raise SettingsError(
            f"the policy cannot be read as TOML ({fault}).",
            hint='A policy reads like: ["lang=th"] and below it fertility = {max = 2.5}',
            where=source,
        ) from None
    bounds = tuple(_bounds(held, source))
    if not bounds:
        raise SettingsError(
            "the policy holds no bound.",
            hint="Write one, such as: [all] and below it truncated_documents = {max = 0.01}",
            where=source,
        )
    return Policy(source, bounds)


def refuse_unknown_fields(policy: Policy, fields: Iterable[str]) -> None:
    """Refuse a slice of a field that is not measured apart: this is known before measuring."""
    fields = list(fields)
    for bound in policy.bounds:
        named = bound.slices
        if named == ALL or any(named.startswith(f"{field}=") for field in fields):
            continue
        there = f" Measured apart: {', '.join(fields)}." if fields else ""
        raise SettingsError(
            f"no field that is measured apart begins the slice {named!r}.",
            hint=f"Name its field with --by.{there}",
            where=bound.where,
        )


def refuse_unknown_vocabularies(policy: Policy, known: Iterable[tuple[str, str]]) -> None:
    """Refuse a vocabulary that none of ``known``, (name, source), is."""
    known = list(known)
    for bound in policy.bounds:
        if bound.vocabulary is None or any(bound.vocabulary in own for own in known):
            continue
        raise SettingsError(
            f"there is no vocabulary {bound.vocabulary!r}.",
            hint=nearest(bound.vocabulary, (name for name, _ in known)),
            where=bound.where,
        )


def nearest(name: str, names: Iterable[str]) -> str:
    """Return the names most like ``name``, or the first of them, for a message."""
    names = list(names)
    like = difflib.get_close_matches(name, names, 3, 0.5)
    told = ", ".join(like or names[:5])
    return f"Nearest: {told}." if like else f"There are: {told}{', …' if names[5:] else ''}."


def _bounds(held: dict[str, Any], source: str) -> Iterator[Bound]:
    for slices, table in held.items():
        place = f'{source}: ["{slices}"]' if slices != ALL else f"{source}: [{ALL}]"
        if not isinstance(table, dict) or slices in FIGURES:
            raise SettingsError(
                f"{slices!r} stands outside of any table.",
                hint=f"Write [{ALL}] or a slice above it.",
                where=source,
            )
        if slices != ALL and "=" not in slices:
            raise SettingsError(
                f"{slices!r} is no slice.",
                hint=f'Slices are [{ALL}], ["field=value"] and ["field=*"].',
                where=place,
            )
        for figure, given in table.items():
            _refuse_figure(figure, slices, place)
            for bound in given if isinstance(given, list) else [given]:
                yield _bound(slices, figure, bound, f"{place} {figure}")


def _refuse_figure(figure: str, slices: str, place: str) -> None:
    if figure not in FIGURES:
        raise SettingsError(
            f"there is no figure {figure!r}.", hint=nearest(figure, FIGURES), where=place
        )
    if figure in _OF_THE_WHOLE and slices != ALL:
        raise SettingsError(
            f"{figure} is measured on the whole corpus only.",
            hint=f"Put it under [{ALL}].",
            where=place,
        )


def _bound(slices: str, figure: str, given: object, where: str) -> Bound:
    if not isinstance(given, dict) or not {"min", "max"} & given.keys():
        raise SettingsError(
            "a bound needs min, max or both.", hint="Write it as {max = 0.01}.", where=where
        )
    unknown = next((key for key in given if key not in _KEYS), None)
    if unknown is not None:
        raise SettingsError(
            f"a bound has no key {unknown!r}.", hint=nearest(unknown, _KEYS), where=where
        )
    least, most = (_number(given, end, figure, where) for end in ("min", "max"))
    if least is not None and most is not None and least > most:
        raise SettingsError(
            f"min ({least}) is above max ({most}): nothing can hold.",
            hint="Exchange them.",
            where=where,
        )
    on, vocabulary = given.get("on", "value"), given.get("vocabulary")
    if on not in _SPOKEN_OF:
        raise SettingsError(
            f"on = {on!r} is neither 'value' nor 'interval'.",
            hint="value speaks of this corpus, interval of further documents like it.",
            where=where,
        )
    if vocabulary is not None and not isinstance(vocabulary, str):
        raise SettingsError(
            "vocabulary is no text.", hint='Name one: vocabulary = "name".', where=where
        )
    return Bound(slices, figure, least, most, on, vocabulary, where)


def _number(given: dict[str, Any], end: str, figure: str, where: str) -> Decimal | None:
    """Return one end of a bound, exactly as it is written."""
    number = given.get(end)
    if number is None:
        return None
    if isinstance(number, bool) or not isinstance(number, (int, Decimal)):
        raise SettingsError(
            f"{end} = {number!r} is no number.", hint=f"Write {end} = 0.01.", where=where
        )
    number = Decimal(number)
    highest = 1 if figure in _SHARES else None
    if not number.is_finite() or number < 0 or (highest is not None and number > highest):
        told = "a share: from 0 to 1" if highest else "never below 0, and finite"
        remedy = f"Write 5 % as {end} = 0.05." if highest else f"Write {end} = 2.5."
        raise SettingsError(
            f"{end} = {number} cannot be: {figure} is {told}.", hint=remedy, where=where
        )
    return number
